//! The one table of keys: the footer, the help and the docs come from it.

use ratatui::crossterm::event::{KeyCode, KeyEvent, KeyEventKind, KeyModifiers};
use tui_input::InputRequest;

use super::action::Action;
use super::state::{Mode, State, View};

/// When a key means this.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum When {
    /// Looking and turning.
    Look,
    /// A value is typed.
    Typing,
    /// A cell of the table is walked to.
    Walk,
    /// A slot is named.
    Slots,
    /// What will be charted is shown.
    Chart,
    /// A file name is typed.
    Naming,
    /// The form.
    Form,
    /// A profile is chosen.
    Profiles,
    /// The note.
    Note,
    /// The help.
    Help,
    /// Leaving was asked for.
    Leave,
    /// Something typed before is offered.
    Recover,
}

impl When {
    /// What the keys mean in a mode.
    pub const fn of(mode: &Mode) -> Self {
        match mode {
            Mode::Look => Self::Look,
            Mode::Typing(_) => Self::Typing,
            Mode::Walk { .. } => Self::Walk,
            Mode::Slots => Self::Slots,
            Mode::Chart { .. } => Self::Chart,
            Mode::Naming { .. } => Self::Naming,
            Mode::Form(_) => Self::Form,
            Mode::Profiles { .. } => Self::Profiles,
            Mode::Note => Self::Note,
            Mode::Help { .. } => Self::Help,
            Mode::Leave(_) => Self::Leave,
            Mode::Recover(_) => Self::Recover,
        }
    }

    /// Whether letters are typed into a field.
    pub const fn types(self) -> bool {
        matches!(self, Self::Typing | Self::Naming | Self::Form | Self::Help)
    }

    /// As a heading.
    pub const fn heading(self) -> &'static str {
        match self {
            Self::Look => "Looking and turning",
            Self::Typing => "Typing a value",
            Self::Walk => "In the table",
            Self::Slots => "Keeping a trial",
            Self::Chart => "Charting a trial",
            Self::Naming => "Naming a file",
            Self::Form => "In the form",
            Self::Profiles => "Choosing a profile",
            Self::Note => "Writing the note",
            Self::Help => "In the help",
            Self::Leave => "Leaving",
            Self::Recover => "At the start, after a loss",
        }
    }

    /// All, in the order of the help.
    pub const ALL: [Self; 12] = [
        Self::Look,
        Self::Typing,
        Self::Walk,
        Self::Slots,
        Self::Form,
        Self::Chart,
        Self::Naming,
        Self::Profiles,
        Self::Note,
        Self::Help,
        Self::Leave,
        Self::Recover,
    ];
}

/// A press of the keyboard.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Press {
    /// A letter or sign.
    Sign(char),
    /// Another key.
    Code(KeyCode),
    /// Another key with Shift.
    Shift(KeyCode),
    /// A letter with Ctrl.
    Ctrl(char),
}

impl Press {
    /// The press of an event; `None` for releases and chords that are not used. `AltGr` arrives as Ctrl with Alt on some
    /// systems and is taken as the letter it gives.
    pub fn of(event: KeyEvent) -> Option<Self> {
        if event.kind == KeyEventKind::Release {
            return None;
        }
        let control = event.modifiers.contains(KeyModifiers::CONTROL);
        let alt = event.modifiers.contains(KeyModifiers::ALT);
        match event.code {
            KeyCode::Char(letter) if control && !alt => Some(Self::Ctrl(letter.to_ascii_lowercase())),
            KeyCode::Char(letter) if control == alt => Some(Self::Sign(letter)),
            KeyCode::Char(_) => None,
            KeyCode::Tab if event.modifiers.contains(KeyModifiers::SHIFT) => {
                Some(Self::Code(KeyCode::BackTab))
            }
            KeyCode::BackTab => Some(Self::Code(KeyCode::BackTab)),
            code if event.modifiers.contains(KeyModifiers::SHIFT) => Some(Self::Shift(code)),
            code => Some(Self::Code(code)),
        }
    }
}

/// One row of the table.
pub struct KeyRow {
    /// When it holds.
    pub when: When,
    /// The keys as they are shown.
    pub shown: &'static str,
    /// What they do.
    pub does: &'static str,
    /// What the footer says of them; empty when it does not.
    pub foot: &'static str,
    /// Each press and what it asks for.
    pub presses: &'static [(Press, Action)],
}

mod table;
pub use table::KEYS;

/// The rows that hold in a mode.
pub fn rows(when: When) -> impl Iterator<Item = &'static KeyRow> {
    KEYS.iter().filter(move |row| row.when == when)
}

/// What a key asks for.
pub fn action_for(state: &State, event: KeyEvent) -> Option<Action> {
    let press = Press::of(event)?;
    match press {
        Press::Ctrl('c') => return Some(Action::Leave),
        Press::Ctrl('z') => return Some(Action::Suspend),
        Press::Sign(_) | Press::Code(_) | Press::Shift(_) | Press::Ctrl(_) => {}
    }
    let when = When::of(&state.mode);
    let known = rows(when).flat_map(|row| row.presses).find(|(known, _)| *known == press);
    if let Some((_, action)) = known {
        return Some(action.clone());
    }
    match (when, press) {
        (When::Look, Press::Sign(letter)) if letter.is_ascii_digit() || matches!(letter, '.' | ',') => {
            Some(Action::Begin(letter))
        }
        (When::Look, Press::Code(KeyCode::Enter)) => {
            Some(if state.view == View::Table { Action::Accept } else { Action::Begin(' ') })
        }
        (_, press) if when.types() => edit(press).map(Action::Edit),
        _ => None,
    }
}

const fn edit(press: Press) -> Option<InputRequest> {
    Some(match press {
        Press::Sign(letter) => InputRequest::InsertChar(letter),
        Press::Code(KeyCode::Backspace) | Press::Shift(KeyCode::Backspace) => InputRequest::DeletePrevChar,
        Press::Code(KeyCode::Delete) => InputRequest::DeleteNextChar,
        Press::Code(KeyCode::Left) => InputRequest::GoToPrevChar,
        Press::Code(KeyCode::Right) => InputRequest::GoToNextChar,
        Press::Code(KeyCode::Home) => InputRequest::GoToStart,
        Press::Code(KeyCode::End) => InputRequest::GoToEnd,
        Press::Code(_) | Press::Shift(_) | Press::Ctrl(_) => return None,
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn no_press_means_two_things_at_once() {
        for when in When::ALL {
            let presses: Vec<Press> =
                rows(when).flat_map(|row| row.presses).map(|(press, _)| *press).collect();
            for (index, press) in presses.iter().enumerate() {
                assert!(!presses.iter().skip(index + 1).any(|other| other == press), "{when:?} {press:?}");
            }
        }
    }

    #[test]
    fn alt_gr_is_the_letter_it_gives_and_releases_are_dropped() {
        let alt_gr = KeyEvent::new(KeyCode::Char('?'), KeyModifiers::CONTROL | KeyModifiers::ALT);
        assert_eq!(Press::of(alt_gr), Some(Press::Sign('?')));
        let mut release = KeyEvent::new(KeyCode::Char('q'), KeyModifiers::NONE);
        release.kind = KeyEventKind::Release;
        assert_eq!(Press::of(release), None);
        let alt = KeyEvent::new(KeyCode::Char('q'), KeyModifiers::ALT);
        assert_eq!(Press::of(alt), None);
    }
}
