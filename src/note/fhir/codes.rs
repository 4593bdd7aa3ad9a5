//! Which code and unit each quantity goes out with. LOINC codes are those seen in public FHIR guides; what has none here
//! goes out as text under a code system of our own.

use crate::quantity::input::{Input, Key};
use crate::quantity::unit::Dimension;

/// A code, a unit, and how to get to it.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Coded {
    /// LOINC code.
    pub loinc: Option<&'static str>,
    /// What it is called.
    pub words: &'static str,
    /// The unit as people write it.
    pub unit: &'static str,
    /// Its UCUM code.
    pub ucum: &'static str,
    /// Shares go out in percent, I:E as inspiration over expiration.
    pub turned: Turned,
}

/// How a value is turned into what is exported.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Turned {
    /// As it is.
    Not,
    /// A share into percent.
    Percent,
    /// Expiration over inspiration into inspiration over expiration.
    Inverse,
}

impl Coded {
    /// A value in the default unit, in the unit exported.
    pub fn value(&self, value: f64) -> f64 {
        match self.turned {
            Turned::Not => value,
            // 0.55 is 55 %, not 55.00000000000001 %.
            Turned::Percent => (value * 1e8).round() / 1e6,
            Turned::Inverse => 1.0 / value,
        }
    }
}

/// PaO2/FiO2, which is computed.
pub const PAO2_FIO2: Coded =
    Coded { loinc: Some("50984-4"), words: "PaO2/FiO2", unit: "mmHg", ucum: "mm[Hg]", turned: Turned::Not };

/// The rapid shallow breathing index, which is computed.
pub const RAPID_SHALLOW: Coded = Coded {
    loinc: None,
    words: "rapid shallow breathing index",
    unit: "/min/L",
    ucum: "/min/L",
    turned: Turned::Not,
};

/// LOINC codes seen in public FHIR guides. An exhaled volume, a set rate, compliance, resistance and VD/VT have none here
/// until somebody has seen theirs: a near miss would be read as another quantity.
const fn loinc(key: Key) -> Option<&'static str> {
    Some(match key {
        Key::Paco2 => "2019-8",
        Key::Ph => "2744-1",
        Key::Bicarbonate => "1960-4",
        Key::Pao2 => "2703-7",
        Key::TidalVolume => "20112-9",
        Key::Peep => "20077-4",
        Key::Fio2 => "19994-3",
        Key::Plateau => "76259-1",
        Key::Peak => "76531-3",
        Key::MeanAirwayPressure => "76530-5",
        Key::InspiratoryTime => "76334-2",
        Key::Ratio => "75931-6",
        Key::TotalRate => "19840-8",
        Key::SpontaneousRate => "19839-0",
        Key::EndTidalCo2 => "19891-1",
        Key::Height => "8302-2",
        Key::Weight => "29463-7",
        Key::PredictedWeight => "50064-5",
        _ => return None,
    })
}

/// The code and unit of an input.
pub fn coded(input: &Input) -> Coded {
    let default = input.dimension.units().first();
    let (unit, ucum) = default.map_or(("", "1"), |unit| (unit.word, unit.ucum));
    let (unit, ucum, turned) = match (input.dimension, input.key) {
        (Dimension::Fraction, Key::DeadSpaceFraction) => ("", "1", Turned::Not),
        (Dimension::Fraction, _) => ("%", "%", Turned::Percent),
        (Dimension::Ratio, _) => ("", "{ratio}", Turned::Inverse),
        (Dimension::Ph, _) => ("pH", "[pH]", Turned::Not),
        (Dimension::Rate, _) => ("/min", "/min", Turned::Not),
        _ => (unit, ucum, Turned::Not),
    };
    Coded { loinc: loinc(input.key), words: input.words, unit, ucum, turned }
}
