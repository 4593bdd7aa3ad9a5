//! The record as a note that a clinician would sign, before it has a face: what is set, what the gas says, what was
//! planned and forecast, what came, what is beyond its limit, what is estimated.

use super::columns::{bounds, cell};
use super::document::{Block, Words, harmless};
use super::face::Face;
use super::{SAFETY, entry_items, patient_lines, reckoning_lines, weaning_lines};
use crate::case::entry::TrialSupport;
use crate::case::moment::Moment;
use crate::case::record::{Occasion, Record};
use crate::case::settings::{InForce, Inflation, Settings};
use crate::case::struck::Struck;
use crate::planning::baseline::gas_exchange::predicted_weight_kg;
use crate::planning::baseline::mechanics::TrappingEvidence;
use crate::planning::forecast::Held;
use crate::planning::plan::{Forecast, forecast};
use crate::planning::reckoning::{Reckoned, reckon};
use crate::planning::trial::Trial;
use crate::planning::weaning::{self, Assessment, TrialCourse};
use crate::quantity::input::Key;
use crate::quantity::show::with_unit;
use crate::quantity::unit::Dimension;

/// Which entries a note shows; everything is computed from the whole record.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Since {
    /// All of them.
    Start,
    /// Those at or after this time.
    Time(Moment),
    /// The last one in time.
    Last,
}

/// A record with everything a note tells of it.
pub struct Told<'r> {
    /// The record.
    pub record: &'r Record,
    /// Which entries to show.
    pub since: Since,
    /// Where the patient stands now; or why no forecast can be made, and what to do.
    pub now: Result<Forecast, String>,
    /// Forecasts held against what came.
    pub reckoned: Reckoned,
    /// Readiness.
    pub weaning: Option<Assessment>,
    /// Breathing trials.
    pub trials: Vec<TrialCourse>,
    /// Struck values.
    pub struck: Struck,
}

impl<'r> Told<'r> {
    /// Reads a record.
    pub fn of(record: &'r Record, since: Since) -> Self {
        let now = forecast(record, &Trial::default(), Held::Split).map_err(|faults| {
            let said: Vec<String> =
                faults.iter().map(|it| format!("{}. {}", capital(&it.message), it.help)).collect();
            said.join(" ")
        });
        Self {
            record,
            since,
            now,
            reckoned: reckon(record),
            weaning: weaning::assess(record),
            trials: weaning::trials(record),
            struck: Struck::of(record),
        }
    }

    /// Whether an entry of this number and time is shown.
    pub fn shows(&self, number: usize, at: Option<Moment>) -> bool {
        match self.since {
            Since::Start => true,
            Since::Time(since) => at.is_some_and(|at| at >= since),
            Since::Last => self.last().is_some_and(|last| last.number == number),
        }
    }

    /// The last occasion in time.
    pub fn last(&self) -> Option<&'r Occasion> {
        self.record.occasions().last()
    }

    /// The latest gas with a PaCO2.
    pub fn gas(&self) -> Option<&'r Occasion> {
        let gases = self.record.occasions().iter().filter(|it| it.entry.gas.paco2_mmhg.is_some());
        gases.max_by_key(|it| it.drawn_at())
    }
}

pub(super) fn capital(text: &str) -> String {
    let mut letters = text.chars();
    letters.next().map_or_else(String::new, |first| first.to_uppercase().chain(letters).collect())
}

/// The note.
pub fn blocks(told: &Told<'_>, face: Face) -> Vec<Block> {
    let mut blocks = head(told, face);
    blocks.extend(standing(told, face));
    blocks.extend(forecasts(told, face));
    if let Some(assessment) = &told.weaning {
        blocks.extend(weaning_lines::readiness(assessment, face));
    }
    let trials = told.trials.iter().filter(|it| it.entries.iter().any(|number| shown(told, *number)));
    blocks.extend(trials.flat_map(|it| weaning_lines::trial(it, face)));
    blocks.extend(entries(told, face));
    blocks.extend(foot(told, face));
    blocks
}

fn shown(told: &Told<'_>, number: usize) -> bool {
    let entry = number.checked_sub(1).and_then(|index| told.record.entries().get(index));
    entry.is_some_and(|entry| told.shows(number, entry.at))
}

fn head(told: &Told<'_>, face: Face) -> Vec<Block> {
    let label = harmless(told.record.label());
    let label = if label.is_empty() { "no label".to_owned() } else { label };
    let at = told.last().and_then(|it| it.at);
    let until = at.map_or_else(String::new, |at| format!(", as charted until {at}"));
    let kg = predicted_weight_kg(told.record.patient());
    // The line begins with the label, which stands in the title already.
    let patient = patient_lines::body(told.record, kg, face);
    vec![Block::Title(Words::from("Ventilation note: ").typed(label).and(until)), Block::Line(patient.into())]
}

/// What is set in a line: "volume control, 24/min × 330 mL, PEEP 6, FiO2 0.5".
pub fn settings(in_force: &InForce, face: Face) -> String {
    match in_force {
        InForce::Mandatory(settings) => mandatory(settings, face),
        InForce::Support { inspiratory_pressure_cmh2o, peep_cmh2o, fio2 } => {
            let mut parts = vec!["pressure support".to_owned()];
            parts.extend(inspiratory_pressure_cmh2o.map(|it| {
                entry_items::support_words(TrialSupport::Pressure(it), face).replace("pressure support ", "")
            }));
            parts.extend(common(*peep_cmh2o, *fio2, face));
            parts.join(", ")
        }
        InForce::Missing(key) => format!("settings not complete: {} not charted", key.replace('_', " ")),
    }
}

fn common(peep: Option<f64>, fio2: Option<f64>, face: Face) -> Vec<String> {
    let mut parts = Vec::new();
    parts.extend(peep.map(|it| format!("PEEP {}", with_unit(it, Dimension::AirwayPressure, face.unit))));
    parts.extend(fio2.map(|it| format!("FiO2 {}", face.value(it, Dimension::Fraction))));
    parts
}

fn mandatory(settings: &Settings, face: Face) -> String {
    let rate = entry_items::quantity(Key::Rate, settings.rate_per_min, face);
    let mut parts = vec![entry_items::control_word(settings.control()).to_owned(), format!("rate {rate}")];
    parts.push(match settings.inflation {
        Inflation::Volume { tidal_volume_ml, .. } => {
            format!("tidal volume {}", entry_items::quantity(Key::TidalVolume, tidal_volume_ml, face))
        }
        Inflation::Pressure { inspiratory_pressure_cmh2o } => format!(
            "inspiratory pressure {}",
            entry_items::quantity(Key::InspiratoryPressure, inspiratory_pressure_cmh2o, face)
        ),
    });
    parts.extend(common(settings.peep_cmh2o, settings.fio2, face));
    let assumed = if settings.timing_assumed { " (I:E 1:2 assumed)" } else { "" };
    parts.push(format!(
        "inspiratory time {}{assumed}",
        with_unit(settings.inspiratory_time_s(), Dimension::Time, face.unit)
    ));
    let apparatus = with_unit(settings.apparatus_dead_space_ml, Dimension::Volume, face.unit);
    let assumed = if settings.apparatus_assumed { " (assumed)" } else { "" };
    parts.push(format!("apparatus dead space {apparatus}{assumed}"));
    parts.join(", ")
}

fn standing(told: &Told<'_>, face: Face) -> Vec<Block> {
    let mut blocks = vec![Block::Heading("Where the patient stands".to_owned())];
    if let Some(last) = told.last() {
        blocks.push(Block::Item(format!("Set: {}.", settings(&last.in_force, face)).into()));
    }
    match told.gas() {
        Some(occasion) => {
            blocks.push(Block::Item(capital(&patient_lines::gas_line(occasion, face)).into()));
            let paco2 = occasion.entry.gas.paco2_mmhg.unwrap_or_default();
            let meaning = patient_lines::meaning(occasion.entry.gas.ph, paco2, face);
            blocks.push(Block::Item(meaning.into()));
        }
        None => blocks.push(Block::Item("No arterial gas with a PaCO2 is charted.".into())),
    }
    match &told.now {
        Err(why) => blocks.push(Block::Caution(format!("No forecast: {why}"))),
        Ok(now) => {
            if now.now.paco2_is == "forecast" {
                let outcome = &now.now.outcome;
                let interval = &outcome.interval;
                let ph = face.known(outcome.state.ph, Dimension::Ph);
                blocks.push(Block::Item(
                    format!(
                        "Settings changed since that gas. FORECAST, not measured, under what is set now: PaCO2 {}, expected \
                         {}, 9 gases in 10 within {} {}; pH {ph}.",
                        face.gas(outcome.state.paco2_mmhg),
                        face.known(interval.paco2_expected_mmhg, Dimension::GasPressure),
                        face.gas_range(interval.paco2_low_mmhg, interval.paco2_high_mmhg),
                        face.unit.word()
                    )
                    .into(),
                ));
            }
            blocks.extend(limits(now, face));
        }
    }
    blocks
}

/// The limits of what is set now, worst first.
fn limits(now: &Forecast, face: Face) -> Vec<Block> {
    let limits = &now.now.outcome.limits;
    let assumed = now.baseline.trapping_evidence == TrappingEvidence::Assumed;
    let rows = ["beyond", "near", "unknown", "within"]
        .into_iter()
        .flat_map(|verdict| limits.iter().filter(move |limit| limit.verdict.word() == verdict));
    let rows: Vec<Vec<String>> = rows
        .map(|limit| {
            let shown = cell(limit, assumed, face);
            let value = shown.strip_suffix(limit.verdict.word()).unwrap_or("").trim().to_owned();
            vec![limit.id.words().to_owned(), value, bounds(limit, face), limit.verdict.word().to_owned()]
        })
        .collect();
    if rows.is_empty() {
        return Vec::new();
    }
    let head = ["limit", "now", "bound", ""].map(str::to_owned).to_vec();
    vec![Block::Table(head, rows)]
}

fn forecasts(told: &Told<'_>, face: Face) -> Vec<Block> {
    let reckoned = &told.reckoned;
    let mut blocks = vec![Block::Heading("Plan and forecasts".to_owned())];
    match &reckoned.waiting {
        Some(waiting) => blocks.push(Block::Line(reckoning_lines::waiting(waiting, face).into())),
        None if reckoned.reckonings.is_empty() => {
            blocks.push(Block::Line("No plan is charted.".into()));
        }
        None => blocks.push(Block::Line("No plan waits for a gas.".into())),
    }
    for reckoning in reckoned.reckonings.iter().rev().filter(|it| shown(told, it.gas_entry)) {
        let mut lines = reckoning_lines::one(reckoning, face).into_iter();
        blocks.extend(lines.next().map(|line| Block::Item(line.into())));
        blocks.extend(lines.map(|line| Block::Below(line.into())));
    }
    blocks.extend(reckoning_lines::tally(&reckoned.tally).map(|line| Block::Line(line.into())));
    blocks
}

fn entries(told: &Told<'_>, face: Face) -> Vec<Block> {
    let entries = told.record.entries();
    let shown: Vec<_> = (1..).zip(entries).filter(|(number, entry)| told.shows(*number, entry.at)).collect();
    let which = if shown.len() == entries.len() {
        String::new()
    } else {
        format!(" ({} of {})", shown.len(), entries.len())
    };
    let mut blocks = vec![Block::Heading(format!("Entries{which}"))];
    for (number, entry) in shown {
        let at = entry.at.map_or_else(|| "no time".to_owned(), |at| at.to_string());
        let mut head = Words::from(format!("{number} · {at}"));
        if let Some(by) = &entry.by {
            head = head.and(" · ").typed(harmless(by));
        }
        if let Some(amends) = entry.amends {
            head = head.and(format!(" · corrects entry {amends}"));
        }
        blocks.push(Block::Item(head));
        for (name, words) in entry_items::of(entry, number, &told.struck, face) {
            let line = Words::joined([Words::from(format!("{name}:")), words], " ");
            blocks.push(Block::Below(line));
        }
    }
    blocks
}

fn foot(told: &Told<'_>, face: Face) -> Vec<Block> {
    let mut blocks = Vec::new();
    if let Ok(now) = &told.now {
        blocks.push(Block::Heading("Where the numbers come from".to_owned()));
        let origins = patient_lines::origins(&now.baseline, face);
        blocks.extend(origins.into_iter().map(|line| Block::Item(line.into())));
        if !now.cautions.is_empty() {
            blocks.push(Block::Heading("Cautions".to_owned()));
            blocks.extend(now.cautions.iter().map(|it| Block::Caution(it.text.clone())));
        }
    }
    blocks.push(Block::Gap);
    blocks.push(Block::Line(SAFETY.into()));
    blocks.push(Block::Gap);
    blocks.push(Block::Line("Signed: ______________________   Date, time: ______________________".into()));
    blocks
}
