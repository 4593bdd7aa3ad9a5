//! How a text is shown: units of gas pressure, plain ASCII or not, and the width it keeps to.

use crate::quantity::show::{PressureUnit, paco2, show};
use crate::quantity::unit::Dimension;

/// A space at which no line is broken.
pub const TOGETHER: char = '\u{A0}';

/// The width texts keep to.
pub const WIDTH: usize = 80;

/// Choices that hold for a whole text.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct Face {
    /// The unit gas pressures are shown in.
    pub unit: PressureUnit,
    /// True when only ASCII may be written.
    pub ascii: bool,
}

impl Face {
    /// A value of a dimension, without its unit.
    pub fn value(self, value: f64, dimension: Dimension) -> String {
        show(value, dimension, self.unit)
    }

    /// A value that may be unknown.
    pub fn known(self, value: Option<f64>, dimension: Dimension) -> String {
        value.map_or_else(|| "unknown".to_owned(), |value| self.value(value, dimension))
    }

    /// A gas pressure with its unit.
    pub fn gas(self, mmhg: f64) -> String {
        format!("{} {}", self.value(mmhg, Dimension::GasPressure), self.unit.word())
    }

    /// A forecast PaCO2, without its unit; one that no patient reaches is only said to be over 200 mmHg.
    pub fn paco2(self, mmhg: f64) -> String {
        paco2(mmhg, self.unit)
    }

    /// The same where it may be unknown.
    pub fn known_paco2(self, mmhg: Option<f64>) -> String {
        mmhg.map_or_else(|| "unknown".to_owned(), |mmhg| self.paco2(mmhg))
    }

    /// A range of PaCO2, without its unit; without an upper end where that is beyond what a patient reaches.
    pub fn gas_range(self, low: Option<f64>, high: Option<f64>) -> String {
        let end = |mmhg: f64| self.paco2(mmhg);
        match (low, high) {
            (Some(low), Some(_)) if end(low).starts_with("over") => end(low),
            (Some(low), Some(high)) if end(high).starts_with("over") => format!("over {}", end(low)),
            (Some(low), Some(high)) => format!("{}{}{}", end(low), self.dash(), end(high)),
            // No upper end: some of the chance lies where no breath passes the dead space.
            (Some(low), None) => format!("over {}", end(low)),
            _ => "unknown".to_owned(),
        }
    }

    /// A dash between the ends of a range.
    pub const fn dash(self) -> &'static str {
        if self.ascii { "-" } else { "–" }
    }

    /// Between the parts of a line.
    pub const fn dot(self) -> &'static str {
        // A hyphen between numbers would read as a minus or a range.
        if self.ascii { " | " } else { " · " }
    }

    /// Before a value that may be larger.
    pub const fn at_least(self) -> &'static str {
        if self.ascii { ">=" } else { "≥" }
    }

    /// Before an upper bound.
    pub const fn at_most(self) -> &'static str {
        if self.ascii { "<=" } else { "≤" }
    }

    /// Text wrapped to the width, with a first and a later indent.
    pub fn wrapped(self, text: &str, first: &str, later: &str) -> String {
        let text = if self.ascii { ascii(text) } else { text.to_owned() };
        // Lines break at spaces alone: never within a range ("34-53") or at a space that keeps a number and its unit together.
        let options = textwrap::Options::new(WIDTH)
            .initial_indent(first)
            .subsequent_indent(later)
            .word_separator(textwrap::WordSeparator::AsciiSpace)
            .word_splitter(textwrap::WordSplitter::NoHyphenation);
        textwrap::fill(&text, options).replace(TOGETHER, " ")
    }
}

/// The same words in ASCII.
pub fn ascii(text: &str) -> String {
    let mut plain = String::with_capacity(text.len());
    for letter in text.chars() {
        match letter {
            '–' | '—' | '−' => plain.push('-'),
            // UCUM's sign of multiplication.
            '·' => plain.push('.'),
            TOGETHER => plain.push(TOGETHER),
            '≥' => plain.push_str(">="),
            '≤' => plain.push_str("<="),
            '→' => plain.push_str("->"),
            '°' => plain.push_str("deg "),
            '±' => plain.push_str("+/-"),
            '×' => plain.push('x'),
            'τ' => plain.push_str("tau"),
            '’' => plain.push('\''),
            other if other.is_ascii() => plain.push(other),
            _ => plain.push('?'),
        }
    }
    plain
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ascii_is_ascii() {
        assert_eq!(ascii("cmH2O·s/L ≥ 3 – 4 °C"), "cmH2O.s/L >= 3 - 4 deg C");
        assert!(ascii("Bett fünf ☃").is_ascii());
    }

    #[test]
    fn a_range_has_no_upper_end_that_no_patient_reaches() {
        let face = Face::default();
        assert_eq!(face.gas_range(Some(38.2), Some(66.9)), "38–67");
        assert_eq!(face.gas_range(Some(38.2), None), "over 38");
        assert_eq!(face.gas_range(Some(90.0), Some(4865.0)), "over 90");
        assert_eq!(face.gas_range(Some(254.0), Some(874.0)), "over 200");
        assert_eq!(face.gas_range(None, Some(50.0)), "unknown");
    }
}
