//! A record: one patient's entries, checked as a whole. The engine takes nothing else.

use super::amend::{Corrected, corrected};
use super::entry::{Control, Entry, Patient};
use super::fault::{Fault, Place};
use super::inherit::Carried;
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
    /// Checks every entry against itself and the record as a whole: corrections are applied, entries put in order
    /// of time, settings inherited.
    ///
    /// # Errors
    /// Every fault found, those of the patient first, then entry by entry.
    pub fn check(draft: Draft) -> Result<Self, Vec<Fault>> {
        let mut faults = Vec::new();
        faults.extend(two_pressures(&draft.patient));
        faults.extend(undated(&draft.entries));
        let (mut corrected, astray) = corrected(&draft.entries);
        faults.extend(astray);
        // Stable: entries of one instant keep the order of the file.
        corrected.sort_by_key(|held| held.entry.at);
        let mut carried = Carried::default();
        let mut occasions = Vec::with_capacity(corrected.len());
        for Corrected { number, entry } in corrected {
            faults.extend(carried.advance(&entry, |key| Place::in_entry(number, "settings", key)));
            faults.extend(without_peep(number, &entry, &carried));
            let at = entry.at;
            occasions.push(Occasion { number, entry, in_force: carried.in_force(), at });
        }
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

/// An airway pressure means nothing until PEEP is known.
fn without_peep(number: usize, entry: &Entry, carried: &Carried) -> Option<Fault> {
    if carried.peep_cmh2o.is_some() {
        return None;
    }
    let measured = &entry.measured;
    let pressures = [
        ("measured", "plateau", measured.plateau_cmh2o),
        ("measured", "peak", measured.peak_cmh2o),
        ("measured", "total_peep", measured.total_peep_cmh2o),
        ("measured", "auto_peep", measured.auto_peep_cmh2o),
        ("measured", "mean_airway_pressure", measured.mean_airway_pressure_cmh2o),
        ("measured", "compliance", measured.compliance_ml_cmh2o),
    ];
    let mut charted: Vec<Place> = pressures
        .into_iter()
        .filter(|(_, _, value)| value.is_some())
        .map(|(table, key, _)| Place::in_entry(number, table, key))
        .collect();
    let says = if let Some(first) = charted.first() {
        format!("{} is charted, and no PEEP is in force", first.key)
    } else if entry.settings.control == Some(Control::Pressure) {
        charted.push(Place::in_entry(number, "settings", "control"));
        "pressure control is set, and no PEEP is in force".to_owned()
    } else if carried.control.is_some_and(|held| held.value == Control::Pressure)
        && entry.settings.inspiratory_pressure_cmh2o.is_some()
    {
        charted.push(Place::in_entry(number, "settings", "inspiratory_pressure"));
        "an inspiratory pressure is set, and no PEEP is in force".to_owned()
    } else {
        return None;
    };
    charted.push(Place::in_entry(number, "settings", "peep"));
    Some(Fault::new(
        charted,
        says,
        "add the set PEEP under settings, in cmH2O: peep = 8 (peep = 0 when there is none)",
    ))
}

#[cfg(test)]
mod tests;
