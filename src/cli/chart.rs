//! `tidewright chart`: adds entries to a case file, the record checked as a whole before a byte is written.

pub mod arguments;
mod entry;

use std::fmt::Write as _;
use std::io::{self, IsTerminal};
use std::path::Path;

use clap::ArgMatches;
use serde::Serialize;

use super::answer::{Answer, as_json, asked, face};
use super::source::sentence;
use super::{Colours, Said, Status, clock, complaint};
use crate::case::append::{self, AppendError, Appended, Seen};
use crate::case::entry::{Aim, Entry};
use crate::case::file::{self, Unreadable};
use crate::case::moment::Moment;
use crate::case::presets;
use crate::case::problem::Problem;
use crate::case::read;
use crate::case::record::Record;
use crate::note::reckoning_lines;
use crate::planning::baseline::Baseline;
use crate::planning::charted::charted;
use crate::planning::plan::{Plan, Request, plan as make_plan};
use crate::planning::reckoning::reckon;

/// A later entry may be charted up to this long ahead of this machine's clock without a word, minutes.
const AHEAD_MIN: f64 = 10.0;

/// What `chart --json` says.
#[derive(Debug, Serialize)]
struct Report<'a> {
    format: u32,
    path: &'a str,
    dry_run: bool,
    added: Vec<usize>,
    text: &'a str,
    added_meanwhile: usize,
    remarks: &'a [String],
}

/// The case file as it was read.
struct Opened<'a> {
    name: &'a str,
    path: &'a Path,
    record: Record,
    seen: Seen,
    colour: bool,
}

/// `tidewright chart`.
pub fn chart(matches: &ArgMatches, colours: Colours) -> Answer {
    let name = matches.get_one::<String>("case").map_or("", String::as_str);
    let opened = open(name, colours.err)?;
    let now = clock::now();
    let at = entry::at(matches, now).map_err(|problem| opened.flags(&[problem]))?;
    let first = opened.record.entries().len() + 1;
    let given = given(matches, &opened, first, now)?;
    let mut entries: Vec<Entry> = given.into_iter().map(entry::tidied).collect();
    for entry in &mut entries {
        entry.at = entry.at.or(Some(at));
        entry.by = entry.by.take().or_else(|| matches.get_one::<String>("by").cloned());
    }
    let mut remarks = Vec::new();
    if matches.contains_id("plan") {
        let planned = planned(matches, &opened, &entries, colours, &mut remarks)?;
        let by = matches.get_one::<String>("by").cloned();
        entries.push(Entry { at: Some(at), by, plan: Some(planned), ..Entry::default() });
    }
    on_time(matches, &opened.record, &entries, now, &mut remarks)?;
    let rehearsed = append::rehearse(opened.path, &entries, &opened.seen);
    let rehearsed = rehearsed.map_err(|error| opened.refused(error))?;
    sound(&rehearsed, &opened)?;
    let dry_run = matches.get_flag("dry_run");
    let added = if dry_run {
        rehearsed
    } else {
        append::append(opened.path, &entries, &opened.seen).map_err(|error| opened.refused(error))?
    };
    if added.meanwhile > 0 {
        remarks.push(format!(
            "Another program had added {} since this one read the file: look at the record.",
            counted(added.meanwhile)
        ));
    }
    let reckoned = reckon(&added.record);
    for reckoning in reckoned.reckonings.iter().filter(|it| added.numbers.contains(&it.gas_entry)) {
        remarks.extend(reckoning_lines::one(reckoning, face(matches)));
    }
    told(matches, &opened, &added, &remarks)
}

fn open(name: &str, colour: bool) -> Result<Opened<'_>, Said> {
    let path = Path::new(name);
    if name == "-" {
        return Err(sentence(
            "name the case file to add to: standard input holds what is to be added",
            Status::BadInput,
        ));
    }
    if presets::case(name).is_some() && !path.exists() {
        let text = format!(
            "{name} is a built-in case and cannot be added to: tidewright cases --show {name} > bed3.toml makes a file of it"
        );
        return Err(sentence(&text, Status::BadInput));
    }
    let bytes =
        file::bytes(path).map_err(|unreadable| sentence(&unreadable.to_string(), Status::Unreadable))?;
    let read = read::case(&bytes, &|profile| file::profile(profile, Some(path)));
    let (record, _) = read.map_err(|problems| {
        let drawn = complaint::draw(&problems, Some((name, &read::as_shown(&bytes))), colour);
        Said::complaint(drawn, Status::BadInput)
    })?;
    Ok(Opened { name, path, record, seen: Seen::of(&bytes), colour })
}

/// What is to be added, by flags or from standard input.
fn given(matches: &ArgMatches, opened: &Opened<'_>, first: usize, now: Moment) -> Result<Vec<Entry>, Said> {
    if entry::given(matches) {
        return entry::of(matches, first, now).map(|it| vec![it]).map_err(|problems| opened.flags(&problems));
    }
    if matches.contains_id("plan") {
        return Ok(Vec::new());
    }
    if io::stdin().is_terminal() {
        let text =
            "there is nothing to chart: give flags (tidewright chart --help), or TOML on standard input";
        return Err(sentence(text, Status::BadInput));
    }
    let bytes = file::bytes_from(io::stdin().lock(), Path::new("standard input"))
        .map_err(|unreadable| sentence(&unreadable.to_string(), Status::Unreadable))?;
    read::fragments(&bytes, first).map(|(entries, _)| entries).map_err(|problems| {
        let source = Some(("standard input", &*read::as_shown(&bytes)));
        Said::complaint(complaint::draw(&problems, source, opened.colour), Status::BadInput)
    })
}

/// The plan of `--plan`, made on the record with the entries that are charted with it.
fn planned(
    matches: &ArgMatches,
    opened: &Opened<'_>,
    entries: &[Entry],
    colours: Colours,
    remarks: &mut Vec<String>,
) -> Result<crate::case::entry::ChartedPlan, Said> {
    let aim = match matches.get_one::<String>("plan").map(String::as_str) {
        Some("rate") => Aim::Rate,
        Some("volume") => Aim::Volume,
        _ => Aim::Gentle,
    };
    let request = Request { asked: asked(matches, colours)?, aims: vec![aim], ..Request::default() };
    let whole = if entries.is_empty() {
        opened.record.clone()
    } else {
        let rehearsed = append::rehearse(opened.path, entries, &opened.seen);
        rehearsed.map_err(|error| opened.refused(error))?.record
    };
    let plan: Plan = make_plan(&whole, &request).map_err(|faults| {
        let problems: Vec<Problem> = faults.into_iter().map(Problem::from).collect();
        Said::complaint(complaint::draw(&problems, None, opened.colour), Status::BadInput)
    })?;
    let line = plan.plans.first().ok_or_else(|| {
        let why: Vec<&str> = plan.cautions.iter().map(|caution| caution.text.as_str()).collect();
        sentence(&format!("no plan of this aim can be made. {}", why.join(" ")), Status::BadInput)
    })?;
    let face = face(matches);
    if !line.on_target {
        remarks.push(format!(
            "The plan is NOT on the goal: PaCO2 {} is the nearest that can be dialled.",
            face.gas(line.forecast.state.paco2_mmhg)
        ));
    }
    if line.within_limits != Some(true) {
        let verdicts = line.forecast.limits.iter().map(|limit| (limit.verdict.word(), limit.id.words()));
        let named = |verdict: &str| -> Vec<&str> {
            verdicts.clone().filter(|(word, _)| *word == verdict).map(|(_, words)| words).collect()
        };
        for verdict in ["beyond", "unknown"] {
            if !named(verdict).is_empty() {
                let is = if verdict == "beyond" { "beyond its limit" } else { "unknown" };
                remarks.push(format!("With this plan {is}: {}.", named(verdict).join(", ")));
            }
        }
    }
    let settled = plan.course.as_ref().map(|course| course.settled_minutes);
    let target = Some(plan.target.paco2_mmhg);
    Ok(charted(&line.settings, &line.forecast, target, Some(aim), settled))
}

/// A clock that was set back, or a date that was mistyped.
fn on_time(
    matches: &ArgMatches,
    record: &Record,
    entries: &[Entry],
    now: Moment,
    remarks: &mut Vec<String>,
) -> Result<(), Said> {
    let Some(latest) = record.occasions().iter().filter_map(|occasion| occasion.at).max() else {
        return Ok(());
    };
    let amends = entries.iter().all(|entry| entry.amends.is_some());
    if !matches.contains_id("at")
        && !amends
        && entries.iter().any(|entry| entry.at == Some(now))
        && now < latest
    {
        let text = format!(
            "this machine's clock says {now}, and the last entry stands at {latest}: set the clock right, or say when it was \
             with --at"
        );
        return Err(sentence(&text, Status::BadInput));
    }
    for at in entries.iter().filter(|entry| entry.amends.is_none()).filter_map(|entry| entry.at) {
        if at < latest {
            remarks.push(format!(
                "This entry stands at {at}, before the last one at {latest}: it is read in its place in time."
            ));
        }
        if at.minutes_since(now) > AHEAD_MIN {
            remarks.push(format!(
                "This entry stands at {at}, and this machine's clock says {now}: if the date is wrong, amend it."
            ));
        }
    }
    remarks.dedup();
    Ok(())
}

/// Evidence that cannot be is refused at the door, as `check` would.
fn sound(rehearsed: &Appended, opened: &Opened<'_>) -> Result<(), Said> {
    let before = Baseline::evidence_faults(&opened.record);
    let faults = Baseline::evidence_faults(&rehearsed.record);
    let new: Vec<Problem> = faults
        .into_iter()
        .filter(|fault| !before.contains(fault))
        .map(|fault| rehearsed.spans.locate(fault))
        .collect();
    if new.is_empty() {
        return Ok(());
    }
    let whole = whole_text(opened, &rehearsed.text);
    Err(opened.drawn(&new, &whole))
}

fn whole_text(opened: &Opened<'_>, added: &str) -> String {
    let before = file::bytes(opened.path).unwrap_or_default();
    format!("{}{added}", read::as_shown(&before))
}

fn told(matches: &ArgMatches, opened: &Opened<'_>, added: &Appended, remarks: &[String]) -> Answer {
    let dry_run = matches.get_flag("dry_run");
    if matches.get_flag("json") {
        let report = Report {
            format: 1,
            path: opened.name,
            dry_run,
            added: added.numbers.clone().collect(),
            text: &added.text,
            added_meanwhile: added.meanwhile,
            remarks,
        };
        return Ok(Said::answer(as_json(&report)?, Status::Done));
    }
    let numbers: Vec<String> = added.numbers.clone().map(|number| number.to_string()).collect();
    let entries = if numbers.len() == 1 { "entry" } else { "entries" };
    let done = if dry_run { "would get (nothing was written)" } else { "now has" };
    let mut out = format!("{} {done} {entries} {}:\n", opened.name, numbers.join(", "));
    for line in added.text.trim().lines() {
        // Writing to a string cannot fail.
        let _ = if line.is_empty() { writeln!(out) } else { writeln!(out, "  {line}") };
    }
    for remark in remarks {
        let _ = writeln!(out, "{}", face(matches).wrapped(remark, "! ", "  "));
    }
    Ok(Said::answer(out, Status::Done))
}

fn counted(entries: usize) -> String {
    if entries == 1 { "an entry".to_owned() } else { format!("{entries} entries") }
}

impl Opened<'_> {
    fn flags(&self, problems: &[Problem]) -> Said {
        Said::complaint(complaint::draw(problems, None, self.colour), Status::BadInput)
    }

    fn drawn(&self, problems: &[Problem], text: &str) -> Said {
        let name = format!("{} as it would be", self.name);
        let drawn = complaint::draw(problems, Some((&name, text)), self.colour);
        Said::complaint(format!("{drawn}nothing was written\n"), Status::BadInput)
    }

    fn refused(&self, error: AppendError) -> Said {
        match error {
            AppendError::Invalid { text, problems } => self.drawn(&problems, &text),
            AppendError::Unreadable(Unreadable::Folder(_)) => sentence(&error.to_string(), Status::BadInput),
            error => sentence(&error.to_string(), Status::Unreadable),
        }
    }
}
