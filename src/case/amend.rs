//! Corrections: an entry that amends another replaces its keys in all computing, and both stay on file.

use std::collections::BTreeMap;

use super::entry::{Control, Entry};
use super::fault::{Fault, Place};
use super::slots::ENTRY;

/// An entry that counts, with the corrections that name it applied.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Corrected {
    /// Its number in the file, from 1.
    pub number: usize,
    /// The entry, corrections applied in file order.
    pub entry: Entry,
    /// Which entry each corrected value stands in, by table and key.
    from: BTreeMap<(&'static str, &'static str), usize>,
}

impl Corrected {
    /// Where a value of this entry stands in the file: in the correction when it was corrected.
    pub(super) fn place(&self, table: &'static str, key: &'static str) -> Place {
        Place::in_entry(self.from.get(&(table, key)).copied().unwrap_or(self.number), table, key)
    }
}

/// The entries that count, in file order, and every correction that cannot be made.
pub(super) fn corrected(entries: &[Entry]) -> (Vec<Corrected>, Vec<Fault>) {
    let mut standing: Vec<Corrected> = Vec::with_capacity(entries.len());
    let mut roots: Vec<usize> = Vec::with_capacity(entries.len());
    let mut faults = Vec::new();
    for (number, entry) in (1..).zip(entries) {
        let Some(amends) = entry.amends else {
            roots.push(number);
            standing.push(Corrected { number, entry: entry.clone(), from: BTreeMap::new() });
            continue;
        };
        // An amendment of an amendment corrects the entry at the root of both.
        let root = amends.checked_sub(1).and_then(|index| roots.get(index)).copied();
        roots.push(root.unwrap_or(number));
        let index = root.and_then(|root| standing.binary_search_by_key(&root, |held| held.number).ok());
        match index.and_then(|index| standing.get_mut(index)) {
            Some(held) => amend(held, number, entry),
            None => faults.push(astray(number, amends, entries.len())),
        }
    }
    (standing, faults)
}

fn astray(number: usize, amends: usize, count: usize) -> Fault {
    let message = if amends == number {
        format!("entry {number} says that it amends itself")
    } else if amends > number && amends <= count {
        format!("entry {number} says that it amends entry {amends}, which comes after it")
    } else {
        format!("entry {number} says that it amends entry {amends}, and there is no entry {amends}")
    };
    let help = if number == 1 {
        "the first entry has nothing before it to amend: take the line away".to_owned()
    } else {
        format!("name the earlier entry to correct, counted from 1 at the top: amends = {}", number - 1)
    };
    Fault::new([Place::in_entry(number, "", "amends")], message, help)
}

/// Key by key within settings, measured, gas and weaning; a trial or a plan is replaced whole; the time stays.
fn amend(held: &mut Corrected, number: usize, typed: &Entry) {
    make_way(&mut held.entry, typed);
    for slot in &ENTRY {
        if let Some(value) = (slot.get)(typed) {
            *(slot.open)(&mut held.entry) = Some(value);
            let input = slot.key.input();
            held.from.insert((input.table, input.name), number);
        }
    }
    let Corrected { entry, from, .. } = held;
    let mut replace = |table: &'static str, key: &'static str, given: bool| {
        if given {
            from.insert((table, key), number);
        }
        given
    };
    if replace("settings", "control", typed.settings.control.is_some()) {
        entry.settings.control = typed.settings.control;
    }
    if replace("settings", "flow_pattern", typed.settings.flow_pattern.is_some()) {
        entry.settings.flow_pattern = typed.settings.flow_pattern;
    }
    if replace("gas", "drawn_at", typed.gas.drawn_at.is_some()) {
        entry.gas.drawn_at = typed.gas.drawn_at;
    }
    if replace("trial", "", typed.trial.is_some()) {
        entry.trial.clone_from(&typed.trial);
    }
    if replace("plan", "", typed.plan.is_some()) {
        entry.plan.clone_from(&typed.plan);
    }
}

/// Takes away what the correction makes void without naming it.
fn make_way(held: &mut Entry, typed: &Entry) {
    let settings = &mut held.settings;
    let timing = &typed.settings;
    // The three timing keys say one thing in three ways: naming one replaces whichever stood there.
    if timing.inspiratory_time_s.or(timing.flow_l_min).or(timing.ratio).is_some() {
        settings.inspiratory_time_s = None;
        settings.flow_l_min = None;
        settings.ratio = None;
    }
    // A corrected control takes away what only the mistaken one could carry.
    match typed.settings.control {
        Some(Control::Volume) => settings.inspiratory_pressure_cmh2o = None,
        Some(Control::Pressure | Control::Support) => {
            settings.tidal_volume_ml = None;
            settings.flow_l_min = None;
            settings.pause_s = None;
            settings.flow_pattern = None;
        }
        None => {}
    }
    // Total PEEP and auto-PEEP are one reading in two ways.
    if typed.measured.total_peep_cmh2o.or(typed.measured.auto_peep_cmh2o).is_some() {
        held.measured.total_peep_cmh2o = None;
        held.measured.auto_peep_cmh2o = None;
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::case::entry::SettingsChange;

    fn rate(rate_per_min: f64, amends: Option<usize>) -> Entry {
        let settings = SettingsChange { rate_per_min: Some(rate_per_min), ..SettingsChange::default() };
        Entry { settings, amends, ..Entry::default() }
    }

    #[test]
    fn an_amendment_of_an_amendment_corrects_the_root_and_the_last_word_counts() {
        let (standing, faults) =
            corrected(&[rate(20.0, None), rate(22.0, None), rate(24.0, Some(1)), rate(26.0, Some(3))]);
        assert_eq!(faults, []);
        let rates: Vec<_> =
            standing.iter().map(|held| (held.number, held.entry.settings.rate_per_min)).collect();
        assert_eq!(rates, [(1, Some(26.0)), (2, Some(22.0))]);
    }

    #[test]
    fn an_amendment_of_itself_of_a_later_entry_or_of_none_is_a_fault() {
        let (_, faults) =
            corrected(&[rate(20.0, Some(1)), rate(20.0, Some(3)), rate(20.0, Some(9)), rate(20.0, Some(0))]);
        let said: Vec<_> = faults.iter().map(|fault| fault.message.as_str()).collect();
        assert_eq!(
            said,
            [
                "entry 1 says that it amends itself",
                "entry 2 says that it amends entry 3, which comes after it",
                "entry 3 says that it amends entry 9, and there is no entry 9",
                "entry 4 says that it amends entry 0, and there is no entry 0",
            ]
        );
    }

    #[test]
    fn naming_one_timing_or_one_peep_reading_replaces_the_other() {
        let mut first = rate(20.0, None);
        first.settings.flow_l_min = Some(50.0);
        first.measured.auto_peep_cmh2o = Some(3.0);
        let mut second = Entry { amends: Some(1), ..Entry::default() };
        second.settings.ratio = Some(2.0);
        second.measured.total_peep_cmh2o = Some(12.0);
        let (standing, _) = corrected(&[first, second]);
        let held = &standing[0].entry;
        assert_eq!((held.settings.flow_l_min, held.settings.ratio), (None, Some(2.0)));
        assert_eq!(standing[0].place("settings", "ratio"), Place::in_entry(2, "settings", "ratio"));
        assert_eq!(standing[0].place("settings", "rate"), Place::in_entry(1, "settings", "rate"));
        assert_eq!((held.measured.auto_peep_cmh2o, held.measured.total_peep_cmh2o), (None, Some(12.0)));
    }
}
