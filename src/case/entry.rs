//! What a person charts: the patient and the entries, in the field's default units, each value optional.
//!
//! The numbers here are as typed. They become a [`Record`](super::record::Record), and so fit for the engine,
//! only through [`Record::check`](super::record::Record::check).

use super::moment::Moment;

/// Sex, for predicted weight and resting energy.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Sex {
    /// Female.
    Female,
    /// Male.
    Male,
}

/// The airway the breath passes.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Airway {
    /// Mouth and nose, as with a mask.
    Native,
    /// A tracheal tube.
    Tube,
    /// A tracheostomy.
    Tracheostomy,
}

/// How a breath is controlled.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Control {
    /// Volume control.
    Volume,
    /// Pressure control.
    Pressure,
    /// Pressure support: every breath the patient's own.
    Support,
}

/// The shape of the inspiratory flow in volume control.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum FlowPattern {
    /// Constant flow.
    #[default]
    Constant,
    /// A falling flow.
    Decelerating,
}

/// The patient.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Patient {
    /// Sex.
    pub sex: Option<Sex>,
    /// Height, cm.
    pub height_cm: Option<f64>,
    /// Actual weight, kg.
    pub weight_kg: Option<f64>,
    /// Age, years.
    pub age_years: Option<f64>,
    /// The airway; `None` when not named.
    pub airway: Option<Airway>,
    /// Predicted body weight given outright, kg.
    pub predicted_weight_kg: Option<f64>,
    /// Barometric pressure, mmHg.
    pub barometric_pressure_mmhg: Option<f64>,
    /// Altitude, m.
    pub altitude_m: Option<f64>,
}

/// The settings an entry carries; what it leaves out is inherited.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct SettingsChange {
    /// Volume control, pressure control or support.
    pub control: Option<Control>,
    /// Set rate, 1/min.
    pub rate_per_min: Option<f64>,
    /// Set tidal volume, mL (volume control).
    pub tidal_volume_ml: Option<f64>,
    /// Inspiratory pressure above PEEP, cmH2O (pressure control, support).
    pub inspiratory_pressure_cmh2o: Option<f64>,
    /// Set PEEP, cmH2O.
    pub peep_cmh2o: Option<f64>,
    /// Inspired oxygen, fraction.
    pub fio2: Option<f64>,
    /// Inspiratory time, pause included, s.
    pub inspiratory_time_s: Option<f64>,
    /// Mean inspiratory flow, L/min.
    pub flow_l_min: Option<f64>,
    /// I:E as expiration over inspiration: 2 for 1:2.
    pub ratio: Option<f64>,
    /// End-inspiratory pause, s.
    pub pause_s: Option<f64>,
    /// Flow pattern (volume control).
    pub flow_pattern: Option<FlowPattern>,
    /// Dead space of apparatus between the wye and the airway, mL.
    pub apparatus_dead_space_ml: Option<f64>,
}

/// What was measured on this occasion; never inherited.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Measured {
    /// Total respiratory rate, 1/min.
    pub total_rate_per_min: Option<f64>,
    /// Exhaled tidal volume, mL.
    pub exhaled_tidal_volume_ml: Option<f64>,
    /// Minute volume, L/min, a cross-check.
    pub minute_ventilation_l_min: Option<f64>,
    /// Plateau inspiratory pressure, cmH2O.
    pub plateau_cmh2o: Option<f64>,
    /// Peak inspiratory pressure, cmH2O.
    pub peak_cmh2o: Option<f64>,
    /// Total PEEP from an expiratory hold, cmH2O.
    pub total_peep_cmh2o: Option<f64>,
    /// Auto-PEEP from an expiratory hold, cmH2O.
    pub auto_peep_cmh2o: Option<f64>,
    /// Mean airway pressure, cmH2O, a cross-check.
    pub mean_airway_pressure_cmh2o: Option<f64>,
    /// Respiratory-system compliance given outright, mL/cmH2O.
    pub compliance_ml_cmh2o: Option<f64>,
    /// Inspiratory resistance given outright, cmH2O·s/L.
    pub resistance_cmh2o_s_l: Option<f64>,
    /// Expiratory resistance given outright, cmH2O·s/L.
    pub expiratory_resistance_cmh2o_s_l: Option<f64>,
    /// Circuit compliance where the ventilator does not compensate, mL/cmH2O.
    pub circuit_compliance_ml_cmh2o: Option<f64>,
    /// End-tidal PCO2, mmHg.
    pub end_tidal_co2_mmhg: Option<f64>,
    /// Mixed expired PCO2, mmHg.
    pub mixed_expired_co2_mmhg: Option<f64>,
    /// Physiological dead space over tidal volume.
    pub dead_space_fraction: Option<f64>,
    /// CO2 production, mL/min STPD.
    pub co2_production_ml_min: Option<f64>,
    /// Body temperature, °C.
    pub temperature_c: Option<f64>,
    /// Oxygen saturation by pulse oximetry, fraction.
    pub spo2: Option<f64>,
}

/// An arterial gas, as reported at 37 °C.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Gas {
    /// When it was drawn; the entry's own time when not named.
    pub drawn_at: Option<Moment>,
    /// pH.
    pub ph: Option<f64>,
    /// PaCO2, mmHg.
    pub paco2_mmhg: Option<f64>,
    /// PaO2, mmHg.
    pub pao2_mmhg: Option<f64>,
    /// Typed bicarbonate, mmol/L, a cross-check.
    pub bicarbonate_mmol_l: Option<f64>,
}

/// Measurements toward weaning.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Weaning {
    /// Spontaneous rate, 1/min.
    pub spontaneous_rate_per_min: Option<f64>,
    /// Spontaneous tidal volume, mL.
    pub spontaneous_tidal_volume_ml: Option<f64>,
    /// Maximal inspiratory pressure, cmH2O, negative.
    pub inspiratory_pressure_max_cmh2o: Option<f64>,
    /// Vital capacity, mL.
    pub vital_capacity_ml: Option<f64>,
    /// P0.1, cmH2O.
    pub occlusion_pressure_cmh2o: Option<f64>,
    /// FiO2 at which SpO2 was read for readiness.
    pub spo2_fraction_on: Option<f64>,
    /// Heart rate, 1/min.
    pub heart_rate_per_min: Option<f64>,
    /// Systolic pressure, mmHg.
    pub systolic_pressure_mmhg: Option<f64>,
}

/// How a spontaneous breathing trial ended.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum TrialOutcome {
    /// Passed.
    Passed,
    /// Failed.
    Failed,
    /// Stopped for another reason.
    Stopped,
    /// Still running.
    Running,
}

/// What supports the patient during a trial.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum TrialSupport {
    /// Pressure support, cmH2O.
    Pressure(f64),
    /// A T-piece.
    TPiece,
}

/// One observation during a spontaneous breathing trial.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Observation {
    /// Minute of the trial.
    pub minute: f64,
    /// Rate, 1/min.
    pub rate_per_min: Option<f64>,
    /// Tidal volume, mL.
    pub tidal_volume_ml: Option<f64>,
    /// Heart rate, 1/min.
    pub heart_rate_per_min: Option<f64>,
    /// Systolic pressure, mmHg.
    pub systolic_pressure_mmhg: Option<f64>,
    /// Oxygen saturation, fraction.
    pub spo2: Option<f64>,
}

/// A spontaneous breathing trial.
#[derive(Debug, Clone, PartialEq)]
pub struct BreathingTrial {
    /// What supported the patient.
    pub support: Option<TrialSupport>,
    /// When it started.
    pub started_at: Option<Moment>,
    /// How it ended.
    pub outcome: Option<TrialOutcome>,
    /// Observations by the minute.
    pub observations: Vec<Observation>,
}

/// What a plan was meant to move.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Aim {
    /// The rate; volume kept.
    Rate,
    /// The volume (or inspiratory pressure); rate kept.
    Volume,
    /// Both, the gentlest pair.
    Gentle,
}

/// A plan as it was charted, with its forecast.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct ChartedPlan {
    /// The target, mmHg.
    pub target_paco2_mmhg: Option<f64>,
    /// What was moved.
    pub aim: Option<Aim>,
    /// Set rate to dial, 1/min.
    pub rate_per_min: Option<f64>,
    /// Set tidal volume to dial, mL.
    pub tidal_volume_ml: Option<f64>,
    /// Inspiratory pressure to dial, cmH2O.
    pub inspiratory_pressure_cmh2o: Option<f64>,
    /// Plain arithmetic forecast, mmHg.
    pub forecast_paco2_mmhg: Option<f64>,
    /// Median of the forecast, mmHg.
    pub expected_paco2_mmhg: Option<f64>,
    /// 25–75 % interval, mmHg.
    pub half_interval_mmhg: Option<[f64; 2]>,
    /// 5–95 % interval, mmHg.
    pub wide_interval_mmhg: Option<[f64; 2]>,
    /// Minutes until settled.
    pub settle_minutes: Option<f64>,
}

/// One entry of the record.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Entry {
    /// When it was charted.
    pub at: Option<Moment>,
    /// Initials or role.
    pub by: Option<String>,
    /// Settings this entry carries.
    pub settings: SettingsChange,
    /// Measurements of this entry.
    pub measured: Measured,
    /// The gas of this entry.
    pub gas: Gas,
    /// Weaning measurements.
    pub weaning: Weaning,
    /// A spontaneous breathing trial.
    pub trial: Option<BreathingTrial>,
    /// A charted plan.
    pub plan: Option<ChartedPlan>,
    /// Free text.
    pub text: Option<String>,
    /// The entry (from 1) that this one corrects.
    pub amends: Option<usize>,
}
