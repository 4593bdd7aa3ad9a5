//! Readiness, indices and breathing trials as parts of a note.

use super::document::Block;
use super::entry_items::{observed, outcome_word, support_words};
use super::face::Face;
use crate::case::entry::TrialOutcome;
use crate::planning::weaning::{
    Assessment, BEDSIDE, Criterion, Index, StopRow, StopVerdict, TrialCourse, Verdict,
};
use crate::quantity::show::with_unit;
use crate::quantity::unit::Dimension;

/// The table of readiness and the indices.
pub fn readiness(assessment: &Assessment, face: Face) -> Vec<Block> {
    let at = assessment.at.map_or_else(String::new, |at| format!(", {at}"));
    let mut blocks = vec![
        Block::Heading(format!("Ready for a breathing trial? (entry {}{at})", assessment.entry)),
        Block::Line(said(assessment).into()),
    ];
    let rows = assessment
        .criteria
        .iter()
        .map(|it| vec![it.asks.to_owned(), value(it, face), it.verdict.word().to_owned()]);
    blocks.push(Block::Table(
        vec!["criterion".to_owned(), "recorded".to_owned(), String::new()],
        rows.collect(),
    ));
    let sources: Vec<&str> = assessment.criteria.first().map(|it| it.source).into_iter().collect();
    blocks.push(Block::Line(format!("Bounds: {}. {BEDSIDE}", sources.join(", ")).into()));
    blocks.extend(assessment.indices.iter().map(|it| Block::Item(index(it).into())));
    blocks
}

/// One sentence over the table.
pub fn said(assessment: &Assessment) -> String {
    let total = assessment.criteria.len();
    let named = |verdict: Verdict| -> String {
        let which = assessment.criteria.iter().filter(|it| it.verdict == verdict);
        which.map(|it| it.id.replace('_', " ")).collect::<Vec<_>>().join(", ")
    };
    let mut parts = vec![format!("{} of {total} criteria met", assessment.count(Verdict::Met))];
    if assessment.count(Verdict::NotMet) > 0 {
        parts.push(format!("NOT met: {}", named(Verdict::NotMet)));
    }
    if assessment.count(Verdict::NotRecorded) > 0 {
        parts.push(format!("not recorded: {} (record before deciding)", named(Verdict::NotRecorded)));
    }
    format!("{}.", parts.join("; "))
}

fn value(criterion: &Criterion, face: Face) -> String {
    let plain = criterion.value.map(|value| match criterion.id {
        "rapid_shallow_breathing_index" => format!("{value:.0}/min/L"),
        "oxygenation" => format!("PaO2/FiO2 {}", face.gas(value)),
        _ => with_unit(value, criterion.dimension, face.unit),
    });
    let saturation = criterion.saturation_on.map(|[spo2, fio2]| {
        format!("SpO2 {:.0} % on FiO2 {}", spo2 * 100.0, face.value(fio2, Dimension::Fraction))
    });
    saturation.into_iter().chain(plain).collect::<Vec<_>>().join("; ")
}

fn index(index: &Index) -> String {
    let Some(value) = index.value else {
        return format!("{}: not known; needs {}", index.words, index.needs);
    };
    let digits = index.digits;
    let unit = if index.unit == "1" { String::new() } else { format!(" {}", index.unit) };
    let unit = if index.unit.starts_with('/') { index.unit.to_owned() } else { unit };
    let asks = match index.asks {
        "" => String::new(),
        asks => format!("; weaning asks {asks}: {}", index.verdict.word()),
    };
    format!("{} {value:.digits$}{unit}{asks}. Source: {}", index.words, index.source)
}

/// One breathing trial.
pub fn trial(trial: &TrialCourse, face: Face) -> Vec<Block> {
    let started = trial.started_at.map_or_else(|| "start not recorded".to_owned(), |at| at.to_string());
    let support =
        trial.support.map_or_else(|| "support not recorded".to_owned(), |it| support_words(it, face));
    let outcome = trial.outcome.map_or("no end recorded", outcome_word);
    let mut blocks = vec![
        Block::Heading(format!("Breathing trial of {started}")),
        Block::Line(format!("{support}; {outcome}.").into()),
    ];
    blocks.extend(judged(trial).into_iter().map(Block::Caution));
    blocks.extend(trial.observations.iter().map(|it| {
        let minute = face.value(it.minute, Dimension::Number);
        Block::Item(format!("minute {minute}: {}", observed(it, face)).into())
    }));
    let named = |is: fn(&StopVerdict) -> bool| -> Vec<&str> {
        trial.criteria.iter().filter(|row| is(&row.verdict)).map(|row| row.asks).collect()
    };
    for (row, crossing) in trial.crossed() {
        blocks.push(Block::Item(crossed(row, crossing.minute, crossing.value, crossing.from, face).into()));
    }
    let kept = named(|it| *it == StopVerdict::NotCrossed);
    let unknown = named(|it| *it == StopVerdict::NotRecorded);
    if !kept.is_empty() {
        blocks.push(Block::Line(format!("Looked at and not crossed: {}.", kept.join("; ")).into()));
    }
    if !unknown.is_empty() {
        blocks.push(Block::Line(format!("Not recorded, so not known: {}.", unknown.join("; ")).into()));
    }
    if let Some(row) = trial.criteria.first() {
        blocks.push(Block::Line(format!("Stop criteria: {}.", row.source).into()));
    }
    blocks
}

fn crossed(row: &StopRow, minute: Option<f64>, value: f64, from: Option<f64>, face: Face) -> String {
    let shown = |value: f64| match row.dimension {
        Dimension::Fraction => format!("{:.0} %", value * 100.0),
        other => face.value(value, other),
    };
    let when = minute.map_or_else(String::new, |it| format!(" at minute {it:.0}"));
    let from = from.map_or_else(String::new, |it| format!(" (from {})", shown(it)));
    format!("CROSSED{when}: {}: {}{from}", row.asks, shown(value))
}

/// What the crossings mean for a trial that runs, or that was charted as passed.
pub fn judged(trial: &TrialCourse) -> Option<String> {
    let crossed: Vec<&str> = trial.crossed().map(|(row, _)| row.asks).collect();
    if crossed.is_empty() {
        return None;
    }
    let list = crossed.join("; ");
    match trial.outcome {
        None | Some(TrialOutcome::Running) => Some(format!(
            "A stop criterion is crossed ({list}): look at the patient now; if it is real, end the trial and restore support."
        )),
        Some(TrialOutcome::Passed) => Some(format!(
            "Charted as passed, yet a stop criterion was crossed ({list}): look again before the tube comes out."
        )),
        Some(TrialOutcome::Failed | TrialOutcome::Stopped) => None,
    }
}
