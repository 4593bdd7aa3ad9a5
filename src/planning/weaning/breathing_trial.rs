//! Spontaneous breathing trials: entries that belong together, and which stop criteria were crossed when.

use serde::Serialize;

use super::published::{BOLES, rapid_shallow_breathing_index, stop};
use crate::case::entry::{Observation, TrialOutcome, TrialSupport};
use crate::case::moment::Moment;
use crate::case::record::{Occasion, Record};
use crate::quantity::unit::Dimension;

/// An observation this early is the state before the trial, minutes: common practice.
const START_MIN: f64 = 1.0;
/// The state before the trial is read off measures charted up to this long before it, hours: common practice.
const BEFORE_HOURS: f64 = 2.0;
/// A gas before the trial counts up to this age, hours: common practice.
const GAS_BEFORE_HOURS: f64 = 24.0;
/// A gas belongs to the trial up to this long after its last observation, minutes: common practice.
const GAS_AFTER_MIN: f64 = 15.0;

/// A criterion crossed.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Crossing {
    /// Minute of the trial; `None` for a gas whose time is not known.
    pub minute: Option<f64>,
    /// The value, in the default unit of the row's dimension.
    pub value: f64,
    /// What it started from, where the criterion is a rise or a fall.
    pub from: Option<f64>,
}

/// How a stop criterion fared.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum StopVerdict {
    /// Crossed, first here.
    Crossed(Crossing),
    /// Looked at and not crossed.
    NotCrossed,
    /// What it takes was not recorded.
    NotRecorded,
}

/// One stop criterion of a trial.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct StopRow {
    /// Stable id.
    pub id: &'static str,
    /// When it is crossed.
    pub asks: &'static str,
    /// What it measures.
    #[serde(skip)]
    pub dimension: Dimension,
    /// How it fared.
    pub verdict: StopVerdict,
    /// Where the bound comes from.
    pub source: &'static str,
}

/// A trial, put together from the entries that speak of it.
#[derive(Debug, Clone, PartialEq)]
pub struct TrialCourse {
    /// The entries, from 1.
    pub entries: Vec<usize>,
    /// When it started.
    pub started_at: Option<Moment>,
    /// What supported the patient.
    pub support: Option<TrialSupport>,
    /// How it ended; `None` or running while it runs.
    pub outcome: Option<TrialOutcome>,
    /// Observations by the minute; of two at one minute the later charted.
    pub observations: Vec<Observation>,
    /// The stop criteria.
    pub criteria: Vec<StopRow>,
}

impl TrialCourse {
    /// Whether no end has been charted.
    pub fn runs(&self) -> bool {
        matches!(self.outcome, None | Some(TrialOutcome::Running))
    }

    /// The criteria that were crossed.
    pub fn crossed(&self) -> impl Iterator<Item = (&StopRow, Crossing)> {
        self.criteria.iter().filter_map(|row| match row.verdict {
            StopVerdict::Crossed(crossing) => Some((row, crossing)),
            StopVerdict::NotCrossed | StopVerdict::NotRecorded => None,
        })
    }
}

/// Every trial of a record, oldest first. Entries with one start are one trial; an entry without a start belongs to the
/// trial that runs.
pub fn trials(record: &Record) -> Vec<TrialCourse> {
    let mut trials: Vec<TrialCourse> = Vec::new();
    for occasion in record.occasions() {
        let Some(entry) = &occasion.entry.trial else { continue };
        let joined = trials.iter_mut().rev().find(|trial| match entry.started_at {
            Some(start) => trial.started_at.is_some_and(|known| known.instant == start.instant),
            None => trial.runs(),
        });
        let trial = if let Some(trial) = joined {
            trial
        } else {
            trials.push(TrialCourse {
                entries: Vec::new(),
                started_at: entry.started_at,
                support: None,
                outcome: None,
                observations: Vec::new(),
                criteria: Vec::new(),
            });
            let Some(last) = trials.last_mut() else { continue };
            last
        };
        trial.entries.push(occasion.number);
        trial.support = entry.support.or(trial.support);
        trial.outcome = entry.outcome.or(trial.outcome);
        for observation in &entry.observations {
            trial.observations.retain(|other| (other.minute - observation.minute).abs() > 1e-9);
            trial.observations.push(observation.clone());
        }
    }
    for trial in &mut trials {
        trial.observations.sort_by(|one, other| one.minute.total_cmp(&other.minute));
        trial.criteria = criteria(trial, record.occasions());
    }
    trials
}

/// The state before the trial.
#[derive(Debug, Clone, Copy, Default)]
struct Start {
    rate: Option<f64>,
    heart_rate: Option<f64>,
    systolic: Option<f64>,
}

fn start(trial: &TrialCourse, occasions: &[Occasion]) -> Start {
    let first = trial.observations.iter().find(|it| it.minute <= START_MIN);
    let before = |value: fn(&Occasion) -> Option<f64>| {
        let started = trial.started_at?;
        let recent =
            |it: &&Occasion| it.at.is_some_and(|at| (0.0..=BEFORE_HOURS).contains(&started.hours_since(at)));
        occasions.iter().rev().filter(recent).find_map(value)
    };
    let at_start = |value: fn(&Observation) -> Option<f64>| first.and_then(value);
    Start {
        rate: at_start(|it| it.rate_per_min)
            .or_else(|| before(|it| it.entry.weaning.spontaneous_rate_per_min)),
        heart_rate: at_start(|it| it.heart_rate_per_min)
            .or_else(|| before(|it| it.entry.weaning.heart_rate_per_min)),
        systolic: at_start(|it| it.systolic_pressure_mmhg)
            .or_else(|| before(|it| it.entry.weaning.systolic_pressure_mmhg)),
    }
}

type Seen = Vec<(Option<f64>, f64)>;

fn criteria(trial: &TrialCourse, occasions: &[Occasion]) -> Vec<StopRow> {
    let start = start(trial, occasions);
    let mut rows = breathing(trial, start).to_vec();
    rows.extend(circulation(trial, start));
    rows.extend(blood(&Gases::of(trial, occasions)));
    rows
}

fn seen(trial: &TrialCourse, value: fn(&Observation) -> Option<f64>) -> Seen {
    trial.observations.iter().filter_map(|it| Some((Some(it.minute), value(it)?))).collect()
}

/// For a bound that needs no start.
const ALWAYS: Option<f64> = Some(0.0);

fn above(bound: f64) -> impl Fn(f64, f64) -> bool {
    move |value, _| value > bound
}

fn risen(share: f64) -> impl Fn(f64, f64) -> bool {
    move |value, from| value > from * (1.0 + share) + 1e-9
}

fn breathing(trial: &TrialCourse, start: Start) -> [StopRow; 4] {
    let rate = seen(trial, |it| it.rate_per_min);
    let index = seen(trial, |it| Some(rapid_shallow_breathing_index(it.rate_per_min?, it.tidal_volume_ml?)));
    let saturation = seen(trial, |it| it.spo2);
    let shallow = "rate/volume index above 105/min/L";
    [
        row("rate", "rate above 35/min", Dimension::Rate, &rate, ALWAYS, above(stop::RATE_ABOVE)),
        row(
            "rate_rise",
            "rate up by more than 50 %",
            Dimension::Rate,
            &rate,
            start.rate,
            risen(stop::RATE_RISE),
        ),
        row(
            "rapid_shallow_breathing_index",
            shallow,
            Dimension::Volume,
            &index,
            ALWAYS,
            above(stop::RAPID_SHALLOW_ABOVE),
        ),
        row("saturation", "SpO2 below 90 %", Dimension::Fraction, &saturation, ALWAYS, |value, _| {
            value < stop::SATURATION_BELOW
        }),
    ]
}

fn circulation(trial: &TrialCourse, start: Start) -> [StopRow; 5] {
    let heart = seen(trial, |it| it.heart_rate_per_min);
    let systolic = seen(trial, |it| it.systolic_pressure_mmhg);
    let pressure = Dimension::BloodPressure;
    [
        row(
            "heart_rate",
            "heart rate above 140/min",
            Dimension::Rate,
            &heart,
            ALWAYS,
            above(stop::HEART_RATE_ABOVE),
        ),
        row(
            "heart_rate_rise",
            "heart rate up by more than 20 %",
            Dimension::Rate,
            &heart,
            start.heart_rate,
            risen(stop::HEART_RATE_RISE),
        ),
        row(
            "systolic_pressure_high",
            "systolic pressure above 180 mmHg",
            pressure,
            &systolic,
            ALWAYS,
            above(stop::SYSTOLIC_ABOVE_MMHG),
        ),
        row(
            "systolic_pressure_rise",
            "systolic pressure up by more than 20 %",
            pressure,
            &systolic,
            start.systolic,
            risen(stop::SYSTOLIC_RISE),
        ),
        row(
            "systolic_pressure_low",
            "systolic pressure below 90 mmHg",
            pressure,
            &systolic,
            ALWAYS,
            |value, _| value < stop::SYSTOLIC_BELOW_MMHG,
        ),
    ]
}

fn blood(gases: &Gases) -> [StopRow; 5] {
    let pressure = Dimension::GasPressure;
    [
        row("paco2", "PaCO2 above 50 mmHg", pressure, &gases.paco2, ALWAYS, above(stop::PACO2_ABOVE_MMHG)),
        row(
            "paco2_rise",
            "PaCO2 up by more than 8 mmHg",
            pressure,
            &gases.paco2,
            gases.paco2_before,
            |value, from| value - from > stop::PACO2_RISE_MMHG + 1e-9,
        ),
        row("ph", "pH below 7.32", Dimension::Ph, &gases.ph, ALWAYS, |value, _| value < stop::PH_BELOW),
        row(
            "ph_fall",
            "pH down by 0.07 or more",
            Dimension::Ph,
            &gases.ph,
            gases.ph_before,
            |value, from| from - value >= stop::PH_FALL - 1e-9,
        ),
        row(
            "pao2",
            "PaO2 60 mmHg or less on FiO2 of 0.5 or more",
            pressure,
            &gases.pao2_on_much,
            ALWAYS,
            |value, _| value <= stop::PAO2_MMHG,
        ),
    ]
}

/// A row from the values seen; `from` is what a rise starts from, `None` when it is not known.
fn row(
    id: &'static str,
    asks: &'static str,
    dimension: Dimension,
    seen: &[(Option<f64>, f64)],
    from: Option<f64>,
    crossed: impl Fn(f64, f64) -> bool,
) -> StopRow {
    let relative = id.ends_with("_rise") || id.ends_with("_fall");
    let verdict = match from {
        _ if seen.is_empty() => StopVerdict::NotRecorded,
        None => StopVerdict::NotRecorded,
        Some(from) => seen.iter().find(|(_, value)| crossed(*value, from)).map_or(
            StopVerdict::NotCrossed,
            |&(minute, value)| {
                StopVerdict::Crossed(Crossing { minute, value, from: relative.then_some(from) })
            },
        ),
    };
    StopRow { id, asks, dimension, verdict, source: BOLES }
}

/// Gases drawn during the trial, and the one before it.
#[derive(Default)]
struct Gases {
    paco2: Seen,
    ph: Seen,
    pao2_on_much: Seen,
    paco2_before: Option<f64>,
    ph_before: Option<f64>,
}

impl Gases {
    fn of(trial: &TrialCourse, occasions: &[Occasion]) -> Self {
        let mut gases = Self::default();
        let Some(started) = trial.started_at else { return gases };
        let last = trial.observations.last().map_or(0.0, |it| it.minute);
        let drawn = |it: &Occasion| it.drawn_at().map(|at| at.minutes_since(started));
        let mut by_time: Vec<(f64, &Occasion)> =
            occasions.iter().filter_map(|it| Some((drawn(it)?, it))).collect();
        by_time.sort_by(|(one, _), (other, _)| one.total_cmp(other));
        for (minute, occasion) in by_time {
            let gas = &occasion.entry.gas;
            if minute <= 0.0 {
                if minute >= -GAS_BEFORE_HOURS * 60.0 {
                    gases.paco2_before = gas.paco2_mmhg.or(gases.paco2_before);
                    gases.ph_before = gas.ph.or(gases.ph_before);
                }
            } else if minute <= last + GAS_AFTER_MIN {
                gases.paco2.extend(gas.paco2_mmhg.map(|value| (Some(minute), value)));
                gases.ph.extend(gas.ph.map(|value| (Some(minute), value)));
                let much = occasion.in_force.fio2().is_some_and(|fio2| fio2 >= stop::PAO2_COUNTS_FROM_FIO2);
                if much {
                    gases.pao2_on_much.extend(gas.pao2_mmhg.map(|value| (Some(minute), value)));
                }
            }
        }
        gases
    }
}
