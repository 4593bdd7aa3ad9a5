//! The foot: what happened, or the keys that matter here; and that this is decision support.

use ratatui::layout::Rect;

use super::layout::Layout;
use super::pen::{Pen, lines};
use crate::panel::key::{When, rows};
use crate::panel::state::{Mode, State};

/// What is always said, in the longest wording that fits.
const SAFETY: [&str; 3] = [
    "Decision support for trained clinicians. Confirm with a repeat gas. Local protocol and the responsible clinician decide.",
    "Decision support: confirm with a repeat gas; protocol and clinician decide.",
    "Decision support. Repeat the gas; protocol, clinician decide.",
];

/// A message takes at most this many rows, upwards from the keys.
const MESSAGE_ROWS: usize = 3;

/// What happened: over the keys, and where it is long over the rows above them.
fn said_last(message: &str, layout: &Layout, pen: &mut Pen<'_>) {
    let wrapped = lines(message, layout.foot.width.saturating_sub(2));
    let shown: Vec<&String> = wrapped.iter().take(MESSAGE_ROWS).collect();
    let rows = u16::try_from(shown.len()).unwrap_or(1);
    let top = layout.foot.y.saturating_sub(rows.saturating_sub(1));
    let place = Rect { y: top, height: rows, ..layout.foot };
    let blank = " ".repeat(usize::from(place.width));
    for (y, line) in (0..rows).zip(shown) {
        pen.text(place, 0, y, &blank, pen.theme.plain());
        pen.text(place, 1, y, line, pen.theme.tried());
    }
}

/// Draws the foot.
pub fn draw(state: &State, layout: &Layout, pen: &mut Pen<'_>) {
    let theme = pen.theme;
    let width = usize::from(layout.safety.width);
    let said = SAFETY.iter().find(|said| said.len() < width).unwrap_or(&SAFETY[2]);
    pen.text(layout.safety, 1, 0, said, theme.quiet());
    if let Some(message) = &state.message {
        said_last(message, layout, pen);
        return;
    }
    if let Mode::Slots = state.mode {
        let slots: Vec<String> = (1..)
            .zip(&state.slots)
            .map(|(number, slot)| format!("{number} {}", if slot.is_some() { "full" } else { "empty" }))
            .collect();
        pen.text(
            layout.foot,
            1,
            0,
            &format!("Slots: {} · 1 2 3 keep or bring back, Esc leaves", slots.join(", ")),
            theme.tried(),
        );
        return;
    }
    if let Mode::Note = state.mode {
        pen.text(
            layout.foot,
            1,
            0,
            "The note: f to a file, c to the terminal's clipboard, Esc nothing",
            theme.tried(),
        );
        return;
    }
    keys(When::of(&state.mode), layout, pen);
}

/// The keys that matter here, as many as fit; the last one named always stands at the end.
fn keys(when: When, layout: &Layout, pen: &mut Pen<'_>) {
    let parts: Vec<(&str, &str)> =
        rows(when).filter(|row| !row.foot.is_empty()).map(|row| (first_keys(row.shown), row.foot)).collect();
    let wide = |(keys, does): &(&str, &str)| {
        u16::try_from(keys.chars().count() + does.len() + 3).unwrap_or(u16::MAX)
    };
    let help = parts.iter().position(|(keys, _)| *keys == "?");
    let end = layout.foot.width.saturating_sub(help.and_then(|at| parts.get(at)).map_or(0, wide));
    let mut x = 1;
    for (at, part) in parts.iter().enumerate().filter(|(at, _)| Some(*at) != help) {
        if x + wide(part) > end + 2 {
            break;
        }
        x = key(part, x, layout, pen);
        if help.is_some_and(|help| at + 1 == help) {
            break;
        }
    }
    if let Some(part) = help.and_then(|at| parts.get(at)) {
        x = key(part, x, layout, pen);
    }
    for part in parts.iter().skip(help.map_or(parts.len(), |at| at + 1)) {
        if x + wide(part) <= layout.foot.width + 2 {
            x = key(part, x, layout, pen);
        }
    }
}

fn key((keys, does): &(&str, &str), x: u16, layout: &Layout, pen: &mut Pen<'_>) -> u16 {
    let x = pen.text(layout.foot, x, 0, keys, pen.theme.key());
    pen.text(layout.foot, x + 1, 0, does, pen.theme.plain()) + 2
}

/// The first of several keys that do the same.
fn first_keys(shown: &str) -> &str {
    [" Ctrl-C", " h l", " j k", " Shift-Tab", " h j k l"]
        .iter()
        .find_map(|rest| shown.strip_suffix(rest))
        .unwrap_or(shown)
}
