//! The help: what is searched for, what is found, and what the marked one means.

use ratatui::layout::{Position, Rect};
use tui_input::Input;

use super::pen::{Pen, lines};
use crate::panel::help::{Found, found};
use crate::panel::state::State;

/// Room for keys and names.
const NAME: u16 = 22;

/// Draws the help; gives where the cursor stands.
pub fn draw(query: &Input, chosen: usize, _: &State, area: Rect, pen: &mut Pen<'_>) -> Position {
    let theme = pen.theme;
    pen.rule(area, 0, "Keys, and what each line means");
    let x = pen.text(area, 1, 1, "search: ", theme.heading());
    pen.text(area, x, 1, query.value(), theme.tried());
    let cursor =
        Position { x: area.x + x + u16::try_from(query.visual_cursor()).unwrap_or(0), y: area.y + 1 };
    let all = found(query.value());
    let details = all.get(chosen).map(details).unwrap_or_default();
    let below: Vec<String> =
        details.iter().flat_map(|line| lines(line, area.width.saturating_sub(2))).collect();
    let below_rows = u16::try_from(below.len()).unwrap_or(0).min(area.height / 3);
    let list = Rect { y: area.y + 3, height: area.height.saturating_sub(3 + below_rows + 1), ..area };
    if all.is_empty() {
        pen.text(list, 1, 0, "Nothing found: shorten the search.", theme.plain());
    }
    let height = usize::from(list.height).max(1);
    let from = chosen.saturating_sub(height / 2).min(all.len().saturating_sub(height));
    for (y, (at, one)) in (0..list.height).zip(all.iter().enumerate().skip(from)) {
        let marked = at == chosen;
        if marked {
            pen.text(list, 0, y, "▸", theme.tried());
        }
        let (name, does) = match one {
            Found::Key(row) => (row.shown, format!("{} ({})", row.does, row.when.heading().to_lowercase())),
            Found::Line(row) => (row.name, row.meaning.to_owned()),
        };
        let names = Rect { width: NAME.min(list.width), ..list };
        pen.text(names, 1, y, name, if marked { theme.marked() } else { theme.key() });
        pen.text(list, NAME, y, &does, theme.plain());
    }
    let foot = Rect { y: list.y + list.height, height: below_rows + 1, ..area };
    pen.rule(foot, 0, "The marked one");
    for (y, line) in (1..foot.height).zip(below) {
        pen.text(foot, 1, y, &line, theme.plain());
    }
    cursor
}

fn details(found: &Found) -> Vec<String> {
    match found {
        Found::Key(row) => {
            vec![format!("{}: {}. Holds when: {}.", row.shown, row.does, row.when.heading().to_lowercase())]
        }
        Found::Line(row) => vec![format!("{}: {}", row.name, row.meaning), format!("How: {}.", row.source)],
    }
}
