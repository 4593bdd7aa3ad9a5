//! Acid and base: bicarbonate, standard base excess, and the pH that a PaCO2 gives while base excess is kept.
//!
//! A change of PaCO2 by ventilation keeps standard base excess within the hour (Schlichtig 1998; Brackett 1965 gives
//! the same pH within 0.006 from 40 to 80 mmHg). Holding bicarbonate constant instead reads pH too low.

use std::f64::consts::LN_10;

/// CO2 solubility in plasma at 37 °C, mmol/L/mmHg: NCCLS/CLSI.
pub const SOLUBILITY_MMOL_L_MMHG: f64 = 0.0307;
/// pK' of carbonic acid in plasma at 37 °C: Henderson–Hasselbalch, common practice.
pub const PK: f64 = 6.1;
/// Bicarbonate at which base excess is 0 at pH 7.40, mmol/L: base excess of extracellular fluid, NCCLS/CLSI form.
pub const NORMAL_BICARBONATE_MMOL_L: f64 = 24.8;
/// Non-bicarbonate buffering of extracellular fluid, mmol/L per pH: the same form.
pub const BUFFER_MMOL_L_PER_PH: f64 = 16.2;
/// pH of reference.
pub const NORMAL_PH: f64 = 7.40;

/// Bicarbonate, mmol/L, from pH and PaCO2 in mmHg: `0.0307·PaCO2·10^(pH − 6.1)`.
pub fn bicarbonate(ph: f64, paco2_mmhg: f64) -> f64 {
    SOLUBILITY_MMOL_L_MMHG * paco2_mmhg * libm::pow(10.0, ph - PK)
}

/// pH from bicarbonate in mmol/L and PaCO2 in mmHg (Henderson–Hasselbalch). Domain: both above 0.
pub fn ph(bicarbonate_mmol_l: f64, paco2_mmhg: f64) -> f64 {
    PK + libm::log10(bicarbonate_mmol_l / (SOLUBILITY_MMOL_L_MMHG * paco2_mmhg))
}

/// Standard base excess, mmol/L: `HCO3 − 24.8 + 16.2·(pH − 7.40)`.
pub fn base_excess(ph: f64, paco2_mmhg: f64) -> f64 {
    bicarbonate(ph, paco2_mmhg) - NORMAL_BICARBONATE_MMOL_L + BUFFER_MMOL_L_PER_PH * (ph - NORMAL_PH)
}

/// The pH that `paco2_mmhg` gives while base excess is kept: the one root of
/// `6.1 + log10((24.8 + SBE − 16.2·(pH − 7.4))/(0.0307·PaCO2)) − pH`. Domain: PaCO2 above 0.
///
/// Solved for bicarbonate `h`: `h + 16.2·log10 h = A` has an increasing concave left side, so Newton's method from
/// below never overshoots.
pub fn ph_at(base_excess_mmol_l: f64, paco2_mmhg: f64) -> f64 {
    let per_ln = BUFFER_MMOL_L_PER_PH / LN_10;
    let whole = NORMAL_BICARBONATE_MMOL_L
        + base_excess_mmol_l
        + BUFFER_MMOL_L_PER_PH * (NORMAL_PH - PK + libm::log10(SOLUBILITY_MMOL_L_MMHG * paco2_mmhg));
    let miss = |h: f64| h + per_ln * libm::log(h) - whole;
    let mut h: f64 = 8.0;
    while miss(h) > 0.0 {
        h /= 4.0;
    }
    for _ in 0..100 {
        let next = h - miss(h) / (1.0 + per_ln / h);
        let done = (next - h).abs() <= 2.0 * f64::EPSILON * h;
        h = next;
        if done {
            break;
        }
    }
    ph(h, paco2_mmhg)
}

/// The PaCO2, mmHg, at which `ph` stands while base excess is kept: `(24.8 + SBE − 16.2·(pH − 7.4))/(0.0307·10^(pH − 6.1))`.
/// Zero or negative when no PaCO2 gives that pH.
pub fn paco2_at(base_excess_mmol_l: f64, ph: f64) -> f64 {
    let bicarbonate =
        NORMAL_BICARBONATE_MMOL_L + base_excess_mmol_l - BUFFER_MMOL_L_PER_PH * (ph - NORMAL_PH);
    bicarbonate / (SOLUBILITY_MMOL_L_MMHG * libm::pow(10.0, ph - PK))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn hand_worked_points() {
        // 0.0307·40·10^1.3 = 1.228·19.9526 = 24.5018; SBE = 24.5018 − 24.8 = −0.2982.
        assert!((bicarbonate(7.40, 40.0) - 24.5018).abs() < 1e-4);
        assert!((base_excess(7.40, 40.0) + 0.2982).abs() < 1e-4);
        assert!((ph(24.5018, 40.0) - 7.40).abs() < 1e-5);
    }

    #[test]
    fn ph_and_paco2_are_inverses_over_the_whole_range() {
        for sbe in [-22.0, -10.0, 0.0, 12.0, 30.0] {
            for paco2 in [5.0, 10.0, 40.0, 63.0, 150.0, 900.0] {
                let there = ph_at(sbe, paco2);
                assert!((paco2_at(sbe, there) / paco2 - 1.0).abs() < 1e-12, "{sbe} {paco2} {there}");
                assert!((base_excess(there, paco2) - sbe).abs() < 1e-10);
            }
        }
    }

    #[test]
    fn no_paco2_gives_an_impossible_ph() {
        assert!(paco2_at(-24.0, 7.6) < 0.0);
    }
}
