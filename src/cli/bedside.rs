//! Bedside numbers given as flags: written down as a case of one entry and read like any other, so that there is one
//! reader and one set of errors.

use std::collections::BTreeMap;

use clap::ArgMatches;

use super::arguments::{WORDS, bedside_inputs};
use crate::case::problem::Problem;
use crate::case::read;
use crate::case::record::Record;
use crate::case::{file, record::Steadiness};

/// Where a flag's key stands in a case file.
fn header(table: &str) -> &'static str {
    match table {
        "patient" => "patient",
        "settings" => "entry.settings",
        "measured" => "entry.measured",
        _ => "entry.gas",
    }
}

/// The flags given that belong at the bedside: table, key and text.
pub fn given(matches: &ArgMatches) -> Vec<(&'static str, &'static str, String)> {
    let words = WORDS.iter().map(|(key, table, _, _)| (*table, *key));
    let inputs = bedside_inputs().map(|input| (input.table, input.name));
    words
        .chain(inputs)
        .filter_map(|(table, key)| Some((table, key, matches.get_one::<String>(key)?.clone())))
        .collect()
}

/// A record of one entry from the flags.
///
/// # Errors
/// Everything wrong with them, each naming its flag.
pub fn record(
    matches: &ArgMatches,
    profile: Option<&str>,
    steadiness: Option<Steadiness>,
) -> Result<Record, Vec<Problem>> {
    let mut tables: BTreeMap<&str, Vec<String>> = BTreeMap::new();
    for (table, key, text) in given(matches) {
        let text = serde_json::to_string(&text).unwrap_or_default(); // a JSON string is a TOML basic string
        tables.entry(header(table)).or_default().push(format!("{key} = {text}"));
    }
    let mut case = String::from("format = 1\n");
    if let Some(profile) = profile {
        case.push_str(&format!("profile = {}\n", serde_json::to_string(profile).unwrap_or_default()));
    }
    if steadiness == Some(Steadiness::Settled) {
        case.push_str("steadiness = \"settled\"\n");
    }
    if let Some(patient) = tables.remove("patient") {
        case.push_str(&format!("[patient]\n{}\n", patient.join("\n")));
    }
    case.push_str("[[entry]]\n");
    for (table, keys) in tables {
        case.push_str(&format!("[{table}]\n{}\n", keys.join("\n")));
    }
    let read = read::case(case.as_bytes(), &|name| file::profile(name, None));
    read.map(|(record, _)| record).map_err(|problems| {
        problems.into_iter().map(|problem| Problem { span: None, also: Vec::new(), ..problem }).collect()
    })
}
