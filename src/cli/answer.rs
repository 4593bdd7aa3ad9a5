//! What each command answers.

use clap::ArgMatches;

use super::arguments::{command, flag_of};
use super::checked::{Checked, CheckedFile};
use super::source::{Opened, bytes, named, open, sentence};
use super::{Colours, Said, Status, complaint, trial};
use crate::case::entry::Aim;
use crate::case::fault::Fault;
use crate::case::presets::{CASES, PROFILES, Preset};
use crate::case::problem::Problem;
use crate::case::{file, read};
use crate::note::face::Face;
use crate::note::{forecast_text, json, plan_text};
use crate::planning::baseline::Baseline;
use crate::planning::forecast::Held;
use crate::planning::gentle::Least;
use crate::planning::plan::{Request, plan as make_plan};
use crate::planning::target::Asked;
use crate::planning::trial::Trial;
use crate::quantity::input::Key;
use crate::quantity::show::PressureUnit;

/// The case shown when none is named.
pub const DEMONSTRATION: &str = "injured-lungs";

/// Columns for the names of a list.
const NAMES: usize = 26;

/// What a command says, or why it cannot.
pub type Answer = Result<Said, Said>;

/// How the user wants texts shown.
pub(super) fn face(matches: &ArgMatches) -> Face {
    let unit = match matches.get_one::<String>("units").map(String::as_str) {
        Some("kPa") => PressureUnit::KPa,
        _ => PressureUnit::MmHg,
    };
    Face { unit, ascii: matches.get_flag("ascii") }
}

/// An answer as JSON.
///
/// # Errors
/// It cannot be written so.
pub fn as_json(answer: &impl serde::Serialize) -> Result<String, Said> {
    json::of(answer).map_err(|error| {
        sentence(&format!("the answer cannot be written as JSON: {error}"), Status::Unreadable)
    })
}

fn held(matches: &ArgMatches) -> Held {
    match matches.get_one::<String>("held").map(String::as_str) {
        Some("volume") => Held::Volume,
        Some("fraction") => Held::Fraction,
        _ => Held::Split,
    }
}

/// The flags of a trial: with CASE the plain ones, without it those that begin with `try`.
fn trial_of(matches: &ArgMatches, colours: Colours) -> Result<Trial, Said> {
    let prefix = if matches.contains_id("case") { "" } else { "try_" };
    let named = trial::of(matches, prefix).and_then(|trial| Ok((trial, trial::of(matches, "try_")?)));
    match named {
        Ok((_, other)) if prefix.is_empty() && other != Trial::default() => {
            Err(sentence("with CASE the flags to try need no --try- before them", Status::BadInput))
        }
        Ok((trial, _)) => Ok(trial),
        Err(problems) => {
            Err(Said::complaint(complaint::draw(&problems, None, colours.err), Status::BadInput))
        }
    }
}

/// What `--to-paco2` or `--to-ph` ask for.
///
/// # Errors
/// They cannot be read.
pub fn asked(matches: &ArgMatches, colours: Colours) -> Result<Asked, Said> {
    let complain =
        |problem: Problem| Said::complaint(complaint::draw(&[problem], None, colours.err), Status::BadInput);
    if let Some(text) = matches.get_one::<String>("to_paco2") {
        return trial::quantity(text, Key::PlannedPaco2)
            .map(Asked::Paco2)
            .map_err(|problem| complain(renamed(problem, "to_paco2")));
    }
    if let Some(text) = matches.get_one::<String>("to_ph") {
        return trial::quantity(text, Key::Ph)
            .map(Asked::Ph)
            .map_err(|problem| complain(renamed(problem, "to_ph")));
    }
    Ok(Asked::Profile)
}

/// The goal's flags read the quantity of another input: what they say must name the flag that was typed.
fn renamed(mut problem: Problem, key: &'static str) -> Problem {
    let typed = |key: &str| format!("--{} ", flag_of(key));
    for place in &mut problem.places {
        problem.help = problem.help.replace(&typed(place.key), &typed(key));
        place.key = key;
    }
    problem
}

/// `tidewright plan`.
pub fn plan(matches: &ArgMatches, colours: Colours) -> Answer {
    let request = Request {
        asked: asked(matches, colours)?,
        aims: aims(matches),
        least: match matches.get_one::<String>("least").map(String::as_str) {
            Some("power") => Least::Power,
            _ => Least::Load,
        },
        held: held(matches),
        trial: trial_of(matches, colours)?,
    };
    print_plan(&open(matches, colours.err)?, &request, matches, colours)
}

fn aims(matches: &ArgMatches) -> Vec<Aim> {
    let Some(words) = matches.get_many::<String>("aim") else { return Request::default().aims };
    words
        .map(|word| match word.as_str() {
            "rate" => Aim::Rate,
            "volume" => Aim::Volume,
            _ => Aim::Gentle,
        })
        .collect()
}

/// `tidewright` alone or with a case: the plan, where there is no panel.
pub fn plan_of(matches: &ArgMatches, colours: Colours) -> Answer {
    let name = matches.get_one::<String>("case").map_or(DEMONSTRATION, String::as_str);
    print_plan(&named(name, None, None, colours.err)?, &Request::default(), matches, colours)
}

fn print_plan(opened: &Opened, request: &Request, matches: &ArgMatches, colours: Colours) -> Answer {
    let plan = make_plan(&opened.record, request)
        .map_err(|faults: Vec<Fault>| opened.complain(faults, colours.err))?;
    let status = if plan.on_target() { Status::Done } else { Status::OffTarget };
    let text = if matches.get_flag("json") {
        as_json(&plan)?
    } else {
        painted(plan_text::of(&plan, &opened.record, face(matches)), colours.out)
    };
    Ok(Said::answer(text, status))
}

/// `tidewright forecast`.
pub fn forecast(matches: &ArgMatches, colours: Colours) -> Answer {
    let trial = trial_of(matches, colours)?;
    let opened = open(matches, colours.err)?;
    let forecast = crate::planning::plan::forecast(&opened.record, &trial, held(matches))
        .map_err(|faults| opened.complain(faults, colours.err))?;
    let text = if matches.get_flag("json") {
        as_json(&forecast)?
    } else {
        painted(forecast_text::of(&forecast, &opened.record, face(matches)), colours.out)
    };
    Ok(Said::answer(text, Status::Done))
}

/// Verdicts in colour beside their words: orange for what is beyond, blue for what is unknown.
fn painted(text: String, colour: bool) -> String {
    if !colour {
        return text;
    }
    let paint = |word: &str, colour: anstyle::AnsiColor| {
        let style = anstyle::Style::new().fg_color(Some(colour.into()));
        format!("{style}{word}{style:#}")
    };
    text.replace("beyond", &paint("beyond", anstyle::AnsiColor::Yellow))
        .replace("BEYOND", &paint("BEYOND", anstyle::AnsiColor::Yellow))
        .replace("unknown", &paint("unknown", anstyle::AnsiColor::BrightBlue))
}

/// `tidewright check`.
pub fn check(matches: &ArgMatches, colours: Colours) -> Answer {
    let (mut files, mut drawn, mut lines) = (Vec::new(), String::new(), Vec::new());
    for name in matches.get_many::<String>("files").into_iter().flatten() {
        let bytes = bytes(name)?;
        let shown = read::as_shown(&bytes).into_owned();
        let kind = read::kind(&bytes);
        let path = if name == "-" { "standard input" } else { name };
        let problems = problems_of(kind, name, &bytes);
        drawn.push_str(&complaint::draw(&problems, Some((path, &shown)), colours.err));
        if problems.is_empty() {
            lines.push(format!("{path}: nothing wrong\n"));
        }
        files.push(CheckedFile::new(path, kind, &shown, &problems));
    }
    let status = if files.iter().all(|file| file.ok) { Status::Done } else { Status::BadInput };
    if matches.get_flag("json") {
        return Ok(Said::answer(as_json(&Checked { files })?, status));
    }
    Ok(Said { out: lines.concat(), err: drawn, status })
}

/// What is wrong with a file, and whether the engine could start from it. A record without a gas, or under support, is no
/// fault of the file.
fn problems_of(kind: read::Kind, name: &str, bytes: &[u8]) -> Vec<Problem> {
    if kind == read::Kind::Profile {
        return read::profile(bytes).err().unwrap_or_default();
    }
    let folder = (name != "-").then(|| std::path::Path::new(name));
    match read::case(bytes, &|profile| file::profile(profile, folder)) {
        Err(problems) => problems,
        Ok((record, spans)) => {
            let faults = Baseline::evidence_faults(&record);
            faults.into_iter().map(|fault| spans.locate(fault)).collect()
        }
    }
}

/// `tidewright profiles`.
pub fn profiles(matches: &ArgMatches, _: Colours) -> Answer {
    let summary = |preset: &Preset| {
        read::profile(preset.text.as_bytes()).map(|profile| profile.summary).unwrap_or_default()
    };
    listed(matches, "profile", &PROFILES, &summary)
}

/// `tidewright cases`.
pub fn cases(matches: &ArgMatches, _: Colours) -> Answer {
    let summary = |preset: &Preset| {
        // The words above the case, to the end of the first line that ends a sentence.
        let mut words = Vec::new();
        for line in preset.text.lines().map_while(|line| line.strip_prefix('#')) {
            words.push(line.trim());
            if line.ends_with('.') {
                break;
            }
        }
        words.join(" ")
    };
    listed(matches, "case", &CASES, &summary)
}

fn listed(
    matches: &ArgMatches,
    what: &str,
    presets: &[Preset],
    summary: &dyn Fn(&Preset) -> String,
) -> Answer {
    if let Some(name) = matches.get_one::<String>("show") {
        let found = presets.iter().find(|preset| preset.name == name);
        return found.map(|preset| Said::answer(preset.text.to_owned(), Status::Done)).ok_or_else(|| {
            let names: Vec<&str> = presets.iter().map(|preset| preset.name).collect();
            sentence(
                &format!("there is no built-in {what} \"{name}\"; there are {}", names.join(", ")),
                Status::BadInput,
            )
        });
    }
    let list: Vec<(&str, String)> = presets.iter().map(|preset| (preset.name, summary(preset))).collect();
    if matches.get_flag("json") {
        let objects: Vec<_> = list
            .iter()
            .map(|(name, summary)| serde_json::json!({ "name": name, "summary": summary }))
            .collect();
        return Ok(Said::answer(as_json(&objects)?, Status::Done));
    }
    let (face, later) = (face(matches), " ".repeat(NAMES));
    let lines: Vec<String> = list
        .iter()
        .map(|(name, summary)| format!("{}\n", face.wrapped(summary, &format!("{name:<NAMES$}"), &later)))
        .collect();
    Ok(Said::answer(lines.concat(), Status::Done))
}

/// `tidewright completions`.
pub fn completions(matches: &ArgMatches) -> Said {
    let mut script = Vec::new();
    if let Some(shell) = matches.get_one::<clap_complete::Shell>("shell") {
        clap_complete::generate(*shell, &mut command(), "tidewright", &mut script);
    }
    Said::answer(String::from_utf8_lossy(&script).into_owned(), Status::Done)
}

/// `tidewright manual`.
pub fn manual() -> Answer {
    let mut page = Vec::new();
    clap_mangen::Man::new(command())
        .render(&mut page)
        .map_err(|error| sentence(&format!("the manual page cannot be made: {error}"), Status::Unreadable))?;
    Ok(Said::answer(String::from_utf8_lossy(&page).into_owned(), Status::Done))
}
