//! Weaning indices, each with what it needs.

use serde::Serialize;

use super::values::Values;
use super::{Verdict, published};

/// One index.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Index {
    /// Stable id.
    pub id: &'static str,
    /// What it is called.
    pub words: &'static str,
    /// Its value; `None` when something it needs was not recorded.
    pub value: Option<f64>,
    /// Its unit.
    pub unit: &'static str,
    /// Digits after the point that it deserves.
    pub digits: usize,
    /// Which values speak for weaning, in words; empty when none is published.
    pub asks: &'static str,
    /// Whether this one does.
    pub verdict: Verdict,
    /// What it needs.
    pub needs: &'static str,
    /// Where it comes from.
    pub source: &'static str,
}

/// Every index.
pub(super) fn all(values: &Values) -> Vec<Index> {
    let crop = crop(values);
    let integrative = values
        .static_compliance_ml_cmh2o
        .zip(values.spo2)
        .zip(values.rapid_shallow)
        .map(|((compliance, spo2), index)| published::integrative_index(compliance, spo2, index));
    vec![
        Index {
            id: "rapid_shallow_breathing_index",
            words: "rapid shallow breathing index",
            value: values.rapid_shallow,
            unit: "/min/L",
            digits: 0,
            asks: "below 105",
            verdict: Verdict::of(values.rapid_shallow.map(|it| it < published::RAPID_SHALLOW_BELOW)),
            needs: "spontaneous rate and volume",
            source: published::YANG,
        },
        Index {
            id: "crop_index",
            words: "CROP index",
            value: crop,
            unit: "mL/(1/min)",
            digits: 0,
            asks: "above 13 (from memory)",
            verdict: Verdict::of(crop.map(|it| it > published::CROP_ABOVE)),
            needs: "peak and volume of a set breath, maximal inspiratory pressure, PaO2 with PaCO2 and FiO2, spontaneous rate",
            source: published::YANG,
        },
        Index {
            id: "integrative_index",
            words: "integrative index",
            value: integrative,
            unit: "mL/cmH2O/(/min/L)",
            digits: 0,
            asks: "above 25",
            verdict: Verdict::of(integrative.map(|it| it > published::INTEGRATIVE_ABOVE)),
            needs: "compliance, SpO2 (read for SaO2), spontaneous rate and volume",
            source: published::NEMER,
        },
        plain(
            "ventilatory_ratio",
            "ventilatory ratio",
            values.ventilatory_ratio,
            "1",
            1,
            "PaCO2, rate and exhaled volume, predicted weight",
            "Sinha 2009",
        ),
        plain(
            "dead_space_fraction",
            "VD/VT",
            values.dead_space_fraction,
            "1",
            2,
            "VD/VT, or mixed expired PCO2 with a gas",
            "Enghoff 1938",
        ),
        plain(
            "occlusion_pressure",
            "occlusion pressure (P0.1)",
            values.occlusion_pressure_cmh2o,
            "cmH2O",
            1,
            "P0.1",
            "as measured",
        ),
    ]
}

/// A figure without a published bound here.
const fn plain(
    id: &'static str,
    words: &'static str,
    value: Option<f64>,
    unit: &'static str,
    digits: usize,
    needs: &'static str,
    source: &'static str,
) -> Index {
    Index { id, words, value, unit, digits, asks: "", verdict: Verdict::NotRecorded, needs, source }
}

fn crop(values: &Values) -> Option<f64> {
    Some(published::crop_index(
        values.dynamic_compliance_ml_cmh2o?,
        values.inspiratory_pressure_max_cmh2o?,
        values.arterial_over_alveolar_po2?,
        values.rate_per_min?,
    ))
}
