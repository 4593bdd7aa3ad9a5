//! An entry as the text that stands for it in a case file: only what it holds, in the default units.

use std::fmt::{Display, Write};

use super::entry::{
    Aim, BreathingTrial, ChartedPlan, Control, Entry, FlowPattern, Observation, TrialOutcome, TrialSupport,
};
use super::moment::Moment;
use super::slots::{ENTRY, OBSERVATION, PLAN, Slot};
use crate::quantity::input::Key;
use crate::quantity::unit::Dimension;

/// `entry` as text to stand at the end of a case file, from its `[[entry]]` on; lines end with `\n`.
///
/// Reading it gives `entry` back, to the last bit of each number.
///
/// ```
/// use tidewright::case::{entry::Entry, write};
/// let mut entry = Entry::default();
/// entry.gas.paco2_mmhg = Some(52.0);
/// assert_eq!(write::entry(&entry), "[[entry]]\n\n[entry.gas]\npaco2 = 52\n");
/// ```
pub fn entry(entry: &Entry) -> String {
    let mut text = Lines::default();
    text.header("[[entry]]");
    text.key("at", entry.at.map(moment));
    text.key("by", entry.by.as_deref().map(quoted));
    text.table("settings", &settings(entry));
    text.table("measured", &numbers(&ENTRY, entry, "measured"));
    text.table("gas", &gas(entry));
    text.table("weaning", &numbers(&ENTRY, entry, "weaning"));
    if let Some(trial) = &entry.trial {
        breathing_trial(trial, &mut text);
    }
    if let Some(plan) = &entry.plan {
        text.header("\n[entry.plan]");
        text.append(&charted_plan(plan));
    }
    let mut note = Lines::default();
    note.key("text", entry.text.as_deref().map(quoted));
    note.key("amends", entry.amends);
    text.table("note", &note);
    text.text
}

/// Lines of TOML.
#[derive(Default)]
struct Lines {
    text: String,
}

impl Lines {
    fn header(&mut self, header: &str) {
        self.text.push_str(header);
        self.text.push('\n');
    }

    fn key(&mut self, key: &str, value: Option<impl Display>) {
        if let Some(value) = value {
            // Writing to a string cannot fail.
            let _ = writeln!(self.text, "{key} = {value}");
        }
    }

    fn append(&mut self, other: &Self) {
        self.text.push_str(&other.text);
    }

    /// A table of an entry, when there is anything in it.
    fn table(&mut self, name: &str, keys: &Self) {
        if !keys.text.is_empty() {
            self.header(&format!("\n[entry.{name}]"));
            self.append(keys);
        }
    }
}

fn numbers<T>(slots: &[Slot<T>], whole: &T, table: &str) -> Lines {
    let mut lines = Lines::default();
    for slot in slots.iter().filter(|slot| slot.key.input().table == table) {
        let dimension = slot.key.input().dimension;
        lines.key(slot.key.name(), (slot.get)(whole).map(|value| number(value, dimension)));
    }
    lines
}

/// A number in its default unit, with as many digits as it takes to read the same number back.
fn number(value: f64, dimension: Dimension) -> String {
    if dimension != Dimension::Ratio {
        return value.to_string();
    }
    let inverse = 1.0 / value;
    // Expiration over inspiration; written the way round that has whole parts.
    if value < 1.0 && (1.0 / inverse).to_bits() == value.to_bits() {
        format!("\"{inverse}:1\"")
    } else {
        format!("\"1:{value}\"")
    }
}

/// A time with its offset, as TOML has it: `2026-03-04T08:10:00+01:00`.
pub(super) fn moment(moment: Moment) -> String {
    let minutes = moment.offset.seconds() / 60;
    let sign = if minutes < 0 { '-' } else { '+' };
    // TOML knows offsets of whole minutes only; the instant is the same whatever the offset.
    let offset = jiff::tz::Offset::from_seconds(minutes * 60).unwrap_or(jiff::tz::Offset::UTC);
    let clock = offset.to_datetime(moment.instant).strftime("%Y-%m-%dT%H:%M:%S%.f");
    let minutes = minutes.abs();
    format!("{clock}{sign}{:02}:{:02}", minutes / 60, minutes % 60)
}

/// Text as a TOML basic string on one line; whatever it holds, it cannot end the string or the line.
pub fn quoted(text: &str) -> String {
    let mut quoted = String::with_capacity(text.len() + 2);
    quoted.push('"');
    for letter in text.chars() {
        match letter {
            '"' => quoted.push_str("\\\""),
            '\\' => quoted.push_str("\\\\"),
            '\n' => quoted.push_str("\\n"),
            '\t' => quoted.push_str("\\t"),
            '\r' => quoted.push_str("\\r"),
            control if control.is_control() => {
                let _ = write!(quoted, "\\u{:04X}", u32::from(control));
            }
            other => quoted.push(other),
        }
    }
    quoted.push('"');
    quoted
}

fn settings(entry: &Entry) -> Lines {
    let mut lines = Lines::default();
    lines.key(
        "control",
        entry.settings.control.map(|control| match control {
            Control::Volume => "\"volume\"",
            Control::Pressure => "\"pressure\"",
            Control::Support => "\"support\"",
        }),
    );
    lines.append(&numbers(&ENTRY, entry, "settings"));
    lines.key(
        "flow_pattern",
        entry.settings.flow_pattern.map(|pattern| match pattern {
            FlowPattern::Constant => "\"constant\"",
            FlowPattern::Decelerating => "\"decelerating\"",
        }),
    );
    lines
}

fn gas(entry: &Entry) -> Lines {
    let mut lines = Lines::default();
    lines.key("drawn_at", entry.gas.drawn_at.map(moment));
    lines.append(&numbers(&ENTRY, entry, "gas"));
    lines
}

fn breathing_trial(trial: &BreathingTrial, text: &mut Lines) {
    text.header("\n[entry.trial]");
    text.key(
        "support",
        trial.support.map(|support| match support {
            TrialSupport::Pressure(cmh2o) => number(cmh2o, Dimension::AirwayPressure),
            TrialSupport::TPiece => "\"t-piece\"".to_owned(),
        }),
    );
    text.key("started_at", trial.started_at.map(moment));
    text.key(
        "outcome",
        trial.outcome.map(|outcome| match outcome {
            TrialOutcome::Passed => "\"passed\"",
            TrialOutcome::Failed => "\"failed\"",
            TrialOutcome::Stopped => "\"stopped\"",
            TrialOutcome::Running => "\"running\"",
        }),
    );
    for observation in &trial.observations {
        observed(observation, text);
    }
}

fn observed(observation: &Observation, text: &mut Lines) {
    text.header("\n[[entry.trial.observation]]");
    text.key("minute", Some(number(observation.minute, Dimension::Minutes)));
    text.append(&numbers(&OBSERVATION, observation, "observation"));
}

fn charted_plan(plan: &ChartedPlan) -> Lines {
    let mut lines = Lines::default();
    lines.key(
        "aim",
        plan.aim.map(|aim| match aim {
            Aim::Rate => "\"rate\"",
            Aim::Volume => "\"volume\"",
            Aim::Gentle => "\"gentle\"",
        }),
    );
    lines.append(&numbers(&PLAN, plan, "plan"));
    for (key, interval) in
        [(Key::HalfInterval, plan.half_interval_mmhg), (Key::WideInterval, plan.wide_interval_mmhg)]
    {
        lines.key(key.name(), interval.map(|[low, high]| format!("[{low}, {high}]")));
    }
    lines
}

#[cfg(test)]
mod tests;
