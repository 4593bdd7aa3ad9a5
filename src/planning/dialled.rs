//! Settings as they would be dialled, and the patient they are dialled for.

use crate::case::settings::{Inflation, Settings};
use crate::physiology::breath::Lung;

/// Settings to forecast, and the patient they are dialled for.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Dialled {
    /// The settings.
    pub settings: Settings,
    /// The lung; `None` when no compliance is known.
    pub lung: Option<Lung>,
    /// Measured over modelled volume in pressure control.
    pub pressure_scale: Option<f64>,
    /// True where trapping rests on an expiratory resistance that is only assumed.
    pub trapping_assumed: bool,
    /// CO2 output over the present one.
    pub co2_factor: f64,
}

impl Dialled {
    /// The same patient with another set rate.
    #[must_use]
    pub const fn with_rate(mut self, rate_per_min: f64) -> Self {
        self.settings.rate_per_min = rate_per_min;
        self
    }

    /// The same patient with another volume (mL) or inspiratory pressure (cmH2O), whichever is controlled.
    #[must_use]
    pub const fn with_volume(mut self, value: f64) -> Self {
        self.settings.inflation = match self.settings.inflation {
            Inflation::Volume { pause_s, flow_pattern, .. } => {
                Inflation::Volume { tidal_volume_ml: value, pause_s, flow_pattern }
            }
            Inflation::Pressure { .. } => Inflation::Pressure { inspiratory_pressure_cmh2o: value },
        };
        self
    }

    /// The set volume (mL) or inspiratory pressure (cmH2O), whichever is controlled.
    pub const fn volume(&self) -> f64 {
        match self.settings.inflation {
            Inflation::Volume { tidal_volume_ml, .. } => tidal_volume_ml,
            Inflation::Pressure { inspiratory_pressure_cmh2o } => inspiratory_pressure_cmh2o,
        }
    }
}
