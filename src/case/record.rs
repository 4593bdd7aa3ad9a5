//! A record: one patient's entries, checked as a whole. The engine takes nothing else.

use std::collections::HashSet;

use super::amend::{Corrected, corrected};
use super::contradiction::contradictions;
use super::entry::{Entry, Patient};
use super::fault::{Fault, Place};
use super::inherit::Carried;
use super::moment::Moment;
use super::plausible::implausible;
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

impl Occasion {
    /// When its gas was drawn: as charted with the gas, else the time of the entry.
    pub fn drawn_at(&self) -> Option<Moment> {
        self.entry.gas.drawn_at.or(self.at)
    }
}

/// A checked record.
#[derive(Debug, Clone, PartialEq)]
pub struct Record {
    draft: Draft,
    occasions: Vec<Occasion>,
}

impl Record {
    /// Checks every value against the table of inputs, every entry against itself and the record as a whole:
    /// corrections are applied, entries put in order of time, settings inherited.
    ///
    /// # Errors
    /// Every fault found, those of the patient first, then entry by entry.
    pub fn check(draft: Draft) -> Result<Self, Vec<Fault>> {
        Self::check_beside(draft, &[])
    }

    /// As [`check`](Self::check), where the values at `unread` were given but could not be read: what would follow
    /// from their absence alone is no fault of its own.
    pub(super) fn check_beside(draft: Draft, unread: &[Place]) -> Result<Self, Vec<Fault>> {
        let mut faults = implausible(&draft);
        let doubts = Doubts::of(faults.iter().flat_map(|fault| &fault.places).chain(unread));
        let (occasions, found) = standing(&draft);
        faults.extend(found.into_iter().filter(|fault| !doubts.touch(fault)));
        faults.sort_by_key(|fault| fault.places.first().and_then(|place| place.entry));
        if faults.is_empty() { Ok(Self { draft, occasions }) } else { Err(faults) }
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

/// Values that are implausible or could not be read.
struct Doubts {
    places: HashSet<Place>,
    /// Settings are inherited, so one in doubt casts doubt on all entries.
    settings: HashSet<&'static str>,
}

impl Doubts {
    fn of<'p>(places: impl Iterator<Item = &'p Place>) -> Self {
        let places: HashSet<Place> = places.copied().collect();
        let settings =
            places.iter().filter(|place| place.table == "settings").map(|place| place.key).collect();
        Self { places, settings }
    }

    /// Whether a fault draws on a value in doubt.
    fn touch(&self, fault: &Fault) -> bool {
        fault.places.iter().any(|place| {
            self.places.contains(place) || (place.table == "settings" && self.settings.contains(place.key))
        })
    }
}

/// The entries that count with the settings in force, and every fault between values.
fn standing(draft: &Draft) -> (Vec<Occasion>, Vec<Fault>) {
    let mut faults = Vec::new();
    faults.extend(two_pressures(&draft.patient));
    faults.extend(undated(&draft.entries));
    let (mut corrected, astray) = corrected(&draft.entries);
    faults.extend(astray);
    // Stable: entries of one instant keep the order of the file.
    corrected.sort_by_key(|held| held.entry.at);
    let mut carried = Carried::default();
    let mut said = HashSet::new();
    let mut occasions = Vec::with_capacity(corrected.len());
    for held in corrected {
        faults.extend(carried.advance(&held.entry, |key| held.place("settings", key)));
        let in_force = carried.in_force();
        // Settings stay in force: what they alone contradict is said where it comes about, not in every entry after.
        let new =
            contradictions(&held, &carried, &in_force).into_iter().filter(|fault| said.insert(fault.clone()));
        faults.extend(new);
        let Corrected { number, entry, .. } = held;
        let at = entry.at;
        occasions.push(Occasion { number, entry, in_force, at });
    }
    (occasions, faults)
}

fn two_pressures(patient: &Patient) -> Option<Fault> {
    (patient.barometric_pressure_mmhg.is_some() && patient.altitude_m.is_some()).then(|| {
        Fault::new(
            [Place::top("patient", "altitude"), Place::top("patient", "barometric_pressure")],
            "barometric_pressure and altitude are both given, and one follows from the other",
            "keep barometric_pressure when it was read off a barometer, else altitude",
        )
    })
}

/// Only a record of one entry may do without times.
fn undated(entries: &[Entry]) -> Vec<Fault> {
    if entries.len() < 2 {
        return Vec::new();
    }
    let mut faults = Vec::new();
    for (number, entry) in (1..).zip(entries) {
        if entry.at.is_none() {
            faults.push(Fault::new(
                [Place::in_entry(number, "", "at")],
                format!(
                    "entry {number} has no time, and a record of {} entries needs one in each",
                    entries.len()
                ),
                "write when it was charted, with the offset from UTC: at = 2026-03-04T08:10:00+01:00",
            ));
        }
    }
    faults
}

#[cfg(test)]
mod tests;
