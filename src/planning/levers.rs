//! Levers: what one step of each thing that can be changed buys, and costs, from now.

use serde::Serialize;

use super::dialled::Dialled;
use super::forecast::Forecaster;
use super::state::State;
use crate::case::entry::Control;

/// Steps of rate, 1/min.
const RATE_STEP: f64 = 2.0;
/// Step of tidal volume, mL.
const VOLUME_STEP_ML: f64 = 20.0;
/// Step of inspiratory pressure, cmH2O.
const PRESSURE_STEP: f64 = 1.0;
/// Step of apparatus dead space, mL.
const APPARATUS_STEP_ML: f64 = 10.0;
/// Share by which CO2 output falls, about what 1 °C of fever makes (+13 %/°C).
const CO2_STEP: f64 = -0.10;

/// One lever.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Lever {
    /// `rate`, `tidal_volume`, `inspiratory_pressure`, `apparatus_dead_space` or `co2_production`.
    pub id: &'static str,
    /// How far it is moved.
    pub step: f64,
    /// The unit of the step.
    pub unit: &'static str,
    /// Change of PaCO2, mmHg; `None` when the step cannot be dialled.
    pub paco2_change_mmhg: Option<f64>,
    /// Change of pH.
    pub ph_change: Option<f64>,
    /// Change of driving pressure, cmH2O.
    pub driving_pressure_change_cmh2o: Option<f64>,
    /// Change of mechanical power, J/min.
    pub mechanical_power_change_j_min: Option<f64>,
}

/// The levers, each from the forecast of now; apparatus is left out where there is none.
pub fn levers(forecaster: &Forecaster<'_>) -> Vec<Lever> {
    let now = forecaster.now();
    let Some(from) = forecaster.state(&now) else { return Vec::new() };
    let rate = now.settings.rate_per_min + RATE_STEP;
    let (volume_id, volume_step, volume_unit) = match now.settings.control() {
        Control::Pressure => ("inspiratory_pressure", PRESSURE_STEP, "cmH2O"),
        Control::Volume | Control::Support => ("tidal_volume", VOLUME_STEP_ML, "mL"),
    };
    let apparatus = now.settings.apparatus_dead_space_ml;
    let less = APPARATUS_STEP_ML.min(apparatus);
    let mut lighter = now;
    lighter.settings.apparatus_dead_space_ml = apparatus - less;
    let cooler = Dialled { co2_factor: 1.0 + CO2_STEP, ..now };
    let tries = [
        ("rate", RATE_STEP, "1/min", Some(now.with_rate(rate))),
        (volume_id, volume_step, volume_unit, Some(now.with_volume(now.volume() + volume_step))),
        ("apparatus_dead_space", -less, "mL", (apparatus > 0.0).then_some(lighter)),
        ("co2_production", 100.0 * CO2_STEP, "%", Some(cooler)),
    ];
    tries
        .into_iter()
        .filter_map(|(id, step, unit, dialled)| {
            let to = forecaster.state(&dialled?);
            Some(lever(id, step, unit, &from, to.as_ref()))
        })
        .collect()
}

fn lever(id: &'static str, step: f64, unit: &'static str, from: &State, to: Option<&State>) -> Lever {
    let change = |value: fn(&State) -> Option<f64>| Some(value(to?)? - value(from)?);
    Lever {
        id,
        step,
        unit,
        paco2_change_mmhg: change(|state| Some(state.paco2_mmhg)),
        ph_change: change(|state| state.ph),
        driving_pressure_change_cmh2o: change(|state| state.driving_pressure_cmh2o),
        mechanical_power_change_j_min: change(|state| state.mechanical_power_j_min),
    }
}
