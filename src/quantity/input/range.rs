//! Is a value plausible? If not: what it may have been meant to be, as a question, never as a repair.

use super::{Input, Key};
use crate::quantity::show::{self, PressureUnit};
use crate::quantity::unit::{Dimension, Unit};

/// How a value was typed.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Typed {
    /// A plain number, in the default unit.
    Plain,
    /// A number with a unit.
    With {
        /// The number, in that unit.
        number: f64,
        /// The unit.
        unit: &'static Unit,
    },
}

/// A value outside its plausible range, or not finite.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct OutOfRange {
    /// What is wrong, a sentence with the value and the range.
    pub message: String,
    /// What may have been meant, or an example.
    pub help: String,
}

/// A value's plausible range, and how to speak of it.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Plausible {
    /// Its key, as it is written.
    pub name: &'static str,
    /// What a clinician calls it.
    pub words: &'static str,
    /// What it measures.
    pub dimension: Dimension,
    /// The least plausible value, in the default unit.
    pub min: f64,
    /// The greatest plausible value, in the default unit.
    pub max: f64,
    /// Digits after the point that it deserves, in the default unit.
    pub digits: usize,
    /// A value as it is written in a file.
    pub example: &'static str,
    /// Whether the units of weather reports are likely readings.
    pub weather: bool,
    /// Whether it is spoken of as a flag of the command line rather than a key of a file.
    pub as_flag: bool,
}

impl Input {
    /// The plausible range of this input.
    pub fn plausible(&self) -> Plausible {
        let Self { key, name, words, dimension, min, max, digits, example, .. } = *self;
        Plausible {
            name,
            words,
            dimension,
            min,
            max,
            digits,
            example,
            weather: key == Key::BarometricPressure,
            as_flag: false,
        }
    }

    /// Checks a value in the default unit against the plausible range.
    ///
    /// # Errors
    /// When it is not finite, below `min` or above `max`.
    pub fn accept(&self, value: f64, typed: Typed) -> Result<f64, OutOfRange> {
        self.plausible().accept(value, typed)
    }
}

impl Plausible {
    /// The same, spoken of as a flag of the command line.
    #[must_use]
    pub const fn flag(self) -> Self {
        Self { as_flag: true, ..self }
    }

    /// How a value is written: `rate = 22` in a file, `--rate 22` as a flag.
    pub fn written(&self, value: &str) -> String {
        if self.as_flag {
            format!("--{} {value}", self.name.replace('_', "-"))
        } else {
            format!("{} = {value}", self.name)
        }
    }

    const fn unit(&self) -> &'static str {
        self.dimension.unit()
    }

    /// A value in the default unit, as text with the unit, as it was typed down to a thousandth.
    pub fn shown(&self, value: f64) -> String {
        let shown = match self.dimension {
            Dimension::Ratio => show::ratio(value),
            Dimension::Ph => show::show(value, Dimension::Ph, PressureUnit::MmHg),
            _ => show::number(value, 3),
        };
        show::joined(&shown, self.unit())
    }

    /// Checks a value in the default unit against the plausible range.
    ///
    /// # Errors
    /// When it is not finite, below `min` or above `max`.
    pub fn accept(&self, value: f64, typed: Typed) -> Result<f64, OutOfRange> {
        if value.is_finite() && self.holds(value) {
            return Ok(value);
        }
        Err(OutOfRange { message: self.complaint(value, typed), help: self.likely(value, typed) })
    }

    /// The plausible range in words: "10 to 200 mmHg".
    pub fn range(&self) -> String {
        if self.dimension == Dimension::Ratio {
            return format!("{} to {}", show::ratio(self.min), show::ratio(self.max));
        }
        let [low, high] = [self.min, self.max].map(|bound| show::number(bound, 3));
        format!("{low} to {}", show::joined(&high, self.unit()))
    }

    fn complaint(&self, value: f64, typed: Typed) -> String {
        if !value.is_finite() {
            return format!("{} must be a finite number, from {}", self.words, self.range());
        }
        let side = if value < self.min { "below" } else { "above" };
        let shown = match typed {
            Typed::Plain => self.shown(value),
            Typed::With { number, unit } if unit.word == self.unit() => {
                show::joined(&show::number(number, 3), unit.word)
            }
            Typed::With { number, unit } => {
                let converted = self.shown_rounded(value);
                format!("{} ({converted})", show::joined(&show::number(number, 3), unit.word))
            }
        };
        format!("{} of {shown} is {side} what is plausible, {}", self.words, self.range())
    }

    fn shown_rounded(&self, value: f64) -> String {
        let shown = show::number(value, if value.abs() < 100.0 { self.digits.max(1) } else { self.digits });
        show::joined(&shown, self.unit())
    }

    fn holds(&self, value: f64) -> bool {
        (self.min..=self.max).contains(&value)
    }

    /// A reading in another unit first; then a slip of the sign or of the decimal point; else an example.
    fn likely(&self, value: f64, typed: Typed) -> String {
        let number = match typed {
            Typed::Plain => value,
            Typed::With { number, .. } => number,
        };
        if number.is_finite() {
            let written = match typed {
                Typed::Plain => self.unit(),
                Typed::With { unit, .. } => unit.word,
            };
            let mut units: Vec<&Unit> = self
                .dimension
                .units()
                .iter()
                // No weather report speaks of centimetres of water.
                .filter(|unit| unit.offered || (self.weather && unit.word != "cmH2O"))
                .filter(|unit| unit.word != written && self.holds(unit.to_default(number)))
                .collect();
            // hPa and mbar are one unit by two names: one offer is enough.
            units.dedup_by_key(|unit| unit.to_default(number).to_bits());
            let readings: Vec<String> = units.into_iter().map(|unit| self.offer(number, unit)).collect();
            if !readings.is_empty() {
                return readings.join("; ");
            }
            if self.holds(-number) {
                return format!("a sign missing? if so, write {}", self.written(&show::number(-number, 3)));
            }
            // A share is seldom ten-fold wrong, and mostly a percentage, which was offered above.
            if matches!(typed, Typed::Plain)
                && self.dimension != Dimension::Fraction
                && let Some(slip) = self.slip(value)
            {
                return slip;
            }
        }
        format!("write, for example, {}", self.written(self.example))
    }

    fn offer(&self, number: f64, unit: &Unit) -> String {
        let shown = show::number(number, 3);
        let value = unit.to_default(number);
        if unit.word == self.unit() {
            let reading = self.shown(value);
            return format!(
                "{reading} would be plausible: if that was meant, write {}",
                self.written(&shown)
            );
        }
        let (reading, converted) = (show::joined(&shown, unit.word), self.shown_rounded(value));
        let written = self.written(&format!("\"{reading}\""));
        format!("{reading} would be plausible ({converted}): if that was meant, write {written}")
    }

    fn slip(&self, value: f64) -> Option<String> {
        let slips = [
            (10.0, "10 times too high?"),
            (0.1, "10 times too low?"),
            (100.0, "100 times too high?"),
            (1000.0, "1000 times too high?"),
        ];
        slips.into_iter().find(|(factor, _)| self.holds(value / factor)).map(|(factor, question)| {
            let meant = value / factor;
            format!(
                "{question} {} would be plausible: look again, and if that is it, write {}",
                self.shown(meant),
                self.written(&show::number(meant, 3))
            )
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quantity::parse::read;

    fn refused(key: Key, value: f64) -> (String, String) {
        let out = key.input().accept(value, Typed::Plain).unwrap_err();
        (out.message, out.help)
    }

    #[test]
    fn a_number_plausible_in_another_unit_is_offered_and_never_taken() {
        let (message, help) = refused(Key::Paco2, 5.3);
        assert_eq!(message, "PaCO2 of 5.3 mmHg is below what is plausible, 10 to 200 mmHg");
        // 5.3 kPa is 39.75 mmHg by the definition of the torr.
        assert_eq!(
            help,
            "5.3 kPa would be plausible (39.8 mmHg): if that was meant, write paco2 = \"5.3 kPa\""
        );
        assert_eq!(
            refused(Key::Height, 1.63).1,
            "1.63 m would be plausible (163 cm): if that was meant, write height = \"1.63 m\""
        );
        assert_eq!(
            refused(Key::Fio2, 60.0).1,
            "60 % would be plausible (0.6): if that was meant, write fio2 = \"60 %\""
        );
        assert_eq!(
            refused(Key::TidalVolume, 0.38).1,
            "0.38 L would be plausible (380 mL): if that was meant, write tidal_volume = \"0.38 L\""
        );
        assert_eq!(
            refused(Key::Temperature, 100.4).1,
            "100.4 °F would be plausible (38 °C): if that was meant, write temperature = \"100.4 °F\""
        );
    }

    #[test]
    fn a_slip_of_ten_is_asked_about() {
        let (message, help) = refused(Key::Rate, 220.0);
        assert_eq!(message, "set rate of 220/min is above what is plausible, 4 to 60/min");
        assert_eq!(
            help,
            "10 times too high? 22/min would be plausible: look again, and if that is it, write rate = 22"
        );
        assert_eq!(
            refused(Key::TidalVolume, 38.0).1,
            "10 times too low? 380 mL would be plausible: look again, and if that is it, write tidal_volume = 380"
        );
        assert_eq!(
            refused(Key::Ph, 724.0).1,
            "100 times too high? 7.24 would be plausible: look again, and if that is it, write ph = 7.24"
        );
        assert_eq!(
            refused(Key::InspiratoryPressureMax, 28.0).1,
            "a sign missing? if so, write inspiratory_pressure_max = -28"
        );
    }

    #[test]
    fn a_wrong_unit_typed_is_shown_with_what_it_comes_to() {
        let peep = Key::Peep.input();
        let reading = read("10 kPa", peep.dimension).unwrap();
        let typed = Typed::With { number: reading.number, unit: reading.unit.unwrap() };
        let out = peep.accept(reading.value, typed).unwrap_err();
        // 10 kPa is 101.97 cmH2O by the definition of the conventional centimetre of water.
        assert_eq!(out.message, "set PEEP of 10 kPa (102 cmH2O) is above what is plausible, 0 to 30 cmH2O");
        assert_eq!(out.help, "10 cmH2O would be plausible: if that was meant, write peep = 10");
    }

    #[test]
    fn bounds_belong_to_the_range_and_nothing_unfinite_does() {
        for input in &crate::quantity::input::INPUTS {
            assert!(
                input.accept(input.min, Typed::Plain).is_ok()
                    && input.accept(input.max, Typed::Plain).is_ok()
            );
            for value in [f64::NAN, f64::INFINITY, f64::NEG_INFINITY] {
                let out = input.accept(value, Typed::Plain).unwrap_err();
                assert!(!out.message.contains("NaN") && !out.message.contains("inf "), "{}", out.message);
            }
        }
    }
}
