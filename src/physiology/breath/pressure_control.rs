//! Pressure control: a square pressure above PEEP; the volume follows from the lung and the time it is given.

use super::{Breath, Lung, Phases};

/// What one cmH2O of inspiratory pressure moves at the periodic steady state, per mL/cmH2O of compliance.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Filling {
    /// Tidal volume as a share of C·ΔPi.
    pub tidal: f64,
    /// End-inspiratory volume as a share of C·ΔPi.
    pub end_inspiratory: f64,
    /// Trapped volume as a share of C·ΔPi; `None` where it is unknown.
    pub trapped: Option<f64>,
}

/// How far the lung fills and empties:
/// `a = exp(−Ti/(RI·C))`, `b = exp(−Te/(RE·C))`, end-inspiratory `(1 − a)/(1 − a·b)`, trapped that times `b`.
///
/// Without expiratory resistance nothing is held to stay behind (b = 0); without inspiratory resistance the lung is
/// held to fill (a = 0). Source: Marini & Crooke 1989; validated by Burke 1993.
pub fn filling(lung: &Lung, phases: &Phases) -> Filling {
    let unfilled = lung
        .inspiratory_resistance
        .map_or(0.0, |resistance| libm::exp(-phases.inspiratory_s / lung.time_constant_s(resistance)));
    let unemptied = lung.expiratory_time_constant_s().map(|tau| libm::exp(-phases.expiratory_s / tau));
    let (Some(left), Some(_)) = (unemptied, lung.inspiratory_resistance) else {
        return Filling { tidal: 1.0 - unfilled, end_inspiratory: 1.0 - unfilled, trapped: None };
    };
    let end_inspiratory = (1.0 - unfilled) / (1.0 - unfilled * left);
    let trapped = end_inspiratory * left;
    Filling { tidal: end_inspiratory - trapped, end_inspiratory, trapped: Some(trapped) }
}

/// A breath in pressure control.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct PressureBreath {
    /// Inspiratory pressure above PEEP, cmH2O.
    pub inspiratory_pressure_cmh2o: f64,
    /// Set PEEP, cmH2O.
    pub peep_cmh2o: Option<f64>,
    /// Measured over modelled tidal volume, which scales every volume; 1 when they agree.
    pub scale: f64,
    /// Its timing.
    pub phases: Phases,
}

impl PressureBreath {
    /// Tidal volume, mL: `scale·C·ΔPi·(end-inspiratory − trapped share)`.
    pub fn tidal_volume_ml(&self, lung: &Lung) -> f64 {
        self.scale
            * lung.compliance_ml_cmh2o
            * self.inspiratory_pressure_cmh2o
            * filling(lung, &self.phases).tidal
    }

    /// The periodic steady state:
    ///
    /// ```text
    /// Vei = C·ΔPi·(1 − a)/(1 − a·b)    Vee = Vei·b    VT = Vei − Vee    auto-PEEP = Vee/C    ΔP = VT/C
    /// plateau = PEEP + Vei/C           peak = PEEP + ΔPi
    /// mean = [Ti·(PEEP + ΔPi) + Te·PEEP]/(Ti + Te)          work = VT·(PEEP + ΔPi)
    /// ```
    ///
    /// Source: Marini & Crooke 1989; work by Becher 2019, from memory, exact for a square pressure.
    pub fn breathe(&self, lung: &Lung) -> Breath {
        let share = filling(lung, &self.phases);
        let full_ml = self.scale * lung.compliance_ml_cmh2o * self.inspiratory_pressure_cmh2o;
        let full_cmh2o = self.scale * self.inspiratory_pressure_cmh2o;
        let auto = share.trapped.map(|trapped| full_cmh2o * trapped);
        let peak = self.peep_cmh2o.map(|peep| peep + self.inspiratory_pressure_cmh2o);
        let Phases { inspiratory_s, expiratory_s, .. } = self.phases;
        Breath {
            trapped_ml: share.trapped.map(|trapped| full_ml * trapped),
            auto_peep_cmh2o: auto,
            total_peep_cmh2o: self.peep_cmh2o.zip(auto).map(|(peep, auto)| peep + auto),
            driving_pressure_cmh2o: Some(full_cmh2o * share.tidal),
            plateau_cmh2o: self.peep_cmh2o.map(|peep| peep + full_cmh2o * share.end_inspiratory),
            peak_cmh2o: peak,
            mean_cmh2o: self
                .peep_cmh2o
                .zip(peak)
                .map(|(peep, peak)| (inspiratory_s * peak + expiratory_s * peep) / self.phases.period_s()),
            work_cmh2o_ml: peak.map(|peak| full_ml * share.tidal * peak),
            expiratory_time_constants: lung
                .expiratory_time_constant_s()
                .filter(|_| share.trapped.is_some())
                .map(|tau| expiratory_s / tau),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Marini & Crooke's closed form, numbers checked by integration outside this project:
    /// `ΔPi` 18, I:E 1:2, RI 18, RE 25, C 60: rate 10 gives 856.6 mL and auto-PEEP 1.07; rate 20 gives 536.2 mL and 3.20.
    #[test]
    fn obstructed_lung_at_two_rates() {
        let lung = Lung {
            compliance_ml_cmh2o: 60.0,
            inspiratory_resistance: Some(18.0),
            expiratory_resistance: Some(25.0),
        };
        for (rate, volume, auto) in [(10.0, 856.575, 1.06603), (20.0, 536.2, 3.19913)] {
            let breath = PressureBreath {
                inspiratory_pressure_cmh2o: 18.0,
                peep_cmh2o: Some(5.0),
                scale: 1.0,
                phases: Phases::at_rate(60.0 / rate / 3.0, 0.0, rate).unwrap(),
            };
            assert!((breath.tidal_volume_ml(&lung) - volume).abs() < 0.05);
            let out = breath.breathe(&lung);
            assert!((out.auto_peep_cmh2o.unwrap() - auto).abs() < 1e-4);
            assert!((out.driving_pressure_cmh2o.unwrap() - volume / 60.0).abs() < 0.001);
        }
    }

    #[test]
    fn without_resistance_pressure_and_compliance_alone_decide() {
        let lung =
            Lung { compliance_ml_cmh2o: 40.0, inspiratory_resistance: None, expiratory_resistance: None };
        let breath = PressureBreath {
            inspiratory_pressure_cmh2o: 15.0,
            peep_cmh2o: Some(8.0),
            scale: 1.0,
            phases: Phases::at_rate(1.0, 0.0, 20.0).unwrap(),
        };
        let out = breath.breathe(&lung);
        assert!((breath.tidal_volume_ml(&lung) - 600.0).abs() < 1e-12);
        assert_eq!((out.plateau_cmh2o, out.peak_cmh2o), (Some(23.0), Some(23.0)));
        assert_eq!((out.auto_peep_cmh2o, out.expiratory_time_constants), (None, None));
        // (1·23 + 2·8)/3 = 13.
        assert!((out.mean_cmh2o.unwrap() - 13.0).abs() < 1e-12);
    }
}
