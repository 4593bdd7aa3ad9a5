//! How sure: what all gases of the record say about the patient, as a distribution of the next PaCO2.
//!
//! The forecast depends on the patient only through `x = ln(K·V̇CO2/(1 − f))` and the series dead space:
//! `ln PaCO2 = x − ln(rate·(VT − VDs))`. Belief is a grid over the airway part of `VDs` with one Kalman filter for `x`
//! at each point. Everything is in closed form; nothing is drawn at random.

mod mixture;

use serde::Serialize;

use super::baseline::Baseline;
use super::baseline::gas_exchange::SeriesEvidence;
use crate::case::profile::Figures;
use crate::physiology::stores::Course;
pub use mixture::Mixture;

/// `usual`: fitted to 205 consecutive arterial gases under volume control, up to 12 h apart, 50 patients of an open ICU
/// database.
pub const USUAL: Figures = Figures { gas: 0.12, wander_per_hour: 0.03, change: 0.45 };
/// `settled`: stable, untouched patients within the hour: CV 3 % (Thorson 1983); `change` from memory.
pub const SETTLED: Figures = Figures { gas: 0.03, wander_per_hour: 0.04, change: 0.15 };

/// Points of the grid.
const CELLS: usize = 201;
/// How many standard deviations the grid reaches to either side.
const REACH: f64 = 4.0;
/// The dead space of the airway cannot exceed this share of the smallest breath seen.
const LARGEST_SHARE: f64 = 0.95;
/// Spread of the rule, mL, at least …
const RULE_SPREAD_ML: f64 = 25.0;
/// … or this share of it, since anatomical rules predict a patient's dead space poorly.
const RULE_SPREAD_SHARE: f64 = 0.4;
/// Spread where the dead space was measured, mL.
const MEASURED_SPREAD_ML: f64 = 10.0;
/// How much of ln(volume reading/fraction reading) is doubt.
pub const READINGS_DOUBT: f64 = 0.25;

/// How sure a forecast PaCO2 is. `None` where it is not known (a measured value, or beyond what can be reached).
#[derive(Debug, Clone, Copy, PartialEq, Default, Serialize)]
pub struct Interval {
    /// The median, mmHg, which also hears earlier gases.
    pub paco2_expected_mmhg: Option<f64>,
    /// 25 % quantile, mmHg.
    pub paco2_half_low_mmhg: Option<f64>,
    /// 75 % quantile, mmHg.
    pub paco2_half_high_mmhg: Option<f64>,
    /// 5 % quantile, mmHg.
    pub paco2_low_mmhg: Option<f64>,
    /// 95 % quantile, mmHg.
    pub paco2_high_mmhg: Option<f64>,
    /// The chance to land in the target band.
    pub chance_on_target: Option<f64>,
}

/// What the gases of the record say.
#[derive(Debug, Clone, PartialEq)]
pub struct Belief {
    airway_ml: Vec<f64>,
    weight: Vec<f64>,
    x: Vec<f64>,
    variance: f64,
    figures: Figures,
    gases: usize,
    rooms: LogRooms,
}

/// ln(room − airway) at every grid point for one room, kept since most breaths of a record leave the same room.
#[derive(Debug, Clone, PartialEq)]
struct LogRooms {
    room_ml: f64,
    ln: Vec<f64>,
}

impl LogRooms {
    /// Every airway of the grid is below every room heard, so the logarithms are finite.
    fn of(room_ml: f64, airway_ml: &[f64]) -> Self {
        Self { room_ml, ln: airway_ml.iter().map(|airway| libm::log(room_ml - airway)).collect() }
    }

    fn is_of(&self, room_ml: f64) -> bool {
        (self.room_ml - room_ml).abs() <= 0.0
    }
}

/// The breath a forecast is made for, with what adds doubt to it.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Ahead {
    /// Effective rate, 1/min.
    pub rate_per_min: f64,
    /// Effective tidal volume, mL.
    pub tidal_volume_ml: f64,
    /// Apparatus dead space, mL.
    pub apparatus_ml: f64,
    /// ln of alveolar ventilation ahead over that of the latest gas.
    pub ln_ventilation: f64,
    /// ln of the forecast by the volume reading over that by the fraction reading, where both can be had.
    pub ln_readings: Option<f64>,
    /// Shift of ln PaCO2: CO2 output under trial, and another reading of held dead space.
    pub shift: f64,
}

impl Belief {
    /// Hears the gases of a record in order.
    pub fn hear(baseline: &Baseline, figures: Figures) -> Self {
        let airway = baseline.exchange.series_ml - baseline.gas.apparatus_ml;
        let (mean, spread) = match baseline.exchange.series_evidence {
            SeriesEvidence::Rule => {
                let rule = baseline.airway_by_rule_ml;
                (rule, RULE_SPREAD_ML.max(RULE_SPREAD_SHARE * rule))
            }
            SeriesEvidence::Measured | SeriesEvidence::CutToWhole => (airway.max(0.0), MEASURED_SPREAD_ML),
        };
        // A breath that the apparatus swallows whole says nothing that can be heard.
        let gases: Vec<_> =
            baseline.gases.iter().filter(|gas| gas.tidal_volume_ml > gas.apparatus_ml).collect();
        let smallest =
            gases.iter().map(|gas| gas.tidal_volume_ml - gas.apparatus_ml).fold(f64::INFINITY, f64::min);
        let high = (mean + REACH * spread).min(LARGEST_SHARE * smallest);
        let low = (mean - REACH * spread).max(0.0);
        let low = if low < high { low } else { 0.0 };
        let cell = (high - low) / CELLS as f64;
        let airway_ml: Vec<f64> = (0..CELLS).map(|i| low + (i as f64 + 0.5) * cell).collect();
        let log_prior = airway_ml.iter().map(|ml| {
            let z = (ml - mean) / spread;
            -0.5 * z * z
        });
        let mut belief = Self {
            weight: log_prior.collect(),
            x: vec![0.0; CELLS],
            airway_ml,
            variance: 0.0,
            figures,
            gases: gases.len(),
            rooms: LogRooms { room_ml: f64::NAN, ln: Vec::new() },
        };
        let ventilation = |gas: &super::baseline::HeardGas| {
            gas.rate_per_min * passing_ml(gas.tidal_volume_ml, gas.apparatus_ml + airway)
        };
        for (i, gas) in gases.iter().enumerate() {
            let previous = i.checked_sub(1).and_then(|before| gases.get(before));
            let mut noise = figures.gas * figures.gas;
            if let Some(previous) = previous {
                let ln_change = libm::log(ventilation(gas) / ventilation(previous));
                belief.variance +=
                    figures.wander_per_hour * figures.wander_per_hour * (gas.hours - previous.hours).max(0.0)
                        + (figures.change * ln_change) * (figures.change * ln_change);
                let settled_at = previous.paco2_mmhg * ventilation(previous) / ventilation(gas);
                noise += unsettled(baseline, gas.minutes_since_change, previous.paco2_mmhg, settled_at);
            }
            belief.hear_one(gas, previous.is_none(), noise);
        }
        belief.normalise();
        belief
    }

    /// One Kalman step at every grid point; weights are kept as logarithms until the end.
    fn hear_one(&mut self, gas: &super::baseline::HeardGas, first: bool, noise: f64) {
        let ln_moved = libm::log(gas.paco2_mmhg * gas.rate_per_min);
        let room = gas.tidal_volume_ml - gas.apparatus_ml;
        if !self.rooms.is_of(room) {
            self.rooms = LogRooms::of(room, &self.airway_ml);
        }
        let total = self.variance + noise;
        let gain = if first { 1.0 } else { self.variance / total };
        for ((ln_room, x), weight) in self.rooms.ln.iter().zip(&mut self.x).zip(&mut self.weight) {
            let observed = ln_moved + ln_room;
            let surprise = observed - *x;
            if !first {
                *weight -= 0.5 * surprise * surprise / total;
            }
            *x += gain * surprise;
        }
        self.variance = if first { noise } else { self.variance * noise / total };
    }

    fn normalise(&mut self) {
        let most = self.weight.iter().copied().fold(f64::NEG_INFINITY, f64::max);
        for weight in &mut self.weight {
            *weight = libm::exp(*weight - most);
        }
        let sum: f64 = self.weight.iter().sum();
        for weight in &mut self.weight {
            *weight /= sum;
        }
    }

    /// How many gases were heard.
    pub const fn gases(&self) -> usize {
        self.gases
    }

    /// The mean of the airway dead space, mL.
    pub fn airway_mean_ml(&self) -> f64 {
        self.airway_ml.iter().zip(&self.weight).map(|(ml, weight)| ml * weight).sum()
    }

    /// The distribution of ln PaCO2 of the next gas, an hour ahead.
    pub fn ahead(&self, ahead: &Ahead) -> Mixture {
        let Figures { gas, wander_per_hour, change } = self.figures;
        let doubt = ahead.ln_readings.map_or(READINGS_DOUBT, |ln| READINGS_DOUBT * ln);
        let moved = change * ahead.ln_ventilation;
        let variance =
            self.variance + wander_per_hour * wander_per_hour + gas * gas + moved * moved + doubt * doubt;
        let room = ahead.tidal_volume_ml - ahead.apparatus_ml;
        let shift = ahead.shift - libm::log(ahead.rate_per_min);
        let of_heard = self.rooms.is_of(room);
        let grid = self.airway_ml.iter().zip(&self.rooms.ln).zip(&self.x).zip(&self.weight);
        // A grid point that swallows the breath whole puts its mass at infinity.
        let points =
            grid.filter(|(((airway, _), _), _)| room > **airway).map(|(((airway, ln_heard), x), weight)| {
                let ln_room = if of_heard { *ln_heard } else { libm::log(room - airway) };
                (*weight, x + shift - ln_room)
            });
        Mixture::new(points, variance.sqrt())
    }
}

/// What passes the series dead space of section 1, mL, for ratios of ventilation: at least 5 % of a breath, as the grid
/// allows no more than 95 % of one to be dead space.
pub fn passing_ml(tidal_volume_ml: f64, series_ml: f64) -> f64 {
    (tidal_volume_ml - series_ml).max((1.0 - LARGEST_SHARE) * tidal_volume_ml)
}

/// Extra variance of a gas drawn before the preceding change had settled: `ln(1 + |missing|/final)²`.
fn unsettled(baseline: &Baseline, minutes: Option<f64>, before_mmhg: f64, settled_at_mmhg: f64) -> f64 {
    let (Some(minutes), Some(weight), Some(output)) =
        (minutes, baseline.predicted_weight_kg, baseline.exchange.co2_output_ml_min)
    else {
        return 0.0;
    };
    let course = Course::new(weight, output, before_mmhg, settled_at_mmhg);
    if minutes >= course.settled_minutes() {
        return 0.0;
    }
    let missing = (course.paco2_mmhg(minutes) - settled_at_mmhg).abs();
    let ln = libm::log1p(missing / settled_at_mmhg);
    ln * ln
}
