//! Body CO2 stores: how PaCO2 travels from one steady state to the next.
//!
//! Two stores, a fast one that the lungs see and a slow one behind it:
//!
//! ```text
//! Sf·dPf/dt = V̇CO2 − V̇A·Pf/K − G·(Pf − Ps)        Ss·dPs/dt = G·(Pf − Ps)        PaCO2 = Pf
//! ```
//!
//! For fixed settings this is linear and solved in closed form. The sizes reproduce an immediate store of about 0.5
//! (Fowle & Campbell 1964, from memory) and a whole-body store of 1.5–1.8 mL/kg/mmHg (Farhi & Rahn 1955 and man in
//! exercise), half-times of about 3 and 16 min for doubled and halved ventilation (Nunn, from memory), and
//! 3.4–4.4 mmHg/min in apnoea after the first minute (Kobayashi 1994).

use super::root::crossing;

/// Fast store, mL STPD/mmHg per kg predicted weight.
pub const FAST_ML_MMHG_KG: f64 = 0.6;
/// Slow store, mL STPD/mmHg per kg predicted weight.
pub const SLOW_ML_MMHG_KG: f64 = 1.0;
/// Exchange between them, mL/min/mmHg per kg predicted weight.
pub const EXCHANGE_ML_MIN_MMHG_KG: f64 = 0.02;
/// PaCO2 has settled when it stays this near its final value, mmHg …
const SETTLED_MMHG: f64 = 2.0;
/// … or within this share of the final value …
const SETTLED_OF_FINAL: f64 = 0.05;
/// … or within this share of the whole change.
const SETTLED_OF_CHANGE: f64 = 0.20;

/// The way of PaCO2 from a start to a final value under fixed settings.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Course {
    start_mmhg: f64,
    final_mmhg: f64,
    fast_rate_per_min: f64,
    slow_rate_per_min: f64,
    fast_share: f64,
}

impl Course {
    /// The course for a patient of `predicted_weight_kg` making `co2_output_ml_min` (STPD), from `start_mmhg` in both
    /// stores to `final_mmhg`; V̇A/K is taken so that the end point is `final_mmhg`. Domain: all above 0.
    pub fn new(predicted_weight_kg: f64, co2_output_ml_min: f64, start_mmhg: f64, final_mmhg: f64) -> Self {
        let clearance = co2_output_ml_min / final_mmhg / predicted_weight_kg;
        let washout = clearance / FAST_ML_MMHG_KG;
        let a = washout + EXCHANGE_ML_MIN_MMHG_KG / FAST_ML_MMHG_KG;
        let b = EXCHANGE_ML_MIN_MMHG_KG / FAST_ML_MMHG_KG;
        let c = EXCHANGE_ML_MIN_MMHG_KG / SLOW_ML_MMHG_KG;
        // Eigenvalues of [[−a, b], [c, −c]]; both are negative since a > b.
        let spread = ((a - c) * (a - c) + 4.0 * b * c).sqrt();
        let (fast, slow) = (f64::midpoint(a + c, spread), f64::midpoint(a + c, -spread));
        Self {
            start_mmhg,
            final_mmhg,
            fast_rate_per_min: fast,
            slow_rate_per_min: slow,
            fast_share: (washout - slow) / (fast - slow),
        }
    }

    /// The share of the change still to come after `minutes`, 1 at the start.
    fn remaining(&self, minutes: f64) -> f64 {
        self.fast_share * libm::exp(-self.fast_rate_per_min * minutes)
            + (1.0 - self.fast_share) * libm::exp(-self.slow_rate_per_min * minutes)
    }

    /// PaCO2, mmHg, after `minutes` (0 or more).
    pub fn paco2_mmhg(&self, minutes: f64) -> f64 {
        self.final_mmhg + (self.start_mmhg - self.final_mmhg) * self.remaining(minutes)
    }

    /// The minute after which PaCO2 stays within max(2 mmHg, 5 % of the final value, 20 % of the change) of its final
    /// value; 0 when it is there from the start.
    pub fn settled_minutes(&self) -> f64 {
        let change = (self.start_mmhg - self.final_mmhg).abs();
        let near = SETTLED_MMHG.max(SETTLED_OF_FINAL * self.final_mmhg).max(SETTLED_OF_CHANGE * change);
        if change <= near {
            return 0.0;
        }
        let miss = |minutes: f64| change * self.remaining(minutes) - near;
        let mut late = 8.0;
        while miss(late) > 0.0 {
            late *= 2.0;
        }
        crossing(miss, 0.0, late).unwrap_or(late)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn starts_where_it_starts_and_ends_at_the_forecast() {
        let course = Course::new(60.0, 180.0, 63.0, 50.0);
        assert!((course.paco2_mmhg(0.0) - 63.0).abs() < 1e-12);
        assert!((course.paco2_mmhg(10_000.0) - 50.0).abs() < 1e-9);
    }

    #[test]
    fn no_change_is_settled_at_once() {
        assert!(Course::new(60.0, 180.0, 40.0, 40.0).settled_minutes() < 1e-12);
        assert!(Course::new(60.0, 180.0, 41.9, 40.0).settled_minutes() < 1e-12);
    }

    /// Half-times of about 3 min when ventilation doubles and 16 min when it halves, in man: Nunn, from memory.
    #[test]
    fn a_rise_is_slower_than_a_fall() {
        let half_time = |start: f64, end: f64| {
            let course = Course::new(70.0, 200.0, start, end);
            crossing(|t| course.remaining(t) - 0.5, 0.0, 200.0).unwrap()
        };
        let (fall, rise) = (half_time(40.0, 20.0), half_time(40.0, 80.0));
        assert!((2.0..5.0).contains(&fall), "{fall}");
        assert!((12.0..20.0).contains(&rise), "{rise}");
    }
}
