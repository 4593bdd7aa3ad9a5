//! Volume control: the tidal volume is delivered whatever is trapped.

use super::{Breath, Lung, Phases};

/// A breath in volume control.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct VolumeBreath {
    /// The volume that reaches and leaves the lung, mL.
    pub tidal_volume_ml: f64,
    /// The volume set on the ventilator, which the flow delivers, mL.
    pub set_tidal_volume_ml: f64,
    /// Set PEEP, cmH2O.
    pub peep_cmh2o: Option<f64>,
    /// True for constant flow; with a falling flow peak, mean and work are unknown.
    pub constant_flow: bool,
    /// Its timing.
    pub phases: Phases,
}

impl VolumeBreath {
    /// Inspiratory flow, L/s: set volume over the time without pause.
    pub fn flow_l_s(&self) -> f64 {
        self.set_tidal_volume_ml / 1000.0 / (self.phases.inspiratory_s - self.phases.pause_s)
    }

    /// The periodic steady state:
    ///
    /// ```text
    /// b = exp(−Te/(RE·C))       trapped = VT·b/(1 − b)     auto-PEEP = trapped/C
    /// ΔP = VT/C                 plateau = PEEPtot + ΔP     peak = plateau + RI·flow
    /// mean = [(Ti − pause)·(PEEPtot + RI·flow + ΔP/2) + pause·plateau + Te·PEEP]/(Ti + Te)
    /// work = VT·(peak − ΔP/2)
    /// ```
    ///
    /// Where expiratory resistance is unknown, trapping is unknown and the other pressures stand with total PEEP = PEEP.
    /// Source: Marini & Crooke 1989 and Gattinoni 2016; checked by integration.
    pub fn breathe(&self, lung: &Lung) -> Breath {
        let compliance = lung.compliance_ml_cmh2o;
        let driving = self.tidal_volume_ml / compliance;
        let constants = lung.expiratory_time_constant_s().map(|tau| self.phases.expiratory_s / tau);
        let trapped = constants.map(|n| {
            let left = libm::exp(-n);
            self.tidal_volume_ml * left / (1.0 - left)
        });
        let auto = trapped.map(|volume| volume / compliance);
        let base = self.peep_cmh2o.map(|peep| peep + auto.unwrap_or(0.0));
        let plateau = base.map(|base| base + driving);
        let resistive = lung
            .inspiratory_resistance
            .filter(|_| self.constant_flow)
            .map(|resistance| resistance * self.flow_l_s());
        let peak = plateau.zip(resistive).map(|(plateau, resistive)| plateau + resistive);
        let Phases { inspiratory_s, pause_s, expiratory_s } = self.phases;
        let mean = match (self.peep_cmh2o, base, plateau, resistive) {
            (Some(peep), Some(base), Some(plateau), Some(resistive)) => Some(
                ((inspiratory_s - pause_s) * (base + resistive + driving / 2.0)
                    + pause_s * plateau
                    + expiratory_s * peep)
                    / self.phases.period_s(),
            ),
            _ => None,
        };
        Breath {
            trapped_ml: trapped,
            auto_peep_cmh2o: auto,
            total_peep_cmh2o: auto.and(base),
            driving_pressure_cmh2o: Some(driving),
            plateau_cmh2o: plateau,
            peak_cmh2o: peak,
            mean_cmh2o: mean,
            work_cmh2o_ml: peak.map(|peak| self.tidal_volume_ml * (peak - driving / 2.0)),
            expiratory_time_constants: constants,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn breath() -> VolumeBreath {
        VolumeBreath {
            tidal_volume_ml: 500.0,
            set_tidal_volume_ml: 500.0,
            peep_cmh2o: Some(5.0),
            constant_flow: true,
            phases: Phases::at_rate(1.0, 0.0, 20.0).unwrap(),
        }
    }

    /// VT 500 mL, rate 20, I:E 1:2, R 25, C 60: auto-PEEP 2.98294 cmH2O (derived by hand from the exponential).
    #[test]
    fn traps_what_the_exponential_leaves() {
        let lung = Lung {
            compliance_ml_cmh2o: 60.0,
            inspiratory_resistance: Some(25.0),
            expiratory_resistance: Some(25.0),
        };
        let out = breath().breathe(&lung);
        assert!((out.auto_peep_cmh2o.unwrap() - 2.98294).abs() < 1e-5);
        assert!((out.trapped_ml.unwrap() - 2.98294 * 60.0).abs() < 1e-3);
        assert!((out.driving_pressure_cmh2o.unwrap() - 500.0 / 60.0).abs() < 1e-12);
        // peak = 5 + 2.98294 + 8.33333 + 25·0.5 = 28.81627, by hand.
        assert!((out.peak_cmh2o.unwrap() - 28.81627).abs() < 1e-4);
    }

    #[test]
    fn unknown_stays_unknown() {
        let lung =
            Lung { compliance_ml_cmh2o: 50.0, inspiratory_resistance: None, expiratory_resistance: None };
        let out = breath().breathe(&lung);
        assert_eq!(out.plateau_cmh2o, Some(15.0));
        for unknown in
            [out.peak_cmh2o, out.mean_cmh2o, out.auto_peep_cmh2o, out.total_peep_cmh2o, out.work_cmh2o_ml]
        {
            assert_eq!(unknown, None);
        }
    }
}
