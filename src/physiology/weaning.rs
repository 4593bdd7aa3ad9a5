//! Weaning indices and the published bounds of readiness and of a spontaneous breathing trial.

/// Where the bounds of readiness and of trials come from.
pub const BOLES: &str = "Boles 2007 (Eur Respir J 29:1033)";
/// Where the rapid shallow breathing index and CROP come from.
pub const YANG: &str = "Yang and Tobin 1991 (N Engl J Med 324:1445)";
/// Where the integrative index comes from.
pub const NEMER: &str = "Nemer 2009 (Crit Care 13:R152)";

/// Below it weaning is likely to succeed, breaths/min/L: Yang and Tobin 1991.
pub const RAPID_SHALLOW_BELOW: f64 = 105.0;
/// Above it weaning is likely to succeed, mL per breath/min: Yang and Tobin 1991, from memory.
pub const CROP_ABOVE: f64 = 13.0;
/// Above it weaning is likely to succeed, mL/cmH2O per breaths/min/L: Nemer 2009.
pub const INTEGRATIVE_ABOVE: f64 = 25.0;

/// Rapid shallow breathing index `f/VT`, breaths/min/L: spontaneous rate in 1/min, spontaneous tidal volume in mL.
/// Source: Yang and Tobin 1991.
///
/// ```
/// use tidewright::physiology::weaning::rapid_shallow_breathing_index;
/// assert!((rapid_shallow_breathing_index(25.0, 350.0) - 71.4286).abs() < 1e-4);
/// ```
pub fn rapid_shallow_breathing_index(rate_per_min: f64, tidal_volume_ml: f64) -> f64 {
    rate_per_min / (tidal_volume_ml / 1000.0)
}

/// CROP, mL per breath/min: dynamic compliance (mL/cmH2O) × size of the maximal inspiratory pressure (cmH2O, given
/// negative) × PaO2/PAO2 over the spontaneous rate (1/min). Source: Yang and Tobin 1991.
pub fn crop_index(
    dynamic_compliance_ml_cmh2o: f64,
    inspiratory_pressure_max_cmh2o: f64,
    arterial_over_alveolar_po2: f64,
    rate_per_min: f64,
) -> f64 {
    dynamic_compliance_ml_cmh2o * inspiratory_pressure_max_cmh2o.abs() * arterial_over_alveolar_po2
        / rate_per_min
}

/// Integrative weaning index, mL/cmH2O per breaths/min/L: static compliance (mL/cmH2O) × arterial saturation (in percent)
/// over the rapid shallow breathing index. `saturation` is a fraction here. Source: Nemer 2009.
pub fn integrative_index(static_compliance_ml_cmh2o: f64, saturation: f64, rapid_shallow: f64) -> f64 {
    static_compliance_ml_cmh2o * saturation * 100.0 / rapid_shallow
}

/// Readiness for a trial. Source of each: Boles 2007, tables 5 and 6.
pub mod readiness {
    /// Heart rate at most, 1/min.
    pub const HEART_RATE_MAX: f64 = 140.0;
    /// Systolic pressure from, mmHg.
    pub const SYSTOLIC_MIN_MMHG: f64 = 90.0;
    /// Systolic pressure to, mmHg.
    pub const SYSTOLIC_MAX_MMHG: f64 = 160.0;
    /// Arterial saturation above, fraction.
    pub const SATURATION_ABOVE: f64 = 0.90;
    /// With FiO2 at most.
    pub const FIO2_MAX: f64 = 0.4;
    /// Or PaO2/FiO2 at least, mmHg.
    pub const PAO2_FIO2_MIN_MMHG: f64 = 150.0;
    /// PEEP at most, cmH2O.
    pub const PEEP_MAX_CMH2O: f64 = 8.0;
    /// Rate at most, 1/min.
    pub const RATE_MAX: f64 = 35.0;
    /// Maximal inspiratory pressure at most, cmH2O: printed as −20 to −25, the milder end.
    pub const INSPIRATORY_PRESSURE_MAX_CMH2O: f64 = -20.0;
    /// Tidal volume above, mL/kg predicted weight.
    pub const TIDAL_VOLUME_ABOVE_ML_KG: f64 = 5.0;
    /// Vital capacity above, mL/kg predicted weight.
    pub const VITAL_CAPACITY_ABOVE_ML_KG: f64 = 10.0;
}

/// When a trial has failed. Source of each: Boles 2007, tables 5 and 6.
pub mod stop {
    /// Rate above, 1/min.
    pub const RATE_ABOVE: f64 = 35.0;
    /// Or rate up by this share.
    pub const RATE_RISE: f64 = 0.50;
    /// Rapid shallow breathing index above, breaths/min/L.
    pub const RAPID_SHALLOW_ABOVE: f64 = 105.0;
    /// Heart rate above, 1/min.
    pub const HEART_RATE_ABOVE: f64 = 140.0;
    /// Or heart rate up by this share.
    pub const HEART_RATE_RISE: f64 = 0.20;
    /// Systolic pressure above, mmHg.
    pub const SYSTOLIC_ABOVE_MMHG: f64 = 180.0;
    /// Or systolic pressure up by this share.
    pub const SYSTOLIC_RISE: f64 = 0.20;
    /// Or systolic pressure below, mmHg.
    pub const SYSTOLIC_BELOW_MMHG: f64 = 90.0;
    /// Saturation below, fraction.
    pub const SATURATION_BELOW: f64 = 0.90;
    /// PaO2 at or below, mmHg: printed as 50 to 60, the earlier warning …
    pub const PAO2_MMHG: f64 = 60.0;
    /// … on FiO2 of this or more.
    pub const PAO2_COUNTS_FROM_FIO2: f64 = 0.5;
    /// PaCO2 above, mmHg.
    pub const PACO2_ABOVE_MMHG: f64 = 50.0;
    /// Or PaCO2 up by more than, mmHg.
    pub const PACO2_RISE_MMHG: f64 = 8.0;
    /// pH below.
    pub const PH_BELOW: f64 = 7.32;
    /// Or pH down by, or more.
    pub const PH_FALL: f64 = 0.07;
}
