//! How a charted forecast fared: the gas that came, and whether it fell inside what was said.

use crate::case::record::Occasion;
use crate::case::settings::{InForce, Inflation};

/// Where a gas fell.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Fell {
    /// Inside the half interval.
    InsideHalf,
    /// Inside the wide interval.
    InsideWide,
    /// Below the wide interval.
    Below,
    /// Above the wide interval.
    Above,
}

impl Fell {
    /// In words.
    pub const fn words(self) -> &'static str {
        match self {
            Self::InsideHalf => "inside the half where 1 gas in 2 falls",
            Self::InsideWide => "inside the range where 9 in 10 fall",
            Self::Below => "below the range where 9 in 10 fall",
            Self::Above => "above the range where 9 in 10 fall",
        }
    }
}

/// The gas that came after a charted plan.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Score {
    /// The number of the entry with the gas.
    pub number: usize,
    /// PaCO2 that came, mmHg.
    pub paco2_mmhg: f64,
    /// Where it fell; `None` when it was drawn under other settings than planned, or when no interval was charted.
    pub fell: Option<Fell>,
}

/// Rounding allowed between a planned and a dialled value.
const SAME: f64 = 1e-6;

/// Scores the plan charted at place `at` of `occasions` against the next gas; `None` while none has come.
pub fn score(occasions: &[Occasion], at: usize) -> Option<Score> {
    let occasion = occasions.get(at)?;
    let plan = occasion.entry.plan.as_ref()?;
    let (gas, paco2_mmhg) = occasions
        .iter()
        .skip(at + 1)
        .find_map(|later| later.entry.gas.paco2_mmhg.map(|paco2| (later, paco2)))?;
    let dialled = match &gas.in_force {
        InForce::Mandatory(settings) => {
            let same =
                |planned: Option<f64>, set: f64| planned.is_none_or(|planned| (planned - set).abs() <= SAME);
            same(plan.rate_per_min, settings.rate_per_min)
                && match settings.inflation {
                    Inflation::Volume { tidal_volume_ml, .. } => same(plan.tidal_volume_ml, tidal_volume_ml),
                    Inflation::Pressure { inspiratory_pressure_cmh2o } => {
                        same(plan.inspiratory_pressure_cmh2o, inspiratory_pressure_cmh2o)
                    }
                }
        }
        InForce::Support { .. } | InForce::Missing(_) => false,
    };
    let within = |interval: Option<[f64; 2]>| interval.map(|[low, high]| (low..=high).contains(&paco2_mmhg));
    let fell =
        match (within(plan.half_interval_mmhg), within(plan.wide_interval_mmhg), plan.wide_interval_mmhg) {
            _ if !dialled => None,
            (Some(true), ..) => Some(Fell::InsideHalf),
            (_, Some(true), _) => Some(Fell::InsideWide),
            (_, Some(false), Some([low, _])) => {
                Some(if paco2_mmhg < low { Fell::Below } else { Fell::Above })
            }
            _ => None,
        };
    Some(Score { number: gas.number, paco2_mmhg, fell })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::case::{file, presets, read};

    /// Read off the file by eye: entry 2 forecast 45.2–54.7 and 49 came, dialled as planned (entry 4 as corrected);
    /// entry 7 forecast 44.7–53.4 and 50 came; the gas after entry 11 is still to come.
    #[test]
    fn the_plans_of_three_days_are_scored() {
        let text = presets::case("three-days").unwrap().text;
        let (record, _) = read::case(text.as_bytes(), &|name| file::profile(name, None)).unwrap();
        let occasions = record.occasions();
        let scores: Vec<_> = (0..occasions.len())
            .filter(|at| occasions[*at].entry.plan.is_some())
            .map(|at| score(occasions, at).map(|score| (score.paco2_mmhg, score.fell)))
            .collect();
        assert_eq!(
            scores,
            [Some((49.0, Some(Fell::InsideHalf))), Some((50.0, Some(Fell::InsideHalf))), None]
        );
    }
}
