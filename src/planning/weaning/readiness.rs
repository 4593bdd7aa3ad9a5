//! Readiness for a spontaneous breathing trial: met, not met, not recorded.

use serde::Serialize;

use super::values::Values;
use super::{Verdict, published};
use crate::quantity::unit::Dimension;
use published::readiness as bound;

/// One criterion of readiness.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Criterion {
    /// Stable id.
    pub id: &'static str,
    /// What it asks, with its bound.
    pub asks: &'static str,
    /// What was recorded, in the default unit of `dimension`; for oxygenation PaO2/FiO2.
    pub value: Option<f64>,
    /// What `value` measures.
    #[serde(skip)]
    pub dimension: Dimension,
    /// For oxygenation: SpO2 and the FiO2 it was read on.
    pub saturation_on: Option<[f64; 2]>,
    /// Whether it holds.
    pub verdict: Verdict,
    /// Where the bound comes from.
    pub source: &'static str,
}

/// The table, in the order it is read at the bedside.
pub(super) fn table(values: &Values) -> Vec<Criterion> {
    let row = |id, asks, value: Option<f64>, dimension, holds: fn(f64) -> bool| Criterion {
        id,
        asks,
        value,
        dimension,
        saturation_on: None,
        verdict: Verdict::of(value.map(holds)),
        source: published::BOLES,
    };
    vec![
        oxygenation(values),
        row("peep", "PEEP at most 8 cmH2O", values.peep_cmh2o, Dimension::AirwayPressure, |it| {
            it <= bound::PEEP_MAX_CMH2O
        }),
        row("heart_rate", "heart rate at most 140/min", values.heart_rate_per_min, Dimension::Rate, |it| {
            it <= bound::HEART_RATE_MAX
        }),
        row(
            "systolic_pressure",
            "systolic pressure 90 to 160 mmHg",
            values.systolic_pressure_mmhg,
            Dimension::BloodPressure,
            |it| (bound::SYSTOLIC_MIN_MMHG..=bound::SYSTOLIC_MAX_MMHG).contains(&it),
        ),
        row("rate", "spontaneous rate at most 35/min", values.rate_per_min, Dimension::Rate, |it| {
            it <= bound::RATE_MAX
        }),
        row(
            "rapid_shallow_breathing_index",
            "rate/volume index below 105/min/L",
            values.rapid_shallow,
            Dimension::Volume,
            |it| it < published::RAPID_SHALLOW_BELOW,
        ),
        row(
            "tidal_volume_per_kg",
            "spontaneous volume above 5 mL/kg predicted",
            values.tidal_volume_ml_kg,
            Dimension::VolumePerMass,
            |it| it > bound::TIDAL_VOLUME_ABOVE_ML_KG,
        ),
        row(
            "inspiratory_pressure_max",
            "maximal inspiratory pressure −20 cmH2O or lower",
            values.inspiratory_pressure_max_cmh2o,
            Dimension::AirwayPressure,
            |it| it <= bound::INSPIRATORY_PRESSURE_MAX_CMH2O,
        ),
        row(
            "vital_capacity_per_kg",
            "vital capacity above 10 mL/kg predicted",
            values.vital_capacity_ml_kg,
            Dimension::VolumePerMass,
            |it| it > bound::VITAL_CAPACITY_ABOVE_ML_KG,
        ),
    ]
}

/// Either way is enough; what one way does not show, the other may, so one failed and one unrecorded is not recorded.
fn oxygenation(values: &Values) -> Criterion {
    let saturation_on = values.spo2.zip(values.spo2_on_fio2).map(|(spo2, fio2)| [spo2, fio2]);
    let by_saturation =
        saturation_on.map(|[spo2, fio2]| spo2 > bound::SATURATION_ABOVE && fio2 <= bound::FIO2_MAX);
    let by_ratio = values.pao2_fio2_mmhg.map(|ratio| ratio >= bound::PAO2_FIO2_MIN_MMHG);
    let holds = match (by_saturation, by_ratio) {
        (Some(true), _) | (_, Some(true)) => Some(true),
        (Some(false), Some(false)) => Some(false),
        _ => None,
    };
    Criterion {
        id: "oxygenation",
        asks: "SpO2 above 90 % on FiO2 of at most 0.4, or PaO2/FiO2 at least 150 mmHg",
        value: values.pao2_fio2_mmhg,
        dimension: Dimension::GasPressure,
        saturation_on,
        verdict: Verdict::of(holds),
        source: published::BOLES,
    }
}
