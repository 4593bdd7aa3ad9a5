//! Ventilator settings in force, complete and checked: what the engine works on.

use super::entry::{Control, FlowPattern};

/// How inspiration is timed: the one quantity that is held when rate or volume changes.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Timing {
    /// Inspiratory time, pause included, s.
    InspiratoryTime(f64),
    /// Mean inspiratory flow, L/min (volume control).
    Flow(f64),
    /// Expiration over inspiration: 2 for 1:2.
    Ratio(f64),
}

/// What is delivered with each breath.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Inflation {
    /// Volume control.
    Volume {
        /// Set tidal volume, mL.
        tidal_volume_ml: f64,
        /// End-inspiratory pause, s.
        pause_s: f64,
        /// Shape of the flow.
        flow_pattern: FlowPattern,
    },
    /// Pressure control.
    Pressure {
        /// Inspiratory pressure above PEEP, cmH2O.
        inspiratory_pressure_cmh2o: f64,
    },
}

/// Settings of a mandatory mode, complete.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Settings {
    /// What is delivered.
    pub inflation: Inflation,
    /// Set rate, 1/min.
    pub rate_per_min: f64,
    /// Set PEEP, cmH2O; `None` only where no airway pressure is known either.
    pub peep_cmh2o: Option<f64>,
    /// Inspired oxygen, fraction.
    pub fio2: Option<f64>,
    /// What times inspiration.
    pub timing: Timing,
    /// True when no timing was given and I:E 1:2 was taken.
    pub timing_assumed: bool,
    /// Apparatus dead space, mL.
    pub apparatus_dead_space_ml: f64,
    /// True when no apparatus dead space was given and 0 was taken.
    pub apparatus_assumed: bool,
}

impl Settings {
    /// Volume or pressure control.
    pub const fn control(&self) -> Control {
        match self.inflation {
            Inflation::Volume { .. } => Control::Volume,
            Inflation::Pressure { .. } => Control::Pressure,
        }
    }

    /// Set tidal volume in volume control, mL.
    pub const fn tidal_volume_ml(&self) -> Option<f64> {
        match self.inflation {
            Inflation::Volume { tidal_volume_ml, .. } => Some(tidal_volume_ml),
            Inflation::Pressure { .. } => None,
        }
    }

    /// Inspiratory pressure above PEEP in pressure control, cmH2O.
    pub const fn inspiratory_pressure_cmh2o(&self) -> Option<f64> {
        match self.inflation {
            Inflation::Volume { .. } => None,
            Inflation::Pressure { inspiratory_pressure_cmh2o } => Some(inspiratory_pressure_cmh2o),
        }
    }

    /// End-inspiratory pause, s; 0 in pressure control.
    pub const fn pause_s(&self) -> f64 {
        match self.inflation {
            Inflation::Volume { pause_s, .. } => pause_s,
            Inflation::Pressure { .. } => 0.0,
        }
    }

    /// Inspiratory time, pause included, s: given, from flow and set volume, or a share of 60/set rate.
    pub fn inspiratory_time_s(&self) -> f64 {
        match self.timing {
            Timing::InspiratoryTime(seconds) => seconds,
            Timing::Flow(l_min) => {
                self.tidal_volume_ml().unwrap_or(0.0) / (l_min * 1000.0 / 60.0) + self.pause_s()
            }
            Timing::Ratio(expiration) => 60.0 / self.rate_per_min / (1.0 + expiration),
        }
    }
}

/// What an entry's settings amount to once inherited ones are added.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum InForce {
    /// A mandatory mode with everything the engine needs.
    Mandatory(Settings),
    /// Support: every breath the patient's own.
    Support {
        /// Inspiratory pressure above PEEP, cmH2O.
        inspiratory_pressure_cmh2o: Option<f64>,
        /// Set PEEP, cmH2O.
        peep_cmh2o: Option<f64>,
        /// Inspired oxygen, fraction.
        fio2: Option<f64>,
    },
    /// Something is missing; the key to give.
    Missing(&'static str),
}

impl InForce {
    /// Inspired oxygen in force, fraction.
    pub const fn fio2(&self) -> Option<f64> {
        match self {
            Self::Mandatory(settings) => settings.fio2,
            Self::Support { fio2, .. } => *fio2,
            Self::Missing(_) => None,
        }
    }

    /// PEEP in force, cmH2O.
    pub const fn peep_cmh2o(&self) -> Option<f64> {
        match self {
            Self::Mandatory(settings) => settings.peep_cmh2o,
            Self::Support { peep_cmh2o, .. } => *peep_cmh2o,
            Self::Missing(_) => None,
        }
    }

    /// The settings, when a mandatory mode is complete.
    pub const fn mandatory(&self) -> Option<&Settings> {
        match self {
            Self::Mandatory(settings) => Some(settings),
            Self::Support { .. } | Self::Missing(_) => None,
        }
    }
}
