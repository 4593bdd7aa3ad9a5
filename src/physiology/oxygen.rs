//! Oxygen: the alveolar gas equation and barometric pressure.

use super::carbon_dioxide::WATER_VAPOUR_37_MMHG;

/// Respiratory exchange ratio taken throughout: common practice.
pub const EXCHANGE_RATIO: f64 = 0.8;
/// Sea-level pressure, mmHg: by definition of the standard atmosphere.
pub const SEA_LEVEL_MMHG: f64 = 760.0;

/// Alveolar PO2, mmHg, at 37 °C: `FiO2·(PB − 47) − PaCO2·(FiO2 + (1 − FiO2)/0.8)`.
///
/// `fio2` is a fraction; pressures in mmHg. Source: Fenn, Rahn & Otis, Am J Physiol 1946;146:637, the full form.
pub fn alveolar_po2_mmhg(fio2: f64, barometric_mmhg: f64, paco2_mmhg: f64) -> f64 {
    fio2 * (barometric_mmhg - WATER_VAPOUR_37_MMHG) - paco2_mmhg * (fio2 + (1.0 - fio2) / EXCHANGE_RATIO)
}

/// Barometric pressure, mmHg, at an altitude in m: `760·(1 − 2.25577e-5·h)^5.25588`, the standard atmosphere (ISO 2533).
/// Domain: altitude below 44,330 m.
pub fn barometric_at_altitude_mmhg(altitude_m: f64) -> f64 {
    SEA_LEVEL_MMHG * libm::pow(1.0 - 2.25577e-5 * altitude_m, 5.25588)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn hand_worked_points() {
        // Air at sea level, PaCO2 40: 0.21·713 − 40·(0.21 + 0.9875) = 149.73 − 47.9 = 101.83.
        assert!((alveolar_po2_mmhg(0.21, 760.0, 40.0) - 101.83).abs() < 1e-9);
        // 1 − 2.25577e-5·1600 = 0.96390768; its 5.25588th power is 0.8243; times 760 = 626.5.
        assert!((barometric_at_altitude_mmhg(1600.0) - 626.5).abs() < 0.1);
        assert!((barometric_at_altitude_mmhg(0.0) - 760.0).abs() < 1e-12);
    }
}
