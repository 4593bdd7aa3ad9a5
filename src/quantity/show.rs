//! Showing a quantity: no more digits than it deserves, a zero before the point, none at the end, never "-0".
//!
//! ```
//! use tidewright::quantity::{show::{PressureUnit, show, with_unit}, unit::Dimension};
//! assert_eq!(with_unit(62.6, Dimension::GasPressure, PressureUnit::MmHg), "63 mmHg");
//! assert_eq!(with_unit(62.6, Dimension::GasPressure, PressureUnit::KPa), "8.3 kPa");
//! assert_eq!(show(7.3, Dimension::Ph, PressureUnit::MmHg), "7.30");
//! assert_eq!(show(0.6, Dimension::Fraction, PressureUnit::MmHg), "0.6");
//! assert_eq!(show(2.0, Dimension::Ratio, PressureUnit::MmHg), "1:2");
//! ```

use super::unit::Dimension;

/// The unit gas pressures are shown in.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum PressureUnit {
    /// mmHg, whole.
    #[default]
    MmHg,
    /// kPa, to a tenth.
    KPa,
}

impl PressureUnit {
    /// As it is written.
    pub const fn word(self) -> &'static str {
        match self {
            Self::MmHg => "mmHg",
            Self::KPa => "kPa",
        }
    }

    /// A gas pressure in mmHg, in this unit. 760 mmHg are 101.325 kPa by definition.
    pub const fn from_mmhg(self, mmhg: f64) -> f64 {
        match self {
            Self::MmHg => mmhg,
            Self::KPa => mmhg * 101.325 / 760.0,
        }
    }

    /// A gas pressure in this unit, in mmHg.
    pub const fn to_mmhg(self, value: f64) -> f64 {
        match self {
            Self::MmHg => value,
            Self::KPa => value * 760.0 / 101.325,
        }
    }

    /// Digits after the point that a gas pressure deserves in this unit.
    pub const fn digits(self) -> usize {
        match self {
            Self::MmHg => 0,
            Self::KPa => 1,
        }
    }
}

/// A number with at most `digits` after the point, zeros at the end left out.
pub fn number(value: f64, digits: usize) -> String {
    let text = fixed(value, digits);
    if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.').to_owned() } else { text }
}

/// A number with exactly `digits` after the point; "not known" when it is not finite.
pub fn fixed(value: f64, digits: usize) -> String {
    if !value.is_finite() {
        return "not known".to_owned();
    }
    let text = format!("{value:.digits$}");
    let is_zero = !text.contains(|digit: char| matches!(digit, '1'..='9'));
    text.strip_prefix('-').filter(|_| is_zero).map_or(text.clone(), str::to_owned)
}

/// Digits after the point that a value deserves, in the unit it is shown in. Common practice at the bedside.
pub const fn digits(value: f64, dimension: Dimension, unit: PressureUnit) -> usize {
    match dimension {
        Dimension::GasPressure | Dimension::PressurePerHour => unit.digits(),
        Dimension::AirwayPressure | Dimension::Compliance | Dimension::Resistance => {
            if value.abs() < 10.0 {
                1
            } else {
                0
            }
        }
        Dimension::Volume
        | Dimension::BloodPressure
        | Dimension::Altitude
        | Dimension::Age
        | Dimension::Minutes
        | Dimension::GasOutput => 0,
        Dimension::Rate
        | Dimension::Length
        | Dimension::Mass
        | Dimension::Flow
        | Dimension::Temperature
        | Dimension::Ratio
        | Dimension::Concentration
        | Dimension::VolumePerMass
        | Dimension::Power
        | Dimension::Number => 1,
        Dimension::Fraction | Dimension::Time | Dimension::Ph => 2,
    }
}

/// A value in the default unit of `dimension`, as text without its unit; gas pressures in `unit`.
pub fn show(value: f64, dimension: Dimension, unit: PressureUnit) -> String {
    match dimension {
        // pH keeps both its digits: 7.30 is how the trade reads it.
        Dimension::Ph => fixed(value, 2),
        Dimension::GasPressure | Dimension::PressurePerHour => number(unit.from_mmhg(value), unit.digits()),
        Dimension::Ratio => ratio(value),
        _ => number(value, digits(value, dimension, unit)),
    }
}

/// A value in the default unit of `dimension`, as text with its unit; gas pressures in `unit`.
pub fn with_unit(value: f64, dimension: Dimension, unit: PressureUnit) -> String {
    let shown = show(value, dimension, unit);
    let word = match (dimension, unit) {
        (Dimension::GasPressure, unit) => unit.word(),
        (Dimension::PressurePerHour, PressureUnit::KPa) => "kPa/h",
        (other, _) => other.unit(),
    };
    joined(&shown, word)
}

/// Above this a PaCO2 is not told apart, mmHg: no patient is let come near it. Common practice.
pub const PACO2_TOLD_UP_TO_MMHG: f64 = 200.0;

/// A PaCO2 without its unit; one that no patient reaches is only said to be over 200 mmHg.
pub fn paco2(mmhg: f64, unit: PressureUnit) -> String {
    let told = |mmhg| show(mmhg, Dimension::GasPressure, unit);
    if mmhg > PACO2_TOLD_UP_TO_MMHG { format!("over {}", told(PACO2_TOLD_UP_TO_MMHG)) } else { told(mmhg) }
}

/// A PaCO2 with its unit.
pub fn paco2_with_unit(mmhg: f64, unit: PressureUnit) -> String {
    joined(&paco2(mmhg, unit), unit.word())
}

/// A number and its unit as people write them together: "63 mmHg", "22/min", "0.6".
pub fn joined(shown: &str, word: &str) -> String {
    match (word, word.strip_prefix("1/")) {
        ("", _) => shown.to_owned(),
        (_, Some(per)) => format!("{shown}/{per}"),
        _ => format!("{shown} {word}"),
    }
}

/// Expiration over inspiration, as inspiration to expiration: 2 is "1:2", 0.5 is "2:1".
pub fn ratio(expiration: f64) -> String {
    if expiration >= 1.0 {
        format!("1:{}", number(expiration, 1))
    } else {
        format!("{}:1", number(1.0 / expiration, 1))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn no_trailing_zero_a_leading_zero_and_never_minus_zero() {
        assert_eq!(number(0.50, 2), "0.5");
        assert_eq!(number(100.0, 0), "100");
        assert_eq!(number(100.0, 2), "100");
        assert_eq!(number(-0.04, 1), "0");
        assert_eq!(number(-0.06, 1), "-0.1");
        assert_eq!(fixed(-0.001, 2), "0.00");
        assert_eq!(number(f64::NAN, 1), "not known");
        assert_eq!(number(f64::INFINITY, 1), "not known");
    }

    #[test]
    fn digits_by_what_is_measured() {
        let mmhg = PressureUnit::MmHg;
        assert_eq!(with_unit(24.6, Dimension::AirwayPressure, mmhg), "25 cmH2O");
        assert_eq!(with_unit(2.34, Dimension::AirwayPressure, mmhg), "2.3 cmH2O");
        assert_eq!(with_unit(9.96, Dimension::Compliance, mmhg), "10 mL/cmH2O");
        assert_eq!(with_unit(380.4, Dimension::Volume, mmhg), "380 mL");
        assert_eq!(with_unit(0.624, Dimension::Fraction, mmhg), "0.62");
        assert_eq!(with_unit(17.04, Dimension::Power, mmhg), "17 J/min");
        assert_eq!(with_unit(7.3, Dimension::Ph, mmhg), "7.30");
        assert_eq!(with_unit(0.5, Dimension::Ratio, mmhg), "2:1");
        assert_eq!(with_unit(22.0, Dimension::Rate, mmhg), "22/min");
        assert_eq!(with_unit(10.0, Dimension::PressurePerHour, PressureUnit::KPa), "1.3 kPa/h");
    }
}
