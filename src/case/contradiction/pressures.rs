//! Airway pressures. One breath runs PEEP ≤ total PEEP < plateau ≤ peak.

use crate::case::amend::Corrected;
use crate::case::entry::Control;
use crate::case::fault::{Fault, Place};
use crate::case::inherit::{Carried, Held};
use crate::quantity::input::Key;

/// How far two readings of PEEP may lie apart, cmH2O: the displays round, and PEEP swings with the breath.
const AGREEMENT_CMH2O: f64 = 1.0;
/// How far below the set PEEP a total PEEP may read, cmH2O: the display rounds to whole numbers.
const DISPLAY_CMH2O: f64 = 0.5;
/// How far above PEEP plus inspiratory pressure a plateau may read in pressure control, cmH2O.
const OVERSHOOT_CMH2O: f64 = 1.0;

pub(super) fn contradictions(held: &Corrected, carried: &Carried) -> Vec<Fault> {
    let mut faults = Vec::new();
    faults.extend(peak_below_plateau(held));
    let Some(peep) = carried.peep_cmh2o else {
        faults.extend(without_peep(held, carried));
        return faults;
    };
    faults.extend(total_below_set(held, peep));
    faults.extend(two_readings(held, peep));
    faults.extend(plateau_too_low(held, peep));
    faults.extend(plateau_too_high(held, carried, peep));
    faults
}

fn shown(cmh2o: f64) -> String {
    Key::Plateau.input().shown(cmh2o)
}

/// An airway pressure means nothing until PEEP is known.
fn without_peep(held: &Corrected, carried: &Carried) -> Option<Fault> {
    let measured = &held.entry.measured;
    let pressures = [
        ("plateau", measured.plateau_cmh2o),
        ("peak", measured.peak_cmh2o),
        ("total_peep", measured.total_peep_cmh2o),
        ("auto_peep", measured.auto_peep_cmh2o),
        ("mean_airway_pressure", measured.mean_airway_pressure_cmh2o),
        ("compliance", measured.compliance_ml_cmh2o),
    ];
    let mut places: Vec<Place> = pressures
        .into_iter()
        .filter(|(_, value)| value.is_some())
        .map(|(key, _)| held.place("measured", key))
        .collect();
    let typed = &held.entry.settings;
    let control = carried.control.filter(|control| control.value == Control::Pressure);
    let says = match (places.first(), control) {
        (Some(first), _) => format!("{} is charted, and no PEEP is in force", first.key),
        (None, Some(_)) if typed.control.is_some() => {
            places.push(held.place("settings", "control"));
            "pressure control is set, and no PEEP is in force".to_owned()
        }
        (None, Some(_)) if typed.inspiratory_pressure_cmh2o.is_some() => {
            places.push(held.place("settings", "inspiratory_pressure"));
            "an inspiratory pressure is set, and no PEEP is in force".to_owned()
        }
        _ => return None,
    };
    places.push(held.place("settings", "peep"));
    let help = "add the set PEEP under settings, in cmH2O: peep = 8 (peep = 0 when there is none)";
    Some(Fault::new(places, says, help))
}

fn peak_below_plateau(held: &Corrected) -> Option<Fault> {
    let (peak, plateau) = (held.entry.measured.peak_cmh2o?, held.entry.measured.plateau_cmh2o?);
    (peak < plateau).then(|| {
        Fault::new(
            [held.place("measured", "peak"), held.place("measured", "plateau")],
            format!("the peak, {}, is below the plateau, {}", shown(peak), shown(plateau)),
            "the peak is read while gas flows in, the plateau with flow stopped, so it cannot be lower: are they swapped?",
        )
    })
}

fn total_below_set(held: &Corrected, peep: Held<f64>) -> Option<Fault> {
    let total = held.entry.measured.total_peep_cmh2o?;
    (total < peep.value - DISPLAY_CMH2O).then(|| {
        Fault::new(
            [held.place("measured", "total_peep"), peep.place],
            format!("the total PEEP, {}, is below the set PEEP, {}", shown(total), shown(peep.value)),
            "total PEEP is set PEEP plus auto-PEEP: if the reading was the auto-PEEP alone, write it as auto_peep",
        )
    })
}

fn two_readings(held: &Corrected, peep: Held<f64>) -> Option<Fault> {
    let (total, auto) = (held.entry.measured.total_peep_cmh2o?, held.entry.measured.auto_peep_cmh2o?);
    let sum = peep.value + auto;
    ((total - sum).abs() > AGREEMENT_CMH2O).then(|| {
        Fault::new(
            [held.place("measured", "auto_peep"), held.place("measured", "total_peep"), peep.place],
            format!(
                "set PEEP {} plus auto-PEEP {} make {}, but the total PEEP is given as {}",
                shown(peep.value),
                shown(auto),
                shown(sum),
                shown(total)
            ),
            "keep the one that was read from the expiratory hold, total_peep or auto_peep, and take the other away",
        )
    })
}

fn plateau_too_low(held: &Corrected, peep: Held<f64>) -> Option<Fault> {
    let measured = &held.entry.measured;
    let plateau = measured.plateau_cmh2o?;
    let at_plateau = held.place("measured", "plateau");
    if plateau <= peep.value {
        return Some(Fault::new(
            [at_plateau, peep.place],
            format!("the plateau, {}, is not above the set PEEP, {}", shown(plateau), shown(peep.value)),
            "the plateau is the whole pressure at the end of inspiration, PEEP included: add PEEP if the ventilator showed it above PEEP",
        ));
    }
    let (total, place) = match (measured.total_peep_cmh2o, measured.auto_peep_cmh2o) {
        (Some(total), _) => (total, held.place("measured", "total_peep")),
        (None, Some(auto)) => (peep.value + auto, held.place("measured", "auto_peep")),
        (None, None) => return None,
    };
    (plateau <= total).then(|| {
        Fault::new(
            [at_plateau, place, peep.place],
            format!("the plateau, {}, is not above the total PEEP, {}", shown(plateau), shown(total)),
            "a breath on top of the total PEEP must raise the pressure: repeat both holds, or correct the number that is wrong",
        )
    })
}

fn plateau_too_high(held: &Corrected, carried: &Carried, peep: Held<f64>) -> Option<Fault> {
    let plateau = held.entry.measured.plateau_cmh2o?;
    let control = carried.control.filter(|control| control.value == Control::Pressure)?;
    let above = carried.inspiratory_pressure_cmh2o?;
    let reached = peep.value + above.value;
    (plateau > reached + OVERSHOOT_CMH2O).then(|| {
        Fault::new(
            [held.place("measured", "plateau"), above.place, peep.place, control.place],
            format!(
                "the plateau, {}, is above what pressure control can reach: PEEP {} plus {} make {}",
                shown(plateau),
                shown(peep.value),
                shown(above.value),
                shown(reached)
            ),
            "inspiratory_pressure counts from PEEP upward: if the ventilator shows the whole pressure, take PEEP off it",
        )
    })
}
