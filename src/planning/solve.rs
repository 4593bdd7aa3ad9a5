//! Solving for a target: the exact rate or volume, the summit of alveolar ventilation, and the settable values.

use serde::Serialize;

use crate::case::entry::Control;
use crate::case::profile::Steps;
use crate::physiology::breath::SHORTEST_EXPIRATION_S;
use crate::physiology::root::{crossing, summit};

use super::dialled::Dialled;
use super::forecast::Forecaster;
use crate::case::settings::Timing;

/// Where a faster rate stops clearing more.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Summit {
    /// The rate, 1/min.
    pub rate_per_min: f64,
    /// The PaCO2 there, mmHg.
    pub paco2_mmhg: f64,
}

/// Set rates a plan may choose, 1/min: what adult ventilators offer, common practice.
pub const RATES_PER_MIN: [f64; 2] = [4.0, 60.0];
/// Set tidal volumes a plan may choose, mL: common practice.
pub const VOLUMES_ML: [f64; 2] = [50.0, 1500.0];
/// Inspiratory pressures above PEEP a plan may choose, cmH2O: common practice.
pub const PRESSURES_CMH2O: [f64; 2] = [1.0, 60.0];

/// Slowest rate looked at when searching, 1/min.
const SLOWEST_PER_MIN: f64 = 1e-3;
/// Rates tried to find where alveolar ventilation is highest.
const SCAN: usize = 400;

/// The whole multiples of `step` within `range`.
fn multiples(step: f64, [low, high]: [f64; 2]) -> impl Iterator<Item = f64> {
    let first = (low / step - 1e-9).ceil();
    let count = (high / step + 1e-9).floor() - first;
    // Whole numbers far below 2^52, so each is exact.
    std::iter::successors(Some(0.0), |n| Some(n + 1.0))
        .take_while(move |n| *n <= count)
        .map(move |n| (first + n) * step)
}

/// The rates that can be dialled, 1/min.
pub fn settable_rates(steps: &Steps) -> impl Iterator<Item = f64> + use<> {
    multiples(steps.rate_per_min, RATES_PER_MIN)
}

/// The range of volumes (mL) or inspiratory pressures (cmH2O) that can be dialled, whichever is controlled.
pub fn volume_range(dialled: &Dialled) -> [f64; 2] {
    match dialled.settings.control() {
        Control::Pressure => PRESSURES_CMH2O,
        Control::Volume | Control::Support => VOLUMES_ML,
    }
}

/// The step of volume (mL) or inspiratory pressure (cmH2O), whichever is controlled.
pub fn volume_step(dialled: &Dialled, steps: &Steps) -> f64 {
    match dialled.settings.control() {
        Control::Pressure => steps.inspiratory_pressure_cmh2o,
        Control::Volume | Control::Support => steps.tidal_volume_ml,
    }
}

/// The volumes (mL) or inspiratory pressures (cmH2O) that can be dialled.
pub fn settable_volumes(dialled: &Dialled, steps: &Steps) -> impl Iterator<Item = f64> + use<> {
    multiples(volume_step(dialled, steps), volume_range(dialled))
}

/// The rate, 1/min, at which expiration runs out with the timing held.
fn fastest_rate(dialled: &Dialled) -> f64 {
    match dialled.settings.timing {
        // Te = 60/rate·x/(1 + x)
        Timing::Ratio(expiration) => 60.0 * expiration / (1.0 + expiration) / SHORTEST_EXPIRATION_S,
        Timing::InspiratoryTime(_) | Timing::Flow(_) => {
            60.0 / (dialled.settings.inspiratory_time_s() + SHORTEST_EXPIRATION_S)
        }
    }
}

/// Alveolar ventilation over (1 − f), mL/min, if every breath came at `rate_per_min`; `None` where nothing is delivered.
fn cleared(forecaster: &Forecaster<'_>, dialled: &Dialled, rate_per_min: f64) -> Option<f64> {
    let at = dialled.with_rate(rate_per_min);
    let room = forecaster.volume_at(&at, rate_per_min)? - forecaster.series_under(&at.settings);
    Some(rate_per_min * room)
}

/// Where alveolar ventilation is highest as the rate rises in pressure control, 1/min (unrounded); `None` in volume
/// control, without resistance, or when there is no summit before expiration runs out. The patient's own rate is left
/// out of account: the summit is the lung's and the ventilator's.
fn summit_rate(forecaster: &Forecaster<'_>, dialled: &Dialled) -> Option<f64> {
    let lung = dialled.lung?;
    if dialled.settings.control() != Control::Pressure
        || lung.inspiratory_resistance.is_none()
        || lung.expiratory_resistance.is_none()
    {
        return None;
    }
    let fastest = fastest_rate(dialled) * (1.0 - 1e-9);
    let cleared = |rate: f64| cleared(forecaster, dialled, rate).unwrap_or(f64::NEG_INFINITY);
    let at = |i: usize| fastest * (i as f64) / (SCAN as f64);
    let best = (1..=SCAN).max_by(|&a, &b| cleared(at(a)).total_cmp(&cleared(at(b))))?;
    if best == SCAN {
        return None;
    }
    Some(summit(cleared, at(best - 1), at(best + 1)))
}

/// The summit of alveolar ventilation: its rate, 1/min, and the PaCO2 there, mmHg.
pub fn summit_of(forecaster: &Forecaster<'_>, dialled: &Dialled) -> Option<Summit> {
    let rate_per_min = summit_rate(forecaster, dialled)?;
    let most = cleared(forecaster, dialled, rate_per_min).filter(|ml_min| *ml_min > 0.0)?;
    Some(Summit { rate_per_min, paco2_mmhg: forecaster.needed_ml_min(1.0, dialled.co2_factor) / most })
}

/// The unrounded set rate, 1/min, that brings PaCO2 to `target_mmhg`: closed form where the volume does not hang on the
/// rate, else the root on the rising side of the summit. `None` when there is none, when expiration runs out before it, or
/// when it lies below the patient's own.
pub fn exact_rate(forecaster: &Forecaster<'_>, dialled: &Dialled, target_mmhg: f64) -> Option<f64> {
    let needed = forecaster.needed_ml_min(target_mmhg, dialled.co2_factor);
    let rate = if volume_hangs_on_rate(dialled) {
        let top = summit_rate(forecaster, dialled).unwrap_or_else(|| fastest_rate(dialled) * (1.0 - 1e-9));
        let own = forecaster.effective_rate(SLOWEST_PER_MIN); // below it the patient breathes on
        if own >= top {
            return None;
        }
        crossing(|rate| cleared(forecaster, dialled, rate).unwrap_or(f64::NAN) - needed, own, top)?
    } else {
        let room = forecaster.volume(dialled)? - forecaster.series_under(&dialled.settings);
        if room <= 0.0 {
            return None;
        }
        needed / room
    };
    (rate >= forecaster.effective_rate(0.0) && forecaster.breathes(&dialled.with_rate(rate))).then_some(rate)
}

fn volume_hangs_on_rate(dialled: &Dialled) -> bool {
    dialled.settings.control() == Control::Pressure
        && dialled.lung.is_some_and(|lung| lung.inspiratory_resistance.is_some())
}

/// The unrounded set volume (mL) or inspiratory pressure (cmH2O) that brings PaCO2 to `target_mmhg`, rate kept;
/// `None` when there is none or when it leaves no time to breathe out.
pub fn exact_volume(forecaster: &Forecaster<'_>, dialled: &Dialled, target_mmhg: f64) -> Option<f64> {
    let rate = forecaster.effective_rate(dialled.settings.rate_per_min);
    let needed = forecaster.needed_ml_min(target_mmhg, dialled.co2_factor);
    let tidal = forecaster.series_under(&dialled.settings) + needed / rate;
    // Both controls deliver in proportion to what is dialled.
    let per_unit = forecaster.volume(&dialled.with_volume(1.0))?;
    let exact = (tidal > 0.0 && per_unit > 0.0).then(|| tidal / per_unit)?;
    forecaster.breathes(&dialled.with_volume(exact)).then_some(exact)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn settable_values_are_whole_multiples_within_the_range() {
        assert_eq!(settable_rates(&Steps::default()).count(), 57);
        assert_eq!(multiples(10.0, VOLUMES_ML).count(), 146);
        assert_eq!(multiples(0.5, [4.0, 6.0]).collect::<Vec<_>>(), [4.0, 4.5, 5.0, 5.5, 6.0]);
        assert_eq!(multiples(7.0, [4.0, 20.0]).collect::<Vec<_>>(), [7.0, 14.0]);
    }
}
