//! The flags of a trial, read by the table of inputs.

use clap::ArgMatches;

use super::arguments::{TRIAL_PATIENT, TRIAL_SETTINGS};
use crate::case::entry::Control;
use crate::case::fault::Place;
use crate::case::flag;
use crate::case::problem::Problem;
use crate::case::settings::Timing;
use crate::planning::trial::{Co2Trial, Trial};
use crate::quantity::input::Key;
use crate::quantity::parse;

/// The trial that the flags name, each flag's id being `prefix` and its key.
///
/// # Errors
/// Every flag that cannot be read, is implausible, or contradicts another.
pub fn of(matches: &ArgMatches, prefix: &str) -> Result<Trial, Vec<Problem>> {
    let mut problems = Vec::new();
    let mut value = |table: &'static str, name: &'static str| -> Option<f64> {
        let text = matches.get_one::<String>(&format!("{prefix}{name}"))?;
        let input = Key::find(table, name)?;
        match quantity(text, input) {
            Ok(value) => Some(value),
            Err(problem) => {
                problems.push(problem);
                None
            }
        }
    };
    let mut settings = [None; TRIAL_SETTINGS.len()];
    for (slot, key) in settings.iter_mut().zip(TRIAL_SETTINGS) {
        *slot = value("settings", key);
    }
    let [rate, tidal, pressure, peep, fio2, time, flow, ratio, pause, apparatus] = settings;
    let [_, compliance, resistance] = TRIAL_PATIENT;
    let mut trial = Trial {
        control: matches.get_one::<String>(&format!("{prefix}control")).map(|word| control(word)),
        rate_per_min: rate,
        tidal_volume_ml: tidal,
        inspiratory_pressure_cmh2o: pressure,
        peep_cmh2o: peep,
        fio2,
        timing: None,
        pause_s: pause,
        apparatus_dead_space_ml: apparatus,
        co2: None,
        compliance_ml_cmh2o: value("measured", compliance),
        resistance_cmh2o_s_l: value("measured", resistance),
    };
    let timings = [time.map(Timing::InspiratoryTime), flow.map(Timing::Flow), ratio.map(Timing::Ratio)];
    let mut given = timings.into_iter().flatten();
    trial.timing = given.next();
    if given.next().is_some() {
        problems.push(flag_problem(
            "inspiratory_time",
            "inspiration is timed by one of inspiratory time, flow and I:E, and more than one is given",
            "keep the one that the ventilator holds",
        ));
    }
    match matches.get_one::<String>(&format!("{prefix}co2_production")).map(|text| co2(text)) {
        Some(Ok(co2)) => trial.co2 = Some(co2),
        Some(Err(problem)) => problems.push(problem),
        None => {}
    }
    if problems.is_empty() { Ok(trial) } else { Err(problems) }
}

fn control(word: &str) -> Control {
    match word {
        "volume" => Control::Volume,
        "pressure" => Control::Pressure,
        _ => Control::Support,
    }
}

fn flag_problem(key: &'static str, message: impl Into<String>, help: impl Into<String>) -> Problem {
    Problem {
        message: message.into(),
        help: help.into(),
        span: None,
        also: Vec::new(),
        places: vec![Place::top("trial", key)],
    }
}

/// Reads a flag as the quantity of an input.
///
/// # Errors
/// When it cannot be read or is implausible.
pub fn quantity(text: &str, key: Key) -> Result<f64, Problem> {
    flag::number(key, None, text).map_err(Problem::from)
}

/// "180", "180 mL/min" or "x0.9".
fn co2(text: &str) -> Result<Co2Trial, Problem> {
    let trimmed = text.trim();
    let Some(factor) = trimmed.strip_prefix(['x', '×']) else {
        return quantity(trimmed, Key::Co2Production).map(Co2Trial::Output);
    };
    let wrong = || {
        flag_problem(
            "co2_production",
            format!("\"{text}\" is not a factor of the present CO2 output between 0.3 and 3"),
            "write x0.9 for 90 % of the present output, or an output in mL/min",
        )
    };
    let reading = parse::parse(factor, crate::quantity::unit::Dimension::Number).map_err(|_| wrong())?;
    if (0.3..=3.0).contains(&reading) { Ok(Co2Trial::Times(reading)) } else { Err(wrong()) }
}
