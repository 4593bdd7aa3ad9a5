//! The steadiness figures under which past gases were least surprising.
//!
//! A bounded sample of stays is kept, so that memory does not grow with the file; of a longer one every second, fourth …
//! stay stays, counted from the first, without any dice.

use serde::Serialize;

use super::{PastGas, Stay, changed, dialled};
use crate::case::profile::Figures;
use crate::planning::baseline::Baseline;
use crate::planning::belief::USUAL;
use crate::planning::forecast::{Forecaster, Held};

/// Below this many forecasts nothing is fitted.
const FEWEST: usize = 30;
/// Below this many forecasts after a change, `change` stays at its default.
const FEWEST_CHANGED: usize = 20;
/// The most forecasts a sample holds.
const MOST: usize = 1000;
/// Folds of the cross-validation, by stay.
const FOLDS: usize = 5;
/// The ranges looked through: gas, wander, change.
const RANGES: [[f64; 2]; 3] = [[0.02, 0.40], [0.0, 0.20], [0.0, 1.5]];
/// First steps of the search in each.
const FIRST_STEPS: [f64; 3] = [0.04, 0.02, 0.15];
/// The search ends when steps are this share of the first.
const LAST_SHARE: f64 = 1.0 / 256.0;

/// A forecast that can be made again under other figures.
#[derive(Debug, Clone)]
struct Case {
    stay: usize,
    baseline: Baseline,
    next: PastGas,
    after_change: bool,
}

/// Forecasts kept for fitting.
#[derive(Debug, Clone, Default)]
pub struct Sample {
    cases: Vec<Case>,
    every: usize,
}

/// The figures that fit.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Fitted {
    /// Standard deviation of ln PaCO2 between a gas and the truth.
    pub gas: f64,
    /// Its wander per square root of an hour.
    pub wander_per_hour: f64,
    /// Spread per ln change of alveolar ventilation.
    pub change: f64,
    /// Mean ln density under these figures.
    pub mean_log_density: f64,
    /// Share within the 5–95 % interval, each fold forecast with figures fitted to the others.
    pub cross_validated_wide_coverage: f64,
    /// The same for the 25–75 % interval.
    pub cross_validated_half_coverage: f64,
}

impl Sample {
    /// Keeps the forecast of `next` from `stay`, the `number`th stay of the file, if it belongs to the sample.
    pub fn keep(&mut self, number: usize, stay: &Stay, next: &PastGas) {
        self.every = self.every.max(1);
        if !number.is_multiple_of(self.every) {
            return;
        }
        let (Some(baseline), Some(before)) = (stay.baseline(), stay.latest()) else { return };
        self.cases.push(Case { stay: number, baseline, next: *next, after_change: changed(before, next) });
        while self.cases.len() > MOST && self.every < usize::MAX / 2 {
            self.every *= 2;
            let every = self.every;
            self.cases.retain(|case| case.stay.is_multiple_of(every));
        }
    }
}

/// Mean ln density of the cases under `figures`.
fn mean_log_density(cases: &[&Case], figures: Figures) -> f64 {
    let sum: f64 = cases
        .iter()
        .filter_map(|case| {
            let forecaster = Forecaster::new(&case.baseline, figures, Held::Split).ok()?;
            let mixture = forecaster.mixture(&dialled(&forecaster, &case.next))?;
            Some(libm::log(mixture.density(libm::log(case.next.paco2_mmhg)).max(f64::MIN_POSITIVE)))
        })
        .sum();
    sum / cases.len() as f64
}

const fn figures([gas, wander_per_hour, change]: [f64; 3]) -> Figures {
    Figures { gas, wander_per_hour, change }
}

/// The figures of highest mean ln density, by a compass search from `start` within the ranges: each figure is stepped up
/// and down while that helps, then the steps are halved.
fn search(cases: &[&Case], start: [f64; 3], move_change: bool) -> ([f64; 3], f64) {
    let mut best = start;
    let mut density = mean_log_density(cases, figures(best));
    let mut share = 1.0;
    while share >= LAST_SHARE {
        let mut moved = false;
        for (axis, (step, [low, high])) in FIRST_STEPS.iter().zip(RANGES).enumerate() {
            if axis == 2 && !move_change {
                continue;
            }
            for sign in [1.0, -1.0] {
                let mut tried = best;
                let Some(value) = tried.get_mut(axis) else { continue };
                *value = (*value + sign * step * share).clamp(low, high);
                let found = mean_log_density(cases, figures(tried));
                if found > density {
                    (best, density, moved) = (tried, found, true);
                    break;
                }
            }
        }
        if !moved {
            share /= 2.0;
        }
    }
    (best, density)
}

/// Fits the figures to a sample; `None` below 30 forecasts.
pub fn fit(sample: &Sample) -> Option<Fitted> {
    let all: Vec<&Case> = sample.cases.iter().collect();
    if all.len() < FEWEST {
        return None;
    }
    let enough = |cases: &[&Case]| cases.iter().filter(|case| case.after_change).count() >= FEWEST_CHANGED;
    let start = [USUAL.gas, USUAL.wander_per_hour, USUAL.change];
    let (best, mean_log_density) = search(&all, start, enough(&all));
    let (mut wide, mut half, mut scored) = (0_u32, 0_u32, 0_u32);
    for fold in 0..FOLDS {
        let (out, rest): (Vec<&Case>, Vec<&Case>) =
            all.iter().copied().partition(|case| (case.stay / sample.every.max(1)) % FOLDS == fold);
        if rest.is_empty() {
            continue;
        }
        let (others, _) = search(&rest, start, enough(&rest));
        for case in out {
            let Ok(forecaster) = Forecaster::new(&case.baseline, figures(others), Held::Split) else {
                continue;
            };
            let Some(mixture) = forecaster.mixture(&dialled(&forecaster, &case.next)) else { continue };
            let below = mixture.below(libm::log(case.next.paco2_mmhg));
            scored += 1;
            wide += u32::from((0.05..=0.95).contains(&below));
            half += u32::from((0.25..=0.75).contains(&below));
        }
    }
    let [gas, wander_per_hour, change] = best;
    let share = |count: u32| f64::from(count) / f64::from(scored.max(1));
    Some(Fitted {
        gas,
        wander_per_hour,
        change,
        mean_log_density,
        cross_validated_wide_coverage: share(wide),
        cross_validated_half_coverage: share(half),
    })
}
