//! One entry as TOML, in the layout that a person would type.

use std::fmt::Write as _;

use super::entry::{Aim, BreathingTrial, Control, Entry, FlowPattern, TrialOutcome, TrialSupport};
use super::moment::Moment;
use super::slots::{ENTRY, OBSERVATION, PLAN, Slot};
use crate::quantity::input::Key;
use crate::quantity::show;
use crate::quantity::unit::Dimension;

/// An entry as text, ready to stand at the end of a case file: it begins with its `[[entry]]` line and ends with a line end.
pub fn entry(entry: &Entry) -> String {
    let mut text = "[[entry]]\n".to_owned();
    if let Some(at) = entry.at {
        line(&mut text, "at", &moment(at));
    }
    if let Some(by) = &entry.by {
        line(&mut text, "by", &quoted(by));
    }
    table(&mut text, "settings", &settings(entry));
    table(&mut text, "measured", &numbers(&ENTRY, entry, "measured"));
    let mut gas = numbers(&ENTRY, entry, "gas");
    if let Some(drawn_at) = entry.gas.drawn_at {
        gas.insert(0, ("drawn_at", moment(drawn_at)));
    }
    table(&mut text, "gas", &gas);
    table(&mut text, "weaning", &numbers(&ENTRY, entry, "weaning"));
    if let Some(trial) = &entry.trial {
        breathing_trial(&mut text, trial);
    }
    table(&mut text, "plan", &plan(entry));
    let mut note = Vec::new();
    if let Some(words) = &entry.text {
        note.push(("text", quoted(words)));
    }
    if let Some(number) = entry.amends {
        note.push(("amends", number.to_string()));
    }
    table(&mut text, "note", &note);
    text
}

type Lines = Vec<(&'static str, String)>;

fn line(text: &mut String, key: &str, value: &str) {
    // Writing into a String cannot fail.
    let _ = writeln!(text, "{key} = {value}");
}

fn table(text: &mut String, name: &str, lines: &Lines) {
    if lines.is_empty() {
        return;
    }
    let _ = writeln!(text, "\n[entry.{name}]");
    for (key, value) in lines {
        line(text, key, value);
    }
}

/// A string as TOML quotes it.
fn quoted(text: &str) -> String {
    toml::Value::String(text.to_owned()).to_string()
}

/// An instant with the offset it was charted with.
fn moment(moment: Moment) -> String {
    let seconds = moment.offset.seconds();
    let sign = if seconds < 0 { '-' } else { '+' };
    let (hours, minutes) = (seconds.abs() / 3600, seconds.abs() / 60 % 60);
    let clock = moment.offset.to_datetime(moment.instant).strftime("%Y-%m-%dT%H:%M:%S");
    format!("{clock}{sign}{hours:02}:{minutes:02}")
}

/// A number as it was typed, to a hundredth of its last digit.
fn number(key: Key, value: f64) -> String {
    let input = key.input();
    match input.dimension {
        Dimension::Ratio => quoted(&show::ratio(value)),
        Dimension::Time => quoted(&format!("{} s", show::number(value, 4))),
        _ => show::number(value, input.digits + 2),
    }
}

fn numbers<T>(slots: &[Slot<T>], whole: &T, table: &str) -> Lines {
    slots
        .iter()
        .filter(|slot| slot.key.input().table == table)
        .filter_map(|slot| Some((slot.key.name(), number(slot.key, (slot.get)(whole)?))))
        .collect()
}

fn settings(entry: &Entry) -> Lines {
    let mut lines = Vec::new();
    if let Some(control) = entry.settings.control {
        let word = match control {
            Control::Volume => "volume",
            Control::Pressure => "pressure",
            Control::Support => "support",
        };
        lines.push(("control", quoted(word)));
    }
    lines.extend(numbers(&ENTRY, entry, "settings"));
    if let Some(pattern) = entry.settings.flow_pattern {
        let word = match pattern {
            FlowPattern::Constant => "constant",
            FlowPattern::Decelerating => "decelerating",
        };
        lines.push(("flow_pattern", quoted(word)));
    }
    lines
}

fn plan(entry: &Entry) -> Lines {
    let Some(plan) = &entry.plan else { return Vec::new() };
    let mut lines = numbers(&PLAN, plan, "plan");
    if let Some(aim) = plan.aim {
        let word = match aim {
            Aim::Rate => "rate",
            Aim::Volume => "volume",
            Aim::Gentle => "gentle",
        };
        let at = usize::from(plan.target_paco2_mmhg.is_some());
        lines.insert(at.min(lines.len()), ("aim", quoted(word)));
    }
    for (name, interval) in
        [("half_interval", plan.half_interval_mmhg), ("wide_interval", plan.wide_interval_mmhg)]
    {
        if let Some([low, high]) = interval {
            let interval = format!("[{}, {}]", show::number(low, 2), show::number(high, 2));
            let settle = lines.iter().position(|(name, _)| *name == Key::SettleMinutes.name());
            lines.insert(settle.unwrap_or(lines.len()), (name, interval));
        }
    }
    lines
}

fn breathing_trial(text: &mut String, trial: &BreathingTrial) {
    let mut lines: Lines = Vec::new();
    match trial.support {
        Some(TrialSupport::Pressure(value)) => lines.push(("support", number(Key::TrialSupport, value))),
        Some(TrialSupport::TPiece) => lines.push(("support", quoted("t-piece"))),
        None => {}
    }
    if let Some(started_at) = trial.started_at {
        lines.push(("started_at", moment(started_at)));
    }
    if let Some(outcome) = trial.outcome {
        let word = match outcome {
            TrialOutcome::Passed => "passed",
            TrialOutcome::Failed => "failed",
            TrialOutcome::Stopped => "stopped",
            TrialOutcome::Running => "running",
        };
        lines.push(("outcome", quoted(word)));
    }
    if lines.is_empty() {
        text.push_str("\n[entry.trial]\n");
    }
    table(text, "trial", &lines);
    for observation in &trial.observations {
        text.push_str("\n[[entry.trial.observation]]\n");
        line(text, "minute", &number(Key::ObservedMinute, observation.minute));
        for (key, value) in numbers(&OBSERVATION, observation, "observation") {
            line(text, key, &value);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::case::presets::CASES;
    use crate::case::{file, read};

    /// The reader is the witness: what it reads from what is written is the entry itself.
    #[test]
    fn every_entry_of_every_built_in_case_reads_back_as_itself() {
        for preset in &CASES {
            let (record, _) = read::case(preset.text.as_bytes(), &|name| file::profile(name, None)).unwrap();
            for (number, one) in (1..).zip(record.entries()) {
                let text = entry(one);
                let (back, _) = read::fragment(text.as_bytes(), number)
                    .unwrap_or_else(|problems| panic!("{}: {problems:?}\n{text}", preset.name));
                assert_eq!(&back, one, "{} entry {number}\n{text}", preset.name);
            }
        }
    }

    #[test]
    fn words_are_quoted_and_instants_keep_their_offset() {
        assert_eq!(quoted("a \"b\" \\ c"), r#"'a "b" \ c'"#);
        let datetime = jiff::civil::datetime(2026, 3, 9, 8, 10, 0, 0);
        let offset = jiff::tz::Offset::from_seconds(-(3 * 3600 + 1800)).unwrap();
        let at = Moment { instant: offset.to_timestamp(datetime).unwrap(), offset };
        assert_eq!(moment(at), "2026-03-09T08:10:00-03:30");
    }
}
