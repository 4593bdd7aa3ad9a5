//! Bedside numbers given as flags: written down as a case of one entry and read like any other, so that there is one
//! reader and one set of errors.

use std::collections::BTreeMap;

use clap::ArgMatches;

use super::arguments::{WORDS, bedside_inputs};
use crate::case::flag;
use crate::case::problem::Problem;
use crate::case::read;
use crate::case::record::Record;
use crate::case::{file, record::Steadiness};
use crate::quantity::input::Key;

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

/// As a TOML basic string, which a JSON string is.
fn quoted(text: &str) -> String {
    serde_json::Value::from(text).to_string()
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
    // Numbers are read as flags first, so that what is wrong with them is said in terms of flags.
    let astray: Vec<Problem> = given(matches)
        .into_iter()
        .filter_map(|(table, key, text)| flag::number(Key::find(table, key)?, Some(1), &text).err())
        .map(Problem::from)
        .collect();
    if !astray.is_empty() {
        return Err(astray);
    }
    let mut tables: BTreeMap<&str, Vec<String>> = BTreeMap::new();
    for (table, key, text) in given(matches) {
        tables.entry(header(table)).or_default().push(format!("{key} = {}", quoted(&text)));
    }
    let mut case = vec!["format = 1".to_owned()];
    case.extend(profile.map(|name| format!("profile = {}", quoted(name))));
    if steadiness == Some(Steadiness::Settled) {
        case.push("steadiness = \"settled\"".to_owned());
    }
    if let Some(patient) = tables.remove("patient") {
        case.push("[patient]".to_owned());
        case.extend(patient);
    }
    case.push("[[entry]]".to_owned());
    for (table, keys) in tables {
        case.push(format!("[{table}]"));
        case.extend(keys);
    }
    let case = case.join("\n");
    let read = read::case(case.as_bytes(), &|name| file::profile(name, None));
    read.map(|(record, _)| record).map_err(|problems| {
        problems.into_iter().map(|problem| Problem { span: None, also: Vec::new(), ..problem }).collect()
    })
}
