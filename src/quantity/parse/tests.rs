//! As written, dimension, as read.

use super::*;

fn near(text: &str, dimension: Dimension, expected: f64) {
    let value = parse(text, dimension).unwrap_or_else(|unread| panic!("{text}: {unread}"));
    assert!(
        (value - expected).abs() <= 1e-9 * expected.abs().max(1.0),
        "{text} gave {value}, not {expected}"
    );
}

#[test]
fn numbers_with_and_without_units() {
    near("63", Dimension::GasPressure, 63.0);
    near(" 63 mmHg ", Dimension::GasPressure, 63.0);
    near("63mm[Hg]", Dimension::GasPressure, 63.0);
    // 8.4 kPa by the definition of the torr: 8400·760/101325.
    near("8.4 kPa", Dimension::GasPressure, 8400.0 * 760.0 / 101_325.0);
    near("8,4 kPa", Dimension::GasPressure, 8400.0 * 760.0 / 101_325.0);
    near("12 mbar", Dimension::AirwayPressure, 1200.0 / 98.0665);
    near("0,450 L", Dimension::Volume, 450.0);
    near("1234 mL", Dimension::Volume, 1234.0);
    near("-28", Dimension::AirwayPressure, -28.0);
    near("−28 cmH2O", Dimension::AirwayPressure, -28.0);
    near("+.5", Dimension::Fraction, 0.5);
    near("60%", Dimension::Fraction, 0.6);
    near("100.4 [degF]", Dimension::Temperature, 38.0);
    near("180 lbs", Dimension::Mass, 81.646_626_6);
    near("14 bpm", Dimension::Rate, 14.0);
    near("900 ms", Dimension::Time, 0.9);
    near("1 h", Dimension::Minutes, 60.0);
    near("7,35", Dimension::Ph, 7.35);
}

#[test]
fn feet_and_inches() {
    for text in
        ["5 ft 4 in", "5ft4in", "5'4\"", "5' 4\"", "5’4”", "5′4″", "5 feet 4 inches", "5'4", "5 ft. 4 in"]
    {
        near(text, Dimension::Length, 162.56);
    }
    near("6 ft", Dimension::Length, 182.88);
    near("5'11.5\"", Dimension::Length, 181.61);
    near("64 in", Dimension::Length, 162.56);
    near("5280 ft", Dimension::Altitude, 1609.344);
    assert_eq!(parse("5 ft 14 in", Dimension::Length), Err(Unread::Inches("5 ft 14 in".to_owned())));
    assert!(parse("5 ft tall", Dimension::Length).is_err());
}

#[test]
fn ratios_are_kept_as_expiration_over_inspiration() {
    near("1:2", Dimension::Ratio, 2.0);
    near("1 : 1.5", Dimension::Ratio, 1.5);
    near("1:1,5", Dimension::Ratio, 1.5);
    near("2:1", Dimension::Ratio, 0.5);
    for text in ["2", "0.5", "1:0", "0:1", "1:-2"] {
        assert!(parse(text, Dimension::Ratio).is_err(), "{text}");
    }
}

#[test]
fn what_could_mean_two_things_is_refused_with_both() {
    let unread = parse("1,234", Dimension::Volume).unwrap_err();
    assert_eq!(
        unread.to_string(),
        "\"1,234\" could mean 1234 or 1.234: the comma may part thousands or decimals"
    );
    assert_eq!(unread.help(), "write 1234 or 1.234, whichever was meant");
}

#[test]
fn what_is_no_number_is_refused() {
    for text in [
        "", "  ", "nan", "NaN", "inf", "-inf", "1e400", "1e3", "0x1F", "1_000", "1 000", "8.4.1", "1.234,5",
        "1,2,3",
    ] {
        assert!(parse(text, Dimension::GasPressure).is_err(), "{text}");
        assert!(parse(text, Dimension::Number).is_err(), "{text}");
    }
    for text in [".", ",", "-", "--5", "+-5", "five", "~5", "5-6", "٥", &"9".repeat(400)] {
        assert!(parse(text, Dimension::Rate).is_err(), "{text}");
    }
}

#[test]
fn a_unit_of_something_else_is_named_with_those_that_fit() {
    let unread = parse("63 mL", Dimension::GasPressure).unwrap_err();
    assert_eq!(unread.to_string(), "\"mL\" is a unit of volume, and this is a gas pressure");
    assert_eq!(unread.help(), "units understood here: mmHg, kPa, hPa, mbar, Pa, cmH2O, inHg or atm");
    let unread = parse("63 kPascal", Dimension::GasPressure).unwrap_err();
    assert_eq!(unread.to_string(), "\"kPascal\" is not a unit of gas pressure");
    assert_eq!(
        parse("0.6 mmHg", Dimension::Fraction).unwrap_err().help(),
        "write a fraction such as 0.6, or percent, as in \"60 %\""
    );
}
