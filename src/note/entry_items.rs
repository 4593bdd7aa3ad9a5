//! What an entry holds, in words: settings, measurements, gas, weaning, trial, plan, remark.

use super::document::{Words, harmless};
use super::face::Face;
use crate::case::entry::{
    Aim, BreathingTrial, ChartedPlan, Control, Entry, FlowPattern, Observation, TrialOutcome, TrialSupport,
};
use crate::case::slots::{self, entry_value};
use crate::case::struck::Struck;
use crate::quantity::input::{INPUTS, Key};
use crate::quantity::show::{PressureUnit, digits, joined, number, with_unit};
use crate::quantity::unit::Dimension;

/// The lines of entry `number`: a name and its words.
pub fn of(entry: &Entry, number: usize, struck: &Struck, face: Face) -> Vec<(&'static str, Words)> {
    let mut lines = Vec::new();
    let mut add = |name: &'static str, table: &'static str, before: Vec<Words>, after: Vec<Words>| {
        let mut parts = before;
        parts.extend(numbers(entry, number, table, struck, face));
        parts.extend(after);
        if !parts.is_empty() {
            lines.push((name, Words::joined(parts, ", ")));
        }
    };
    let marked =
        |table: &'static str, key: &'static str, text: String| mark(text, number, table, key, struck);
    let control = entry.settings.control.map(|it| marked("settings", "control", control_word(it).to_owned()));
    let pattern = entry
        .settings
        .flow_pattern
        .map(|it| marked("settings", "flow_pattern", format!("{} flow", pattern_word(it))));
    add("settings", "settings", control.into_iter().collect(), pattern.into_iter().collect());
    add("measured", "measured", Vec::new(), Vec::new());
    let drawn = entry.gas.drawn_at.map(|at| marked("gas", "drawn_at", format!("drawn {at}")));
    add("gas", "gas", drawn.into_iter().collect(), Vec::new());
    add("weaning", "weaning", Vec::new(), Vec::new());
    if let Some(trial) = &entry.trial {
        lines.push(("breathing trial", marked("trial", "", trial_words(trial, face))));
    }
    if let Some(plan) = &entry.plan {
        lines.push(("plan", marked("plan", "", plan_words(plan, face))));
    }
    if let Some(text) = &entry.text {
        lines.push(("remark", Words::default().typed(format!("\"{}\"", harmless(text)))));
    }
    lines
}

fn mark(text: String, number: usize, table: &'static str, key: &'static str, struck: &Struck) -> Words {
    use super::document::Piece;
    match struck.by(number, table, key) {
        Some(by) => Words(vec![Piece::Struck(text, by)]),
        None => Words::from(text),
    }
}

fn numbers(entry: &Entry, number: usize, table: &'static str, struck: &Struck, face: Face) -> Vec<Words> {
    let of_table = INPUTS.iter().filter(|input| input.table == table);
    of_table
        .filter_map(|input| {
            let value = entry_value(entry, input.key)?;
            let text = format!("{} {}", input.words, as_charted(input.key, value, face));
            Some(mark(text, number, table, input.name, struck))
        })
        .collect()
}

/// A value as it is shown with its unit; a saturation in percent, as the trade says it.
pub fn quantity(key: Key, value: f64, face: Face) -> String {
    match key {
        Key::Spo2 | Key::ObservedSpo2 => joined(&face.value(value * 100.0, Dimension::Volume), "%"),
        _ => with_unit(value, key.input().dimension, face.unit),
    }
}

/// A charted value as it is shown with its unit: as it was charted, with one digit more than a computed one deserves.
fn as_charted(key: Key, value: f64, face: Face) -> String {
    let dimension = key.input().dimension;
    let computed = quantity(key, value, face);
    match (dimension, face.unit) {
        (Dimension::Ph | Dimension::Ratio | Dimension::Fraction, _)
        | (Dimension::GasPressure, PressureUnit::KPa) => computed,
        _ => joined(&number(value, digits(value, dimension, face.unit) + 1), dimension.unit()),
    }
}

/// A control as the trade says it.
pub const fn control_word(control: Control) -> &'static str {
    match control {
        Control::Volume => "volume control",
        Control::Pressure => "pressure control",
        Control::Support => "pressure support",
    }
}

const fn pattern_word(pattern: FlowPattern) -> &'static str {
    match pattern {
        FlowPattern::Constant => "constant",
        FlowPattern::Decelerating => "decelerating",
    }
}

/// What supports the patient in a trial.
pub fn support_words(support: TrialSupport, face: Face) -> String {
    match support {
        TrialSupport::Pressure(cmh2o) => {
            format!("pressure support {}", quantity(Key::TrialSupport, cmh2o, face))
        }
        TrialSupport::TPiece => "T-piece".to_owned(),
    }
}

/// How a trial ended.
pub const fn outcome_word(outcome: TrialOutcome) -> &'static str {
    match outcome {
        TrialOutcome::Passed => "passed",
        TrialOutcome::Failed => "failed",
        TrialOutcome::Stopped => "stopped",
        TrialOutcome::Running => "running",
    }
}

/// An observation without its minute.
pub fn observed(observation: &Observation, face: Face) -> String {
    let of_table = INPUTS.iter().filter(|input| input.table == "observation");
    let parts: Vec<String> = of_table
        .filter_map(|input| {
            let value = slots::observation_value(observation, input.key)?;
            Some(format!("{} {}", input.words, quantity(input.key, value, face)))
        })
        .collect();
    parts.join(", ")
}

fn trial_words(trial: &BreathingTrial, face: Face) -> String {
    let mut parts = Vec::new();
    parts.extend(trial.support.map(|support| support_words(support, face)));
    parts.extend(trial.started_at.map(|at| format!("started {at}")));
    parts.extend(trial.outcome.map(|outcome| outcome_word(outcome).to_owned()));
    let minutes: Vec<String> =
        trial.observations.iter().map(|it| face.value(it.minute, Dimension::Number)).collect();
    if !minutes.is_empty() {
        parts.push(format!("observed at minute {}", minutes.join(", ")));
    }
    parts.join("; ")
}

/// What is to be dialled: "rate 28/min, tidal volume 380 mL".
pub fn dialled(plan: &ChartedPlan, face: Face) -> String {
    let one = |name: &str, key: Key, value: Option<f64>| {
        value.map(|value| format!("{name} {}", quantity(key, value, face)))
    };
    let parts = [
        one("rate", Key::PlannedRate, plan.rate_per_min),
        one("tidal volume", Key::PlannedTidalVolume, plan.tidal_volume_ml),
        one("inspiratory pressure", Key::PlannedInspiratoryPressure, plan.inspiratory_pressure_cmh2o),
    ];
    let parts: Vec<String> = parts.into_iter().flatten().collect();
    if parts.is_empty() { "nothing named".to_owned() } else { parts.join(", ") }
}

/// What is forecast: "PaCO2 51 mmHg, 1 gas in 2 within 47–55, 9 in 10 within 38–67".
pub fn forecast(plan: &ChartedPlan, face: Face) -> String {
    let expected = plan.expected_paco2_mmhg.or(plan.forecast_paco2_mmhg);
    let mut parts = vec![
        expected.map_or_else(|| "PaCO2 not named".to_owned(), |mmhg| format!("PaCO2 {}", face.gas(mmhg))),
    ];
    let range = |[low, high]: [f64; 2]| face.gas_range(Some(low), Some(high));
    parts.extend(plan.half_interval_mmhg.map(|it| format!("1 gas in 2 within {}", range(it))));
    parts.extend(plan.wide_interval_mmhg.map(|it| format!("9 in 10 within {}", range(it))));
    parts.join(", ")
}

fn plan_words(plan: &ChartedPlan, face: Face) -> String {
    let aim = plan.aim.map_or("", |aim| match aim {
        Aim::Rate => "by rate, ",
        Aim::Volume => "by volume, ",
        Aim::Gentle => "gentlest, ",
    });
    let target =
        plan.target_paco2_mmhg.map_or_else(String::new, |it| format!("goal PaCO2 {}, ", face.gas(it)));
    let settle = plan
        .settle_minutes
        .map_or_else(String::new, |it| format!("; settled after about {:.0} min", it.ceil()));
    format!("{aim}{target}{}; FORECAST {}{settle}", dialled(plan, face), forecast(plan, face))
}
