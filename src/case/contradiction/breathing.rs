//! Rates, times and volumes.

use crate::case::amend::Corrected;
use crate::case::entry::Control;
use crate::case::fault::{Fault, Place};
use crate::case::inherit::Carried;
use crate::case::settings::{InForce, Settings, Timing};
use crate::quantity::input::Key;
use crate::quantity::show::number;

/// The least expiratory time that a breath needs, s: the engine's own bound, common practice.
const LEAST_EXPIRATION_S: f64 = 0.1;
/// How far a counted total rate may fall short of the set rate, 1/min: counting over half a minute is that coarse.
const COUNTING_SLACK_PER_MIN: f64 = 1.0;

pub(super) fn contradictions(held: &Corrected, carried: &Carried, in_force: &InForce) -> Vec<Fault> {
    let mut faults = Vec::new();
    faults.extend(slower_than_set(held, carried));
    if let Some(settings) = in_force.mandatory() {
        faults.extend(no_time_to_breathe_out(held, carried, settings));
        faults.extend(all_pause(carried, settings));
    }
    faults.extend(lost_in_apparatus(held, carried));
    faults
}

fn mandatory(carried: &Carried) -> bool {
    carried.control.is_some_and(|control| matches!(control.value, Control::Volume | Control::Pressure))
}

fn slower_than_set(held: &Corrected, carried: &Carried) -> Option<Fault> {
    let total = held.entry.measured.total_rate_per_min?;
    let set = carried.rate_per_min.filter(|_| mandatory(carried))?;
    (total < set.value - COUNTING_SLACK_PER_MIN).then(|| {
        Fault::new(
            [held.place("measured", "total_rate"), set.place],
            format!(
                "the total rate, {}, is below the set rate, {}",
                Key::TotalRate.input().shown(total),
                Key::Rate.input().shown(set.value)
            ),
            "the total rate counts every breath, the ventilator's and the patient's: look again at both",
        )
    })
}

/// The inspiratory time, and the places it follows from.
fn inspiration(carried: &Carried, settings: &Settings) -> (f64, Vec<Place>) {
    let mut places: Vec<Place> = carried.timing.map(|timing| timing.place).into_iter().collect();
    match settings.timing {
        Timing::InspiratoryTime(_) => {}
        Timing::Flow(_) => {
            places.extend(carried.tidal_volume_ml.map(|volume| volume.place));
            places.extend(carried.pause_s.map(|pause| pause.place));
        }
        Timing::Ratio(_) => places.extend(carried.rate_per_min.map(|rate| rate.place)),
    }
    (settings.inspiratory_time_s(), places)
}

fn no_time_to_breathe_out(held: &Corrected, carried: &Carried, settings: &Settings) -> Option<Fault> {
    let total = held.entry.measured.total_rate_per_min.filter(|total| *total > settings.rate_per_min);
    let (rate_per_min, rate_place) = match total {
        Some(total) => (total, held.place("measured", "total_rate")),
        None => (settings.rate_per_min, carried.rate_per_min?.place),
    };
    let (inspiratory_time_s, mut places) = inspiration(carried, settings);
    let expiratory_time_s = 60.0 / rate_per_min - inspiratory_time_s;
    if expiratory_time_s > LEAST_EXPIRATION_S || rate_per_min <= 0.0 {
        return None;
    }
    if !places.contains(&rate_place) {
        places.push(rate_place);
    }
    let left = if expiratory_time_s > 0.0 {
        format!("{} s to breathe out", number(expiratory_time_s, 2))
    } else {
        "no time to breathe out".to_owned()
    };
    let assumed =
        if settings.timing_assumed { " (I:E 1:2 taken, since nothing times inspiration)" } else { "" };
    Some(Fault::new(
        places,
        format!(
            "an inspiratory time of {} s{assumed} at {}/min, {} s a breath, leaves {left}",
            number(inspiratory_time_s, 2),
            number(rate_per_min, 1),
            number(60.0 / rate_per_min, 2)
        ),
        "look again at the rate and at what times inspiration: inspiratory_time, flow or ratio, one of them",
    ))
}

fn all_pause(carried: &Carried, settings: &Settings) -> Option<Fault> {
    let pause = carried.pause_s.filter(|pause| pause.value > 0.0 && settings.control() == Control::Volume)?;
    let (inspiratory_time_s, mut places) = inspiration(carried, settings);
    if pause.value < inspiratory_time_s {
        return None;
    }
    places.insert(0, pause.place);
    Some(Fault::new(
        places,
        format!(
            "a pause of {} s leaves no time for flow within an inspiratory time of {} s",
            number(pause.value, 2),
            number(inspiratory_time_s, 2)
        ),
        "the inspiratory time includes the pause: write the whole of it, or a shorter pause",
    ))
}

fn lost_in_apparatus(held: &Corrected, carried: &Carried) -> Option<Fault> {
    let apparatus = carried.apparatus_dead_space_ml?;
    let exhaled = held.entry.measured.exhaled_tidal_volume_ml;
    let volume_control = carried.control.is_some_and(|control| control.value == Control::Volume);
    let set = carried.tidal_volume_ml.filter(|_| volume_control);
    let (volume_ml, words, place) = match (exhaled, set) {
        (Some(exhaled), _) => {
            (exhaled, "exhaled tidal volume", held.place("measured", "exhaled_tidal_volume"))
        }
        (None, Some(set)) => (set.value, "set tidal volume", set.place),
        (None, None) => return None,
    };
    (apparatus.value >= volume_ml).then(|| {
        Fault::new(
            [apparatus.place, place],
            format!(
                "the apparatus dead space, {} mL, is not below the {words}, {} mL: no fresh gas would pass it",
                number(apparatus.value, 1),
                number(volume_ml, 1)
            ),
            "count only what lies between the wye and the airway: an exchanger, a mount, an elbow",
        )
    })
}
