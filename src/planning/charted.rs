//! A plan as it goes into the record, with the forecast that its gas will be held against.

use super::answer::SettingsReport;
use super::outcome::Outcome;
use crate::case::entry::{Aim, ChartedPlan};

/// A plan or a trial for the record: what is to be dialled, what was aimed at, what was forecast.
///
/// Pressures of gases are kept to a tenth of a mmHg, ten times finer than they are shown; minutes are rounded up.
/// `settled_minutes` is `None` where the course is not known. An interval that reaches beyond all numbers is left out.
pub fn charted(
    settings: &SettingsReport,
    outcome: &Outcome,
    target_paco2_mmhg: Option<f64>,
    aim: Option<Aim>,
    settled_minutes: Option<f64>,
) -> ChartedPlan {
    let tenth = |value: f64| (value * 10.0).round() / 10.0;
    let interval = &outcome.interval;
    let pair =
        |low: Option<f64>, high: Option<f64>| low.zip(high).map(|(low, high)| [tenth(low), tenth(high)]);
    ChartedPlan {
        target_paco2_mmhg: target_paco2_mmhg.map(tenth),
        aim,
        rate_per_min: Some(settings.rate_per_min),
        tidal_volume_ml: settings.tidal_volume_ml,
        inspiratory_pressure_cmh2o: settings.inspiratory_pressure_cmh2o,
        forecast_paco2_mmhg: Some(tenth(outcome.state.paco2_mmhg)),
        expected_paco2_mmhg: interval.paco2_expected_mmhg.map(tenth),
        half_interval_mmhg: pair(interval.paco2_half_low_mmhg, interval.paco2_half_high_mmhg),
        wide_interval_mmhg: pair(interval.paco2_low_mmhg, interval.paco2_high_mmhg),
        settle_minutes: settled_minutes.map(f64::ceil),
    }
}
