//! The foot: what happened, or the keys that matter here; and that this is decision support.

use super::layout::Layout;
use super::pen::Pen;
use crate::panel::key::{When, rows};
use crate::panel::state::{Mode, State};

/// What is always said, in the longest wording that fits.
const SAFETY: [&str; 3] = [
    "Decision support for trained clinicians. Confirm with a repeat gas. Local protocol and the responsible clinician decide.",
    "Decision support: confirm with a repeat gas; protocol and clinician decide.",
    "Decision support. Repeat the gas; protocol, clinician decide.",
];

/// Draws the foot.
pub fn draw(state: &State, layout: &Layout, pen: &mut Pen<'_>) {
    let theme = pen.theme;
    let width = usize::from(layout.safety.width);
    let said = SAFETY.iter().find(|said| said.len() < width).unwrap_or(&SAFETY[2]);
    pen.text(layout.safety, 1, 0, said, theme.quiet());
    if let Some(message) = &state.message {
        pen.text(layout.foot, 1, 0, message, theme.tried());
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
    let mut x = 1;
    for row in rows(When::of(&state.mode)).filter(|row| !row.foot.is_empty()) {
        let needed = u16::try_from(row.shown.chars().count() + row.foot.len() + 3).unwrap_or(0);
        let keys = row.shown.strip_suffix(" Ctrl-C").unwrap_or(row.shown);
        let keys = keys.strip_suffix(" h l").unwrap_or(keys);
        let keys = keys.strip_suffix(" Shift-Tab").unwrap_or(keys);
        if x + needed > layout.foot.width + 8 {
            continue;
        }
        x = pen.text(layout.foot, x, 0, keys, theme.key());
        x = pen.text(layout.foot, x + 1, 0, row.foot, theme.plain());
        x += 2;
    }
}
