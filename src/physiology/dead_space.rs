//! Dead space: the part of each breath that meets no blood.
//!
//! `VDs`, the series dead space (airway and apparatus), is a volume. `f`, the alveolar dead-space fraction, is the
//! share of the gas past the airway that still meets no blood. `VDphys = VDs + f·(VT − VDs)`.

use crate::quantity::typed::{GasPressure, Volume};

/// Airway dead space per kg predicted weight with a native airway, mL/kg: Radford 1955 (1 mL per pound).
pub const NATIVE_AIRWAY_ML_PER_KG: f64 = 2.2;
/// Behind a tracheal tube or tracheostomy, mL/kg: about half (Nunn, from memory).
pub const TUBE_AIRWAY_ML_PER_KG: f64 = 1.1;
/// Native airway without a predicted weight, mL: common practice.
pub const NATIVE_AIRWAY_ML: f64 = 140.0;
/// Tube or tracheostomy without a predicted weight, mL: half of the native one.
pub const TUBE_AIRWAY_ML: f64 = 70.0;
/// The largest alveolar fraction an estimate may give: beyond it the estimated CO2 output is at fault.
pub const LARGEST_ESTIMATED_FRACTION: f64 = 0.85;

/// Airway dead space by rule; `native` is an airway without tube or tracheostomy.
pub fn airway_by_rule(predicted_weight_kg: Option<f64>, native: bool) -> Volume {
    Volume::from_ml(match (predicted_weight_kg, native) {
        (Some(kg), true) => NATIVE_AIRWAY_ML_PER_KG * kg,
        (Some(kg), false) => TUBE_AIRWAY_ML_PER_KG * kg,
        (None, true) => NATIVE_AIRWAY_ML,
        (None, false) => TUBE_AIRWAY_ML,
    })
}

/// VD/VT by Enghoff 1938: `1 − PĒCO2/PaCO2`, both at body temperature.
pub fn enghoff(mixed_expired: GasPressure, arterial: GasPressure) -> f64 {
    1.0 - mixed_expired / arterial
}

/// Alveolar dead-space fraction from end-tidal PCO2: `f = 1 − PETCO2/P_T`, negative when end-tidal is above arterial.
pub fn alveolar_fraction_from_end_tidal(end_tidal: GasPressure, arterial: GasPressure) -> f64 {
    1.0 - end_tidal / arterial
}

/// Alveolar fraction when the whole and the series part are known: `f = (VDphys − VDs)/(VT − VDs)`.
/// Domain: `series < tidal`.
pub fn alveolar_fraction(physiological: Volume, series: Volume, tidal: Volume) -> f64 {
    (physiological - series) / (tidal - series)
}

/// Series dead space when the whole and the alveolar fraction are known: `VDs = (VDphys − f·VT)/(1 − f)`.
/// Domain: `fraction < 1`. Negative when the two contradict each other.
pub fn series(physiological: Volume, alveolar_fraction: f64, tidal: Volume) -> Volume {
    (physiological - tidal * alveolar_fraction) / (1.0 - alveolar_fraction)
}

/// Physiological dead space: `VDphys = VDs + f·(VT − VDs)`.
pub fn physiological(series: Volume, alveolar_fraction: f64, tidal: Volume) -> Volume {
    series + (tidal - series) * alveolar_fraction
}

/// What of each breath meets blood: `(VT − VDs)·(1 − f)`.
pub fn useful(series: Volume, alveolar_fraction: f64, tidal: Volume) -> Volume {
    (tidal - series) * (1.0 - alveolar_fraction)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_parts_add_up() {
        // VT 420, VDs 120, VD/VT 0.60: VDphys 252, f = 132/300 = 0.44, useful 300·0.56 = 168. By hand.
        let (vt, vds) = (Volume::from_ml(420.0), Volume::from_ml(120.0));
        let f = alveolar_fraction(Volume::from_ml(252.0), vds, vt);
        assert!((f - 0.44).abs() < 1e-12);
        assert!((physiological(vds, f, vt).ml() - 252.0).abs() < 1e-9);
        assert!((useful(vds, f, vt).ml() - 168.0).abs() < 1e-9);
        assert!((series(Volume::from_ml(252.0), f, vt).ml() - 120.0).abs() < 1e-9);
    }

    #[test]
    fn rules_know_airway_and_weight() {
        assert!((airway_by_rule(Some(70.0), true).ml() - 154.0).abs() < 1e-9);
        assert!((airway_by_rule(Some(70.0), false).ml() - 77.0).abs() < 1e-9);
        assert!((airway_by_rule(None, true).ml() - 140.0).abs() < 1e-9);
        assert!((airway_by_rule(None, false).ml() - 70.0).abs() < 1e-9);
    }
}
