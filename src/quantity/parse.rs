//! Reading a quantity as people write it: a number, perhaps with its unit.
//!
//! ```
//! use tidewright::quantity::{parse::parse, unit::Dimension};
//! assert_eq!(parse("0.45 L", Dimension::Volume), Ok(450.0));
//! assert_eq!(parse("60 %", Dimension::Fraction), Ok(0.6));
//! assert_eq!(parse("1:1.5", Dimension::Ratio), Ok(1.5));
//! assert!((parse("5 ft 4 in", Dimension::Length).unwrap() - 162.56).abs() < 1e-9);
//! assert!((parse("8,4 kPa", Dimension::GasPressure).unwrap() - 63.0).abs() < 0.01);
//! // One thousand two hundred and thirty-four, or a little over one? Nobody can tell, so nobody guesses.
//! assert!(parse("1,234 mL", Dimension::Volume).is_err());
//! ```

mod number;

use std::fmt;

use super::unit::{Dimension, Unit, dimension_of};

/// A quantity as it was written.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Reading {
    /// In the default unit of its dimension; finite.
    pub value: f64,
    /// The number that was written, in the unit that was written.
    pub number: f64,
    /// The unit that was written; `None` for a plain number, a ratio and feet with inches.
    pub unit: Option<&'static Unit>,
}

/// Why a text is no quantity.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Unread {
    /// Nothing is there.
    Empty,
    /// It does not begin with a number.
    NoNumber(String),
    /// A comma that may part thousands or decimals; the two readings.
    Comma {
        /// As written.
        text: String,
        /// With the comma left out.
        whole: String,
        /// With the comma as a decimal point.
        decimal: String,
    },
    /// A unit nobody knows, and what would fit.
    Unknown {
        /// As written.
        unit: String,
        /// What is measured here.
        dimension: Dimension,
    },
    /// A unit of something else.
    Foreign {
        /// As written.
        unit: String,
        /// What that unit measures.
        measures: Dimension,
        /// What is measured here.
        dimension: Dimension,
    },
    /// A ratio that is not two numbers above 0 with a colon.
    NoRatio(String),
    /// Feet with inches of 12 or more.
    Inches(String),
}

impl fmt::Display for Unread {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Empty => write!(out, "there is no number here"),
            Self::NoNumber(text) => write!(out, "\"{}\" is not a number", fit(text)),
            Self::Comma { text, whole, decimal } => {
                write!(
                    out,
                    "\"{text}\" could mean {whole} or {decimal}: the comma may part thousands or decimals"
                )
            }
            Self::Unknown { unit, dimension } => {
                write!(out, "\"{}\" is not a unit of {}", fit(unit), bare(*dimension))
            }
            Self::Foreign { unit, measures, dimension } => {
                write!(out, "\"{unit}\" is a unit of {}, and this is {}", bare(*measures), dimension.words())
            }
            Self::NoRatio(text) => {
                write!(
                    out,
                    "\"{}\" does not say which part is inspiration and which is expiration",
                    fit(text)
                )
            }
            Self::Inches(text) => write!(out, "\"{}\" has 12 inches or more beside the feet", fit(text)),
        }
    }
}

impl std::error::Error for Unread {}

/// Typed text fit to stand in a sentence: short, without control characters.
fn fit(text: &str) -> String {
    text.chars().take(40).map(|letter| if letter.is_control() { '�' } else { letter }).collect()
}

fn bare(dimension: Dimension) -> &'static str {
    let words = dimension.words();
    words.strip_prefix("a ").or_else(|| words.strip_prefix("an ")).unwrap_or(words)
}

impl Unread {
    /// What to write instead.
    pub fn help(&self) -> String {
        match self {
            Self::Empty | Self::NoNumber(_) => {
                "write a number, with its unit if it is not the usual one".to_owned()
            }
            Self::Comma { whole, decimal, .. } => format!("write {whole} or {decimal}, whichever was meant"),
            Self::Unknown { dimension, .. } | Self::Foreign { dimension, .. } => match dimension {
                Dimension::Ratio => {
                    "write inspiration to expiration without a unit, as in \"1:2\"".to_owned()
                }
                Dimension::Fraction => "write a fraction such as 0.6, or percent, as in \"60 %\"".to_owned(),
                Dimension::Ph | Dimension::Number => "write the number alone, without a unit".to_owned(),
                other => format!("units understood here: {}", other.choices()),
            },
            Self::NoRatio(_) => "write inspiration to expiration, as in \"1:2\"".to_owned(),
            Self::Inches(_) => "write feet and the inches left over, as in \"5 ft 4 in\"".to_owned(),
        }
    }
}

/// Reads `text` as a quantity of `dimension`, in its default unit.
///
/// # Errors
/// See [`Unread`]: nothing there, no number, a comma that could mean two things, a unit that is unknown or measures
/// something else, a ratio without a colon, inches of 12 or more. Numbers are plain decimals: no exponent, no hex, no
/// infinity.
pub fn parse(text: &str, dimension: Dimension) -> Result<f64, Unread> {
    read(text, dimension).map(|reading| reading.value)
}

/// Reads `text` as a quantity of `dimension`, and keeps how it was written.
///
/// # Errors
/// As [`parse`].
pub fn read(text: &str, dimension: Dimension) -> Result<Reading, Unread> {
    let text = text.trim();
    if text.is_empty() {
        return Err(Unread::Empty);
    }
    if dimension == Dimension::Ratio {
        return ratio(text).map(|value| Reading { value, number: value, unit: None });
    }
    if dimension == Dimension::Length
        && let Some(value) = feet_and_inches(text)?
    {
        return Ok(Reading { value, number: value, unit: None });
    }
    let (number, rest) = number::leading(text)?;
    let spelling = rest.trim();
    if spelling.is_empty() {
        return Ok(Reading { value: number, number, unit: None });
    }
    let unit = dimension.find(spelling).ok_or_else(|| unknown(text, spelling, dimension))?;
    Ok(Reading { value: unit.to_default(number), number, unit: Some(unit) })
}

fn unknown(text: &str, spelling: &str, dimension: Dimension) -> Unread {
    // "1 000" or "8.4.1": the rest is more of a number, not a unit.
    if spelling.starts_with(|first: char| first.is_ascii_digit() || matches!(first, '.' | ',' | '_')) {
        return Unread::NoNumber(text.to_owned());
    }
    let unit = spelling.to_owned();
    match dimension_of(spelling) {
        Some(measures) if measures != dimension => Unread::Foreign { unit, measures, dimension },
        _ => Unread::Unknown { unit, dimension },
    }
}

/// "1:2" as expiration over inspiration.
fn ratio(text: &str) -> Result<f64, Unread> {
    let astray = || Unread::NoRatio(text.to_owned());
    let (inspiration, expiration) = text.split_once(':').ok_or_else(astray)?;
    let inspiration = number::whole(inspiration.trim())?;
    let expiration = number::whole(expiration.trim())?;
    if inspiration > 0.0 && expiration > 0.0 { Ok(expiration / inspiration) } else { Err(astray()) }
}

/// "5 ft 4 in" and "5'4\"" in cm; `None` when it is a plain length.
fn feet_and_inches(text: &str) -> Result<Option<f64>, Unread> {
    let straight: String = text
        .chars()
        .map(|letter| match letter {
            '’' | '′' | '‘' => '\'',
            '”' | '″' | '“' => '"',
            other => other,
        })
        .collect();
    let lower = straight.to_lowercase();
    let Some((feet, rest)) = ["feet", "foot", "ft", "'"]
        .iter()
        .find_map(|mark| lower.split_once(mark))
        .filter(|(feet, _)| !feet.is_empty())
    else {
        return Ok(None);
    };
    let rest = rest.trim().trim_start_matches('.').trim();
    let inches =
        ["inches", "inch", "in", "\"", "''"].iter().find_map(|mark| rest.strip_suffix(mark)).unwrap_or(rest);
    let feet = number::whole(feet.trim())?;
    let inches = if inches.trim().is_empty() { 0.0 } else { number::whole(inches.trim())? };
    if !(0.0..12.0).contains(&inches) {
        return Err(Unread::Inches(text.to_owned()));
    }
    // Definition: the inch is 2.54 cm, the foot 12 inches.
    Ok(Some((feet * 12.0 + inches) * 2.54))
}

#[cfg(test)]
mod tests;
