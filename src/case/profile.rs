//! A profile: the target band, the limits that count here, the ventilator's steps, a unit's own steadiness.

/// What a limit bounds.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum LimitId {
    /// Tidal volume per kg predicted weight, mL/kg.
    TidalVolumePerKg,
    /// Plateau inspiratory pressure, cmH2O.
    Plateau,
    /// Driving pressure, cmH2O.
    DrivingPressure,
    /// Total respiratory rate, 1/min.
    Rate,
    /// Auto-PEEP, cmH2O.
    AutoPeep,
    /// Expiratory time over the expiratory time constant.
    ExpiratoryTimeConstants,
    /// Mechanical power, J/min.
    MechanicalPower,
    /// 4·driving pressure + rate.
    LoadIndex,
    /// pH.
    Ph,
    /// PaCO2, mmHg.
    Paco2,
    /// Fall of PaCO2 within an hour, mmHg.
    Paco2FallPerHour,
}

impl LimitId {
    /// Every limit, in the order they are shown.
    pub const ALL: [Self; 11] = [
        Self::TidalVolumePerKg,
        Self::Plateau,
        Self::DrivingPressure,
        Self::Rate,
        Self::AutoPeep,
        Self::ExpiratoryTimeConstants,
        Self::MechanicalPower,
        Self::LoadIndex,
        Self::Ph,
        Self::Paco2,
        Self::Paco2FallPerHour,
    ];

    /// The key in profile files and JSON.
    pub const fn key(self) -> &'static str {
        match self {
            Self::TidalVolumePerKg => "tidal_volume_per_kg",
            Self::Plateau => "plateau",
            Self::DrivingPressure => "driving_pressure",
            Self::Rate => "rate",
            Self::AutoPeep => "auto_peep",
            Self::ExpiratoryTimeConstants => "expiratory_time_constants",
            Self::MechanicalPower => "mechanical_power",
            Self::LoadIndex => "load_index",
            Self::Ph => "ph",
            Self::Paco2 => "paco2",
            Self::Paco2FallPerHour => "paco2_fall_per_hour",
        }
    }

    /// The unit its bounds and values are in.
    pub const fn unit(self) -> &'static str {
        match self {
            Self::TidalVolumePerKg => "mL/kg",
            Self::Plateau | Self::DrivingPressure | Self::AutoPeep => "cmH2O",
            Self::Rate => "1/min",
            Self::ExpiratoryTimeConstants | Self::LoadIndex | Self::Ph => "1",
            Self::MechanicalPower => "J/min",
            Self::Paco2 => "mmHg",
            Self::Paco2FallPerHour => "mmHg/h",
        }
    }

    /// What a clinician calls it.
    pub const fn words(self) -> &'static str {
        match self {
            Self::TidalVolumePerKg => "tidal volume per kg",
            Self::Plateau => "plateau pressure",
            Self::DrivingPressure => "driving pressure",
            Self::Rate => "total rate",
            Self::AutoPeep => "auto-PEEP",
            Self::ExpiratoryTimeConstants => "expiratory time constants",
            Self::MechanicalPower => "mechanical power",
            Self::LoadIndex => "load index",
            Self::Ph => "pH",
            Self::Paco2 => "PaCO2",
            Self::Paco2FallPerHour => "fall of PaCO2 in an hour",
        }
    }
}

/// One limit of a profile, at least one bound given.
#[derive(Debug, Clone, PartialEq)]
pub struct Limit {
    /// What it bounds.
    pub id: LimitId,
    /// Lower bound.
    pub min: Option<f64>,
    /// Upper bound.
    pub max: Option<f64>,
    /// Where the bound comes from.
    pub source: String,
}

/// The band a profile aims at, low to high.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Band {
    /// A band of pH.
    Ph([f64; 2]),
    /// A band of PaCO2, mmHg.
    Paco2([f64; 2]),
}

/// The steps the ventilator can be dialled in.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Steps {
    /// Rate, 1/min.
    pub rate_per_min: f64,
    /// Tidal volume, mL.
    pub tidal_volume_ml: f64,
    /// Inspiratory pressure, cmH2O.
    pub inspiratory_pressure_cmh2o: f64,
}

impl Default for Steps {
    /// 1/min, 10 mL, 1 cmH2O: common practice.
    fn default() -> Self {
        Self { rate_per_min: 1.0, tidal_volume_ml: 10.0, inspiratory_pressure_cmh2o: 1.0 }
    }
}

/// How steady patients are: the three figures of the belief.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Figures {
    /// Standard deviation of ln PaCO2 between a gas and the truth.
    pub gas: f64,
    /// Standard deviation of the hourly wander of ln PaCO2.
    pub wander_per_hour: f64,
    /// Spread per ln change of alveolar ventilation.
    pub change: f64,
}

/// A profile.
#[derive(Debug, Clone, PartialEq)]
pub struct Profile {
    /// Its name.
    pub name: String,
    /// What it is for, one line.
    pub summary: String,
    /// The band to aim at.
    pub target: Band,
    /// The limits, in the order they are shown.
    pub limits: Vec<Limit>,
    /// The ventilator's steps.
    pub steps: Steps,
    /// The unit's own steadiness, with its source.
    pub steadiness: Option<(Figures, String)>,
}
