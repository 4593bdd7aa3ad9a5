//! Forecasts held against what came, in words.

use super::entry_items::{dialled, forecast};
use super::face::Face;
use crate::planning::course::next_gas_minutes;
use crate::planning::reckoning::{Difference, Landing, Reckoned, Reckoning, Tally, Waiting, causes};
use crate::quantity::input::Key;
use crate::quantity::unit::Dimension;

/// What to do after a miss.
const AFTER_A_MISS: &str = "Look for these in this order and treat what is found; if nothing fits the patient, draw again. \
                            Then plan from the newest gas: the next forecast starts from it.";

/// The last plan and what became of it, and how all have done; empty when no plan was charted.
pub fn last(reckoned: &Reckoned, face: Face) -> Vec<String> {
    let mut lines = Vec::new();
    match (&reckoned.waiting, reckoned.reckonings.last()) {
        (Some(plan), _) => lines.push(waiting(plan, face)),
        (None, Some(reckoning)) => lines.extend(one(reckoning, face)),
        (None, None) => {}
    }
    lines.extend(tally(&reckoned.tally));
    lines
}

/// A plan that waits for its gas: what is forecast, whether it is dialled, when to draw.
pub fn waiting(waiting: &Waiting, face: Face) -> String {
    let plan = &waiting.plan;
    let set = if !waiting.dialled {
        "It is not what is set now: dial it, or plan anew.".to_owned()
    } else if let Some(settle) = plan.settle_minutes {
        let next = next_gas_minutes(settle);
        match waiting.dialled_at {
            Some(at) => format!(
                "Set since {}; draw the next gas at {} or later.",
                at.clock(),
                at.later_by_minutes(next).clock()
            ),
            None => format!("Draw the next gas {next:.0} min after the change."),
        }
    } else {
        "When it will have settled is unknown: draw the next gas after about 30 min.".to_owned()
    };
    format!(
        "Plan of entry {} ({}) waits for its gas. FORECAST {}. {set}",
        waiting.plan_entry,
        dialled(plan, face),
        forecast(plan, face)
    )
}

/// One plan and its gas.
pub fn one(reckoning: &Reckoning, face: Face) -> Vec<String> {
    let mut lines = vec![format!("{}, {}", opening(reckoning, face), verdict(reckoning, face))];
    if let (Some(ratio), Some(landing)) = (reckoning.co2_ratio, reckoning.landing) {
        let change = (ratio - 1.0) * 100.0;
        let way = if change >= 0.0 { "up" } else { "down" };
        lines.push(format!("It is as if the CO2 made per perfused lung were {way} {:.0} %.", change.abs()));
        lines.extend(reckoning.signs.iter().map(|sign| format!("The record says: {sign}.")));
        let usual = causes(landing).iter().zip(1..);
        lines.extend(
            usual.map(|(cause, place)| format!("{place}. {} (look at: {}).", cause.what, cause.look)),
        );
        lines.push(AFTER_A_MISS.to_owned());
    }
    lines
}

fn opening(reckoning: &Reckoning, face: Face) -> String {
    let expected = reckoning.expected_mmhg.map_or_else(
        || "no PaCO2 was named".to_owned(),
        |mmhg| format!("PaCO2 {}", face.value(mmhg, Dimension::GasPressure)),
    );
    let range = |[low, high]: [f64; 2]| face.gas_range(Some(low), Some(high));
    let half =
        reckoning.half_mmhg.map_or_else(String::new, |it| format!(", 1 gas in 2 within {}", range(it)));
    let wide = reckoning.wide_mmhg.map_or_else(String::new, |it| format!(", 9 in 10 within {}", range(it)));
    let drawn = reckoning.drawn_at.map_or_else(String::new, |at| format!(" of {at}"));
    format!(
        "Entry {} forecast {expected}{half}{wide}; the gas{drawn} (entry {}) came to {}",
        reckoning.plan_entry,
        reckoning.gas_entry,
        face.gas(reckoning.measured_mmhg)
    )
}

fn verdict(reckoning: &Reckoning, face: Face) -> String {
    if !reckoning.differences.is_empty() {
        let list: Vec<String> = reckoning.differences.iter().map(|it| difference(it, face)).collect();
        return format!(
            "under other settings than planned ({}): not judged. Plan again from this gas.",
            list.join(", ")
        );
    }
    if !reckoning.settled {
        let minutes = reckoning.minutes.unwrap_or(0.0);
        let settle = reckoning.settle_minutes.unwrap_or(0.0).ceil();
        return format!(
            "only {minutes:.0} min after the change, before the {settle:.0} min it takes to settle: not judged. Draw again \
             before acting on it."
        );
    }
    match reckoning.landing {
        Some(Landing::Half) => "inside the inner range.".to_owned(),
        Some(Landing::Wide) => "inside the outer range.".to_owned(),
        Some(Landing::Above) => "ABOVE the outer range.".to_owned(),
        Some(Landing::Below) => "BELOW the outer range.".to_owned(),
        None => "with no range charted: not judged.".to_owned(),
    }
}

fn difference(difference: &Difference, face: Face) -> String {
    match difference.key {
        "control" => return "no longer a mode that sets every breath".to_owned(),
        "not_dialled_yet" => return "drawn before the plan was set".to_owned(),
        _ => {}
    }
    let name = difference.key.replace('_', " ");
    let shown = |value: Option<f64>| {
        let dimension =
            Key::find("settings", difference.key).map_or(Dimension::Number, |key| key.input().dimension);
        value.map_or_else(|| "none".to_owned(), |value| face.value(value, dimension))
    };
    format!("{name} {} instead of {}", shown(difference.was), shown(difference.planned))
}

/// How this patient's forecasts have done; `None` when no plan has been scored or set aside.
pub fn tally(tally: &Tally) -> Option<String> {
    let aside: Vec<String> = [
        (tally.early, "drawn before settling"),
        (tally.otherwise_set, "under other settings"),
        (tally.replaced, "replaced by a newer plan before a gas"),
    ]
    .into_iter()
    .filter(|(count, _)| *count > 0)
    .map(|(count, why)| format!("{count} {why}"))
    .collect();
    let aside = if aside.is_empty() { String::new() } else { format!(" Not counted: {}.", aside.join(", ")) };
    if tally.counted == 0 {
        return (!aside.is_empty())
            .then(|| format!("No forecast of this patient could be judged yet.{aside}"));
    }
    Some(format!(
        "This patient's forecasts so far: {} of {} inside the outer range (9 in 10 should be), {} inside the inner (1 in 2 \
         should be).{aside}",
        tally.in_wide, tally.counted, tally.in_half
    ))
}
