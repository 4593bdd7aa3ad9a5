//! Corrections: an entry that amends another replaces its keys in all computing, and both stay on file.

use super::entry::{Control, Entry, Gas, Measured, SettingsChange, Weaning};
use super::fault::{Fault, Place};

/// An entry that counts, with the corrections that name it applied.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Corrected {
    /// Its number in the file, from 1.
    pub number: usize,
    /// The entry, corrections applied in file order.
    pub entry: Entry,
}

/// The entries that count, in file order, and every correction that cannot be made.
pub(super) fn corrected(entries: &[Entry]) -> (Vec<Corrected>, Vec<Fault>) {
    let mut standing: Vec<Corrected> = Vec::with_capacity(entries.len());
    let mut roots: Vec<usize> = Vec::with_capacity(entries.len());
    let mut faults = Vec::new();
    for (number, entry) in (1..).zip(entries) {
        let Some(amends) = entry.amends else {
            roots.push(number);
            standing.push(Corrected { number, entry: entry.clone() });
            continue;
        };
        // An amendment of an amendment corrects the entry at the root of both.
        let root = amends.checked_sub(1).and_then(|index| roots.get(index)).copied();
        roots.push(root.unwrap_or(number));
        match root.and_then(|root| standing.iter_mut().find(|held| held.number == root)) {
            Some(held) => amend(&mut held.entry, entry),
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
fn amend(held: &mut Entry, typed: &Entry) {
    amend_settings(&mut held.settings, &typed.settings);
    amend_measured(&mut held.measured, &typed.measured);
    amend_gas(&mut held.gas, &typed.gas);
    amend_weaning(&mut held.weaning, &typed.weaning);
    replace(&mut held.trial, typed.trial.as_ref());
    replace(&mut held.plan, typed.plan.as_ref());
}

fn replace<T: Clone>(held: &mut Option<T>, typed: Option<&T>) {
    if let Some(value) = typed {
        *held = Some(value.clone());
    }
}

fn amend_settings(held: &mut SettingsChange, typed: &SettingsChange) {
    // The three timing keys say one thing in three ways: naming one replaces whichever stood there.
    if typed.inspiratory_time_s.or(typed.flow_l_min).or(typed.ratio).is_some() {
        held.inspiratory_time_s = None;
        held.flow_l_min = None;
        held.ratio = None;
    }
    // A corrected control takes away what only the mistaken one could carry.
    match typed.control {
        Some(Control::Volume) => held.inspiratory_pressure_cmh2o = None,
        Some(Control::Pressure | Control::Support) => {
            held.tidal_volume_ml = None;
            held.flow_l_min = None;
            held.pause_s = None;
            held.flow_pattern = None;
        }
        None => {}
    }
    replace(&mut held.control, typed.control.as_ref());
    replace(&mut held.rate_per_min, typed.rate_per_min.as_ref());
    replace(&mut held.tidal_volume_ml, typed.tidal_volume_ml.as_ref());
    replace(&mut held.inspiratory_pressure_cmh2o, typed.inspiratory_pressure_cmh2o.as_ref());
    replace(&mut held.peep_cmh2o, typed.peep_cmh2o.as_ref());
    replace(&mut held.fio2, typed.fio2.as_ref());
    replace(&mut held.inspiratory_time_s, typed.inspiratory_time_s.as_ref());
    replace(&mut held.flow_l_min, typed.flow_l_min.as_ref());
    replace(&mut held.ratio, typed.ratio.as_ref());
    replace(&mut held.pause_s, typed.pause_s.as_ref());
    replace(&mut held.flow_pattern, typed.flow_pattern.as_ref());
    replace(&mut held.apparatus_dead_space_ml, typed.apparatus_dead_space_ml.as_ref());
}

fn amend_measured(held: &mut Measured, typed: &Measured) {
    // Total PEEP and auto-PEEP are one reading in two ways.
    if typed.total_peep_cmh2o.or(typed.auto_peep_cmh2o).is_some() {
        held.total_peep_cmh2o = None;
        held.auto_peep_cmh2o = None;
    }
    replace(&mut held.total_rate_per_min, typed.total_rate_per_min.as_ref());
    replace(&mut held.exhaled_tidal_volume_ml, typed.exhaled_tidal_volume_ml.as_ref());
    replace(&mut held.minute_ventilation_l_min, typed.minute_ventilation_l_min.as_ref());
    replace(&mut held.plateau_cmh2o, typed.plateau_cmh2o.as_ref());
    replace(&mut held.peak_cmh2o, typed.peak_cmh2o.as_ref());
    replace(&mut held.total_peep_cmh2o, typed.total_peep_cmh2o.as_ref());
    replace(&mut held.auto_peep_cmh2o, typed.auto_peep_cmh2o.as_ref());
    replace(&mut held.mean_airway_pressure_cmh2o, typed.mean_airway_pressure_cmh2o.as_ref());
    replace(&mut held.compliance_ml_cmh2o, typed.compliance_ml_cmh2o.as_ref());
    replace(&mut held.resistance_cmh2o_s_l, typed.resistance_cmh2o_s_l.as_ref());
    replace(&mut held.expiratory_resistance_cmh2o_s_l, typed.expiratory_resistance_cmh2o_s_l.as_ref());
    replace(&mut held.circuit_compliance_ml_cmh2o, typed.circuit_compliance_ml_cmh2o.as_ref());
    replace(&mut held.end_tidal_co2_mmhg, typed.end_tidal_co2_mmhg.as_ref());
    replace(&mut held.mixed_expired_co2_mmhg, typed.mixed_expired_co2_mmhg.as_ref());
    replace(&mut held.dead_space_fraction, typed.dead_space_fraction.as_ref());
    replace(&mut held.co2_production_ml_min, typed.co2_production_ml_min.as_ref());
    replace(&mut held.temperature_c, typed.temperature_c.as_ref());
    replace(&mut held.spo2, typed.spo2.as_ref());
}

fn amend_gas(held: &mut Gas, typed: &Gas) {
    replace(&mut held.drawn_at, typed.drawn_at.as_ref());
    replace(&mut held.ph, typed.ph.as_ref());
    replace(&mut held.paco2_mmhg, typed.paco2_mmhg.as_ref());
    replace(&mut held.pao2_mmhg, typed.pao2_mmhg.as_ref());
    replace(&mut held.bicarbonate_mmol_l, typed.bicarbonate_mmol_l.as_ref());
}

fn amend_weaning(held: &mut Weaning, typed: &Weaning) {
    replace(&mut held.spontaneous_rate_per_min, typed.spontaneous_rate_per_min.as_ref());
    replace(&mut held.spontaneous_tidal_volume_ml, typed.spontaneous_tidal_volume_ml.as_ref());
    replace(&mut held.inspiratory_pressure_max_cmh2o, typed.inspiratory_pressure_max_cmh2o.as_ref());
    replace(&mut held.vital_capacity_ml, typed.vital_capacity_ml.as_ref());
    replace(&mut held.occlusion_pressure_cmh2o, typed.occlusion_pressure_cmh2o.as_ref());
    replace(&mut held.spo2_fraction_on, typed.spo2_fraction_on.as_ref());
    replace(&mut held.heart_rate_per_min, typed.heart_rate_per_min.as_ref());
    replace(&mut held.systolic_pressure_mmhg, typed.systolic_pressure_mmhg.as_ref());
}

#[cfg(test)]
mod tests {
    use super::*;

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
        assert_eq!((held.measured.auto_peep_cmh2o, held.measured.total_peep_cmh2o), (None, Some(12.0)));
    }
}
