//! The commands and their flags. Flags for quantities are made from the table of inputs, so that name, unit, range and
//! example are stated once.

use clap::builder::PossibleValuesParser;
use clap::{Arg, ArgAction, Command, value_parser};

use crate::quantity::input::{INPUTS, Input};

/// Flags that a trial may carry, by their key under `settings`.
pub const TRIAL_SETTINGS: [&str; 10] = [
    "rate",
    "tidal_volume",
    "inspiratory_pressure",
    "peep",
    "fio2",
    "inspiratory_time",
    "flow",
    "ratio",
    "pause",
    "apparatus_dead_space",
];

/// What may be asked of the patient in a trial, by its key under `measured`.
pub const TRIAL_PATIENT: [&str; 3] = ["co2_production", "compliance", "resistance"];

/// The tables whose keys are bedside flags.
const BEDSIDE_TABLES: [&str; 4] = ["patient", "settings", "measured", "gas"];

pub(super) const SAFETY: &str = crate::note::SAFETY;

/// A flag's name for a key.
pub fn flag_of(key: &str) -> String {
    key.replace('_', "-")
}

/// The inputs that are bedside flags.
pub fn bedside_inputs() -> impl Iterator<Item = &'static Input> {
    INPUTS.iter().filter(|input| BEDSIDE_TABLES.contains(&input.table))
}

/// Words that are bedside flags: key, table, choices, help.
pub const WORDS: [(&str, &str, &[&str], &str); 4] = [
    ("sex", "patient", &["female", "male"], "Sex, for predicted weight"),
    (
        "airway",
        "patient",
        &["native", "tube", "tracheostomy"],
        "The airway the breath passes [assumed: tube]",
    ),
    (
        "control",
        "settings",
        &["volume", "pressure", "support"],
        "Volume control, pressure control or support",
    ),
    ("flow_pattern", "settings", &["constant", "decelerating"], "Flow pattern in volume control"),
];

fn heading(table: &str) -> &'static str {
    match table {
        "patient" => "The patient (in place of CASE)",
        "settings" => "Settings (with CASE: what to try; without: what is set now)",
        "measured" => "Measurements (in place of CASE; with CASE three of them ask what if)",
        _ => "The arterial gas (in place of CASE)",
    }
}

fn quantity(input: &'static Input) -> Arg {
    quantity_under(input, heading(input.table))
}

/// A quantity's flag under a heading of the help.
pub fn quantity_under(input: &'static Input, heading: &'static str) -> Arg {
    let unit = input.dimension.unit();
    let words = input.words;
    let range = input.plausible().range();
    Arg::new(input.name)
        .long(flag_of(input.name))
        .value_name(if unit.is_empty() { "VALUE".to_owned() } else { unit.to_owned() })
        .allow_hyphen_values(true)
        .help_heading(heading)
        .help(format!("{} ({range}; e.g. {})", as_sentence(words), input.example))
}

/// Says of the flags that are heard beside CASE what they ask there.
fn what_if(flag: Arg, input: &Input) -> Arg {
    let help = flag.get_help().map(ToString::to_string).unwrap_or_default();
    match input.name {
        "co2_production" => {
            flag.help(format!("{help}. With CASE: what if it were this, or x0.9 of what it is"))
        }
        name if TRIAL_PATIENT.contains(&name) => {
            flag.help(format!("{help}. With CASE: what if it were this"))
        }
        _ => flag,
    }
}

/// With a capital at its head, but for "pH".
fn as_sentence(words: &str) -> String {
    let mut letters = words.chars();
    match (letters.next(), letters.as_str()) {
        (Some(first), rest) if !rest.starts_with(char::is_uppercase) => {
            first.to_uppercase().chain(rest.chars()).collect()
        }
        _ => words.to_owned(),
    }
}

fn tried(key: &'static str) -> Arg {
    let input = INPUTS.iter().find(|input| input.name == key);
    let words = input.map_or(key, |input| input.words);
    let factor = if key == "co2_production" { ", or a factor of the present one: x0.9" } else { "" };
    Arg::new(format!("try_{key}"))
        .long(format!("try-{}", flag_of(key)))
        .value_name("VALUE")
        .allow_hyphen_values(true)
        .hide_short_help(true)
        .help_heading("What to try, when bedside numbers stand in place of CASE")
        .help(format!("Try this {words}{factor}"))
}

/// A flag that is one of a few words.
pub fn choice(name: &'static str, values: &'static [&'static str], help: &'static str) -> Arg {
    Arg::new(name).long(flag_of(name)).value_parser(PossibleValuesParser::new(values)).help(help)
}

fn case_argument() -> Arg {
    Arg::new("case")
        .value_name("CASE")
        .help("A case file, the name of a built-in case, or - for standard input")
}

fn bedside(command: Command) -> Command {
    let words = WORDS
        .iter()
        .map(|(key, table, choices, help)| choice(key, choices, help).help_heading(heading(table)));
    let tries = TRIAL_SETTINGS.into_iter().chain(TRIAL_PATIENT).map(tried);
    command
        .arg(case_argument())
        .arg(choice(
            "held",
            &["split", "volume", "fraction"],
            "How dead space is held when settings change: airway a volume and alveolar part a fraction [default], all a \
             volume, all a fraction",
        ))
        .arg(Arg::new("profile").long("profile").value_name("NAME").help("Limits and target band: a built-in profile or a file"))
        .arg(choice("steadiness", &["usual", "settled"], "How steady the patient is [default: as the case says, else usual]"))
        .args(words)
        .args(bedside_inputs().map(|input| what_if(quantity(input), input)))
        .arg(choice("try_control", &["volume", "pressure"], "Try this control").hide_short_help(true).help_heading("What to try, when bedside numbers stand in place of CASE"))
        .args(tries)
}

fn plan_command() -> Command {
    let target = |name: &'static str, value: &'static str, help: &'static str| {
        Arg::new(name).long(flag_of(name)).value_name(value).help(help)
    };
    bedside(
        Command::new("plan")
            .about("Settings that bring PaCO2 or pH to the goal, and what each costs the lung")
            .arg(target("to_paco2", "mmHg", "Aim at this PaCO2 (10 to 150 mmHg; \"6 kPa\" is understood)").conflicts_with("to_ph"))
            .arg(target("to_ph", "pH", "Aim at this pH; without a goal the profile's band is aimed at"))
            .arg(
                Arg::new("aim")
                    .long("aim")
                    .value_parser(PossibleValuesParser::new(["rate", "volume", "gentle"]))
                    .action(ArgAction::Append)
                    .value_delimiter(',')
                    .help("Move the rate, the volume (or inspiratory pressure), or both as gently as can be [default: all three]"),
            )
            .arg(choice("least", &["load", "power"], "What the gentlest pair spares: load index [default] or mechanical power")),
    )
    .after_long_help(format!(
        "Examples:\n  tidewright plan bed3.toml --to-paco2 50\n  tidewright plan injured-lungs --to-ph 7.32 --aim gentle\n  \
         tidewright plan --sex female --height 163 --rate 22 --tidal-volume 380 \\\n    --peep 10 --paco2 63 --ph 7.24 --plateau 27 --to-paco2 50\n\n{SAFETY}"
    ))
}

fn forecast_command() -> Command {
    bedside(Command::new("forecast").about("What named settings would lead to")).after_long_help(format!(
        "Examples:\n  tidewright forecast bed3.toml --rate 28 --tidal-volume 360\n  tidewright forecast bed3.toml --co2-production x0.9\n  \
         tidewright forecast --rate 22 --tidal-volume 380 --paco2 63 --ph 7.24 --try-rate 28\n\n{SAFETY}"
    ))
}

fn with_show(command: Command, what: &'static str) -> Command {
    command.arg(
        Arg::new("show")
            .long("show")
            .value_name("NAME")
            .help(format!("Print this {what}, to start a file from")),
    )
}

fn review_command() -> Command {
    Command::new("review")
        .about("How forecasts did on a unit's own past gases, and the steadiness figures that fit them")
        .arg(Arg::new("gases").value_name("GASES.csv").required(true).help("One row a gas, sorted by stay and time; - for standard input"))
        .arg(Arg::new("within").long("within").value_name("hours").help("Forecast a gas only this soon after the one before [default: 12]"))
        .arg(choice("as", &["summary", "rows"], "A summary [default], or a CSV line for each forecast"))
        .arg(Arg::new("profile").long("profile").value_name("NAME").help("Review with the steadiness figures of this profile"))
        .arg(choice("steadiness", &["usual", "settled"], "Review with these figures [default: usual]"))
        .after_long_help(
            "Columns, in any order; lines that begin with # are skipped:\n  needed: stay, hours or at, rate_set, vt_set (mL), pco2 (mmHg) or pco2_kpa\n  \
             heard:  sex, height_cm or predicted_weight_kg, airway, rate_obs, vt_obs, apparatus_ml, ph\n\nExample:\n  tidewright review our-gases.csv --within 8",
        )
}

/// The whole command line.
pub fn command() -> Command {
    let everywhere = [
        Arg::new("json").long("json").action(ArgAction::SetTrue).help("Answer in JSON"),
        choice("units", &["mmHg", "kPa"], "Unit in which gas pressures are shown [default: mmHg]"),
        Arg::new("ascii").long("ascii").action(ArgAction::SetTrue).help("Write plain ASCII"),
        choice("color", &["auto", "always", "never"], "Colour [default: auto; NO_COLOR is honoured]"),
    ];
    Command::new("tidewright")
        .version(env!("CARGO_PKG_VERSION"))
        .about("From an arterial gas to the next ventilator settings: what PaCO2 will be, how sure that is, what it costs the lung")
        .after_help(format!("Exit status: 0 done; 1 no plan is on target; 2 bad input or usage; 3 could not read or write.\n\n{SAFETY}"))
        .args_conflicts_with_subcommands(true)
        .subcommand_negates_reqs(true)
        .arg(case_argument().help("A case file or the name of a built-in case [default: the demonstration case]"))
        .arg(
            Arg::new("no_mouse")
                .long("no-mouse")
                .action(ArgAction::SetTrue)
                .help("Leave the mouse to the terminal while the panel is open"),
        )
        .args(everywhere.map(|arg| arg.global(true)))
        .subcommand(plan_command())
        .subcommand(forecast_command())
        .subcommand(super::chart::arguments::command())
        .subcommand(super::note::command())
        .subcommand(review_command())
        .subcommand(
            Command::new("check")
                .about("Validate case and profile files")
                .arg(Arg::new("files").value_name("FILE").required(true).action(ArgAction::Append).num_args(1..).help("Case or profile files; - for standard input"))
                .after_long_help("Example:\n  tidewright check bed3.toml our-profile.toml"),
        )
        .subcommand(with_show(Command::new("profiles").about("List the built-in profiles"), "profile").after_long_help("Example:\n  tidewright profiles --show lung-protective > ours.toml"))
        .subcommand(with_show(Command::new("cases").about("List the built-in cases"), "case").after_long_help("Example:\n  tidewright cases --show injured-lungs > bed3.toml"))
        .subcommand(
            Command::new("completions")
                .about("Print shell completions")
                .arg(Arg::new("shell").value_name("SHELL").required(true).value_parser(value_parser!(clap_complete::Shell)).help("The shell"))
                .after_long_help("Example:\n  tidewright completions bash > ~/.local/share/bash-completion/completions/tidewright"),
        )
        .subcommand(Command::new("manual").about("Print the manual page").after_long_help("Example:\n  tidewright manual | man -l -"))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_command_line_is_well_formed() {
        command().debug_assert();
    }

    #[test]
    fn every_trial_flag_is_an_input() {
        for key in TRIAL_SETTINGS {
            assert!(INPUTS.iter().any(|input| input.table == "settings" && input.name == key), "{key}");
        }
        for key in TRIAL_PATIENT {
            assert!(INPUTS.iter().any(|input| input.table == "measured" && input.name == key), "{key}");
        }
    }
}
