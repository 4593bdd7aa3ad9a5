//! Carbon dioxide and alveolar ventilation: the alveolar ventilation equation.

use crate::quantity::typed::{BtpsFlow, GasPressure, StpdFlow, Temperature};

/// Standard pressure of STPD, mmHg: by definition.
pub const STANDARD_PRESSURE_MMHG: f64 = 760.0;
/// 0 °C in kelvin: by definition of the Celsius scale.
pub const ZERO_CELSIUS_K: f64 = 273.15;
/// The temperature an analyser reports at, °C: common practice.
pub const ANALYSER_TEMPERATURE: Temperature = Temperature::from_celsius(37.0);
/// Water vapour pressure at 37 °C, mmHg, as the trade rounds it: common practice (IAPWS gives 47.12).
pub const WATER_VAPOUR_37_MMHG: f64 = 47.0;
/// Change of log10 PCO2 per °C in blood: the factor of the CLSI standard.
pub const PCO2_LOG10_PER_CELSIUS: f64 = 0.019;

/// K, the factor between CO2 output over alveolar ventilation and alveolar PCO2:
/// `K(T) = 760 mmHg · (273.15 + T)/273.15`, both flows in the same unit, the one STPD, the other BTPS.
///
/// At 37 °C it is 862.95 mmHg, the trade's "863". It follows from the ideal gas law and is free of barometric
/// pressure: BTPS→STPD carries (PB − 47)/760, fraction→partial pressure 1/(PB − 47).
///
/// ```
/// use tidewright::physiology::carbon_dioxide::{ANALYSER_TEMPERATURE, ventilation_factor};
/// assert!((ventilation_factor(ANALYSER_TEMPERATURE).mmhg() - 862.947).abs() < 0.001);
/// ```
pub fn ventilation_factor(temperature: Temperature) -> GasPressure {
    GasPressure::from_mmhg(STANDARD_PRESSURE_MMHG * (ZERO_CELSIUS_K + temperature.celsius()) / ZERO_CELSIUS_K)
}

/// PCO2 in the lungs at body temperature from one reported at 37 °C: `P_T = PaCO2 · 10^(0.019·(T − 37))`.
pub fn at_body_temperature(paco2: GasPressure, temperature: Temperature) -> GasPressure {
    let degrees = (temperature - ANALYSER_TEMPERATURE).celsius();
    paco2 * libm::pow(10.0, PCO2_LOG10_PER_CELSIUS * degrees)
}

/// Alveolar ventilation that holds `pco2` (at body temperature) against `output`: `V̇A = K(T)·V̇CO2/P_T`.
/// Domain: `pco2` above 0.
pub fn alveolar_ventilation(output: StpdFlow, pco2: GasPressure, temperature: Temperature) -> BtpsFlow {
    BtpsFlow::from_ml_per_min(ventilation_factor(temperature) / pco2 * output.ml_per_min())
}

/// CO2 output that `ventilation` carries away at `pco2` (at body temperature): `V̇CO2 = P_T·V̇A/K(T)`.
pub fn output(ventilation: BtpsFlow, pco2: GasPressure, temperature: Temperature) -> StpdFlow {
    StpdFlow::from_ml_per_min(pco2 / ventilation_factor(temperature) * ventilation.ml_per_min())
}

/// PCO2 at body temperature that `output` reaches under `ventilation`: `P_T = K(T)·V̇CO2/V̇A`.
/// Domain: `ventilation` above 0.
pub fn pressure(output: StpdFlow, ventilation: BtpsFlow, temperature: Temperature) -> GasPressure {
    ventilation_factor(temperature) * (output.ml_per_min() / ventilation.ml_per_min())
}

/// How many volumes at BTPS one volume at STPD fills:
/// `760/(PB − PH2O) · (273.15 + T)/273.15`. Domain: barometric above water vapour pressure.
/// Source: ideal gas law.
pub fn btps_per_stpd(barometric: GasPressure, water_vapour: GasPressure, temperature: Temperature) -> f64 {
    ventilation_factor(temperature) / (barometric - water_vapour)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn output_ventilation_and_pressure_are_one_equation() {
        // 200 mL/min at 40 mmHg and 37 °C: 862.947·200/40 = 4314.7 mL/min, by hand.
        let (t, p) = (ANALYSER_TEMPERATURE, GasPressure::from_mmhg(40.0));
        let va = alveolar_ventilation(StpdFlow::from_ml_per_min(200.0), p, t);
        assert!((va.ml_per_min() - 4314.735).abs() < 0.001);
        assert!((output(va, p, t).ml_per_min() - 200.0).abs() < 1e-9);
        assert!((pressure(StpdFlow::from_ml_per_min(200.0), va, t).mmhg() - 40.0).abs() < 1e-9);
    }

    #[test]
    fn fever_raises_the_pressure_in_the_lungs() {
        // 10^(0.019·2) = 1.09144, by hand.
        let hot = at_body_temperature(GasPressure::from_mmhg(40.0), Temperature::from_celsius(39.0));
        assert!((hot.mmhg() - 43.6576).abs() < 1e-3);
        let same = at_body_temperature(GasPressure::from_mmhg(40.0), ANALYSER_TEMPERATURE);
        assert_eq!(same, GasPressure::from_mmhg(40.0));
    }
}
