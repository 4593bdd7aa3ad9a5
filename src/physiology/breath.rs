//! Breath mechanics: one linear compartment, inflated under volume or pressure control, emptying passively.
//!
//! Throughout: volumes mL, airway pressures cmH2O, times s, compliance mL/cmH2O, resistance cmH2O·s/L.
//! What cannot be known is `None`, never 0.

pub mod bedside;
pub mod pressure_control;
pub mod volume_control;

/// J/min per cmH2O·L/min: 1 cmH2O·L = 0.0980665 J, rounded as the published formulas do (Gattinoni 2016).
pub const JOULE_PER_CMH2O_L: f64 = 0.098;
/// Expiration shorter than this, s, is not a breath that can be dialled.
pub const SHORTEST_EXPIRATION_S: f64 = 0.1;

/// The mechanical properties of lung and chest wall, as far as they are known.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Lung {
    /// Respiratory-system compliance, mL/cmH2O.
    pub compliance_ml_cmh2o: f64,
    /// Inspiratory resistance, cmH2O·s/L.
    pub inspiratory_resistance: Option<f64>,
    /// Expiratory resistance, cmH2O·s/L; `None` also where trapping is unknown for another reason.
    pub expiratory_resistance: Option<f64>,
}

impl Lung {
    /// Time constant, s, of this compliance with `resistance`: `τ = R·C`.
    pub fn time_constant_s(&self, resistance: f64) -> f64 {
        resistance * self.compliance_ml_cmh2o / 1000.0
    }

    /// Expiratory time constant, s.
    pub fn expiratory_time_constant_s(&self) -> Option<f64> {
        self.expiratory_resistance.map(|resistance| self.time_constant_s(resistance))
    }
}

/// The timing of one breath.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Phases {
    /// Inspiration, pause included, s.
    pub inspiratory_s: f64,
    /// The pause at its end, s.
    pub pause_s: f64,
    /// Expiration, s.
    pub expiratory_s: f64,
}

impl Phases {
    /// Phases of a breath that is repeated `rate_per_min` times: `Te = 60/rate − Ti`.
    /// `None` when expiration would not exceed 0.1 s or the pause leaves no time to inflate.
    pub fn at_rate(inspiratory_s: f64, pause_s: f64, rate_per_min: f64) -> Option<Self> {
        let expiratory_s = 60.0 / rate_per_min - inspiratory_s;
        (expiratory_s > SHORTEST_EXPIRATION_S && inspiratory_s > pause_s).then_some(Self {
            inspiratory_s,
            pause_s,
            expiratory_s,
        })
    }

    /// The whole breath, s.
    pub fn period_s(&self) -> f64 {
        self.inspiratory_s + self.expiratory_s
    }
}

/// One breath at the periodic steady state.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Breath {
    /// Volume still in the lung above its resting volume at PEEP when the next breath begins, mL.
    pub trapped_ml: Option<f64>,
    /// Auto-PEEP, cmH2O.
    pub auto_peep_cmh2o: Option<f64>,
    /// Total PEEP, cmH2O.
    pub total_peep_cmh2o: Option<f64>,
    /// Driving pressure, plateau − total PEEP, cmH2O.
    pub driving_pressure_cmh2o: Option<f64>,
    /// Plateau inspiratory pressure (alveolar, end of inspiration), cmH2O.
    pub plateau_cmh2o: Option<f64>,
    /// Peak inspiratory pressure, cmH2O.
    pub peak_cmh2o: Option<f64>,
    /// Mean airway pressure, cmH2O.
    pub mean_cmh2o: Option<f64>,
    /// Work per breath, cmH2O·mL.
    pub work_cmh2o_ml: Option<f64>,
    /// Expiratory time over the expiratory time constant.
    pub expiratory_time_constants: Option<f64>,
}

impl Breath {
    /// Mechanical power, J/min: `0.098·rate·work` with work in cmH2O·L.
    pub fn power_j_min(&self, rate_per_min: f64) -> Option<f64> {
        self.work_cmh2o_ml.map(|work| JOULE_PER_CMH2O_L * rate_per_min * work / 1000.0)
    }

    /// Load index: `4·ΔP + rate`. Source: Costa 2021, from memory.
    pub fn load_index(&self, rate_per_min: f64) -> Option<f64> {
        self.driving_pressure_cmh2o.map(|driving| 4.0 * driving + rate_per_min)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_breath_needs_time_to_leave() {
        let phases = Phases::at_rate(1.0, 0.2, 20.0).unwrap();
        assert!((phases.expiratory_s - 2.0).abs() < 1e-12 && (phases.period_s() - 3.0).abs() < 1e-12);
        assert_eq!(Phases::at_rate(1.0, 0.0, 60.0), None);
        assert_eq!(Phases::at_rate(1.0, 1.0, 20.0), None);
    }

    #[test]
    fn power_and_load_index_hand_worked() {
        // 0.098·15·0.5 L·13.75 cmH2O = 10.106 J/min (Gattinoni 2016's example); 4·10.5 + 20 = 62 (Costa 2021).
        let breath = Breath {
            work_cmh2o_ml: Some(500.0 * 13.75),
            driving_pressure_cmh2o: Some(10.5),
            ..Breath::default()
        };
        assert!((breath.power_j_min(15.0).unwrap() - 10.106).abs() < 0.001);
        assert!((breath.load_index(20.0).unwrap() - 62.0).abs() < 1e-12);
    }
}
