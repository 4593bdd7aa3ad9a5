//! What a person types into a line or a field, read by the table of inputs.

use super::LineId;
use crate::case::settings::Timing;
use crate::planning::target::Asked;
use crate::planning::trial::{Co2Trial, Trial};
use crate::quantity::input::{Key, Typed};
use crate::quantity::parse;
use crate::quantity::show::PressureUnit;
use crate::quantity::unit::Dimension;

/// Why a text is refused: a sentence, and what to write instead.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Slip {
    /// What is wrong.
    pub message: String,
    /// What to write.
    pub help: String,
}

impl Slip {
    fn new(message: impl Into<String>, help: impl Into<String>) -> Self {
        Self { message: message.into(), help: help.into() }
    }

    /// Both in one line.
    pub fn sentence(&self) -> String {
        format!("{}: {}", self.message, self.help)
    }
}

/// Reads a quantity of `key`. A plain number is in the unit shown: kPa for gas pressures where kPa is chosen.
///
/// # Errors
/// What cannot be read, and what is not plausible, with the likely reading.
pub fn quantity(text: &str, key: Key, unit: PressureUnit) -> Result<f64, Slip> {
    let input = key.input();
    let unread = |unread: parse::Unread| Slip::new(unread.to_string(), unread.help());
    let reading = parse::read(text, input.dimension).map_err(unread)?;
    let plain_in_kpa =
        reading.unit.is_none() && input.dimension == Dimension::GasPressure && unit == PressureUnit::KPa;
    let (value, typed) = match (reading.unit, Dimension::GasPressure.find("kPa")) {
        (Some(unit), _) => (reading.value, Typed::With { number: reading.number, unit }),
        (None, Some(kpa)) if plain_in_kpa => {
            (kpa.to_default(reading.number), Typed::With { number: reading.number, unit: kpa })
        }
        (None, _) => (reading.value, Typed::Plain),
    };
    input.accept(value, typed).map_err(|out| Slip::new(out.message, out.help))
}

/// What a text typed into a line changes.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Read {
    /// The trial.
    Trial(Trial),
    /// The goal.
    Goal(Asked),
}

/// Reads what was typed into `line`; `trial` is what stands, `timing` what times inspiration.
///
/// # Errors
/// As [`quantity`]; a goal that could be a pH or a PaCO2.
pub fn read(
    line: LineId,
    text: &str,
    trial: Trial,
    timing: Timing,
    unit: PressureUnit,
) -> Result<Read, Slip> {
    let mut trial = trial;
    match line {
        LineId::Goal => return goal(text, unit).map(Read::Goal),
        LineId::Control => {
            return Err(Slip::new("control is turned, not typed", "press the right arrow"));
        }
        LineId::Timing => trial.timing = Some(timed(text, timing, unit)?),
        LineId::Co2Output => trial.co2 = Some(output(text, unit)?),
        LineId::Rate
        | LineId::TidalVolume
        | LineId::InspiratoryPressure
        | LineId::Peep
        | LineId::Fio2
        | LineId::Pause
        | LineId::Apparatus
        | LineId::Compliance
        | LineId::Resistance => {
            if let Some(key) = line.key(timing) {
                super::put(line, &mut trial, quantity(text, key, unit)?, timing);
            }
        }
    }
    Ok(Read::Trial(trial))
}

/// "1:2" is a ratio, "50 L/min" a flow, "0.9 s" a time; a plain number is what times inspiration now.
fn timed(text: &str, timing: Timing, unit: PressureUnit) -> Result<Timing, Slip> {
    let has_unit_of =
        |dimension: Dimension| parse::read(text, dimension).is_ok_and(|reading| reading.unit.is_some());
    let key = if text.contains(':') {
        Key::Ratio
    } else if has_unit_of(Dimension::Flow) {
        Key::Flow
    } else if has_unit_of(Dimension::Time) {
        Key::InspiratoryTime
    } else {
        match timing {
            Timing::InspiratoryTime(_) => Key::InspiratoryTime,
            Timing::Flow(_) => Key::Flow,
            // A plain number beside I:E: "2" is 1:2.
            Timing::Ratio(_) => return quantity(&format!("1:{text}"), Key::Ratio, unit).map(Timing::Ratio),
        }
    };
    let value = quantity(text, key, unit)?;
    Ok(match key {
        Key::Ratio => Timing::Ratio(value),
        Key::Flow => Timing::Flow(value),
        _ => Timing::InspiratoryTime(value),
    })
}

/// "x0.9" is a factor, else an output. The range of a factor is that of a fever or deep cooling: common practice.
fn output(text: &str, unit: PressureUnit) -> Result<Co2Trial, Slip> {
    const FACTORS: [f64; 2] = [0.2, 5.0];
    let Some(factor) = text.trim().strip_prefix(['x', 'X', '×', '*']) else {
        return quantity(text, Key::Co2Production, unit).map(Co2Trial::Output);
    };
    let factor = parse::parse(factor, Dimension::Number)
        .map_err(|unread| Slip::new(unread.to_string(), unread.help()))?;
    let [low, high] = FACTORS;
    if (low..=high).contains(&factor) {
        Ok(Co2Trial::Times(factor))
    } else {
        Err(Slip::new(
            format!("a factor of {factor} is outside {low} to {high}"),
            "write x0.9 for a tenth less".to_owned(),
        ))
    }
}

fn goal(text: &str, unit: PressureUnit) -> Result<Asked, Slip> {
    let text = text.trim();
    let lower = text.to_lowercase();
    if let Some(ph) = lower.strip_prefix("ph") {
        return quantity(ph, Key::Ph, unit).map(Asked::Ph);
    }
    let reading = parse::read(text, Dimension::GasPressure);
    let plain = reading.is_ok_and(|reading| reading.unit.is_none());
    let number = parse::parse(text, Dimension::Number).ok();
    let [low, high] = [Key::Ph.input().min, Key::Ph.input().max];
    match number.filter(|number| plain && (low..=high).contains(number)) {
        Some(_) if unit == PressureUnit::KPa => Err(Slip::new(
            format!("{text} could be a pH or a PaCO2 in kPa"),
            format!("write pH {text} or {text} kPa"),
        )),
        Some(number) => Ok(Asked::Ph(number)),
        None => quantity(text, Key::PlannedPaco2, unit).map(Asked::Paco2),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const SECONDS: Timing = Timing::InspiratoryTime(0.9);

    #[test]
    fn a_goal_says_whether_it_is_a_ph() {
        let mmhg = PressureUnit::MmHg;
        assert_eq!(goal("7.32", mmhg), Ok(Asked::Ph(7.32)));
        assert_eq!(goal("7,32", mmhg), Ok(Asked::Ph(7.32)));
        assert_eq!(goal("pH 7.3", PressureUnit::KPa), Ok(Asked::Ph(7.3)));
        assert_eq!(goal("50", mmhg), Ok(Asked::Paco2(50.0)));
        assert!(goal("7.3", PressureUnit::KPa).unwrap_err().sentence().contains("pH 7.3 or 7.3 kPa"));
        // 6 kPa are 45.0 mmHg: 760/101.325 mmHg a kPa by definition.
        assert!(matches!(goal("6", PressureUnit::KPa), Ok(Asked::Paco2(p)) if (p - 45.0).abs() < 0.01));
    }

    #[test]
    fn what_is_typed_says_what_times_inspiration() {
        let mmhg = PressureUnit::MmHg;
        assert_eq!(timed("0.8", SECONDS, mmhg), Ok(Timing::InspiratoryTime(0.8)));
        assert_eq!(timed("1:3", SECONDS, mmhg), Ok(Timing::Ratio(3.0)));
        assert_eq!(timed("3", Timing::Ratio(2.0), mmhg), Ok(Timing::Ratio(3.0)));
        assert_eq!(timed("50 L/min", SECONDS, mmhg), Ok(Timing::Flow(50.0)));
    }

    #[test]
    fn out_of_range_is_said_and_not_cut() {
        let slip = quantity("220", Key::Rate, PressureUnit::MmHg).unwrap_err();
        assert!(slip.sentence().contains("220"), "{slip:?}");
        assert!(output("x9", PressureUnit::MmHg).is_err());
        assert_eq!(output("x0.9", PressureUnit::MmHg), Ok(Co2Trial::Times(0.9)));
    }
}
