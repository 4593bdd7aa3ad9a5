//! What is measured, and the units a person may write it in.
//!
//! The first unit of a dimension is its default: the one that plain numbers are in and that everything is kept in.

mod table;

/// What a number measures.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Dimension {
    /// Breaths or beats in a minute, 1/min.
    Rate,
    /// A gas volume, mL.
    Volume,
    /// The partial pressure of a gas, mmHg.
    GasPressure,
    /// A pressure in the airway, cmH2O.
    AirwayPressure,
    /// A blood pressure, mmHg.
    BloodPressure,
    /// A body length, cm.
    Length,
    /// A height above the sea, m.
    Altitude,
    /// A mass, kg.
    Mass,
    /// An age, years.
    Age,
    /// A share of a whole, from 0 to 1.
    Fraction,
    /// A time within a breath, s.
    Time,
    /// A time at the bedside, min.
    Minutes,
    /// A flow of gas in the airway, or a ventilation, L/min.
    Flow,
    /// Volume for pressure, mL/cmH2O.
    Compliance,
    /// Pressure for flow, cmH2O·s/L.
    Resistance,
    /// A gas made or taken up by the body, mL/min STPD.
    GasOutput,
    /// A temperature, °C.
    Temperature,
    /// Inspiration to expiration, kept as expiration over inspiration.
    Ratio,
    /// pH.
    Ph,
    /// Amount in a volume, mmol/L.
    Concentration,
    /// Volume for body mass, mL/kg.
    VolumePerMass,
    /// Mechanical power, J/min.
    Power,
    /// Change of a gas pressure in an hour, mmHg/h.
    PressurePerHour,
    /// A plain number.
    Number,
}

/// One unit and every way it is written.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Unit {
    /// As we write it.
    pub word: &'static str,
    /// Its UCUM code.
    pub ucum: &'static str,
    /// Other ways people write it, spaces left out; letter case does not matter.
    pub also: &'static [&'static str],
    /// What is taken off a typed number first (temperature scales), in this unit.
    pub shift: f64,
    /// Default units in `denominator` of these.
    pub numerator: f64,
    /// See `numerator`: two numbers, so that 60 % is 60/100 to the last bit.
    pub denominator: f64,
    /// Whether an error may offer it as a likely reading.
    pub offered: bool,
    /// Where the factor comes from.
    pub source: &'static str,
}

impl Unit {
    /// A number in this unit, in the default unit of its dimension.
    pub const fn to_default(&self, typed: f64) -> f64 {
        (typed - self.shift) * self.numerator / self.denominator
    }

    /// A number in the default unit, in this unit.
    pub const fn from_default(&self, value: f64) -> f64 {
        value * self.denominator / self.numerator + self.shift
    }

    fn is_written(&self, spelling: &str) -> bool {
        let same = |known: &str| folded(known) == spelling;
        same(self.word) || same(self.ucum) || self.also.iter().any(|known| same(known))
    }
}

/// A spelling without what people vary: letter case, spaces, subscripts, the multiplication sign.
fn folded(spelling: &str) -> String {
    spelling
        .chars()
        .filter(|letter| !letter.is_whitespace())
        .flat_map(|letter| {
            let plain = match letter {
                '·' | '⋅' | '*' | '∙' => '.',
                'º' | '˚' => '°',
                '₂' | '²' => '2',
                '⁻' | '−' => '-',
                '¹' => '1',
                other => other,
            };
            plain.to_lowercase()
        })
        .collect()
}

impl Dimension {
    /// Every dimension.
    pub const ALL: [Self; 24] = [
        Self::Rate,
        Self::Volume,
        Self::GasPressure,
        Self::AirwayPressure,
        Self::BloodPressure,
        Self::Length,
        Self::Altitude,
        Self::Mass,
        Self::Age,
        Self::Fraction,
        Self::Time,
        Self::Minutes,
        Self::Flow,
        Self::Compliance,
        Self::Resistance,
        Self::GasOutput,
        Self::Temperature,
        Self::Ratio,
        Self::Ph,
        Self::Concentration,
        Self::VolumePerMass,
        Self::Power,
        Self::PressurePerHour,
        Self::Number,
    ];

    /// The units it may be written in, the default one first.
    pub const fn units(self) -> &'static [Unit] {
        table::units(self)
    }

    /// The default unit as we write it; empty for plain numbers.
    pub const fn unit(self) -> &'static str {
        match self.units() {
            [first, ..] => first.word,
            [] => "",
        }
    }

    /// What it measures, with its article.
    pub const fn words(self) -> &'static str {
        match self {
            Self::Rate => "a rate",
            Self::Volume => "a volume",
            Self::GasPressure => "a gas pressure",
            Self::AirwayPressure => "an airway pressure",
            Self::BloodPressure => "a blood pressure",
            Self::Length => "a length",
            Self::Altitude => "an altitude",
            Self::Mass => "a weight",
            Self::Age => "an age",
            Self::Fraction => "a fraction",
            Self::Time | Self::Minutes => "a time",
            Self::Flow => "a flow",
            Self::Compliance => "a compliance",
            Self::Resistance => "a resistance",
            Self::GasOutput => "a CO2 production",
            Self::Temperature => "a temperature",
            Self::Ratio => "a ratio",
            Self::Ph => "a pH",
            Self::Concentration => "a concentration",
            Self::VolumePerMass => "a volume per weight",
            Self::Power => "a power",
            Self::PressurePerHour => "a change of gas pressure in an hour",
            Self::Number => "a plain number",
        }
    }

    /// The unit of this dimension that is written `spelling`.
    pub fn find(self, spelling: &str) -> Option<&'static Unit> {
        let spelling = folded(spelling);
        self.units().iter().find(|unit| unit.is_written(&spelling))
    }

    /// Its units as a sentence lists them: "mmHg, kPa or cmH2O".
    pub fn choices(self) -> String {
        let words: Vec<&str> =
            self.units().iter().map(|unit| unit.word).filter(|word| !word.is_empty()).collect();
        match words.split_last() {
            None => "a number without a unit".to_owned(),
            Some((last, [])) => (*last).to_owned(),
            Some((last, rest)) => format!("{} or {last}", rest.join(", ")),
        }
    }
}

/// What a spelling measures, wherever it is known; for the error that says it is the wrong kind of unit.
pub fn dimension_of(spelling: &str) -> Option<Dimension> {
    Dimension::ALL.into_iter().find(|dimension| dimension.find(spelling).is_some())
}

#[cfg(test)]
mod tests {
    use super::*;

    fn in_default(dimension: Dimension, typed: f64, spelling: &str) -> f64 {
        dimension.find(spelling).unwrap_or_else(|| panic!("{spelling} is not known")).to_default(typed)
    }

    #[test]
    fn factors_follow_from_the_definitions() {
        // Definitions: torr 101325/760 Pa; conventional centimetre of water 98.0665 Pa; inch 2.54 cm; pound 0.45359237 kg.
        let near =
            |value: f64, expected: f64| assert!((value / expected - 1.0).abs() < 1e-12, "{value} {expected}");
        near(in_default(Dimension::GasPressure, 101.325, "kPa"), 760.0);
        near(in_default(Dimension::GasPressure, 1013.25, "mbar"), 760.0);
        near(in_default(Dimension::AirwayPressure, 0.980_665, "kPa"), 10.0);
        near(in_default(Dimension::AirwayPressure, 9.806_65, "mbar"), 10.0);
        near(in_default(Dimension::Length, 64.0, "in"), 162.56);
        near(in_default(Dimension::Mass, 100.0, "lb"), 45.359_237);
        near(in_default(Dimension::Altitude, 1000.0, "ft"), 304.8);
        near(in_default(Dimension::Temperature, 98.6, "°F"), 37.0);
        near(in_default(Dimension::Temperature, 310.15, "K"), 37.0);
        near(in_default(Dimension::Compliance, 0.05, "L/cmH2O"), 50.0);
        near(in_default(Dimension::Flow, 1.0, "L/s"), 60.0);
        near(in_default(Dimension::Power, 1.0, "W"), 60.0);
    }

    #[test]
    fn letter_case_subscripts_and_dots_do_not_matter() {
        for spelling in ["mmHg", "MMHG", "mm[Hg]", "mm Hg", "Torr"] {
            assert_eq!(
                Dimension::GasPressure.find(spelling).map(|unit| unit.word),
                Some("mmHg"),
                "{spelling}"
            );
        }
        for spelling in ["cmH₂O", "cmh2o", "cm[H2O]", "cm H2O"] {
            assert_eq!(
                Dimension::AirwayPressure.find(spelling).map(|unit| unit.word),
                Some("cmH2O"),
                "{spelling}"
            );
        }
        for spelling in ["cmH2O·s/L", "cm[H2O].s/L", "cmH2O/L/s", "cmH2O*s/l"] {
            assert!(Dimension::Resistance.find(spelling).is_some(), "{spelling}");
        }
    }

    #[test]
    fn no_spelling_means_two_things_within_a_dimension() {
        for dimension in Dimension::ALL {
            let mut seen: Vec<(String, &str)> = Vec::new();
            for unit in dimension.units() {
                for spelling in [unit.word, unit.ucum].into_iter().chain(unit.also.iter().copied()) {
                    let spelling = folded(spelling);
                    let clash = seen.iter().find(|(known, word)| *known == spelling && *word != unit.word);
                    assert_eq!(clash, None, "{dimension:?} {}", unit.word);
                    seen.push((spelling, unit.word));
                }
                assert!(unit.numerator > 0.0 && unit.denominator > 0.0 && !unit.source.is_empty());
            }
        }
    }
}
