//! How a text is shown: units of gas pressure, plain ASCII or not, and the width it keeps to.

use crate::quantity::show::{PressureUnit, show};
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

    /// A range of gas pressures, without its unit.
    pub fn gas_range(self, low: Option<f64>, high: Option<f64>) -> String {
        let end = |mmhg: Option<f64>| self.known(mmhg, Dimension::GasPressure);
        format!("{}{}{}", end(low), self.dash(), end(high))
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
    fn a_range_names_what_is_unknown() {
        let face = Face::default();
        assert_eq!(face.gas_range(Some(38.2), Some(66.9)), "38–67");
        assert_eq!(face.gas_range(Some(38.2), None), "38–unknown");
    }
}
