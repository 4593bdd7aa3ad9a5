//! The form: parts and fields in columns, what is wrong beside the field.

use ratatui::layout::{Position, Rect};

use super::pen::{Pen, lines};
use crate::panel::form::{Form, PARTS};
use crate::panel::state::State;

/// Room for a field's name.
const NAME: u16 = 24;
/// Room for what is typed.
const VALUE: u16 = 18;

/// A row of the form.
enum Row {
    Heading(&'static str),
    Field(usize),
    Chart,
}

fn rows() -> Vec<Row> {
    let mut rows = Vec::new();
    let mut at = 0;
    for part in &PARTS {
        rows.push(Row::Heading(part.name));
        for _ in part.fields {
            rows.push(Row::Field(at));
            at += 1;
        }
    }
    rows.push(Row::Chart);
    rows
}

/// Draws the form; gives where the cursor stands.
pub fn draw(form: &Form, state: &State, area: Rect, pen: &mut Pen<'_>) -> Option<Position> {
    pen.rule(area, 0, "A new entry: type what there is, leave the rest empty");
    let page =
        Rect { x: area.x + 1, y: area.y + 1, width: area.width.saturating_sub(2), height: area.height - 1 };
    let rows = rows();
    let whole = form.whole.len();
    let height = usize::from(page.height).saturating_sub(whole.min(2)).max(1);
    let marked = rows
        .iter()
        .position(|row| match row {
            Row::Field(at) => *at == form.at,
            Row::Chart => form.at_end(),
            Row::Heading(_) => false,
        })
        .unwrap_or(0);
    let from =
        if rows.len() <= height { 0 } else { marked.saturating_sub(height / 2).min(rows.len() - height) };
    let mut cursor = None;
    for (y, row) in (0..u16::try_from(height).unwrap_or(u16::MAX)).zip(rows.iter().skip(from)) {
        match row {
            Row::Heading(name) => pen.rule(page, y, name),
            Row::Field(at) => {
                let here = field(form, *at, state, page, y, pen);
                cursor = cursor.or(here);
            }
            Row::Chart => {
                let marked = form.at_end();
                let style = if marked { pen.theme.marked() } else { pen.theme.heading() };
                if marked {
                    pen.text(page, 0, y, "▸", pen.theme.tried());
                    cursor = Some(Position { x: page.x + 1, y: page.y + y });
                }
                pen.text(page, 1, y, " Enter: chart this entry ", style);
            }
        }
    }
    for (slip, y) in form.whole.iter().zip((0..page.height).rev()) {
        pen.text(page, 0, y, &format!("! {}", slip.sentence()), pen.theme.caution());
    }
    cursor
}

fn field(form: &Form, at: usize, state: &State, page: Rect, y: u16, pen: &mut Pen<'_>) -> Option<Position> {
    let field = form.fields.get(at)?;
    let marked = at == form.at;
    let theme = pen.theme;
    if marked {
        pen.text(page, 0, y, "▸", theme.tried());
    }
    let names = Rect { width: NAME, ..page };
    pen.text(names, 1, y, field.id.words(), if marked { theme.heading() } else { theme.plain() });
    let room = usize::from(VALUE);
    let scroll = field.input.visual_scroll(room - 1);
    let shown: String = field.input.value().chars().skip(scroll).take(room).collect();
    let style = if marked { theme.marked() } else { theme.tried() };
    let blank = if marked { " ".repeat(room) } else { "·".repeat(room) };
    pen.text(page, NAME, y, &blank, if marked { style } else { theme.quiet() });
    pen.text(page, NAME, y, &shown, style);
    let beside = NAME + VALUE + 1;
    let slip = form.slip_of(field, state.clock, state.face.unit);
    let told = form.slips.iter().any(|(id, _)| *id == field.id);
    match slip.filter(|_| !marked || told) {
        Some(slip) => {
            let room = page.width.saturating_sub(beside);
            let said = format!("! {}", slip.sentence());
            let first = lines(&said, room).into_iter().next().unwrap_or_default();
            let whole = if first.len() < said.len() { format!("{first}…") } else { first };
            pen.text(page, beside, y, &whole, theme.caution());
        }
        None => {
            pen.text(page, beside, y, &field.id.hint(state.face.unit), theme.quiet());
        }
    }
    let across = u16::try_from(field.input.visual_cursor().saturating_sub(scroll)).unwrap_or(0);
    marked.then_some(Position { x: page.x + NAME + across, y: page.y + y })
}
