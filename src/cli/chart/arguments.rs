//! The flags of `chart`: every key of an entry.

use clap::{Arg, ArgAction, Command};

use crate::cli::arguments::{SAFETY, choice, quantity_under};
use crate::cli::clock;
use crate::quantity::input::{INPUTS, Input};

/// The tables whose keys are flags of their own.
const TABLES: [&str; 4] = ["settings", "measured", "gas", "weaning"];

/// The inputs that are flags of `chart`.
pub fn inputs() -> impl Iterator<Item = &'static Input> {
    INPUTS.iter().filter(|input| TABLES.contains(&input.table))
}

fn heading(table: &str) -> &'static str {
    match table {
        "settings" => "Settings that were changed",
        "measured" => "Measurements",
        "gas" => "The arterial gas",
        _ => "Toward weaning",
    }
}

fn text(name: &'static str, long: &'static str, value: &'static str, help: impl Into<String>) -> Arg {
    Arg::new(name).long(long).value_name(value).help(help.into())
}

/// `tidewright chart`.
pub fn command() -> Command {
    let trial = "A spontaneous breathing trial";
    let plan = "A plan, with its forecast";
    Command::new("chart")
        .about("Add an entry to a case file: settings, measurements, a gas, a plan, a breathing trial, a note")
        .arg(Arg::new("case").value_name("CASE").required(true).help("The case file to add to"))
        .arg(text("at", "at", "TIME", format!("When [default: now]; {}", clock::HOW)))
        .arg(text("by", "by", "WHO", "Initials or role of who charts"))
        .arg(text("text", "text", "TEXT", "A remark"))
        .arg(text("amends", "amends", "NUMBER", "The entry that this one corrects; it stays on file, shown struck"))
        .arg(Arg::new("dry_run").long("dry-run").action(ArgAction::SetTrue).help("Show what would be added, write nothing"))
        .arg(
            choice("plan", &["rate", "volume", "gentle"], "Chart the plan of this aim, made on the record with whatever else is charted here")
                .help_heading(plan),
        )
        .arg(text("to_paco2", "to-paco2", "mmHg", "Aim at this PaCO2").requires("plan").conflicts_with("to_ph").help_heading(plan))
        .arg(text("to_ph", "to-ph", "pH", "Aim at this pH; without a goal the profile's band is aimed at").requires("plan").help_heading(plan))
        .arg(choice("control", &["volume", "pressure", "support"], "Volume control, pressure control or support").help_heading(heading("settings")))
        .arg(choice("flow_pattern", &["constant", "decelerating"], "Flow pattern in volume control").help_heading(heading("settings")))
        .arg(text("drawn_at", "drawn-at", "TIME", "When the gas was drawn [default: the time of the entry]").help_heading(heading("gas")))
        .args(inputs().map(|input| quantity_under(input, heading(input.table))))
        .arg(text("trial_support", "trial-support", "cmH2O", "Support during the trial, cmH2O, or t-piece").help_heading(trial))
        .arg(text("trial_started", "trial-started", "TIME", "When the trial started").help_heading(trial))
        .arg(choice("trial_outcome", &["passed", "failed", "stopped", "running"], "How it ended").help_heading(trial))
        .arg(
            text(
                "observation",
                "observation",
                "KEYS",
                "What was seen at a minute of the trial: minute=10,rate=24,spo2=0.95 (minute always; any of rate, tidal_volume, \
                 heart_rate, systolic_pressure, spo2). Without --trial-started it belongs to the trial that runs",
            )
            .action(ArgAction::Append)
            .help_heading(trial),
        )
        .after_long_help(format!(
            "Without flags, entries are read from standard input as TOML: its tables alone ([gas] and below it paco2 = 52), or \
             several [[entry]].\nThe record is checked as a whole before a byte is written; earlier bytes are never changed.\n\n\
             Examples:\n  tidewright chart bed3.toml --rate 28 --by RT\n  tidewright chart bed3.toml --paco2 52 --ph 7.31 --drawn-at 08:40\n  \
             tidewright chart bed3.toml --plan rate --to-paco2 50\n  tidewright chart bed3.toml --amends 4 --paco2 49 --text \"59 was typed for 49\"\n  \
             tidewright chart bed3.toml --trial-started 09:00 --trial-outcome running\n  \
             tidewright chart bed3.toml --observation minute=10,rate=24,spo2=0.95\n  tidewright chart bed3.toml < entries.toml\n\n{SAFETY}"
        ))
}
