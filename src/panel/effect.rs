//! What is done outside the state: files, the clipboard, the terminal. All of it in one place.

use std::io::Write;
use std::path::{Path, PathBuf};

use super::action::Action;
use super::state::{Origin, State};
use crate::case::append::{AppendError, Appended, Hold, Seen};
use crate::case::entry::Entry;
use crate::note::{forecast_text, plan_text};
use crate::planning::forecast::Held;
use crate::planning::plan::{Request, forecast, plan};
use crate::planning::trial::Trial;

/// One thing to be done.
#[derive(Debug, Clone, PartialEq)]
pub enum Effect {
    /// Add an entry to the case file.
    Append(Box<Entry>),
    /// Begin a case file with this text and add an entry.
    Create {
        /// The file.
        path: PathBuf,
        /// What it begins with.
        text: String,
        /// The entry.
        entry: Box<Entry>,
    },
    /// Write the note to this file.
    WriteNote(PathBuf),
    /// Send the note to the terminal's clipboard.
    CopyNote,
    /// Listen to the mouse, or not.
    Mouse(bool),
    /// Stop for the shell.
    Suspend,
    /// Leave.
    Quit,
}

/// The case file as it was last read, and the right to chart in it.
#[derive(Debug, Default)]
pub struct Files {
    held: Option<(Hold, Seen)>,
}

impl Files {
    /// Takes the right to chart in the state's file, which was read as `bytes`; where another program has it, the state
    /// says so and only reads.
    pub fn open(state: &mut State, bytes: &[u8]) -> Self {
        let Origin::File(path) = &state.origin else { return Self::default() };
        match Hold::take(path) {
            Ok(hold) => Self { held: Some((hold, Seen::of(bytes))) },
            Err(why) => {
                let why = lower_first(&why.to_string());
                state.message = Some(format!("Read only: {why}."));
                state.read_only = Some(why);
                Self::default()
            }
        }
    }

    /// Does what concerns files, and gives what happened; `None` for everything else.
    pub fn perform(&mut self, state: &State, effect: &Effect) -> Option<Action> {
        match effect {
            Effect::Append(entry) => match &state.origin {
                Origin::File(path) => Some(self.append(path, entry)),
                Origin::Text { .. } => None,
            },
            Effect::Create { path, text, entry } => Some(self.create(path, text, entry)),
            Effect::WriteNote(path) => Some(write_note(state, path)),
            Effect::CopyNote | Effect::Mouse(_) | Effect::Suspend | Effect::Quit => None,
        }
    }

    /// Adds an entry; what happened comes back as an action.
    fn append(&mut self, path: &Path, entry: &Entry) -> Action {
        let Some((hold, seen)) = &mut self.held else {
            return Action::Failed("Nothing was charted: the file is only read here.".to_owned());
        };
        match hold.append(std::slice::from_ref(entry), seen) {
            Ok(appended) => {
                *seen = appended.seen;
                charted(appended, path)
            }
            Err(why) => not_added(&why),
        }
    }

    /// Begins a file; what happened comes back as an action.
    fn create(&mut self, path: &Path, text: &str, entry: &Entry) -> Action {
        let begun =
            Hold::take(path).and_then(|hold| Ok((hold.create(text, std::slice::from_ref(entry))?, hold)));
        match begun {
            Ok((appended, hold)) => {
                self.held = Some((hold, appended.seen));
                charted(appended, path)
            }
            Err(why) => not_added(&why),
        }
    }
}

fn charted(appended: Appended, path: &Path) -> Action {
    Action::Charted {
        record: Box::new(appended.record),
        path: path.to_owned(),
        meanwhile: appended.meanwhile,
    }
}

fn not_added(why: &AppendError) -> Action {
    Action::Failed(format!("Not charted: {}.", lower_first(&why.to_string())))
}

fn lower_first(text: &str) -> String {
    let mut letters = text.chars();
    letters.next().map_or_else(String::new, |first| first.to_lowercase().chain(letters).collect())
}

/// The note of what is shown: the forecast of the trial, or the plan where nothing is turned.
///
/// # Errors
/// A sentence, where the record cannot be forecast.
pub fn note(state: &State) -> Result<String, String> {
    let sentence = |faults: Vec<crate::case::fault::Fault>| {
        faults.first().map_or_else(String::new, |fault| format!("{}. {}", fault.message, fault.help))
    };
    let record = state.record();
    if state.turned.trial == Trial::default() {
        let request = Request { asked: state.turned.goal, ..Request::default() };
        return plan(&record, &request)
            .map(|plan| plan_text::of(&plan, &record, state.face))
            .map_err(sentence);
    }
    forecast(&record, &state.turned.trial, Held::Split)
        .map(|forecast| forecast_text::of(&forecast, &record, state.face))
        .map_err(sentence)
}

/// Writes the note to a new file, for its owner's eyes only; what happened comes back as an action.
fn write_note(state: &State, path: &Path) -> Action {
    let text = match note(state) {
        Ok(text) => text,
        Err(why) => return Action::Failed(why),
    };
    let folder =
        path.parent().filter(|folder| !folder.as_os_str().is_empty()).unwrap_or_else(|| Path::new("."));
    let written = tempfile::NamedTempFile::new_in(folder).and_then(|mut beside| {
        beside.write_all(text.as_bytes())?;
        beside.as_file().sync_all()?;
        beside.persist_noclobber(path).map_err(|error| error.error)?;
        Ok(())
    });
    match written {
        Ok(()) => Action::Done(format!("The note is in {}.", path.display())),
        Err(error) if error.kind() == std::io::ErrorKind::AlreadyExists => {
            Action::Failed(format!("There is a file {} already: move it away first.", path.display()))
        }
        Err(error) => Action::Failed(format!("The note was not written to {}: {error}.", path.display())),
    }
}
