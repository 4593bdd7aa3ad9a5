//! One forecast against what came, and a tally of many.

use serde::Serialize;

use super::{PastGas, changed, dialled};
use crate::planning::belief::Mixture;
use crate::planning::forecast::Forecaster;

/// One forecast, scored.
#[derive(Debug, Clone, PartialEq)]
pub struct Score {
    /// Plain arithmetic from the latest gas, mmHg.
    pub arithmetic_mmhg: f64,
    /// The expectation, mmHg.
    pub expected_mmhg: f64,
    /// The gas before, mmHg: "the same again".
    pub before_mmhg: f64,
    /// What came, mmHg.
    pub measured_mmhg: f64,
    /// The share of the forecast's mass below what came.
    pub below: f64,
    /// The density of ln PaCO2 at what came.
    pub density: f64,
    /// Whether rate or volume was changed before it.
    pub after_change: bool,
    /// The distribution itself, of ln PaCO2.
    pub mixture: Mixture,
}

impl Score {
    /// Scores the forecast of `next`, made when `before` was the latest gas.
    pub(super) fn of(forecaster: &Forecaster<'_>, before: &PastGas, next: &PastGas) -> Option<Self> {
        let dialled = dialled(forecaster, next);
        let mixture = forecaster.mixture(&dialled)?;
        let ln_measured = libm::log(next.paco2_mmhg);
        Some(Self {
            arithmetic_mmhg: forecaster.paco2_mmhg(&dialled)?,
            expected_mmhg: libm::exp(mixture.quantile(0.5)?),
            before_mmhg: before.paco2_mmhg,
            measured_mmhg: next.paco2_mmhg,
            below: mixture.below(ln_measured),
            density: mixture.density(ln_measured),
            after_change: changed(before, next),
            mixture,
        })
    }

    /// Whether it fell into the 5–95 % interval.
    pub fn in_wide(&self) -> bool {
        (0.05..=0.95).contains(&self.below)
    }

    /// Whether it fell into the 25–75 % interval.
    pub fn in_half(&self) -> bool {
        (0.25..=0.75).contains(&self.below)
    }

    fn ln_error(&self, forecast_mmhg: f64) -> f64 {
        libm::log(self.measured_mmhg / forecast_mmhg).abs()
    }
}

/// Sums over many scores; its size does not grow with their number.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Tally {
    forecasts: u64,
    wide: u64,
    half: u64,
    ln_expected: f64,
    ln_arithmetic: f64,
    ln_before: f64,
    ln_density: f64,
    deciles: [u64; 10],
}

/// What a tally amounts to; `None` without forecasts.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Figures {
    /// How many forecasts.
    pub forecasts: u64,
    /// Share within the 5–95 % interval.
    pub wide_coverage: Option<f64>,
    /// Share within the 25–75 % interval.
    pub half_coverage: Option<f64>,
    /// Mean |ln(measured/expected)|.
    pub mean_absolute_log_error: Option<f64>,
    /// The same of plain arithmetic.
    pub arithmetic_mean_absolute_log_error: Option<f64>,
    /// The same of "the same again".
    pub carried_over_mean_absolute_log_error: Option<f64>,
    /// Mean ln density of ln PaCO2 at what came.
    pub mean_log_density: Option<f64>,
}

impl Tally {
    /// Adds a score.
    pub fn add(&mut self, score: &Score) {
        self.forecasts += 1;
        self.wide += u64::from(score.in_wide());
        self.half += u64::from(score.in_half());
        self.ln_expected += score.ln_error(score.expected_mmhg);
        self.ln_arithmetic += score.ln_error(score.arithmetic_mmhg);
        self.ln_before += score.ln_error(score.before_mmhg);
        self.ln_density += libm::log(score.density.max(f64::MIN_POSITIVE));
        let tenth =
            self.deciles.iter_mut().zip(1..).find(|(_, upper)| score.below * 10.0 < f64::from(*upper));
        if let Some((count, _)) = tenth {
            *count += 1;
        } else if let Some(last) = self.deciles.last_mut() {
            *last += 1;
        }
    }

    /// How many gases fell into each tenth of their forecast, lowest first: even when forecasts are honest.
    pub const fn deciles(&self) -> &[u64; 10] {
        &self.deciles
    }

    /// The figures.
    pub fn figures(&self) -> Figures {
        let mean = |sum: f64| (self.forecasts > 0).then(|| sum / self.forecasts as f64);
        Figures {
            forecasts: self.forecasts,
            wide_coverage: mean(self.wide as f64),
            half_coverage: mean(self.half as f64),
            mean_absolute_log_error: mean(self.ln_expected),
            arithmetic_mean_absolute_log_error: mean(self.ln_arithmetic),
            carried_over_mean_absolute_log_error: mean(self.ln_before),
            mean_log_density: mean(self.ln_density),
        }
    }
}
