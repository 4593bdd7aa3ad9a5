//! The state that settings lead to: gas exchange and mechanics.

use serde::Serialize;

/// Everything a setting leads to, apart from how sure it is. `None` (null in JSON) means not known.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct State {
    /// Effective total rate, 1/min.
    pub rate_per_min: f64,
    /// Effective tidal volume, mL.
    pub tidal_volume_ml: f64,
    /// The same per kg predicted weight.
    pub tidal_volume_ml_kg: Option<f64>,
    /// Inspiratory time, pause included, s.
    pub inspiratory_time_s: f64,
    /// Expiratory time, s.
    pub expiratory_time_s: f64,
    /// Minute volume, L/min.
    pub minute_ventilation_l_min: f64,
    /// Alveolar ventilation, L/min.
    pub alveolar_ventilation_l_min: Option<f64>,
    /// Apparatus dead space, mL.
    pub apparatus_dead_space_ml: f64,
    /// Series dead space, apparatus included, mL.
    pub series_dead_space_ml: f64,
    /// Alveolar dead space, mL.
    pub alveolar_dead_space_ml: Option<f64>,
    /// Physiological dead space over tidal volume.
    pub dead_space_fraction: Option<f64>,
    /// Ventilation of dead space, L/min.
    pub dead_space_loss_l_min: Option<f64>,
    /// PaCO2 by plain arithmetic, mmHg.
    pub paco2_mmhg: f64,
    /// pH at that PaCO2, base excess kept.
    pub ph: Option<f64>,
    /// Bicarbonate, mmol/L.
    pub bicarbonate_mmol_l: Option<f64>,
    /// End-tidal PCO2, mmHg; known only where one was measured.
    pub end_tidal_co2_mmhg: Option<f64>,
    /// Auto-PEEP, cmH2O.
    pub auto_peep_cmh2o: Option<f64>,
    /// Total PEEP, cmH2O.
    pub total_peep_cmh2o: Option<f64>,
    /// Plateau inspiratory pressure, cmH2O.
    pub plateau_cmh2o: Option<f64>,
    /// Peak inspiratory pressure, cmH2O.
    pub peak_cmh2o: Option<f64>,
    /// Driving pressure, cmH2O.
    pub driving_pressure_cmh2o: Option<f64>,
    /// Mean airway pressure, cmH2O.
    pub mean_airway_pressure_cmh2o: Option<f64>,
    /// Trapped volume, mL.
    pub trapped_volume_ml: Option<f64>,
    /// Expiratory time over the expiratory time constant.
    pub expiratory_time_constants: Option<f64>,
    /// Mechanical power, J/min.
    pub mechanical_power_j_min: Option<f64>,
    /// 4·driving pressure + rate.
    pub load_index: Option<f64>,
    /// Fall of PaCO2 from now within an hour, mmHg.
    #[serde(skip)]
    pub paco2_fall_per_hour_mmhg: Option<f64>,
}
