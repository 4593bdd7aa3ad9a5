//! What is wrong with an input, where it stands, and what to do about it.

use std::fmt;

/// Where a value stands in a record: its table, its entry (from 1) and its key.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Place {
    /// The entry's number as a person counts, from 1; `None` outside entries.
    pub entry: Option<usize>,
    /// `""` (the top of the file), `patient`, `settings`, `measured`, `gas`, `weaning`, `trial`, `plan`, `note`.
    pub table: &'static str,
    /// The key in that table; empty for the table itself.
    pub key: &'static str,
}

impl Place {
    /// A key of a table in entry `entry` (from 1).
    pub const fn in_entry(entry: usize, table: &'static str, key: &'static str) -> Self {
        Self { entry: Some(entry), table, key }
    }

    /// A key outside entries.
    pub const fn top(table: &'static str, key: &'static str) -> Self {
        Self { entry: None, table, key }
    }
}

impl fmt::Display for Place {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        let dot = if self.table.is_empty() || self.key.is_empty() { "" } else { "." };
        write!(out, "{}{dot}{}", self.table, self.key)?;
        if let Some(entry) = self.entry { write!(out, " of entry {entry}") } else { Ok(()) }
    }
}

/// One thing wrong with an input: a sentence with its values, and the next step.
#[derive(Debug, Clone, PartialEq, Eq, Hash, thiserror::Error)]
#[error("{message}")]
pub struct Fault {
    /// The values at fault, the most telling first; never empty.
    pub places: Vec<Place>,
    /// What is wrong, a sentence with its values.
    pub message: String,
    /// What was expected, with an example, or what to do.
    pub help: String,
}

impl Fault {
    /// A fault at `places` (the most telling first).
    pub fn new(places: impl Into<Vec<Place>>, message: impl Into<String>, help: impl Into<String>) -> Self {
        Self { places: places.into(), message: message.into(), help: help.into() }
    }
}
