//! What a line reads and what turning it changes in the trial.

use super::LineId;
use crate::case::entry::Control;
use crate::case::settings::Timing;
use crate::planning::dialled::Dialled;
use crate::planning::forecast::Forecaster;
use crate::planning::trial::{Co2Trial, Trial};

/// What a line holds in some settings.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Held {
    /// A number in the line's unit.
    Number(f64),
    /// A factor of something whose amount is not known.
    Factor(f64),
    /// Volume or pressure control.
    Control(Control),
    /// Not known.
    Unknown,
}

/// What a line holds in `dialled`. The goal is not part of the settings and holds nothing here.
pub fn held(line: LineId, dialled: &Dialled, forecaster: &Forecaster<'_>) -> Held {
    if line == LineId::Control {
        return Held::Control(dialled.settings.control());
    }
    if line == LineId::Co2Output && forecaster.co2_output_ml_min().is_none() {
        return Held::Factor(dialled.co2_factor);
    }
    value(line, dialled, forecaster).map_or(Held::Unknown, Held::Number)
}

/// The number a line holds in `dialled`, in its unit.
pub fn value(line: LineId, dialled: &Dialled, forecaster: &Forecaster<'_>) -> Option<f64> {
    let settings = &dialled.settings;
    match line {
        LineId::Control | LineId::Goal => None,
        LineId::Rate => Some(settings.rate_per_min),
        LineId::TidalVolume => settings.tidal_volume_ml(),
        LineId::InspiratoryPressure => settings.inspiratory_pressure_cmh2o(),
        LineId::Peep => settings.peep_cmh2o,
        LineId::Fio2 => settings.fio2,
        LineId::Timing => Some(match settings.timing {
            Timing::InspiratoryTime(value) | Timing::Flow(value) | Timing::Ratio(value) => value,
        }),
        LineId::Pause => Some(settings.pause_s()),
        LineId::Apparatus => Some(settings.apparatus_dead_space_ml),
        LineId::Co2Output => forecaster.co2_output_ml_min().map(|output| output * dialled.co2_factor),
        LineId::Compliance => dialled.lung.map(|lung| lung.compliance_ml_cmh2o),
        LineId::Resistance => dialled
            .lung
            .and_then(|lung| lung.inspiratory_resistance)
            .or_else(|| forecaster.baseline().mechanics.inspiratory_resistance()),
    }
}

/// Whether the trial moves a line.
pub fn is_moved(line: LineId, trial: &Trial) -> bool {
    match line {
        LineId::Control => trial.control.is_some(),
        LineId::Rate => trial.rate_per_min.is_some(),
        LineId::TidalVolume => trial.tidal_volume_ml.is_some(),
        LineId::InspiratoryPressure => trial.inspiratory_pressure_cmh2o.is_some(),
        LineId::Peep => trial.peep_cmh2o.is_some(),
        LineId::Fio2 => trial.fio2.is_some(),
        LineId::Timing => trial.timing.is_some(),
        LineId::Pause => trial.pause_s.is_some(),
        LineId::Apparatus => trial.apparatus_dead_space_ml.is_some(),
        LineId::Co2Output => trial.co2.is_some(),
        LineId::Compliance => trial.compliance_ml_cmh2o.is_some(),
        LineId::Resistance => trial.resistance_cmh2o_s_l.is_some(),
        LineId::Goal => false,
    }
}

/// Puts a number into the trial; `timing` says what a timing number is. Control and goal hold no number.
pub const fn put(line: LineId, trial: &mut Trial, value: f64, timing: Timing) {
    match line {
        LineId::Control | LineId::Goal => {}
        LineId::Rate => trial.rate_per_min = Some(value),
        LineId::TidalVolume => trial.tidal_volume_ml = Some(value),
        LineId::InspiratoryPressure => trial.inspiratory_pressure_cmh2o = Some(value),
        LineId::Peep => trial.peep_cmh2o = Some(value),
        LineId::Fio2 => trial.fio2 = Some(value),
        LineId::Timing => {
            trial.timing = Some(match timing {
                Timing::InspiratoryTime(_) => Timing::InspiratoryTime(value),
                Timing::Flow(_) => Timing::Flow(value),
                Timing::Ratio(_) => Timing::Ratio(value),
            });
        }
        LineId::Pause => trial.pause_s = Some(value),
        LineId::Apparatus => trial.apparatus_dead_space_ml = Some(value),
        LineId::Co2Output => trial.co2 = Some(Co2Trial::Output(value)),
        LineId::Compliance => trial.compliance_ml_cmh2o = Some(value),
        LineId::Resistance => trial.resistance_cmh2o_s_l = Some(value),
    }
}

/// Returns a line to what it is now.
pub const fn reset(line: LineId, trial: &mut Trial) {
    match line {
        LineId::Goal => {}
        LineId::Control => {
            trial.control = None;
            trial.tidal_volume_ml = None;
            trial.inspiratory_pressure_cmh2o = None;
            trial.pause_s = None;
            trial.timing = None;
        }
        LineId::Rate => trial.rate_per_min = None,
        LineId::TidalVolume => trial.tidal_volume_ml = None,
        LineId::InspiratoryPressure => trial.inspiratory_pressure_cmh2o = None,
        LineId::Peep => trial.peep_cmh2o = None,
        LineId::Fio2 => trial.fio2 = None,
        LineId::Timing => trial.timing = None,
        LineId::Pause => trial.pause_s = None,
        LineId::Apparatus => trial.apparatus_dead_space_ml = None,
        LineId::Co2Output => trial.co2 = None,
        LineId::Compliance => trial.compliance_ml_cmh2o = None,
        LineId::Resistance => trial.resistance_cmh2o_s_l = None,
    }
}
