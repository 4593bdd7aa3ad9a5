//! Where a case comes from: a file, a built-in case, standard input, or bedside flags.

use std::io;
use std::path::Path;

use clap::ArgMatches;

use super::{Said, Status, bedside, complaint};
use crate::case::fault::Fault;
use crate::case::presets;
use crate::case::problem::{Problem, Spans};
use crate::case::read;
use crate::case::record::{Record, Steadiness};
use crate::case::{file, profile::Profile};

/// A record, and the text it was read from for errors to point into.
pub struct Opened {
    /// The record.
    pub record: Record,
    text: Option<(String, String, Spans)>,
}

impl Opened {
    /// What keeps the engine from answering, drawn in the text where there is one.
    pub fn complain(&self, faults: Vec<Fault>, colour: bool) -> Said {
        let drawn = if let Some((path, text, spans)) = &self.text {
            let problems: Vec<Problem> = faults.into_iter().map(|fault| spans.locate(fault)).collect();
            complaint::draw(&problems, Some((path, text)), colour)
        } else {
            let problems: Vec<Problem> = faults.into_iter().map(Problem::from).collect();
            complaint::draw(&problems, None, colour)
        };
        Said::complaint(drawn, Status::BadInput)
    }
}

/// A sentence for standard error.
pub fn sentence(text: &str, status: Status) -> Said {
    Said::complaint(format!("error: {text}\n"), status)
}

/// Bytes of a file, of standard input for `-`, or of a built-in case named so.
///
/// # Errors
/// When they cannot be read.
pub fn bytes(name: &str) -> Result<Vec<u8>, Said> {
    let read = if name == "-" {
        file::bytes_from(io::stdin().lock(), Path::new("standard input"))
    } else if let (Some(preset), false) = (presets::case(name), Path::new(name).exists()) {
        return Ok(preset.text.as_bytes().to_vec());
    } else {
        file::bytes(Path::new(name))
    };
    read.map_err(|unreadable| sentence(&unreadable.to_string(), Status::Unreadable))
}

/// Opens the case of a command: CASE, or the bedside flags in its place.
///
/// # Errors
/// What is wrong with it, ready to be said.
pub fn open(matches: &ArgMatches, colour: bool) -> Result<Opened, Said> {
    let profile = matches.get_one::<String>("profile").map(String::as_str);
    let steadiness = matches.get_one::<String>("steadiness").map(|word| match word.as_str() {
        "settled" => Steadiness::Settled,
        _ => Steadiness::Usual,
    });
    let Some(name) = matches.get_one::<String>("case") else {
        if bedside::given(matches).is_empty() {
            let text = "no case: name a case file, a built-in case (tidewright cases), or give the bedside numbers as flags";
            return Err(sentence(text, Status::BadInput));
        }
        let record = bedside::record(matches, profile, steadiness).map_err(|problems| {
            Said::complaint(complaint::draw(&problems, None, colour), Status::BadInput)
        })?;
        return Ok(Opened { record, text: None });
    };
    with_case_flags_only(matches)?;
    named(name, profile, steadiness, colour)
}

/// With CASE, patient, gas and most measurements come from the case.
fn with_case_flags_only(matches: &ArgMatches) -> Result<(), Said> {
    use super::arguments::{TRIAL_PATIENT, TRIAL_SETTINGS, flag_of};
    let tried = |key: &str| TRIAL_SETTINGS.contains(&key) || TRIAL_PATIENT.contains(&key) || key == "control";
    let astray = bedside::given(matches).into_iter().find(|(_, key, _)| !tried(key));
    astray.map_or(Ok(()), |(_, key, _)| {
        let flag = flag_of(key);
        let text = format!(
            "--{flag} describes the patient, and a case was named: change it in the case file, or leave CASE out and give \
             all numbers as flags"
        );
        Err(sentence(&text, Status::BadInput))
    })
}

/// Opens a case by name.
///
/// # Errors
/// What is wrong with it, ready to be said.
pub fn named(
    name: &str,
    profile: Option<&str>,
    steadiness: Option<Steadiness>,
    colour: bool,
) -> Result<Opened, Said> {
    read_as(name, &bytes(name)?, profile, steadiness, colour)
}

/// Reads the bytes of a case that was named `name`.
///
/// # Errors
/// What is wrong with it, ready to be said.
pub fn read_as(
    name: &str,
    bytes: &[u8],
    profile: Option<&str>,
    steadiness: Option<Steadiness>,
    colour: bool,
) -> Result<Opened, Said> {
    let shown = read::as_shown(bytes).into_owned();
    let path = if name == "-" { "standard input" } else { name };
    let complain = |problems: Vec<Problem>| {
        Said::complaint(complaint::draw(&problems, Some((path, &shown)), colour), Status::BadInput)
    };
    let folder = (name != "-").then(|| Path::new(name));
    let read::Typed { mut draft, spans } =
        read::draft(bytes, &|profile| file::profile(profile, folder)).map_err(complain)?;
    if let Some(profile) = profile {
        draft.profile = chosen_profile(profile)?;
    }
    draft.steadiness = steadiness.unwrap_or(draft.steadiness);
    let record = Record::check(draft)
        .map_err(|faults| complain(faults.into_iter().map(|fault| spans.locate(fault)).collect()))?;
    Ok(Opened { record, text: Some((path.to_owned(), shown, spans)) })
}

/// A profile named on the command line: built in, or a path from the current folder.
fn chosen_profile(name: &str) -> Result<Profile, Said> {
    file::profile(name, None).map_err(|error| sentence(&format!("--profile: {error}"), Status::BadInput))
}
