//! Questions that fill the screen: profiles, what will be charted, a file name, leaving, coming back.

use ratatui::layout::{Position, Rect};
use tui_input::Input;

use super::pen::Pen;
use crate::case::entry::Entry;
use crate::case::fault::Fault;
use crate::case::presets::PROFILES;
use crate::case::{read, write};
use crate::panel::chart;
use crate::panel::form::Form;
use crate::panel::recovery::Kept;
use crate::panel::state::State;

fn page(area: Rect, title: &str, pen: &mut Pen<'_>) -> Rect {
    pen.rule(area, 0, title);
    Rect {
        x: area.x + 2,
        y: area.y + 2,
        width: area.width.saturating_sub(4),
        height: area.height.saturating_sub(2),
    }
}

/// The profiles, each with its target and limits in short.
pub fn profiles(chosen: usize, state: &State, area: Rect, pen: &mut Pen<'_>) -> Option<Position> {
    let page = page(area, "Profiles: which limits and which goal", pen);
    let own = state.charted.profile();
    let mut rows = vec![(format!("of the case: {}", own.name), own.summary.clone())];
    rows.extend(PROFILES.iter().map(|preset| {
        let summary =
            read::profile(preset.text.as_bytes()).map(|profile| profile.summary).unwrap_or_default();
        (preset.name.to_owned(), summary)
    }));
    let mut cursor = None;
    for (index, (name, summary)) in rows.iter().enumerate() {
        let y = u16::try_from(index).unwrap_or(u16::MAX);
        let marked = index == chosen;
        if marked {
            pen.text(page, 0, y, "▸", pen.theme.tried());
            cursor = Some(Position { x: page.x, y: page.y + y });
        }
        let style = if marked { pen.theme.marked() } else { pen.theme.heading() };
        pen.text(page, 2, y, name, style);
        pen.text(page, 34.min(page.width / 2), y, summary, pen.theme.plain());
    }
    cursor
}

/// What will be written.
pub fn chart(dialled: bool, state: &State, area: Rect, pen: &mut Pen<'_>) -> Position {
    let page = page(area, "Chart this trial: what will be added to the record", pen);
    let mut y = 0;
    match chart::entry(state, dialled) {
        Err(why) => {
            pen.wrapped(page, 0, &why, pen.theme.caution());
        }
        Ok(entry) => {
            let box_sign = if dialled { "[x]" } else { "[ ]" };
            pen.text(
                page,
                0,
                y,
                &format!("{box_sign} dialled now: chart the settings too (Space)"),
                pen.theme.heading(),
            );
            y += 2;
            for line in write::entry(&entry).lines() {
                pen.text(page, 0, y, line, pen.theme.plain());
                y += 1;
            }
            let to = format!("To: {}", state.origin.name());
            pen.text(page, 0, y + 1, &to, pen.theme.quiet());
        }
    }
    Position { x: page.x + 1, y: page.y }
}

/// A file name.
pub fn naming(name: &Input, entry: &Entry, state: &State, area: Rect, pen: &mut Pen<'_>) -> Position {
    let page = page(area, "A file for this record", pen);
    let why = format!(
        "{} has no file of its own. A new file begins with it and holds this entry:",
        state.origin.name()
    );
    let y = pen.wrapped(page, 0, &why, pen.theme.plain());
    let x = pen.text(page, 0, y + 1, "file name ", pen.theme.heading());
    let blank = " ".repeat(usize::from(page.width.saturating_sub(x)));
    pen.text(page, x, y + 1, &blank, pen.theme.marked());
    pen.text(page, x, y + 1, name.value(), pen.theme.marked());
    for (row, line) in (y + 3..page.height).zip(write::entry(entry).lines()) {
        pen.text(page, 0, row, line, pen.theme.plain());
    }
    let at = u16::try_from(name.visual_cursor()).unwrap_or(0);
    Position { x: page.x + x + at, y: page.y + y + 1 }
}

/// Something typed before is offered.
pub fn recover(kept: &Kept, area: Rect, pen: &mut Pen<'_>) -> Position {
    let page = page(area, "Typed before and not charted", pen);
    let mut y =
        pen.wrapped(page, 0, "The panel ended before this was charted. Bring it back?", pen.theme.plain())
            + 1;
    for (name, text) in kept.form.iter().chain(&kept.lines) {
        pen.text(page, 2, y, &format!("{}: {text}", name.replace('_', " ")), pen.theme.heading());
        y += 1;
    }
    pen.text(
        page,
        0,
        y + 1,
        "Enter brings it back · Esc begins without it and throws it away",
        pen.theme.plain(),
    );
    Position { x: page.x, y: page.y + y + 1 }
}

/// Leaving with something typed.
pub fn leave(form: &Form, area: Rect, pen: &mut Pen<'_>) -> Position {
    let page = page(area, "Not charted yet", pen);
    let mut y = pen.wrapped(
        page,
        0,
        "These values are typed and not charted. Leave all the same?",
        pen.theme.plain(),
    ) + 1;
    for field in form.fields.iter().filter(|field| !field.input.value().trim().is_empty()) {
        pen.text(page, 2, y, &format!("{}: {}", field.id.words(), field.input.value()), pen.theme.heading());
        y += 1;
    }
    pen.text(page, 0, y + 1, "y leaves without charting · Esc stays", pen.theme.plain());
    Position { x: page.x, y: page.y + y + 1 }
}

/// What keeps a record from being forecast, and what to do.
pub fn no_forecast(faults: &[Fault], area: Rect, pen: &mut Pen<'_>) {
    let page = page(area, "No forecast from this record", pen);
    let mut y = 0;
    for fault in faults {
        y = pen.wrapped(page, y, &format!("! {}.", fault.message), pen.theme.caution());
        y = pen.wrapped(page, y, &fault.help, pen.theme.plain()) + 1;
    }
    pen.wrapped(page, y, "Press e to enter a gas, measurements or settings.", pen.theme.plain());
}
