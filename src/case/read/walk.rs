//! One pass over a table: each value read by its kind, each problem kept with its place, nothing stopped at.

use std::ops::Range;

use toml::Spanned;
use toml::de::{DeTable, DeValue};

use super::nearest::nearest;
use crate::case::fault::Place;
use crate::case::problem::{Problem, Spans};
use crate::quantity::input::{OutOfRange, Plausible, Typed};
use crate::quantity::parse::{self, Unread};
use crate::quantity::show;
use crate::quantity::unit::Dimension;

/// A value and where it stands.
pub(super) type Value<'i> = Spanned<DeValue<'i>>;
/// A key and where it stands.
pub(super) type Name<'i> = Spanned<toml::de::DeString<'i>>;

/// What has been found so far.
#[derive(Default)]
pub(super) struct Walk {
    pub problems: Vec<Problem>,
    pub spans: Spans,
    /// Values that are given but could not be read.
    pub unread: Vec<Place>,
}

impl Walk {
    /// Keeps a problem with the value at `place`, which thereby counts as unread.
    pub(super) fn problem(
        &mut self,
        place: Place,
        span: Range<usize>,
        message: impl Into<String>,
        help: impl Into<String>,
    ) {
        self.unread.push(place);
        self.problems.push(Problem { places: vec![place], ..Problem::at(span, message, help) });
    }

    /// A value of the wrong kind.
    fn kind(&mut self, place: Place, value: &Value<'_>, wanted: &str, example: &str) {
        let found = kind_of(value.get_ref());
        let key = if place.key.is_empty() { place.table } else { place.key };
        self.problem(
            place,
            value.span(),
            format!("{key} must be {wanted}, and this is {found}"),
            format!("write, for example, {example}"),
        );
    }

    /// A key that does not exist here.
    pub(super) fn unknown(
        &mut self,
        name: &Name<'_>,
        header: &str,
        known: &[&str],
        elsewhere: Option<String>,
    ) {
        let typed = shown(name.get_ref());
        let help = if let Some(home) = elsewhere {
            format!("{typed} belongs under {home}")
        } else if let Some(near) = nearest(name.get_ref(), known) {
            format!("did you mean {near}?")
        } else {
            format!("known here: {}", known.join(", "))
        };
        let here =
            if header.is_empty() { "at the top of the file".to_owned() } else { format!("under {header}") };
        self.problems.push(Problem::at(name.span(), format!("there is no key {typed} {here}"), help));
    }

    /// A key beside the entries of a text that is to be added to a file.
    pub(super) fn beside_entries(&mut self, name: &Name<'_>) {
        let typed = shown(name.get_ref());
        self.problems.push(Problem::at(
            name.span(),
            format!("{typed} stands beside [[entry]], and only entries can be added to a file"),
            "take it away here; what holds for the whole case is written once, at the top of its file",
        ));
    }

    /// A quantity: a plain number or a string with its unit.
    pub(super) fn number(&mut self, input: &Plausible, place: Place, value: &Value<'_>) -> Option<f64> {
        self.spans.insert(place, value.span());
        let example = input.written(input.example);
        let (number, typed) = match value.get_ref() {
            DeValue::Integer(integer) if integer.radix() == 10 => (number_of(integer.as_str()), Typed::Plain),
            DeValue::Float(float) => (number_of(float.as_str()), Typed::Plain),
            DeValue::String(text) => match text_to_number(input, text) {
                Ok(read) => read,
                Err(out) => {
                    self.problem(place, value.span(), out.message, out.help);
                    return None;
                }
            },
            DeValue::Integer(_) => {
                let message = format!("{} must be a decimal number", input.words);
                self.problem(place, value.span(), message, format!("write, for example, {example}"));
                return None;
            }
            _ => {
                self.kind(place, value, "a number, or a number with its unit in quotation marks", &example);
                return None;
            }
        };
        if input.dimension == Dimension::Ratio && !matches!(value.get_ref(), DeValue::String(_)) {
            let message =
                format!("{} as a plain number could mean inspiration first or expiration first", input.words);
            let help = if number.is_finite() && number > 0.0 {
                let [one, other] = [number, 1.0 / number].map(show::ratio);
                format!("write both parts, inspiration first: ratio = \"{one}\" or ratio = \"{other}\"")
            } else {
                format!("write both parts, inspiration first: {example}")
            };
            self.problem(place, value.span(), message, help);
            return None;
        }
        match input.accept(number, typed) {
            Ok(accepted) => Some(accepted),
            Err(out) => {
                self.problem(place, value.span(), out.message, out.help);
                None
            }
        }
    }

    /// Two quantities, the lower first.
    pub(super) fn pair(&mut self, input: &Plausible, place: Place, value: &Value<'_>) -> Option<[f64; 2]> {
        self.spans.insert(place, value.span());
        let Some([first, second]) = value.get_ref().as_array().map(AsRef::as_ref) else {
            self.kind(place, value, "two numbers in brackets", &input.written(input.example));
            return None;
        };
        let (low, high) = (self.number(input, place, first), self.number(input, place, second));
        self.spans.insert(place, value.span());
        let (low, high) = (low?, high?);
        if low > high {
            self.problem(
                place,
                value.span(),
                format!("{} runs from {} down to {}", input.words, input.shown(low), input.shown(high)),
                format!("write the lower end first, for example {}", input.written(input.example)),
            );
            return None;
        }
        Some([low, high])
    }

    /// Text, without characters that would move a terminal's cursor or turn the reading direction.
    pub(super) fn text(
        &mut self,
        place: Place,
        value: &Value<'_>,
        many_lines: bool,
        example: &str,
    ) -> Option<String> {
        self.spans.insert(place, value.span());
        let Some(text) = value.get_ref().as_str() else {
            self.kind(place, value, "text in quotation marks", example);
            return None;
        };
        let unfit =
            text.chars().find(|letter| is_unfit(*letter) && !(many_lines && matches!(letter, '\n' | '\t')));
        if let Some(unfit) = unfit {
            let key = place.key;
            self.problem(
                place,
                value.span(),
                format!("{key} holds an invisible control character (U+{:04X})", u32::from(unfit)),
                format!("take it away, or type the text again without copying it; for example {example}"),
            );
            return None;
        }
        Some(text.to_owned())
    }

    /// One of a few words.
    pub(super) fn word<T: Copy>(
        &mut self,
        place: Place,
        value: &Value<'_>,
        choices: &[(&'static str, T)],
    ) -> Option<T> {
        self.spans.insert(place, value.span());
        let known: Vec<&str> = choices.iter().map(|(word, _)| *word).collect();
        let quoted: Vec<String> = known.iter().map(|word| format!("\"{word}\"")).collect();
        let list = match quoted.split_last() {
            Some((last, rest)) if !rest.is_empty() => format!("{} or {last}", rest.join(", ")),
            _ => quoted.concat(),
        };
        let Some(typed) = value.get_ref().as_str() else {
            self.kind(place, value, "a word in quotation marks", &format!("{} = {list}", place.key));
            return None;
        };
        let found = choices.iter().find(|(word, _)| *word == typed).map(|(_, choice)| *choice);
        if found.is_none() {
            let help = match nearest(typed, &known) {
                Some(near) => format!("did you mean \"{near}\"? {} is {list}", place.key),
                None => format!("{} is {list}", place.key),
            };
            self.problem(place, value.span(), format!("{} cannot be \"{}\"", place.key, shown(typed)), help);
        }
        found
    }

    /// A whole number from 1.
    pub(super) fn count(&mut self, place: Place, value: &Value<'_>, example: &str) -> Option<usize> {
        self.spans.insert(place, value.span());
        let count = match value.get_ref() {
            DeValue::Integer(integer) if integer.radix() == 10 => integer.as_str().parse().ok(),
            _ => None,
        };
        if count.is_none() {
            self.kind(place, value, "a whole number from 1", example);
        }
        count
    }

    /// A table.
    pub(super) fn table<'v, 'i>(
        &mut self,
        place: Place,
        value: &'v Value<'i>,
        header: &str,
    ) -> Option<&'v DeTable<'i>> {
        self.spans.insert(place, value.span());
        let table = value.get_ref().as_table();
        if table.is_none() {
            let found = kind_of(value.get_ref());
            let message = format!("{header} must be a table, and this is {found}");
            let help = format!("write {header} on a line of its own, with its keys below it");
            self.problem(place, value.span(), message, help);
        }
        table
    }
}

/// A quantity written as text, and how it was written.
pub(in crate::case) fn text_to_number(input: &Plausible, text: &str) -> Result<(f64, Typed), OutOfRange> {
    match parse::read(text, input.dimension) {
        Ok(reading) => {
            let number = reading.number;
            Ok((reading.value, reading.unit.map_or(Typed::Plain, |unit| Typed::With { number, unit })))
        }
        Err(unread) => {
            let help = match unread {
                // Their help is an example already.
                Unread::Comma { .. } | Unread::NoRatio(_) | Unread::Inches(_) => unread.help(),
                _ => format!("{}; for example {}", unread.help(), input.written(input.example)),
            };
            Err(OutOfRange { message: format!("{}: {unread}", input.words), help })
        }
    }
}

/// What the parser of TOML let through as a number; not a number where it is none, which the range then refuses.
fn number_of(text: &str) -> f64 {
    text.parse().unwrap_or(f64::NAN)
}

fn kind_of(value: &DeValue<'_>) -> &'static str {
    match value {
        DeValue::String(_) => "text",
        DeValue::Integer(_) | DeValue::Float(_) => "a number",
        DeValue::Boolean(_) => "true or false",
        DeValue::Datetime(_) => "a date or time",
        DeValue::Array(_) => "a list",
        DeValue::Table(_) => "a table",
    }
}

/// A control character, or one that turns the reading direction of what follows.
fn is_unfit(letter: char) -> bool {
    letter.is_control()
        || matches!(letter, '\u{200E}' | '\u{200F}' | '\u{202A}'..='\u{202E}' | '\u{2066}'..='\u{2069}' | '\u{2028}' | '\u{2029}')
}

/// Typed text fit to stand in a message: short, on one line, nothing invisible.
pub(super) fn shown(text: &str) -> String {
    let mut fit: String =
        text.chars().take(40).map(|letter| if is_unfit(letter) { '�' } else { letter }).collect();
    if text.chars().count() > 40 {
        fit.push('…');
    }
    fit
}
