//! A record: one patient's entries, checked as a whole. The engine takes nothing else.

use super::entry::{Entry, Patient};
use super::fault::Fault;
use super::moment::Moment;
use super::profile::Profile;
use super::settings::InForce;

/// How steady the patient is said to be.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Steadiness {
    /// The world of consecutive gases: drawn and acted on when something has changed.
    #[default]
    Usual,
    /// Stable and untouched within the hour, as the user states.
    Settled,
}

/// A record as typed: every value optional and unchecked.
#[derive(Debug, Clone, PartialEq)]
pub struct Draft {
    /// A label, never a name or hospital number.
    pub label: Option<String>,
    /// The profile, already read.
    pub profile: Profile,
    /// How steady.
    pub steadiness: Steadiness,
    /// The patient.
    pub patient: Patient,
    /// The entries in file order.
    pub entries: Vec<Entry>,
}

/// An entry that counts, corrections applied, with the settings in force.
#[derive(Debug, Clone, PartialEq)]
pub struct Occasion {
    /// Its number in the file, from 1.
    pub number: usize,
    /// The entry with its corrections applied.
    pub entry: Entry,
    /// The settings in force with it.
    pub in_force: InForce,
    /// When; `None` only in a record of one entry.
    pub at: Option<Moment>,
}

/// A checked record.
#[derive(Debug, Clone, PartialEq)]
pub struct Record {
    draft: Draft,
    occasions: Vec<Occasion>,
}

impl Record {
    /// Checks every value against the table of inputs, every entry against itself and the record as a whole.
    ///
    /// # Errors
    /// Every fault found, in file order.
    pub fn check(draft: Draft) -> Result<Self, Vec<Fault>> {
        let _ = draft;
        Err(Vec::new())
    }

    /// The label; empty when none was given.
    pub fn label(&self) -> &str {
        self.draft.label.as_deref().unwrap_or("")
    }

    /// The profile of limits.
    pub const fn profile(&self) -> &Profile {
        &self.draft.profile
    }

    /// How steady the patient is said to be.
    pub const fn steadiness(&self) -> Steadiness {
        self.draft.steadiness
    }

    /// The patient.
    pub const fn patient(&self) -> &Patient {
        &self.draft.patient
    }

    /// The entries as they stand in the file, corrected ones too.
    pub fn entries(&self) -> &[Entry] {
        &self.draft.entries
    }

    /// The entries that count, oldest first, corrections applied.
    pub fn occasions(&self) -> &[Occasion] {
        &self.occasions
    }
}
