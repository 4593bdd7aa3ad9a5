//! Which values of a record no longer count because a later entry corrects them. They stay on file and are shown struck.

use std::collections::HashMap;

use super::entry::{Control, Entry};
use super::record::Record;
use super::slots::ENTRY;

/// A key of an entry: table and name.
pub type EntryKey = (&'static str, &'static str);

/// The struck values of a record.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct Struck {
    by: HashMap<(usize, EntryKey), usize>,
}

const TIMING: [EntryKey; 3] = [("settings", "inspiratory_time"), ("settings", "flow"), ("settings", "ratio")];
const TRAPPING: [EntryKey; 2] = [("measured", "total_peep"), ("measured", "auto_peep")];
const OF_VOLUME_CONTROL: [EntryKey; 4] =
    [("settings", "tidal_volume"), ("settings", "flow"), ("settings", "pause"), ("settings", "flow_pattern")];

impl Struck {
    /// Reads the corrections of a record.
    pub fn of(record: &Record) -> Self {
        let entries = record.entries();
        let mut struck = Self::default();
        // The entries of one correction, by the entry at its root.
        let mut chains: HashMap<usize, Vec<usize>> = HashMap::new();
        let mut roots: Vec<usize> = Vec::with_capacity(entries.len());
        for (number, entry) in (1..).zip(entries) {
            let root = entry.amends.and_then(|amends| roots.get(amends.checked_sub(1)?).copied());
            let root = root.unwrap_or(number);
            roots.push(root);
            let chain = chains.entry(root).or_default();
            if root != number {
                let void = voided(entry);
                for earlier in chain.iter() {
                    let given = entries.get(earlier - 1).map(keys).unwrap_or_default();
                    for key in given.into_iter().filter(|key| void.contains(key)) {
                        struck.by.entry((*earlier, key)).or_insert(number);
                    }
                }
            }
            chain.push(number);
        }
        struck
    }

    /// The entry that corrects `key` of entry `number`, when one does.
    pub fn by(&self, number: usize, table: &'static str, key: &'static str) -> Option<usize> {
        self.by.get(&(number, (table, key))).copied()
    }

    /// Whether anything is struck.
    pub fn is_empty(&self) -> bool {
        self.by.is_empty()
    }
}

/// The keys that an entry gives.
pub fn keys(entry: &Entry) -> Vec<EntryKey> {
    let numbers = ENTRY.iter().filter(|slot| (slot.get)(entry).is_some());
    let mut keys: Vec<EntryKey> =
        numbers.map(|slot| (slot.key.input().table, slot.key.input().name)).collect();
    let others: [(bool, EntryKey); 5] = [
        (entry.settings.control.is_some(), ("settings", "control")),
        (entry.settings.flow_pattern.is_some(), ("settings", "flow_pattern")),
        (entry.gas.drawn_at.is_some(), ("gas", "drawn_at")),
        (entry.trial.is_some(), ("trial", "")),
        (entry.plan.is_some(), ("plan", "")),
    ];
    keys.extend(others.into_iter().filter(|(given, _)| *given).map(|(_, key)| key));
    keys
}

/// The keys that a correction makes void: those it gives, and those that say the same thing in another way.
fn voided(correction: &Entry) -> Vec<EntryKey> {
    let mut void = keys(correction);
    for group in [&TIMING[..], &TRAPPING[..]] {
        if group.iter().any(|key| void.contains(key)) {
            void.extend(group);
        }
    }
    match correction.settings.control {
        Some(Control::Volume) => void.push(("settings", "inspiratory_pressure")),
        Some(Control::Pressure | Control::Support) => void.extend(OF_VOLUME_CONTROL),
        None => {}
    }
    void
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::case::{file, presets, read};

    fn struck(text: &str) -> Struck {
        Struck::of(&read::case(text.as_bytes(), &|name| file::profile(name, None)).unwrap().0)
    }

    #[test]
    fn the_slip_of_the_built_in_case_is_struck_and_its_correction_is_not() {
        let struck = struck(presets::case("three-days").unwrap().text);
        assert_eq!(struck.by(4, "gas", "paco2"), Some(5));
        assert_eq!(struck.by(5, "gas", "paco2"), None);
        assert_eq!((struck.by(4, "gas", "ph"), struck.by.len()), (None, 1));
    }

    #[test]
    fn a_correction_of_a_correction_strikes_it_and_names_the_same_thing_said_otherwise() {
        let struck = struck(
            "format = 1\n[[entry]]\nat = 2026-03-04T08:00:00Z\n[entry.settings]\ncontrol = \"volume\"\nrate = 20\ntidal_volume = 400\npeep = 8\nflow = 50\n\
             [entry.measured]\nauto_peep = 2\n\
             [[entry]]\nat = 2026-03-04T08:10:00Z\namends = 1\n[entry.settings]\nratio = \"1:2\"\n[entry.measured]\ntotal_peep = 11\n\
             [[entry]]\nat = 2026-03-04T08:20:00Z\namends = 2\n[entry.settings]\nratio = \"1:3\"\n",
        );
        assert_eq!(struck.by(1, "settings", "flow"), Some(2));
        assert_eq!(struck.by(1, "measured", "auto_peep"), Some(2));
        assert_eq!(struck.by(2, "settings", "ratio"), Some(3));
        assert_eq!(struck.by(3, "settings", "ratio"), None);
        assert_eq!(struck.by(1, "settings", "rate"), None);
    }
}
