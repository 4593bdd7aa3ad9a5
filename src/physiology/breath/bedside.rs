//! What compliance, resistances and time constants the readings at the bedside give.
//!
//! The formulas of a breath turned round. Units as in [`breath`](super); pressures "above PEEP" are differences.

use super::super::root::crossing;
use super::{Lung, Phases, pressure_control::filling};

/// Above this share of what expiration could at most empty, a plateau no longer tells compliance from trapping.
pub const EMPTYING_LIMIT: f64 = 0.7;
/// A compliance above this, mL/cmH2O, from trapping arithmetic is not believed: common practice.
pub const LARGEST_COMPLIANCE: f64 = 150.0;
/// Auto-PEEP, cmH2O, that an expiratory hold may overlook: common practice.
pub const UNSEEN_AUTO_PEEP: f64 = 0.5;
/// Below this share of pressure left at the end of inspiration, inspiratory resistance is too small to be read.
pub const UNFILLED_LIMIT: f64 = 0.02;
/// Time constants that then fit into inspiration.
const FILLED_TIME_CONSTANTS: f64 = 4.0;

/// Why a plateau does not give a compliance with trapping.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Unread {
    /// The volume per cmH2O of plateau is this share of what expiration could at most empty.
    Emptying(f64),
    /// The compliance that would follow, mL/cmH2O.
    Compliance(f64),
}

/// Compliance, mL/cmH2O, when total PEEP was measured: `C = VT/(plateau − PEEPtot)`. Domain: `driving_cmh2o` above 0.
pub fn compliance(tidal_volume_ml: f64, driving_cmh2o: f64) -> f64 {
    tidal_volume_ml / driving_cmh2o
}

/// The share of what expiration could at most empty: `r = (VT/(plateau − PEEP))/(Te/RE)`; 1 or more is impossible.
pub fn emptying_share(
    tidal_volume_ml: f64,
    plateau_above_peep: f64,
    expiratory_s: f64,
    resistance: f64,
) -> f64 {
    (tidal_volume_ml / 1000.0 / plateau_above_peep) / (expiratory_s / resistance)
}

/// Compliance, mL/cmH2O, from a plateau alone with expiratory resistance known: the root of
/// `plateau − PEEP = VT/(C·(1 − exp(−Te/(RE·C))))`.
///
/// # Errors
/// [`Unread::Emptying`] when the share above exceeds 0.7; [`Unread::Compliance`] when the root exceeds 150 mL/cmH2O.
pub fn compliance_with_trapping(
    tidal_volume_ml: f64,
    plateau_above_peep: f64,
    expiratory_s: f64,
    expiratory_resistance: f64,
) -> Result<f64, Unread> {
    let share = emptying_share(tidal_volume_ml, plateau_above_peep, expiratory_s, expiratory_resistance);
    if share > EMPTYING_LIMIT {
        return Err(Unread::Emptying(share));
    }
    let apparent = tidal_volume_ml / plateau_above_peep;
    let miss = |c: f64| c * -libm::expm1(-expiratory_s / (expiratory_resistance * c / 1000.0)) - apparent;
    let root = rising_root(miss, apparent);
    if root > LARGEST_COMPLIANCE { Err(Unread::Compliance(root)) } else { Ok(root) }
}

/// The root of a function that rises from below 0 at `low` and exceeds 0 for a large enough argument.
fn rising_root(miss: impl Fn(f64) -> f64, low: f64) -> f64 {
    let mut high = low * 2.0;
    while miss(high) < 0.0 {
        high *= 2.0;
    }
    crossing(miss, low, high).unwrap_or(low)
}

/// Inspiratory resistance, cmH2O·s/L, from peak and plateau under constant flow: `(peak − plateau)/flow`.
pub fn inspiratory_resistance(peak_cmh2o: f64, plateau_cmh2o: f64, flow_l_s: f64) -> f64 {
    (peak_cmh2o - plateau_cmh2o) / flow_l_s
}

/// Expiratory time constant, s, from a measured auto-PEEP above 0: `b = auto/(auto + ΔP)`, `τE = −Te/ln b`.
pub fn time_constant_from_auto_peep(auto_peep_cmh2o: f64, driving_cmh2o: f64, expiratory_s: f64) -> f64 {
    expiratory_s / libm::log1p(driving_cmh2o / auto_peep_cmh2o)
}

/// The longest expiratory time constant, s, when an expiratory hold showed none: `Te/ln(1 + ΔP/0.5)`.
pub fn longest_time_constant(driving_cmh2o: f64, expiratory_s: f64) -> f64 {
    time_constant_from_auto_peep(UNSEEN_AUTO_PEEP, driving_cmh2o, expiratory_s)
}

/// Inspiratory resistance from a hold in pressure control.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum HoldResistance {
    /// As read, cmH2O·s/L.
    Read(f64),
    /// Too small to be read; taken as if four time constants fitted into inspiration.
    Small(f64),
}

impl HoldResistance {
    /// The resistance, cmH2O·s/L.
    pub const fn value(self) -> f64 {
        match self {
            Self::Read(value) | Self::Small(value) => value,
        }
    }
}

/// Inspiratory resistance, cmH2O·s/L, from a hold in pressure control:
/// `a = (ΔPi − (plateau − PEEP))/(ΔPi − auto-PEEP)`, `RI = −Ti/(C·ln a)`; with `a` at most 0.02 it is small: `Ti/(4·C)`.
/// Domain: auto-PEEP below the plateau above PEEP.
pub fn inspiratory_resistance_from_hold(
    inspiratory_pressure: f64,
    plateau_above_peep: f64,
    auto_peep_cmh2o: f64,
    compliance_ml_cmh2o: f64,
    inspiratory_s: f64,
) -> HoldResistance {
    let unfilled = (inspiratory_pressure - plateau_above_peep) / (inspiratory_pressure - auto_peep_cmh2o);
    let litres = compliance_ml_cmh2o / 1000.0;
    if unfilled <= UNFILLED_LIMIT || unfilled >= 1.0 {
        HoldResistance::Small(inspiratory_s / (FILLED_TIME_CONSTANTS * litres))
    } else {
        HoldResistance::Read(-inspiratory_s / (litres * libm::log(unfilled)))
    }
}

/// Auto-PEEP, cmH2O, from a hold in pressure control when neither total PEEP nor expiratory resistance is known and the
/// two resistances are held equal: the interior root `x` of `x/p = ((ΔPi − p)/(ΔPi − x))^(Te/Ti)`, `p` the plateau above
/// PEEP; 0 when there is none.
///
/// The left side less the right is concave in `x`, negative at 0 and 0 at `p`, so an interior root lies below its top.
pub fn auto_peep_from_hold(inspiratory_pressure: f64, plateau_above_peep: f64, phases: &Phases) -> f64 {
    let p = plateau_above_peep;
    let short = inspiratory_pressure - p;
    if short <= 0.0 {
        return 0.0;
    }
    let n = phases.expiratory_s / phases.inspiratory_s;
    let miss = |x: f64| x / p - libm::pow(short / (inspiratory_pressure - x), n);
    let top = inspiratory_pressure - libm::pow(n * p * libm::pow(short, n), 1.0 / (n + 1.0));
    if top <= 0.0 || top >= p {
        return 0.0;
    }
    crossing(miss, 0.0, top).unwrap_or(0.0)
}

/// Compliance, mL/cmH2O, from the tidal volume that a pressure moves, resistances known: the root of
/// `VT = C·ΔPi·(1 − a)(1 − b)/(1 − a·b)`. `None` when no compliance moves so much: `VT/ΔPi ≥ 1/(RI/Ti + RE/Te)`.
pub fn compliance_from_volume(
    tidal_volume_ml: f64,
    inspiratory_pressure: f64,
    inspiratory_resistance: f64,
    expiratory_resistance: f64,
    phases: &Phases,
) -> Option<f64> {
    let apparent = tidal_volume_ml / inspiratory_pressure;
    let most = 1000.0
        / (inspiratory_resistance / phases.inspiratory_s + expiratory_resistance / phases.expiratory_s);
    if apparent >= most {
        return None;
    }
    let miss = |c: f64| {
        let lung = Lung {
            compliance_ml_cmh2o: c,
            inspiratory_resistance: Some(inspiratory_resistance),
            expiratory_resistance: Some(expiratory_resistance),
        };
        c * filling(&lung, phases).tidal - apparent
    };
    let mut high = apparent * 2.0;
    while miss(high) < 0.0 {
        high *= 2.0;
        if high > 1e9 {
            return None; // so near the limit that rounding hides the root
        }
    }
    crossing(miss, apparent, high)
}

/// Compliance, mL/cmH2O, from the tidal volume that a pressure moves when auto-PEEP was measured: the lung starts at
/// auto-PEEP, so it is the root of `VT = C·(ΔPi − auto)·(1 − a)`. `None` when `VT/(ΔPi − auto) ≥ Ti/RI`.
pub fn compliance_above_auto_peep(
    tidal_volume_ml: f64,
    pressure_above_auto: f64,
    inspiratory_resistance: f64,
    inspiratory_s: f64,
) -> Option<f64> {
    let apparent = tidal_volume_ml / pressure_above_auto;
    if pressure_above_auto <= 0.0 || apparent >= 1000.0 * inspiratory_s / inspiratory_resistance {
        return None;
    }
    let miss = |c: f64| c * -libm::expm1(-inspiratory_s / (inspiratory_resistance * c / 1000.0)) - apparent;
    let mut high = apparent * 2.0;
    while miss(high) < 0.0 && high < 1e9 {
        high *= 2.0;
    }
    crossing(miss, apparent, high)
}

#[cfg(test)]
mod tests {
    use super::super::{pressure_control::PressureBreath, volume_control::VolumeBreath};
    use super::*;

    fn lung(c: f64, ri: f64, re: f64) -> Lung {
        Lung { compliance_ml_cmh2o: c, inspiratory_resistance: Some(ri), expiratory_resistance: Some(re) }
    }

    #[test]
    fn a_plateau_read_back_gives_the_lung_it_came_from() {
        let truth = lung(35.0, 12.0, 20.0);
        let phases = Phases::at_rate(0.9, 0.2, 28.0).unwrap();
        let breath = VolumeBreath {
            tidal_volume_ml: 380.0,
            set_tidal_volume_ml: 380.0,
            peep_cmh2o: Some(10.0),
            constant_flow: true,
            phases,
        };
        let out = breath.breathe(&truth);
        let (plateau, auto) = (out.plateau_cmh2o.unwrap() - 10.0, out.auto_peep_cmh2o.unwrap());
        let c = compliance_with_trapping(380.0, plateau, phases.expiratory_s, 20.0).unwrap();
        assert!((c - 35.0).abs() < 1e-9);
        let tau = time_constant_from_auto_peep(auto, 380.0 / 35.0, phases.expiratory_s);
        assert!((tau - 0.7).abs() < 1e-9);
        let ri = inspiratory_resistance(out.peak_cmh2o.unwrap(), plateau + 10.0, breath.flow_l_s());
        assert!((ri - 12.0).abs() < 1e-9);
    }

    #[test]
    fn a_hold_in_pressure_control_gives_the_lung_back() {
        let truth = lung(45.0, 15.0, 15.0);
        let phases = Phases::at_rate(1.0, 0.0, 24.0).unwrap();
        let breath =
            PressureBreath { inspiratory_pressure_cmh2o: 16.0, peep_cmh2o: Some(6.0), scale: 1.0, phases };
        let out = breath.breathe(&truth);
        let (p, auto) = (out.plateau_cmh2o.unwrap() - 6.0, out.auto_peep_cmh2o.unwrap());
        assert!((auto_peep_from_hold(16.0, p, &phases) - auto).abs() < 1e-9);
        let c = breath.tidal_volume_ml(&truth) / (p - auto);
        assert!((c - 45.0).abs() < 1e-9);
        let ri = inspiratory_resistance_from_hold(16.0, p, auto, c, 1.0);
        assert!(matches!(ri, HoldResistance::Read(r) if (r - 15.0).abs() < 1e-9));
        let again = compliance_from_volume(breath.tidal_volume_ml(&truth), 16.0, 15.0, 15.0, &phases);
        assert!((again.unwrap() - 45.0).abs() < 1e-9);
    }

    #[test]
    fn readings_that_cannot_be_are_refused() {
        // 500 mL over 5 cmH2O is 0.1 L/cmH2O; 1 s of emptying at R 20 gives at most 0.05: r = 2.
        assert_eq!(compliance_with_trapping(500.0, 5.0, 1.0, 20.0), Err(Unread::Emptying(2.0)));
        let phases = Phases::at_rate(1.0, 0.0, 20.0).unwrap();
        assert_eq!(compliance_from_volume(900.0, 10.0, 20.0, 20.0, &phases), None);
        let full = inspiratory_resistance_from_hold(12.0, 12.0, 0.0, 50.0, 1.0);
        // 1/(4·0.05) = 5.
        assert!(matches!(full, HoldResistance::Small(r) if (r - 5.0).abs() < 1e-12));
    }
}
