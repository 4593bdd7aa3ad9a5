//! Resting energy and the carbon dioxide it makes, when nothing measures it.

use crate::quantity::typed::StpdFlow;

use super::oxygen::EXCHANGE_RATIO;

/// kcal per litre of oxygen: Weir, J Physiol 1949;109:1.
pub const WEIR_OXYGEN: f64 = 3.941;
/// kcal per litre of carbon dioxide: the same.
pub const WEIR_CARBON_DIOXIDE: f64 = 1.106;
/// Litres a day in one mL/min.
pub const LITRES_A_DAY: f64 = 1.44;
/// CO2 output per kg predicted weight when resting energy cannot be estimated, mL/min/kg: common practice.
pub const CO2_ML_MIN_PER_KG: f64 = 3.0;

/// Resting energy, kcal/d, by Mifflin–St Jeor: `10·W + 6.25·H − 5·A + 5` (male) or `− 161` (female),
/// weight in kg, height in cm, age in years. Source: Mifflin 1990, Am J Clin Nutr 51:241.
pub fn resting_kcal_per_day(female: bool, weight_kg: f64, height_cm: f64, age_years: f64) -> f64 {
    let constant = if female { -161.0 } else { 5.0 };
    10.0 * weight_kg + 6.25 * height_cm - 5.0 * age_years + constant
}

/// Energy, kcal/d, from oxygen uptake and CO2 output in mL/min STPD: `1.44·(3.941·V̇O2 + 1.106·V̇CO2)`. Source: Weir 1949.
pub fn weir_kcal_per_day(oxygen: StpdFlow, carbon_dioxide: StpdFlow) -> f64 {
    LITRES_A_DAY * (WEIR_OXYGEN * oxygen.ml_per_min() + WEIR_CARBON_DIOXIDE * carbon_dioxide.ml_per_min())
}

/// CO2 output of an energy in kcal/d at exchange ratio 0.8: `REE/(1.44·(3.941/0.8 + 1.106))`, Weir's formula solved for CO2.
pub fn co2_output(kcal_per_day: f64) -> StpdFlow {
    StpdFlow::from_ml_per_min(
        kcal_per_day / (LITRES_A_DAY * (WEIR_OXYGEN / EXCHANGE_RATIO + WEIR_CARBON_DIOXIDE)),
    )
}

/// CO2 output by predicted weight alone: 3 mL/min/kg.
pub fn co2_output_by_weight(predicted_weight_kg: f64) -> StpdFlow {
    StpdFlow::from_ml_per_min(CO2_ML_MIN_PER_KG * predicted_weight_kg)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn hand_worked_points() {
        // 10·70 + 6.25·175 − 5·40 + 5 = 700 + 1093.75 − 200 + 5 = 1598.75.
        assert!((resting_kcal_per_day(false, 70.0, 175.0, 40.0) - 1598.75).abs() < 1e-9);
        // 1598.75/(1.44·(4.92625 + 1.106)) = 1598.75/8.68644 = 184.051.
        assert!((co2_output(1598.75).ml_per_min() - 184.051).abs() < 0.001);
        // Weir turned round: the output of an energy gives that energy back.
        let out = StpdFlow::from_ml_per_min(200.0);
        assert!((co2_output(weir_kcal_per_day(out / EXCHANGE_RATIO, out)).ml_per_min() - 200.0).abs() < 1e-9);
        assert!((co2_output_by_weight(60.0).ml_per_min() - 180.0).abs() < 1e-12);
    }
}
