//! Parts that the answers to `plan` and `forecast` share: the baseline and settings as they are reported.

use serde::Serialize;

use super::baseline::gas_exchange::Co2Evidence;
use super::baseline::mechanics::TrappingEvidence;
use super::dialled::Dialled;
use super::forecast::Forecaster;
use super::outcome::Outcome;
use crate::case::entry::Control;
use crate::physiology::body;

/// The baseline as reported.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct BaselineReport {
    /// Predicted body weight, kg.
    pub predicted_weight_kg: Option<f64>,
    /// CO2 output, mL/min STPD.
    pub co2_production_ml_min: Option<f64>,
    /// What fixes it.
    pub co2_evidence: Co2Evidence,
    /// Where trapping comes from.
    pub trapping_evidence: TrappingEvidence,
    /// Series dead space, apparatus included, mL.
    pub series_dead_space_ml: f64,
    /// Alveolar dead-space fraction.
    pub alveolar_dead_space_fraction: Option<f64>,
    /// VD/VT.
    pub dead_space_fraction: Option<f64>,
    /// Respiratory-system compliance, mL/cmH2O.
    pub compliance_ml_cmh2o: Option<f64>,
    /// Inspiratory resistance, cmH2O·s/L.
    pub inspiratory_resistance_cmh2o_s_l: Option<f64>,
    /// Expiratory resistance, cmH2O·s/L.
    pub expiratory_resistance_cmh2o_s_l: Option<f64>,
    /// Expiratory time constant, s.
    pub expiratory_time_constant_s: Option<f64>,
    /// Standard base excess, mmol/L.
    pub base_excess_mmol_l: Option<f64>,
    /// Bicarbonate of the gas, mmol/L.
    pub bicarbonate_mmol_l: Option<f64>,
    /// Ventilatory ratio at the gas.
    pub ventilatory_ratio: Option<f64>,
    /// PaO2/FiO2, mmHg.
    pub pao2_fio2_mmhg: Option<f64>,
    /// Alveolar PO2, mmHg.
    pub alveolar_po2_mmhg: Option<f64>,
    /// Alveolar–arterial PO2 difference, mmHg.
    pub alveolar_arterial_po2_mmhg: Option<f64>,
}

impl BaselineReport {
    /// Reports the baseline of a forecaster.
    pub fn of(forecaster: &Forecaster<'_>) -> Self {
        let baseline = forecaster.baseline();
        let gas = &baseline.gas;
        let tidal = gas.tidal_volume_ml;
        let series = forecaster.series_ml();
        let fraction = forecaster.alveolar_fraction();
        let expiratory = baseline.mechanics.expiratory_report();
        Self {
            predicted_weight_kg: baseline.predicted_weight_kg,
            co2_production_ml_min: forecaster.co2_output_ml_min(),
            co2_evidence: baseline.exchange.co2_evidence,
            trapping_evidence: baseline.mechanics.trapping_evidence(),
            series_dead_space_ml: series,
            alveolar_dead_space_fraction: fraction,
            dead_space_fraction: fraction.map(|f| (series + f * (tidal - series)) / tidal),
            compliance_ml_cmh2o: baseline.mechanics.lung().map(|lung| lung.compliance_ml_cmh2o),
            inspiratory_resistance_cmh2o_s_l: baseline.mechanics.inspiratory_resistance(),
            expiratory_resistance_cmh2o_s_l: expiratory,
            expiratory_time_constant_s: baseline
                .mechanics
                .lung()
                .and_then(|lung| lung.expiratory_time_constant_s()),
            base_excess_mmol_l: baseline.base_excess_mmol_l,
            bicarbonate_mmol_l: baseline.bicarbonate_mmol_l,
            ventilatory_ratio: baseline
                .predicted_weight_kg
                .map(|kg| body::ventilatory_ratio(gas.rate_per_min * tidal, gas.paco2_mmhg, kg)),
            pao2_fio2_mmhg: baseline.pao2_fio2_mmhg,
            alveolar_po2_mmhg: baseline.alveolar_po2_mmhg,
            alveolar_arterial_po2_mmhg: baseline.alveolar_arterial_po2_mmhg,
        }
    }
}

/// Settings as they are dialled.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct SettingsReport {
    /// `volume` or `pressure`.
    pub control: &'static str,
    /// Set rate, 1/min.
    pub rate_per_min: f64,
    /// Set tidal volume, mL.
    pub tidal_volume_ml: Option<f64>,
    /// Inspiratory pressure above PEEP, cmH2O.
    pub inspiratory_pressure_cmh2o: Option<f64>,
    /// Set PEEP, cmH2O.
    pub peep_cmh2o: Option<f64>,
    /// Inspired oxygen, fraction.
    pub fio2: Option<f64>,
    /// Inspiratory time, s.
    pub inspiratory_time_s: f64,
    /// Apparatus dead space, mL.
    pub apparatus_dead_space_ml: f64,
}

impl SettingsReport {
    /// Reports what is dialled.
    pub fn of(dialled: &Dialled) -> Self {
        let settings = &dialled.settings;
        Self {
            control: match settings.control() {
                Control::Volume => "volume",
                Control::Pressure => "pressure",
                Control::Support => "support",
            },
            rate_per_min: settings.rate_per_min,
            tidal_volume_ml: settings.tidal_volume_ml(),
            inspiratory_pressure_cmh2o: settings.inspiratory_pressure_cmh2o(),
            peep_cmh2o: settings.peep_cmh2o,
            fio2: settings.fio2,
            inspiratory_time_s: settings.inspiratory_time_s(),
            apparatus_dead_space_ml: settings.apparatus_dead_space_ml,
        }
    }
}

/// The outcome now, and whether its PaCO2 was measured.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Now {
    /// The outcome.
    #[serde(flatten)]
    pub outcome: Outcome,
    /// `measured` or `forecast`.
    pub paco2_is: &'static str,
    /// What is dialled.
    #[serde(skip)]
    pub settings: SettingsReport,
}
