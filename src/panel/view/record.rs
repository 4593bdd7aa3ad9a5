//! The record: entries newest first, each with what was set, measured, forecast, and what came.

use ratatui::layout::Rect;

use super::pen::{Pen, lines};
use crate::case::entry::{Aim, Control, Entry, FlowPattern};
use crate::case::slots::entry_value;
use crate::note::face::Face;
use crate::panel::state::State;
use crate::planning::reckoning::{Landing, Reckoned, Reckoning, reckon};
use crate::quantity::input::INPUTS;
use crate::quantity::show::with_unit;
use crate::quantity::unit::Dimension;

/// Draws the view.
pub fn draw(state: &State, area: Rect, pen: &mut Pen<'_>) {
    let all = entries(state, area.width.saturating_sub(3));
    let most = all.len().saturating_sub(usize::from(area.height));
    let from = state.scroll.min(most);
    for (y, (head, line)) in (0..area.height).zip(all.iter().skip(from)) {
        let style = if *head { pen.theme.heading() } else { pen.theme.plain() };
        pen.text(area, if *head { 1 } else { 3 }, y, line, style);
    }
    if most > from {
        pen.right(area, area.width, area.height.saturating_sub(1), " PageDown: more ", pen.theme.key());
    }
}

fn entries(state: &State, width: u16) -> Vec<(bool, String)> {
    let record = &state.charted;
    let reckoned = reckon(record);
    let mut out = Vec::new();
    for (number, entry) in (1..).zip(record.entries()).collect::<Vec<_>>().into_iter().rev() {
        let amended = record.entries().iter().zip(1..).find(|(other, _)| other.amends == Some(number));
        let struck =
            amended.map_or_else(String::new, |(_, by)| format!(" · STRUCK where entry {by} corrects it"));
        let corrects = entry.amends.map_or_else(String::new, |other| format!(" · corrects entry {other}"));
        let by = entry.by.as_ref().map_or_else(String::new, |by| format!(" · {by}"));
        let at = entry.at.map_or_else(|| "without a time".to_owned(), |at| at.to_string());
        out.push((true, format!("{number} · {at}{by}{corrects}{struck}")));
        for line in body(state, &reckoned, number, entry) {
            out.extend(lines(&line, width.saturating_sub(3)).into_iter().map(|line| (false, line)));
        }
    }
    out
}

fn body(state: &State, reckoned: &Reckoned, number: usize, entry: &Entry) -> Vec<String> {
    let face = state.face;
    let mut body = Vec::new();
    for (table, title) in
        [("settings", "set"), ("measured", "measured"), ("gas", "gas"), ("weaning", "weaning")]
    {
        let mut parts: Vec<String> = Vec::new();
        if table == "settings" {
            parts.extend(control_words(entry));
        }
        if let (true, Some(drawn)) = (table == "gas", entry.gas.drawn_at) {
            parts.push(format!("drawn {drawn}"));
        }
        parts.extend(INPUTS.iter().filter(|input| input.table == table).filter_map(|input| {
            let value = entry_value(entry, input.key)?;
            let words = input.words.trim_start_matches("set ").replace(" above PEEP", "");
            Some(format!("{words} {}", with_unit(value, input.dimension, face.unit)))
        }));
        if !parts.is_empty() {
            body.push(format!("{title}: {}", parts.join(", ")));
        }
    }
    body.extend(plan_words(reckoned, number, entry, face));
    if let Some(trial) = &entry.trial {
        body.push(format!("breathing trial, {} observations", trial.observations.len()));
    }
    body.extend(entry.text.as_ref().map(|text| format!("note: {text}")));
    body
}

fn control_words(entry: &Entry) -> Vec<String> {
    let control = entry.settings.control.map(|control| match control {
        Control::Volume => "volume control",
        Control::Pressure => "pressure control",
        Control::Support => "support",
    });
    let falling =
        matches!(entry.settings.flow_pattern, Some(FlowPattern::Decelerating)).then_some("falling flow");
    control.into_iter().chain(falling).map(str::to_owned).collect()
}

fn plan_words(reckoned: &Reckoned, number: usize, entry: &Entry, face: Face) -> Option<String> {
    let plan = entry.plan.as_ref()?;
    let mut parts = Vec::new();
    let mut dial = |value: Option<f64>, words: &str, dimension| {
        parts.extend(value.map(|value| format!("{words} {}", with_unit(value, dimension, face.unit))));
    };
    dial(plan.rate_per_min, "rate", Dimension::Rate);
    dial(plan.tidal_volume_ml, "tidal volume", Dimension::Volume);
    dial(plan.inspiratory_pressure_cmh2o, "inspiratory pressure", Dimension::AirwayPressure);
    dial(plan.target_paco2_mmhg, "for PaCO2", Dimension::GasPressure);
    let aim = plan.aim.map_or("", |aim| match aim {
        Aim::Rate => " by rate",
        Aim::Volume => " by volume",
        Aim::Gentle => " by rate and volume",
    });
    let forecast =
        plan.forecast_paco2_mmhg.map_or_else(String::new, |mmhg| format!("; forecast {}", face.gas(mmhg)));
    let wide = plan.wide_interval_mmhg.map_or_else(String::new, |[low, high]| {
        format!(", 9 in 10 in {}", face.gas_range(Some(low), Some(high)))
    });
    let reckoning = reckoned.reckonings.iter().find(|one| one.plan_entry == number);
    let waiting = reckoned.waiting.as_ref().is_some_and(|waiting| waiting.plan_entry == number);
    let came = match (reckoning, waiting) {
        (Some(reckoning), _) => came_words(reckoning, face),
        (None, true) => "; its gas is still to come".to_owned(),
        (None, false) => "; another plan took its place before a gas".to_owned(),
    };
    Some(format!("plan{aim}: {}{forecast}{wide}{came}", parts.join(", ")))
}

/// What came of a plan.
fn came_words(reckoning: &Reckoning, face: Face) -> String {
    let landed = if !reckoning.differences.is_empty() {
        "not dialled as planned, so it does not count"
    } else if !reckoning.settled {
        "drawn before it had settled, so it does not count"
    } else {
        match reckoning.landing {
            Some(Landing::Half) => "inside the half where 1 gas in 2 falls",
            Some(Landing::Wide) => "inside the range where 9 in 10 fall",
            Some(Landing::Above) => "above the range where 9 in 10 fall",
            Some(Landing::Below) => "below the range where 9 in 10 fall",
            None => "without an interval to hold it against",
        }
    };
    format!("; {} came (entry {}), {landed}", face.gas(reckoning.measured_mmhg), reckoning.gas_entry)
}
