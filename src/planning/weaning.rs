//! Weaning: is the patient ready for a breathing trial, how does the trial go, and what do the indices say.
//!
//! What was not recorded is never counted as met. Cough, secretions, sedation and whether the disease has turned are
//! judged at the bedside: no number stands for them here.

mod breathing_trial;
mod indices;
mod readiness;
mod values;

use serde::Serialize;

use crate::case::moment::Moment;
use crate::case::record::{Occasion, Record};
use crate::physiology::weaning as published;

pub use breathing_trial::{Crossing, StopRow, StopVerdict, TrialCourse, trials};
pub use indices::Index;
pub use readiness::Criterion;
use values::Values;

/// What is said before any table of readiness.
pub const BEDSIDE: &str = "Cough, secretions, sedation and whether the disease has turned are judged at the bedside and not in this table.";

/// Whether a criterion holds.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum Verdict {
    /// It holds.
    Met,
    /// It does not.
    NotMet,
    /// What it takes was not recorded.
    NotRecorded,
}

impl Verdict {
    /// As it is written.
    pub const fn word(self) -> &'static str {
        match self {
            Self::Met => "met",
            Self::NotMet => "not met",
            Self::NotRecorded => "not recorded",
        }
    }

    fn of(holds: Option<bool>) -> Self {
        match holds {
            Some(true) => Self::Met,
            Some(false) => Self::NotMet,
            None => Self::NotRecorded,
        }
    }
}

/// Readiness and indices at one occasion.
#[derive(Debug, Clone, PartialEq)]
pub struct Assessment {
    /// The entry they were charted in, from 1.
    pub entry: usize,
    /// When.
    pub at: Option<Moment>,
    /// The table of readiness.
    pub criteria: Vec<Criterion>,
    /// The indices.
    pub indices: Vec<Index>,
}

impl Assessment {
    /// How many criteria have this verdict.
    pub fn count(&self, verdict: Verdict) -> usize {
        self.criteria.iter().filter(|criterion| criterion.verdict == verdict).count()
    }
}

/// One occasion of the weaning measures, for a trend over days.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct TrendPoint {
    /// When.
    pub at: Option<Moment>,
    /// Spontaneous rate, 1/min.
    pub rate_per_min: Option<f64>,
    /// Spontaneous tidal volume, mL.
    pub tidal_volume_ml: Option<f64>,
    /// Rapid shallow breathing index, breaths/min/L.
    pub rapid_shallow: Option<f64>,
    /// PaCO2 of a gas charted with them, mmHg.
    pub paco2_mmhg: Option<f64>,
    /// Its pH.
    pub ph: Option<f64>,
}

fn has_weaning(occasion: &Occasion) -> bool {
    occasion.entry.weaning != crate::case::entry::Weaning::default()
}

/// Readiness by the last entry that carries a weaning measure; `None` when there is none.
pub fn assess(record: &Record) -> Option<Assessment> {
    let index = record.occasions().iter().rposition(has_weaning)?;
    assess_at(record, index)
}

/// Readiness by the occasion at `index`.
fn assess_at(record: &Record, index: usize) -> Option<Assessment> {
    let occasion = record.occasions().get(index)?;
    let values = Values::at(record, index)?;
    Some(Assessment {
        entry: occasion.number,
        at: occasion.at,
        criteria: readiness::table(&values),
        indices: indices::all(&values),
    })
}

/// Spontaneous breathing over the days: every occasion that carries weaning measures, oldest first.
pub fn trend(record: &Record) -> Vec<TrendPoint> {
    let occasions = record.occasions().iter().filter(|occasion| has_weaning(occasion));
    let point = |occasion: &Occasion| {
        let weaning = &occasion.entry.weaning;
        let (rate, volume) = (weaning.spontaneous_rate_per_min, weaning.spontaneous_tidal_volume_ml);
        TrendPoint {
            at: occasion.at,
            rate_per_min: rate,
            tidal_volume_ml: volume,
            rapid_shallow: rate
                .zip(volume)
                .map(|(rate, volume)| published::rapid_shallow_breathing_index(rate, volume)),
            paco2_mmhg: occasion.entry.gas.paco2_mmhg,
            ph: occasion.entry.gas.ph,
        }
    };
    occasions.map(point).collect()
}

#[cfg(test)]
mod tests;
