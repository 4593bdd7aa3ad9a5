//! Predicted body weight and the ventilatory ratio.

/// Predicted weight of a man 152.4 cm tall, kg: ARDS Network 2000 (after Devine 1974).
const MALE_KG: f64 = 50.0;
/// Predicted weight of a woman 152.4 cm tall, kg: the same.
const FEMALE_KG: f64 = 45.5;
/// kg per cm above that height: the same.
const KG_PER_CM: f64 = 0.91;
/// The height of reference, cm: 60 inches.
const REFERENCE_CM: f64 = 152.4;
/// The heights, cm, for which the formula is used here; beyond them the weight is given directly.
pub const HEIGHT_RANGE_CM: [f64; 2] = [130.0, 220.0];

/// Predicted body weight, kg: 50 (male) or 45.5 (female) + 0.91·(height − 152.4 cm).
/// `None` outside 130–220 cm. Source: ARDS Network 2000.
pub fn predicted_weight_kg(female: bool, height_cm: f64) -> Option<f64> {
    let [low, high] = HEIGHT_RANGE_CM;
    let base = if female { FEMALE_KG } else { MALE_KG };
    (low..=high).contains(&height_cm).then_some(base + KG_PER_CM * (height_cm - REFERENCE_CM))
}

/// Ventilatory ratio: `VE·PaCO2/(PBW·100·37.5)`, minute volume in mL/min, PaCO2 in mmHg. About 1 in health.
/// Source: Sinha 2009.
pub fn ventilatory_ratio(minute_volume_ml_min: f64, paco2_mmhg: f64, predicted_weight_kg: f64) -> f64 {
    minute_volume_ml_min * paco2_mmhg / (predicted_weight_kg * 100.0 * 37.5)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn hand_worked_points() {
        // 45.5 + 0.91·(163 − 152.4) = 55.146; 50 + 0.91·(175 − 152.4) = 70.566.
        assert!((predicted_weight_kg(true, 163.0).unwrap() - 55.146).abs() < 1e-9);
        assert!((predicted_weight_kg(false, 175.0).unwrap() - 70.566).abs() < 1e-9);
        assert_eq!(predicted_weight_kg(true, 129.9), None);
        assert!((ventilatory_ratio(7000.0, 37.5, 70.0) - 1.0).abs() < 1e-12);
    }
}
