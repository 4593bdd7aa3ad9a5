//! Leaving, coming back, and the note.

use super::super::effect::Effect;
use super::super::recovery::Kept;
use super::super::state::{Mode, State};
use super::{dial, path_of, suggested_name};

/// Leaves, or asks first when something typed is not charted.
pub fn ask(state: &mut State) -> Option<Effect> {
    match std::mem::replace(&mut state.mode, Mode::Look) {
        Mode::Form(form) if form.holds_anything() => state.mode = Mode::Leave(form),
        Mode::Leave(form) => {
            // Asked a second time: still a question, never an answer.
            state.mode = Mode::Leave(form);
        }
        _ => match state.aside.take() {
            Some(form) if form.holds_anything() => state.mode = Mode::Leave(form),
            _ => return Some(Effect::Quit),
        },
    }
    None
}

/// Brings back what was typed and turned before a loss.
pub fn recover(state: &mut State, kept: &Kept) {
    let mut said = Vec::new();
    if kept.entries == state.charted.entries().len() {
        let turned = kept.to_turned();
        if turned != state.turned {
            dial::settle(state, "brought back".to_owned(), turned);
            said.push("the trial");
        }
    }
    if let Some(form) = kept.to_form() {
        state.mode = Mode::Form(Box::new(form));
        said.push("the form");
    }
    if state.message.is_none() {
        state.message = Some(match said.as_slice() {
            [] => "The record has changed since: what was turned no longer holds.".to_owned(),
            _ => format!("Brought back: {}.", said.join(" and ")),
        });
    }
}

/// The note of what is shown, to a file or to the terminal's clipboard.
pub fn note(state: &State, to_file: bool) -> Effect {
    if !to_file {
        return Effect::CopyNote;
    }
    let case = path_of(state).map_or_else(|| suggested_name(state).into(), std::path::Path::to_path_buf);
    Effect::WriteNote(case.with_extension("note.txt"))
}
