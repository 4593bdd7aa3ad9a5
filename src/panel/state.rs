//! Everything the panel knows: the record as charted, what is turned, what is being typed. Results are not in it.

use std::borrow::Cow;
use std::path::PathBuf;

use tui_input::Input;

use super::form::Form;
use super::line::LineId;
use super::recovery::Kept;
use super::theme::Theme;
use crate::case::entry::Entry;
use crate::case::moment::Moment;
use crate::case::profile::Profile;
use crate::case::record::{Draft, Record};
use crate::note::face::Face;
use crate::planning::target::Asked;
use crate::planning::trial::Trial;

/// Where the record comes from, and so where it can be charted.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Origin {
    /// A case file.
    File(PathBuf),
    /// A text without a file of its own (a built-in case, standard input): charting asks for a file name.
    Text {
        /// What it is called.
        name: String,
        /// What a file of it begins with.
        text: String,
    },
}

impl Origin {
    /// What it is called.
    pub fn name(&self) -> String {
        match self {
            Self::File(path) => path.display().to_string(),
            Self::Text { name, .. } => name.clone(),
        }
    }
}

/// What turning changes, and undo brings back.
#[derive(Debug, Clone, PartialEq)]
pub struct Turned {
    /// The trial.
    pub trial: Trial,
    /// The goal.
    pub goal: Asked,
    /// The profile chosen in place of the record's own.
    pub profile: Option<Profile>,
}

impl Default for Turned {
    fn default() -> Self {
        Self { trial: Trial::default(), goal: Asked::Profile, profile: None }
    }
}

/// A drawing that fills the lower part of the screen.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum View {
    /// PaCO2 against ventilation, and as the marked line is turned.
    Curve,
    /// Rate across, volume down.
    Table,
    /// The next hour.
    Course,
    /// One breath shared out.
    Breath,
    /// The kept trials beside now and try.
    Kept,
    /// The entries.
    Record,
    /// Every formula with this patient's numbers.
    Working,
    /// Every caution in full.
    Cautions,
}

impl View {
    /// All, in the order they stand.
    pub const ALL: [Self; 8] = [
        Self::Curve,
        Self::Table,
        Self::Course,
        Self::Breath,
        Self::Kept,
        Self::Record,
        Self::Working,
        Self::Cautions,
    ];

    /// Its name.
    pub const fn name(self) -> &'static str {
        match self {
            Self::Curve => "curve",
            Self::Table => "table",
            Self::Course => "course",
            Self::Breath => "breath",
            Self::Kept => "kept",
            Self::Record => "record",
            Self::Working => "working",
            Self::Cautions => "cautions",
        }
    }

    /// The one `by` places on, around.
    #[must_use]
    pub fn step(self, by: isize) -> Self {
        let at = Self::ALL.iter().position(|view| *view == self).unwrap_or(0);
        let count = Self::ALL.len();
        let next = (at + count).saturating_add_signed(by) % count;
        Self::ALL.get(next).copied().unwrap_or(self)
    }
}

/// What the keys mean just now.
#[derive(Debug, Clone)]
pub enum Mode {
    /// Looking and turning.
    Look,
    /// A value is typed into the marked line.
    Typing(Input),
    /// A cell of the table is walked to.
    Walk {
        /// Rate of the cell, 1/min.
        rate_per_min: f64,
        /// Volume (mL) or inspiratory pressure (cmH2O) of the cell.
        volume: f64,
    },
    /// A slot is to be named.
    Slots,
    /// What will be charted is shown.
    Chart {
        /// Whether the settings are charted as dialled too.
        dialled: bool,
    },
    /// A file name is asked for.
    Naming {
        /// What is typed.
        name: Input,
        /// What will be charted in it.
        entry: Box<Entry>,
    },
    /// A gas and readings are entered.
    Form(Box<Form>),
    /// A profile is chosen.
    Profiles {
        /// Which one is marked.
        chosen: usize,
    },
    /// The note goes to a file or the clipboard.
    Note,
    /// The keys and lines are looked up.
    Help {
        /// What is searched for.
        query: Input,
        /// Which key of those found is marked.
        chosen: usize,
    },
    /// Something typed is not charted, and leaving was asked for.
    Leave(Box<Form>),
    /// Something typed before is offered again.
    Recover(Box<Kept>),
}

/// The panel's state.
#[derive(Debug, Clone)]
pub struct State {
    /// The record as charted.
    pub charted: Record,
    /// Where it comes from.
    pub origin: Origin,
    /// Why it cannot be charted in, when it cannot.
    pub read_only: Option<String>,
    /// What is turned.
    pub turned: Turned,
    /// What was turned before, with what was done since.
    pub undo: Vec<(String, Turned)>,
    /// What was undone.
    pub redo: Vec<(String, Turned)>,
    /// Kept trials.
    pub slots: [Option<Turned>; 3],
    /// The marked line.
    pub marked: LineId,
    /// The view that is open.
    pub view: View,
    /// Whether the view fills the screen.
    pub large: bool,
    /// How far the view is scrolled, rows.
    pub scroll: usize,
    /// What the keys mean.
    pub mode: Mode,
    /// A form put aside with Esc, to be gone on with.
    pub aside: Option<Box<Form>>,
    /// What happened last.
    pub message: Option<String>,
    /// The time now, passed in.
    pub clock: Moment,
    /// Units and letters.
    pub face: Face,
    /// Colours.
    pub theme: Theme,
    /// Whether the mouse is listened to.
    pub mouse: bool,
}

impl State {
    /// Opens a record.
    pub fn new(charted: Record, origin: Origin, clock: Moment) -> Self {
        Self {
            charted,
            origin,
            read_only: None,
            turned: Turned::default(),
            undo: Vec::new(),
            redo: Vec::new(),
            slots: [None, None, None],
            marked: LineId::Rate,
            view: View::Curve,
            large: false,
            scroll: 0,
            mode: Mode::Look,
            aside: None,
            message: None,
            clock,
            face: Face::default(),
            theme: Theme::default(),
            mouse: true,
        }
    }

    /// The record under the profile chosen.
    pub fn record(&self) -> Cow<'_, Record> {
        match &self.turned.profile {
            Some(profile) => Cow::Owned(with_profile(&self.charted, profile)),
            None => Cow::Borrowed(&self.charted),
        }
    }

    /// Whether something typed is not charted yet.
    pub fn unsaved_form(&self) -> Option<&Form> {
        match &self.mode {
            Mode::Form(form) | Mode::Leave(form) => Some(form.as_ref()),
            Mode::Look
            | Mode::Typing(_)
            | Mode::Walk { .. }
            | Mode::Slots
            | Mode::Chart { .. }
            | Mode::Naming { .. }
            | Mode::Profiles { .. }
            | Mode::Note
            | Mode::Help { .. }
            | Mode::Recover(_) => self.aside.as_deref(),
        }
        .filter(|form| form.holds_anything())
    }
}

/// A draft of a record, for entries to be added to it.
pub fn draft_of(record: &Record) -> Draft {
    let label = record.label();
    Draft {
        label: (!label.is_empty()).then(|| label.to_owned()),
        profile: record.profile().clone(),
        steadiness: record.steadiness(),
        patient: record.patient().clone(),
        entries: record.entries().to_vec(),
    }
}

fn with_profile(record: &Record, profile: &Profile) -> Record {
    let draft = Draft { profile: profile.clone(), ..draft_of(record) };
    // A profile is no part of what is checked, so a checked record stays one.
    Record::check(draft).unwrap_or_else(|_| record.clone())
}
