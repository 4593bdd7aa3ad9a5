//! Weaning indices and bounds against the published ones in `tests/reference/published_weaning.toml`.

#![allow(clippy::unwrap_used, clippy::panic, reason = "a test may stop at the first surprise")]

use tidewright::physiology::weaning::{self, readiness, stop};

const TABLE: &str = include_str!("reference/published_weaning.toml");

#[derive(serde::Deserialize)]
struct Row {
    id: String,
    formula: String,
    expected: f64,
    tolerance: f64,
    tolerance_kind: String,
    inputs: toml::Table,
}

impl Row {
    fn word(&self, key: &str) -> &str {
        self.inputs.get(key).and_then(toml::Value::as_str).unwrap_or("")
    }

    fn number(&self, key: &str) -> f64 {
        let value = self.inputs.get(key).unwrap();
        value.as_float().or_else(|| value.as_integer().map(|it| it as f64)).unwrap()
    }

    fn computed(&self) -> f64 {
        match self.formula.as_str() {
            "rapid_shallow_breathing_index" => weaning::rapid_shallow_breathing_index(
                self.number("rate_per_min"),
                self.number("tidal_volume_l") * 1000.0,
            ),
            "crop_index" => weaning::crop_index(
                self.number("dynamic_compliance_ml_cmh2o"),
                // Published as its size; charted as it is read, negative.
                -self.number("inspiratory_pressure_max_cmh2o"),
                self.number("po2_ratio"),
                self.number("rate_per_min"),
            ),
            "integrative_index" => weaning::integrative_index(
                self.number("compliance_ml_cmh2o"),
                self.number("saturation_percent") / 100.0,
                self.number("rapid_shallow_breathing_index"),
            ),
            "index_bound" => match self.word("index") {
                "rapid_shallow_breathing_index" => weaning::RAPID_SHALLOW_BELOW,
                "crop_index" => weaning::CROP_ABOVE,
                "integrative_index" => weaning::INTEGRATIVE_ABOVE,
                other => panic!("no index {other}"),
            },
            "readiness_bound" => self.readiness(),
            "trial_stop_bound" => self.stop(),
            other => panic!("no formula {other}"),
        }
    }

    fn readiness(&self) -> f64 {
        match (self.word("criterion"), self.word("bound")) {
            ("rate", "max") => readiness::RATE_MAX,
            ("inspiratory_pressure_max", "max") => readiness::INSPIRATORY_PRESSURE_MAX_CMH2O,
            ("tidal_volume_per_kg", "min") => readiness::TIDAL_VOLUME_ABOVE_ML_KG,
            ("vital_capacity_per_kg", "min") => readiness::VITAL_CAPACITY_ABOVE_ML_KG,
            ("saturation_percent", "min") => readiness::SATURATION_ABOVE * 100.0,
            ("fio2", "max") => readiness::FIO2_MAX,
            ("peep", "max") => readiness::PEEP_MAX_CMH2O,
            ("heart_rate", "max") => readiness::HEART_RATE_MAX,
            ("systolic_pressure", "min") => readiness::SYSTOLIC_MIN_MMHG,
            ("systolic_pressure", "max") => readiness::SYSTOLIC_MAX_MMHG,
            ("pao2_fio2", "min") => readiness::PAO2_FIO2_MIN_MMHG,
            ("rapid_shallow_breathing_index", "max") => weaning::RAPID_SHALLOW_BELOW,
            other => panic!("no criterion {other:?}"),
        }
    }

    fn stop(&self) -> f64 {
        match (self.word("criterion"), self.word("bound")) {
            ("paco2", "max") => stop::PACO2_ABOVE_MMHG,
            ("paco2_rise", "max") => stop::PACO2_RISE_MMHG,
            ("ph", "min") => stop::PH_BELOW,
            ("ph_fall", "max") => stop::PH_FALL,
            ("rate", "max") => stop::RATE_ABOVE,
            ("rate_rise_percent", "max") => stop::RATE_RISE * 100.0,
            ("heart_rate", "max") => stop::HEART_RATE_ABOVE,
            ("heart_rate_rise_percent", "max") => stop::HEART_RATE_RISE * 100.0,
            ("systolic_pressure", "max") => stop::SYSTOLIC_ABOVE_MMHG,
            ("systolic_pressure_rise_percent", "max") => stop::SYSTOLIC_RISE * 100.0,
            ("systolic_pressure", "min") => stop::SYSTOLIC_BELOW_MMHG,
            ("pao2", "min") => stop::PAO2_MMHG,
            ("pao2_counts_from_fio2", "min") => stop::PAO2_COUNTS_FROM_FIO2,
            ("saturation_percent", "min") => stop::SATURATION_BELOW * 100.0,
            other => panic!("no criterion {other:?}"),
        }
    }
}

#[test]
fn every_published_row_is_reproduced() {
    let table: toml::Table = TABLE.parse().unwrap();
    let rows: Vec<Row> = table.get("row").unwrap().clone().try_into().unwrap();
    assert_eq!(rows.len(), 32);
    for row in rows {
        assert_eq!(row.tolerance_kind, "absolute", "{}", row.id);
        let computed = row.computed();
        assert!(
            (computed - row.expected).abs() <= row.tolerance,
            "{}: {computed} for {}",
            row.id,
            row.expected
        );
    }
}
