//! Quantities: round trips, and the unit table against outside witnesses.

#![allow(
    clippy::unwrap_used,
    clippy::panic,
    clippy::indexing_slicing,
    reason = "a test may stop at the first surprise"
)]

use proptest::prelude::*;
use tidewright::quantity::input::{INPUTS, Typed};
use tidewright::quantity::parse::{parse, read};
use tidewright::quantity::show::{PressureUnit, number, show, with_unit};
use tidewright::quantity::unit::Dimension;

/// Every unit against the UCUM tables of an independent library. It takes the millimetre of mercury as 133.322 Pa,
/// which is 3 in a million from 101325/760 Pa; hence the tolerance.
#[test]
fn every_factor_agrees_with_the_ucum_tables() {
    let mut compared = 0;
    for dimension in Dimension::ALL {
        let Some(default) = dimension.units().first().filter(|unit| unit.ucum != "[pH]") else { continue };
        for unit in dimension.units() {
            let witness = match octofhir_ucum::convert(1.0, unit.ucum, default.ucum) {
                Ok(witness) => witness,
                Err(error) => panic!("{} to {}: {error:?}", unit.ucum, default.ucum),
            };
            let ours = unit.to_default(1.0);
            let near = (ours - witness).abs() <= 5e-6 * witness.abs().max(1e-9);
            assert!(near, "{dimension:?}: 1 {} is {ours}, the witness says {witness}", unit.ucum);
            compared += 1;
        }
    }
    assert!(compared > 50, "only {compared} units were compared");
}

/// Any dimension with any of its units.
fn unit_of_any() -> impl Strategy<Value = (Dimension, usize)> {
    proptest::sample::select(Dimension::ALL.to_vec())
        .prop_filter("ratios have no unit", |dimension| !dimension.units().is_empty())
        .prop_flat_map(|dimension| (Just(dimension), 0..dimension.units().len()))
}

proptest! {
    /// A number written with any spelling of any unit is read as that number in that unit.
    #[test]
    fn what_is_written_with_a_unit_is_read_in_it((dimension, index) in unit_of_any(), typed in -9_999_999_i64..9_999_999) {
        let unit = &dimension.units()[index];
        // Three decimals, spelled by hand so that no formatting of ours takes part.
        let text = format!("{}{}.{:03}", if typed < 0 { "-" } else { "" }, typed.abs() / 1000, typed.abs() % 1000);
        let expected = typed as f64 / 1000.0;
        for spelling in [unit.word, unit.ucum].into_iter().chain(unit.also.iter().copied()) {
            // Feet and inches have a grammar of their own, and no sign.
            if dimension == Dimension::Length && (unit.word == "ft" || typed < 0) {
                continue;
            }
            // "1" as a unit is how UCUM says that there is none.
            if spelling == "1" {
                continue;
            }
            // Glued to a number, "1/min" would lengthen the number itself.
            let glued = if spelling.starts_with(|first: char| first.is_ascii_digit()) { " " } else { "" };
            for written in [format!("{text} {spelling}"), format!("{text}{glued}{spelling}")] {
                let reading = read(&written, dimension).map_err(|unread| TestCaseError::fail(format!("{written}: {unread}")))?;
                prop_assert!((reading.number - expected).abs() < 1e-9, "{}", written);
                let value = unit.to_default(expected);
                prop_assert!((reading.value - value).abs() <= 1e-12 * value.abs().max(1.0), "{}", written);
            }
        }
    }

    /// To the default unit and back is where it began.
    #[test]
    fn units_convert_back((dimension, index) in unit_of_any(), value in -1e6_f64..1e6) {
        let unit = &dimension.units()[index];
        let back = unit.to_default(unit.from_default(value));
        prop_assert!((back - value).abs() <= 1e-9 * value.abs().max(1.0));
    }

    /// What is shown is read back to within half of its last digit, with no zero at the end and none missing in front.
    #[test]
    fn what_is_shown_reads_back(value in -1e5_f64..1e5, digits in 0_u8..4) {
        let shown = number(value, usize::from(digits));
        let back = parse(&shown, Dimension::Number).unwrap();
        prop_assert!((back - value).abs() <= 0.5 * 0.1_f64.powi(i32::from(digits)) + 1e-9);
        prop_assert!(!shown.starts_with('.') && !shown.starts_with("-.") && shown != "-0");
        prop_assert!(!shown.contains('.') || !shown.ends_with(['0', '.']));
    }

    /// A value shown with its unit is a text that the reader understands, in either unit of gas pressure.
    #[test]
    fn what_is_shown_with_its_unit_is_understood(row in 0..INPUTS.len(), share in 0.0_f64..=1.0, kpa: bool) {
        let input = &INPUTS[row];
        let value = input.min + share * (input.max - input.min);
        let unit = if kpa { PressureUnit::KPa } else { PressureUnit::MmHg };
        let text = with_unit(value, input.dimension, unit);
        let back = parse(&text, input.dimension).map_err(|unread| TestCaseError::fail(format!("{text}: {unread}")))?;
        // No quantity is shown more coarsely than a tenth of the span it may take.
        prop_assert!((back - value).abs() <= 0.1 * (input.max - input.min), "{} {}", value, text);
        prop_assert!(show(value, input.dimension, unit).len() <= text.len());
    }

    /// Whatever is typed, the answer is a finite number or a sentence with a next step.
    #[test]
    fn any_text_is_a_finite_number_or_a_sentence(text in "\\PC{0,12}|[0-9.,:'\"+eE -]{0,10}(mmHg|kPa|ft|in|%|mL)?") {
        for dimension in Dimension::ALL {
            match parse(&text, dimension) {
                Ok(value) => prop_assert!(value.is_finite()),
                Err(unread) => prop_assert!(!unread.to_string().is_empty() && !unread.help().is_empty()),
            }
        }
    }

    /// A value is accepted exactly when it lies in its range.
    #[test]
    fn the_range_decides(row in 0..INPUTS.len(), value in prop_oneof![-1e4_f64..1e4, prop::num::f64::ANY]) {
        let input = &INPUTS[row];
        let inside = value >= input.min && value <= input.max;
        match input.accept(value, Typed::Plain) {
            Ok(accepted) => prop_assert!(inside && accepted.to_bits() == value.to_bits()),
            Err(out) => prop_assert!(!inside && !out.message.is_empty() && !out.help.is_empty()),
        }
    }
}
