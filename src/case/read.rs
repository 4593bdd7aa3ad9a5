//! Reading a case or profile file: everything wrong is found in one pass, each with its place in the text.

mod entry;
mod moment;
mod nearest;
mod profile;
mod schema;
mod syntax;
mod walk;

use toml::de::{DeTable, DeValue};

use super::entry::{Entry, Patient};
use super::fault::Place;
use super::problem::{Problem, Spans};
use super::profile::Profile;
use super::record::{Draft, Record, Steadiness};
use syntax::Slips;
pub(super) use walk::text_to_number;
use walk::{Value, Walk};

pub use nearest::nearest;
pub use profile::profile;
pub use syntax::as_shown;

/// The profile of a case that names none.
pub const DEFAULT_PROFILE: &str = "lung-protective";
/// The one format there is.
const FORMAT: &str = "1";

/// Finds a profile by the name a case gives; the error is a sentence.
pub type Profiles<'p> = &'p dyn Fn(&str) -> Result<Profile, String>;

/// What a file is.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Kind {
    /// A case.
    Case,
    /// A profile.
    Profile,
}

/// A case as typed, with the place of every value.
#[derive(Debug, Clone, PartialEq)]
pub struct Typed {
    /// The record as typed, not yet checked as a whole.
    pub draft: Draft,
    /// Where each value stands.
    pub spans: Spans,
}

/// What a file is, by the keys at its top.
pub fn kind(bytes: &[u8]) -> Kind {
    let Ok(text) = syntax::text(bytes) else { return Kind::Case };
    let (table, _) = syntax::table(text);
    let has = |keys: &[&str]| keys.iter().any(|key| table.contains_key(*key));
    if has(&["target", "limits", "steps", "summary"]) && !has(&["patient", "entry"]) {
        Kind::Profile
    } else {
        Kind::Case
    }
}

/// Reads a case and checks it as a whole.
///
/// # Errors
/// Everything wrong with it, in the order of the text: not UTF-8, not TOML, unknown keys, values of a wrong kind or
/// unit, implausible values, contradictions.
///
/// ```
/// use tidewright::case::{file, read};
/// let text = b"format = 1\n[[entry]]\n[entry.settings]\nrate = 220\n";
/// let problems = read::case(text, &|name| file::profile(name, None)).unwrap_err();
/// assert_eq!(problems[0].message, "set rate of 220/min is above what is plausible, 4 to 60/min");
/// assert_eq!(problems[0].span, Some(45..48));
/// ```
pub fn case(bytes: &[u8], profiles: Profiles<'_>) -> Result<(Record, Spans), Vec<Problem>> {
    let Typed { draft, spans } = draft(bytes, profiles)?;
    match Record::check(draft) {
        Ok(record) => Ok((record, spans)),
        Err(faults) => Err(in_order(faults.into_iter().map(|fault| spans.locate(fault)).collect())),
    }
}

/// Reads a case without checking it as a whole, for entries to be added to it.
///
/// # Errors
/// As [`case`]; where anything could not be read, contradictions in the rest are found too.
pub fn draft(bytes: &[u8], profiles: Profiles<'_>) -> Result<Typed, Vec<Problem>> {
    let text = syntax::text(bytes).map_err(|problem| vec![problem])?;
    let (table, slips) = syntax::table(text);
    let mut walk = Walk::default();
    if slips.problems.is_empty() {
        walk.format(text, &table);
    }
    let whole = walk.whole(&table, profiles);
    let Walk { mut problems, spans, unread } = walk;
    if !slips.problems.is_empty() {
        return Err(beside_slips(slips, problems));
    }
    match whole {
        Some(draft) if problems.is_empty() => Ok(Typed { draft, spans }),
        Some(draft) => {
            let faults = Record::check_beside(draft, &unread).err().unwrap_or_default();
            problems.extend(faults.into_iter().map(|fault| spans.locate(fault)));
            Err(in_order(problems))
        }
        None => Err(in_order(problems)),
    }
}

/// Reads one entry, to be added as entry `number`: its tables at the top of the text (`[settings]`, `[gas]`) or
/// under one `[[entry]]`.
///
/// # Errors
/// Everything wrong with it, in the order of the text; more or less than one entry.
pub fn fragment(bytes: &[u8], number: usize) -> Result<(Entry, Spans), Vec<Problem>> {
    let (entries, spans) = fragments(bytes, number)?;
    let mut entries = entries.into_iter();
    if let (Some(entry), None) = (entries.next(), entries.next()) {
        return Ok((entry, spans));
    }
    let help = "give one [[entry]] at a time, or its tables alone: [settings], [measured], [gas]";
    let span = spans.of(Place::in_entry(number + 1, "", "")).unwrap_or(0..0);
    Err(vec![Problem::at(span, "this must be one entry", help)])
}

/// Reads entries to be added from entry `first` on: each under its `[[entry]]`, or one by its tables alone at the top of
/// the text.
///
/// # Errors
/// Everything wrong with them, in the order of the text; no entry at all; anything beside entries.
pub fn fragments(bytes: &[u8], first: usize) -> Result<(Vec<Entry>, Spans), Vec<Problem>> {
    let text = syntax::text(bytes).map_err(|problem| vec![problem])?;
    let (table, slips) = syntax::table(text);
    let mut walk = Walk::default();
    let mut entries = Vec::new();
    match table.get("entry").map(|value| (value.get_ref(), value)) {
        None => entries.push(walk.entry(first, &table)),
        Some((DeValue::Array(list), _)) => {
            for (number, row) in (first..).zip(list) {
                if let Some(table) = walk.table(Place::in_entry(number, "", ""), row, "[[entry]]") {
                    entries.push(walk.entry(number, table));
                }
            }
            for key in table.keys().filter(|key| key.get_ref() != "entry") {
                walk.beside_entries(key);
            }
        }
        Some((_, value)) => walk.table_list(Place::in_entry(first, "", ""), value, "[[entry]]"),
    }
    if !slips.problems.is_empty() {
        return Err(beside_slips(slips, walk.problems));
    }
    if walk.problems.is_empty() && (table.is_empty() || entries.is_empty()) {
        let help = "write what is to be charted, for example [gas] and below it paco2 = 52";
        return Err(vec![Problem::at(0..0, "there is nothing to chart", help)]);
    }
    if walk.problems.is_empty() { Ok((entries, walk.spans)) } else { Err(in_order(walk.problems)) }
}

/// Problems in the order of the text.
fn in_order(mut problems: Vec<Problem>) -> Vec<Problem> {
    problems.sort_by_key(|problem| problem.span.as_ref().map(|span| (span.start, span.end)));
    problems
}

/// Beside syntax errors: those, and what is wrong on other lines.
fn beside_slips(slips: Slips, others: Vec<Problem>) -> Vec<Problem> {
    let hidden = |other: &Problem| other.span.as_ref().is_some_and(|span| slips.hide(span.start));
    let seen: Vec<Problem> = others.into_iter().filter(|other| !hidden(other)).collect();
    in_order(slips.problems.into_iter().chain(seen).collect())
}

impl Walk {
    /// `format = 1`, without which nothing else is trusted to mean what it says.
    fn format(&mut self, text: &str, table: &DeTable<'_>) {
        let place = Place::top("", "format");
        if table.is_empty() {
            let what = if text.trim().is_empty() {
                "the file is empty"
            } else {
                "the file holds nothing but comments"
            };
            let help = "a case begins with format = 1, then [patient] and [[entry]]: tidewright cases --show injured-lungs prints one to start from";
            self.problem(place, 0..0, what, help);
            return;
        }
        match table.get("format") {
            None => {
                self.problem(
                    place,
                    0..0,
                    "the file does not say which format it has",
                    "begin it with the line format = 1",
                );
            }
            Some(value) => {
                let is_one = value
                    .get_ref()
                    .as_integer()
                    .is_some_and(|integer| integer.as_str() == FORMAT && integer.radix() == 10);
                if !is_one {
                    self.problem(
                        place,
                        value.span(),
                        "this format is not known: only format 1 is read",
                        "write format = 1, or read the file with the version of the program that wrote it",
                    );
                }
            }
        }
    }

    fn whole(&mut self, table: &DeTable<'_>, profiles: Profiles<'_>) -> Option<Draft> {
        let mut label = None;
        let mut named = None;
        let mut steadiness = Steadiness::default();
        let mut patient = Patient::default();
        let mut entries = Vec::new();
        let mut sound = true;
        for (key, value) in table {
            match key.get_ref().as_ref() {
                "format" => {}
                "label" => label = self.text(Place::top("", "label"), value, false, "label = \"Bay 3\""),
                "profile" => {
                    named = self
                        .text(Place::top("", "profile"), value, false, "profile = \"lung-protective\"")
                        .map(|name| (name, value.span()));
                }
                "steadiness" => {
                    let choices = [("usual", Steadiness::Usual), ("settled", Steadiness::Settled)];
                    if let Some(read) = self.word(Place::top("", "steadiness"), value, &choices) {
                        steadiness = read;
                    }
                }
                "patient" => patient = self.patient(value),
                "entry" => sound = self.entries(value, &mut entries),
                other => {
                    let known = schema::keys("");
                    self.unknown(key, "", &known, schema::home_of(other, ""));
                }
            }
        }
        let profile = self.profile_named(named, profiles);
        let profile =
            profile.or_else(|| profiles(DEFAULT_PROFILE).ok().filter(|_| !self.problems.is_empty()))?;
        sound.then_some(Draft { label, profile, steadiness, patient, entries })
    }

    fn entries(&mut self, value: &Value<'_>, entries: &mut Vec<Entry>) -> bool {
        let Some(list) = value.get_ref().as_array() else {
            self.table_list(Place::top("", "entry"), value, "[[entry]]");
            return false;
        };
        let mut sound = true;
        for (number, row) in (1..).zip(list) {
            match self.table(Place::in_entry(number, "", ""), row, "[[entry]]") {
                Some(table) => entries.push(self.entry(number, table)),
                None => sound = false,
            }
        }
        sound
    }

    fn profile_named(
        &mut self,
        named: Option<(String, std::ops::Range<usize>)>,
        profiles: Profiles<'_>,
    ) -> Option<Profile> {
        let (name, span) = match named {
            Some((name, span)) => (name, Some(span)),
            None => (DEFAULT_PROFILE.to_owned(), None),
        };
        match profiles(&name) {
            Ok(profile) => Some(profile),
            Err(sentence) => {
                let place = Place::top("", "profile");
                let help = "tidewright profiles lists the built-in ones; a path counts from the folder of the case file";
                self.problem(place, span.unwrap_or(0..0), sentence, help);
                None
            }
        }
    }
}

#[cfg(test)]
mod tests;
