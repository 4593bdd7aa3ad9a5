//! `tidewright note`: the record as a note, for a chart, a handover or another program.

use clap::{Arg, ArgAction, ArgMatches, Command};

use super::answer::{Answer, as_json, face};
use super::arguments::{SAFETY, choice};
use super::source::{named, sentence};
use super::{Colours, Said, Status, clock};
use crate::note::record_note::{Since, Told};
use crate::note::{fhir, record_brief, record_csv, record_json, record_markdown, record_text};

/// The flags of `note`.
pub fn command() -> Command {
    Command::new("note")
        .about("The record as a note: for the chart, for a handover, for a spreadsheet, for another system")
        .arg(
            Arg::new("case")
                .value_name("CASE")
                .required(true)
                .help("A case file, the name of a built-in case, or - for standard input"),
        )
        .arg(choice(
            "as",
            &["text", "markdown", "json", "csv", "fhir"],
            "text [default], Markdown, JSON, CSV (one row a gas, in the columns of review), or a FHIR R4B bundle",
        ))
        .arg(
            Arg::new("since")
                .long("since")
                .value_name("TIME")
                .help("Show only the entries at or after TIME (last: only the last one); all is computed from the whole record"),
        )
        .arg(Arg::new("brief").long("brief").action(ArgAction::SetTrue).help("Two lines for a handover").conflicts_with("as"))
        .after_long_help(format!(
            "Examples:\n  tidewright note bed3.toml\n  tidewright note bed3.toml --brief\n  tidewright note bed3.toml --as markdown --since 07:00\n  \
             tidewright note bed3.toml --as fhir > bundle.json\n  tidewright note bed3.toml --as csv | tidewright review -\n\n{SAFETY}"
        ))
}

/// `tidewright note`.
pub fn note(matches: &ArgMatches, colours: Colours) -> Answer {
    let name = matches.get_one::<String>("case").map_or("", String::as_str);
    let opened = named(name, None, None, colours.err)?;
    let told = Told::of(&opened.record, since(matches)?);
    let face = face(matches);
    let kind = matches.get_one::<String>("as").map(String::as_str);
    let text = match kind {
        _ if matches.get_flag("brief") => record_brief::of(&told, face),
        None | Some("text") if matches.get_flag("json") => as_json(&record_json::of(&told))?,
        Some("json") => as_json(&record_json::of(&told))?,
        Some("markdown") => record_markdown::of(&told, face),
        Some("fhir") => as_json(&fhir::of(&told))?,
        Some("csv") => record_csv::of(&told).map_err(|error| {
            sentence(&format!("the note cannot be written as CSV: {error}"), Status::Unreadable)
        })?,
        _ => record_text::of(&told, face),
    };
    Ok(Said::answer(text, Status::Done))
}

fn since(matches: &ArgMatches) -> Result<Since, Said> {
    match matches.get_one::<String>("since").map(String::as_str) {
        None => Ok(Since::Start),
        Some("last") => Ok(Since::Last),
        Some(text) => clock::moment(text, clock::now())
            .map(Since::Time)
            .map_err(|error| sentence(&format!("--since: {error}"), Status::BadInput)),
    }
}
