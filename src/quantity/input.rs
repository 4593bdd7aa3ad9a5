//! The one table of inputs: name, unit, plausible range, step, default, digits, example and source of each.
//!
//! The reader of files, the flags, the errors, the dials, the help and the random tests all read this table.

mod measured;
mod other;
mod range;
mod settings;

pub use range::{OutOfRange, Plausible, Typed};

use super::unit::Dimension;

/// Every numeric key of a case file.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
#[allow(missing_docs, reason = "each is described by its row: see `Input::words`, `Input::unit`")]
pub enum Key {
    Height,
    Weight,
    Age,
    PredictedWeight,
    BarometricPressure,
    Altitude,
    Rate,
    TidalVolume,
    InspiratoryPressure,
    Peep,
    Fio2,
    InspiratoryTime,
    Flow,
    Ratio,
    Pause,
    ApparatusDeadSpace,
    TotalRate,
    ExhaledTidalVolume,
    MinuteVentilation,
    Plateau,
    Peak,
    TotalPeep,
    AutoPeep,
    MeanAirwayPressure,
    Compliance,
    Resistance,
    ExpiratoryResistance,
    CircuitCompliance,
    EndTidalCo2,
    MixedExpiredCo2,
    DeadSpaceFraction,
    Co2Production,
    Temperature,
    Spo2,
    Ph,
    Paco2,
    Pao2,
    Bicarbonate,
    SpontaneousRate,
    SpontaneousTidalVolume,
    InspiratoryPressureMax,
    VitalCapacity,
    OcclusionPressure,
    Spo2FractionOn,
    HeartRate,
    SystolicPressure,
    TrialSupport,
    ObservedMinute,
    ObservedRate,
    ObservedTidalVolume,
    ObservedHeartRate,
    ObservedSystolicPressure,
    ObservedSpo2,
    PlannedPaco2,
    PlannedRate,
    PlannedTidalVolume,
    PlannedInspiratoryPressure,
    ForecastPaco2,
    ExpectedPaco2,
    HalfInterval,
    WideInterval,
    SettleMinutes,
}

/// One input.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Input {
    /// Which.
    pub key: Key,
    /// The table of the case file it stands in: `patient`, `settings`, `measured`, `gas`, `weaning`, `trial`,
    /// `observation`, `plan`.
    pub table: &'static str,
    /// Its key in that table.
    pub name: &'static str,
    /// What a clinician calls it.
    pub words: &'static str,
    /// What it measures.
    pub dimension: Dimension,
    /// The least plausible value, in the default unit.
    pub min: f64,
    /// The greatest plausible value, in the default unit.
    pub max: f64,
    /// One turn of its dial, in the default unit.
    pub step: f64,
    /// What is taken when it is not given, in the default unit; `None` when nothing is.
    pub default: Option<f64>,
    /// Digits after the point that it deserves, in the default unit.
    pub digits: usize,
    /// A value as it is written in a file.
    pub example: &'static str,
    /// Where range and default come from.
    pub source: &'static str,
}

const ROWS: usize = 62;

/// Every input, in the order of [`Key`].
pub static INPUTS: [Input; ROWS] = joined();

const fn joined() -> [Input; ROWS] {
    let parts: [&[Input]; 5] =
        [&other::PATIENT, &settings::SETTINGS, &measured::MEASURED, &measured::GAS, &other::REST];
    let mut rows = [other::FIRST; ROWS];
    let mut tail: &mut [Input] = &mut rows;
    let mut rest_of_parts: &[&[Input]] = &parts;
    while let [part, others @ ..] = rest_of_parts {
        let mut left: &[Input] = part;
        while let [row, more @ ..] = left {
            if let [slot, free @ ..] = tail {
                *slot = *row;
                tail = free;
            }
            left = more;
        }
        rest_of_parts = others;
    }
    rows
}

impl Key {
    /// Its row.
    #[allow(
        clippy::indexing_slicing,
        reason = "one row a key, in the order of the keys: kept by a test below"
    )]
    pub const fn input(self) -> &'static Input {
        &INPUTS[self as usize]
    }

    /// Its name in the case file.
    pub const fn name(self) -> &'static str {
        self.input().name
    }

    /// The key written `name` in `table` of a case file.
    pub fn find(table: &str, name: &str) -> Option<Self> {
        INPUTS.iter().find(|input| input.table == table && input.name == name).map(|input| input.key)
    }
}

impl Input {
    const fn new(
        key: Key,
        [table, name, words]: [&'static str; 3],
        dimension: Dimension,
        [min, max]: [f64; 2],
        example: &'static str,
        source: &'static str,
    ) -> Self {
        let (step, digits) = usual_step(dimension);
        Self { key, table, name, words, dimension, min, max, step, default: None, digits, example, source }
    }

    const fn step(self, step: f64, digits: usize) -> Self {
        Self { step, digits, ..self }
    }

    const fn default(self, value: f64) -> Self {
        Self { default: Some(value), ..self }
    }

    /// Its default unit as we write it; empty for plain numbers, fractions, pH and ratios.
    pub const fn unit(&self) -> &'static str {
        self.dimension.unit()
    }

    /// A value in its default unit, as text with the unit, as it was typed down to a thousandth.
    pub fn shown(&self, value: f64) -> String {
        self.plausible().shown(value)
    }
}

/// One turn of the dial and the digits after the point: common practice.
const fn usual_step(dimension: Dimension) -> (f64, usize) {
    match dimension {
        Dimension::Volume | Dimension::GasOutput => (10.0, 0),
        Dimension::Fraction | Dimension::Ph => (0.01, 2),
        Dimension::Time => (0.1, 2),
        Dimension::Ratio | Dimension::Temperature | Dimension::Concentration => (0.1, 1),
        Dimension::VolumePerMass | Dimension::Power => (0.5, 1),
        Dimension::Altitude => (100.0, 0),
        Dimension::BloodPressure | Dimension::Minutes | Dimension::Flow => (5.0, 0),
        Dimension::Rate
        | Dimension::GasPressure
        | Dimension::AirwayPressure
        | Dimension::Length
        | Dimension::Mass
        | Dimension::Age
        | Dimension::Compliance
        | Dimension::Resistance
        | Dimension::PressurePerHour
        | Dimension::Number => (1.0, 0),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn rows_stand_in_the_order_of_the_keys() {
        for (index, input) in INPUTS.iter().enumerate() {
            assert_eq!(input.key as usize, index, "{} {}", input.table, input.name);
            assert_eq!(Key::find(input.table, input.name), Some(input.key));
        }
        assert_eq!(Key::SettleMinutes as usize + 1, ROWS);
    }

    #[test]
    fn every_row_is_whole() {
        for input in &INPUTS {
            assert!(input.min < input.max && input.step > 0.0, "{}", input.name);
            assert!(!input.source.is_empty() && !input.words.is_empty(), "{}", input.name);
            if let Some(value) = input.default {
                assert!((input.min..=input.max).contains(&value), "{}", input.name);
            }
        }
    }
}
