//! Units and order of writing change no answer.

use proptest::prelude::*;
use serde_json::Value;
use tidewright::case::entry::Aim;
use tidewright::planning::plan::{Request, plan};
use tidewright::planning::target::Asked;
use tidewright::quantity::input::Key;
use tidewright::quantity::unit::Dimension;

use crate::bed::{Reach, bed, cases, plain, record};

/// Two answers agree: the same shape and words, numbers to 12 digits where they are not searched for.
fn alike(one: &Value, two: &Value, at: &str) -> Result<(), TestCaseError> {
    match (one, two) {
        (Value::Object(one), Value::Object(two)) => {
            prop_assert_eq!(one.len(), two.len());
            for (key, value) in one {
                alike(value, &two[key], &format!("{at}.{key}"))?;
            }
        }
        (Value::Array(one), Value::Array(two)) => {
            prop_assert_eq!(one.len(), two.len(), "{}", at);
            for (place, (one, two)) in one.iter().zip(two).enumerate() {
                alike(one, two, &format!("{at}[{place}]"))?;
            }
        }
        (Value::Number(one), Value::Number(two)) => {
            let (one, two) = (one.as_f64().unwrap(), two.as_f64().unwrap());
            // Changes near nothing (a lever that moves PaCO2 by 1e-6) have fewer digits than what they are changes of.
            // The top of a maximum is flat: its place is known to half the digits.
            // Quantiles are bracketed to 1e-9.
            let quantile = ["_low_mmhg", "_high_mmhg", "_expected_mmhg"].iter().any(|end| at.ends_with(end));
            let digits = match () {
                () if at.ends_with("summit.rate_per_min") => 1e-7,
                () if quantile => 1e-9,
                () => 1e-12,
            };
            let near = (one - two).abs() <= digits * one.abs().max(two.abs()).max(1000.0);
            prop_assert!(near, "{}: {} {}", at, one, two);
        }
        (one, two) => prop_assert_eq!(one, two, "{}", at),
    }
    Ok(())
}

/// A number in a unit that people elsewhere type, as they would: two decimals in the other unit, and the same value in the
/// default one. Factors by definition: 101.325 kPa are 760 mmHg, 98.0665 Pa are 1 cmH2O.
fn spelled(key: Key, value: f64) -> [String; 2] {
    let hundredths = |value: f64| (value * 100.0).round() / 100.0;
    match key.input().dimension {
        Dimension::GasPressure => {
            let kpa = hundredths(value * 101.325 / 760.0);
            [format!("{:?}", kpa * 760.0 / 101.325), format!("\"{kpa} kPa\"")]
        }
        Dimension::AirwayPressure => {
            let mbar = hundredths(value * 0.980_665);
            [format!("{:?}", mbar / 0.980_665), format!("\"{mbar} mbar\"")]
        }
        Dimension::Volume => [format!("{value:?}"), format!("\"{value} mL\"")],
        Dimension::Length => [format!("{value:?}"), format!("\"{value} cm\"")],
        Dimension::Fraction => {
            let percent = hundredths(value * 100.0);
            [format!("{:?}", percent / 100.0), format!("\"{percent} %\"")]
        }
        _ => [plain(key, value), plain(key, value)],
    }
}

proptest! {
    #![proptest_config(cases(80))]

    #[test]
    fn units_change_no_answer(bed in bed(Reach::Bedside), target in 30.0_f64..75.0) {
        let texts = [0, 1].map(|form: usize| bed.written(&|key, value| spelled(key, value)[form].clone()));
        let [one, two] = texts.clone().map(|text| record(&text));
        prop_assert_eq!(one.is_some(), two.is_some(), "{}\n{}", texts[0], texts[1]);
        let (Some(one), Some(two)) = (one, two) else { return Err(TestCaseError::reject("refused")) };
        let request = Request {
            asked: Asked::Paco2(target),
            aims: vec![Aim::Rate, Aim::Volume],
            ..Request::default()
        };
        match (plan(&one, &request), plan(&two, &request)) {
            (Ok(one), Ok(two)) => {
                let [one, two] = [one, two].map(|plan| serde_json::to_value(&plan).unwrap());
                alike(&one, &two, "plan")?;
            }
            (Err(one), Err(two)) => prop_assert_eq!(one.len(), two.len()),
            (one, two) => prop_assert!(false, "{:?}\n{:?}", one.is_ok(), two.is_ok()),
        }
    }

    /// Entries are put in order of their times, not of the file.
    #[test]
    fn the_order_of_entries_in_the_file_does_not_matter(
        beds in proptest::collection::vec(bed(Reach::Bedside), 3), order in Just(vec![0_usize, 1, 2]).prop_shuffle(),
        target in 30.0_f64..75.0,
    ) {
        let text = |order: &[usize]| {
            let mut text = "format = 1\n[patient]\nsex = \"male\"\nheight = 178\nairway = \"tube\"\n".to_owned();
            for hour in order {
                text.push_str(&format!("[[entry]]\nat = 2026-03-02T{:02}:15:00Z\n", 8 + 3 * hour));
                beds[*hour].entry(&mut text, &plain);
            }
            record(&text)
        };
        let (Some(one), Some(two)) = (text(&[0, 1, 2]), text(&order)) else {
            return Err(TestCaseError::reject("refused"));
        };
        let request = Request { asked: Asked::Paco2(target), aims: vec![Aim::Rate], ..Request::default() };
        let (Ok(one), Ok(two)) = (plan(&one, &request), plan(&two, &request)) else {
            return Err(TestCaseError::reject("refused"));
        };
        let [one, two] = [one, two].map(|mut plan| {
            // That the times do not stand in order is said, and changes nothing else.
            plan.cautions.retain(|caution| caution.id != "entries_out_of_order");
            serde_json::to_value(&plan).unwrap()
        });
        prop_assert_eq!(one, two);
    }
}
