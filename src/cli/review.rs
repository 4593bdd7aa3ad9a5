//! `tidewright review`: how forecasts did on a unit's own past gases. The file is streamed; memory does not grow with it.

mod rows;
mod text;

use std::collections::VecDeque;
use std::fs::File;
use std::hash::{DefaultHasher, Hash, Hasher};
use std::io::{self, BufReader, Read, Write};

use clap::ArgMatches;
use serde::Serialize;

use super::source::sentence;
use super::{Colours, Said, Status};
use crate::case::profile;
use crate::case::{file, profile::Profile};
use crate::planning::belief;
use crate::planning::review::{Figures, Fitted, Sample, Score, Stay, Tally, fit};
use crate::quantity::parse;
use crate::quantity::unit::Dimension;
use rows::{Columns, Row};

/// Gases further apart than this, hours, are not forecast from one another unless `--within` says so.
const WITHIN_HOURS: f64 = 12.0;
/// Stays remembered to notice one that comes back: enough for any file that is merely unsorted, and a fixed size.
const REMEMBERED_STAYS: usize = 65_536;
/// Bad rows named; the rest is counted.
const MOST_NAMED: usize = 1000;

/// A row that was left out.
#[derive(Debug, Clone, PartialEq, Eq, Serialize)]
pub struct BadRow {
    /// Its line in the file.
    pub line: u64,
    /// What is wrong with it.
    pub message: String,
}

/// The answer of a review.
#[derive(Debug, Clone, PartialEq, Serialize)]
struct Review {
    format: u32,
    stays: u64,
    rows: u64,
    skipped: u64,
    bad_rows: Vec<BadRow>,
    #[serde(flatten)]
    figures: Figures,
    after_change: Figures,
    fitted: Option<Fitted>,
    #[serde(skip)]
    deciles: [u64; 10],
}

/// Goes through the rows, keeping no more than one stay.
struct Reviewer<'a> {
    within_hours: f64,
    figures: profile::Figures,
    stay: Option<(String, Stay)>,
    seen: VecDeque<u64>,
    stays: u64,
    rows: u64,
    skipped: u64,
    bad_rows: Vec<BadRow>,
    all: Tally,
    changed: Tally,
    sample: Sample,
    rows_out: Option<&'a mut dyn Write>,
}

/// Answers, or says why not.
///
/// # Errors
/// A file that cannot be read or whose rows do not stand as they must, ready to be said.
pub fn review(matches: &ArgMatches, _: Colours) -> Result<Said, Said> {
    let name = matches.get_one::<String>("gases").map_or("-", String::as_str);
    let as_rows = matches.get_one::<String>("as").is_some_and(|word| word == "rows");
    let within_hours = within(matches)?;
    let figures = chosen_figures(matches)?;
    let mut out = io::BufWriter::new(io::stdout().lock());
    let rows_out: Option<&mut dyn Write> = if as_rows { Some(&mut out) } else { None };
    let mut reviewer = Reviewer {
        within_hours,
        figures,
        stay: None,
        seen: VecDeque::new(),
        stays: 0,
        rows: 0,
        skipped: 0,
        bad_rows: Vec::new(),
        all: Tally::default(),
        changed: Tally::default(),
        sample: Sample::default(),
        rows_out,
    };
    reviewer.read(open(name)?, name)?;
    if as_rows {
        let named = reviewer.complaints();
        out.flush().or_else(quiet_if_closed)?;
        return Ok(Said { out: String::new(), err: named, status: Status::Done });
    }
    let review = reviewer.answer();
    if matches.get_flag("json") {
        let text = crate::note::json::of(&review).map_err(|error| {
            sentence(&format!("the answer cannot be written as JSON: {error}"), Status::Unreadable)
        })?;
        return Ok(Said::answer(text, Status::Done));
    }
    Ok(Said::answer(text::of(&review, within_hours, super::answer::face(matches)), Status::Done))
}

fn within(matches: &ArgMatches) -> Result<f64, Said> {
    let Some(text) = matches.get_one::<String>("within") else { return Ok(WITHIN_HOURS) };
    match parse::parse(text, Dimension::Number) {
        Ok(hours) if hours > 0.0 && hours <= 10_000.0 => Ok(hours),
        _ => {
            Err(sentence(&format!("--within \"{text}\" is not a number of hours above 0"), Status::BadInput))
        }
    }
}

fn chosen_figures(matches: &ArgMatches) -> Result<profile::Figures, Said> {
    let profile: Option<Profile> = matches
        .get_one::<String>("profile")
        .map(|name| file::profile(name, None))
        .transpose()
        .map_err(|error| sentence(&format!("--profile: {error}"), Status::BadInput))?;
    let settled = matches.get_one::<String>("steadiness").is_some_and(|word| word == "settled");
    let own = profile.and_then(|profile| profile.steadiness).map(|(figures, _)| figures);
    Ok(if settled { belief::SETTLED } else { own.unwrap_or(belief::USUAL) })
}

fn open(name: &str) -> Result<Box<dyn Read>, Said> {
    if name == "-" {
        return Ok(Box::new(io::stdin().lock()));
    }
    let refused = |what: String| sentence(&format!("{name} {what}"), Status::Unreadable);
    let file = File::open(name).map_err(|error| match error.kind() {
        io::ErrorKind::NotFound => sentence(
            &format!("there is no file {name}: look at the spelling and the folder"),
            Status::Unreadable,
        ),
        _ => refused(format!("cannot be read: {error}")),
    })?;
    if file.metadata().is_ok_and(|facts| facts.is_dir()) {
        return Err(refused("is a folder: name the file in it".to_owned()));
    }
    Ok(Box::new(BufReader::new(file)))
}

/// A closed pipe ends quietly.
#[expect(clippy::needless_pass_by_value, reason = "the shape `or_else` hands it over in")]
fn quiet_if_closed(error: io::Error) -> Result<(), Said> {
    if error.kind() == io::ErrorKind::BrokenPipe {
        return Err(Said::answer(String::new(), Status::Done));
    }
    Err(sentence(&format!("the rows cannot be written: {error}"), Status::Unreadable))
}

impl Reviewer<'_> {
    fn read(&mut self, from: Box<dyn Read>, name: &str) -> Result<(), Said> {
        let mut reader = csv::ReaderBuilder::new()
            .comment(Some(b'#'))
            .flexible(true)
            .trim(csv::Trim::All)
            .from_reader(from);
        let unreadable = |error: &csv::Error| match error.kind() {
            csv::ErrorKind::Io(error) => {
                sentence(&format!("{name} cannot be read: {error}"), Status::Unreadable)
            }
            _ => sentence(&format!("{name} is not a CSV file of text: {error}"), Status::BadInput),
        };
        let header = reader.headers().map_err(|error| unreadable(&error))?.clone();
        let columns = Columns::find(&header)
            .map_err(|message| sentence(&format!("{name}: {message}"), Status::BadInput))?;
        self.head_of_rows().or_else(quiet_if_closed)?;
        let mut record = csv::StringRecord::new();
        loop {
            match reader.read_record(&mut record) {
                Ok(false) => break,
                Ok(true) => {}
                Err(error) if matches!(error.kind(), csv::ErrorKind::Utf8 { .. }) => {
                    self.rows += 1;
                    self.bad(
                        error.position().map_or(0, csv::Position::line),
                        "it is not text in UTF-8".to_owned(),
                    );
                    continue;
                }
                Err(error) => return Err(unreadable(&error)),
            }
            self.rows += 1;
            let line = record.position().map_or(0, csv::Position::line);
            match columns.row(&record, header.len()) {
                Ok(row) => self.take(&row, line)?,
                Err(message) => self.bad(line, message),
            }
        }
        self.judge_rows(name)
    }

    fn judge_rows(&self, name: &str) -> Result<(), Said> {
        if self.rows == 0 {
            return Err(sentence(&format!("{name} has a header but no row"), Status::BadInput));
        }
        if self.skipped * 2 > self.rows {
            let first: Vec<String> = self
                .bad_rows
                .iter()
                .take(5)
                .map(|bad| format!("line {}: {}", bad.line, bad.message))
                .collect();
            let text = format!(
                "{} of {} rows in {name} are bad, so it is not reviewed. The first:\n  {}",
                self.skipped,
                self.rows,
                first.join("\n  ")
            );
            return Err(sentence(&text, Status::BadInput));
        }
        Ok(())
    }

    fn bad(&mut self, line: u64, message: String) {
        self.skipped += 1;
        if self.bad_rows.len() < MOST_NAMED {
            self.bad_rows.push(BadRow { line, message });
        }
    }

    fn take(&mut self, row: &Row, line: u64) -> Result<(), Said> {
        if self.stay.as_ref().is_none_or(|(id, _)| *id != row.stay) {
            self.begin(row, line)?;
        }
        let Some((_, stay)) = &mut self.stay else { return Ok(()) };
        stay.know(&row.patient);
        let mut score = None;
        if let Some(latest) = stay.latest() {
            let gap = row.gas.hours - latest.hours;
            if gap < 0.0 {
                let text = format!(
                    "line {line}: stay {} goes back in time; sort the file by stay, then by hours",
                    row.stay
                );
                return Err(sentence(&text, Status::BadInput));
            }
            if gap <= self.within_hours {
                score = stay.score(&row.gas, self.figures);
                if let (Some(_), true) = (&score, self.rows_out.is_none()) {
                    self.sample.keep(usize::try_from(self.stays).unwrap_or(usize::MAX), stay, &row.gas);
                }
            }
        }
        stay.add(row.gas);
        if let Some(score) = score {
            self.all.add(&score);
            if score.after_change {
                self.changed.add(&score);
            }
            self.row_out(row, &score).or_else(quiet_if_closed)?;
        }
        Ok(())
    }

    fn begin(&mut self, row: &Row, line: u64) -> Result<(), Said> {
        let mut hasher = DefaultHasher::new();
        row.stay.hash(&mut hasher);
        let mark = hasher.finish();
        if self.seen.contains(&mark) {
            let text = format!(
                "line {line}: the rows of stay {} do not stand together; sort the file by stay, then by hours",
                row.stay
            );
            return Err(sentence(&text, Status::BadInput));
        }
        if self.seen.len() >= REMEMBERED_STAYS {
            self.seen.pop_front();
        }
        self.seen.push_back(mark);
        self.stays += 1;
        self.stay = Some((row.stay.clone(), Stay::new(row.patient.clone())));
        Ok(())
    }

    fn head_of_rows(&mut self) -> io::Result<()> {
        let Some(out) = &mut self.rows_out else { return Ok(()) };
        writeln!(
            out,
            "stay,hours,rate_set,vt_set,pco2,forecast_pco2,expected_pco2,half_low,half_high,low,high,share_below,inside_half,inside_wide,after_change"
        )
    }

    fn row_out(&mut self, row: &Row, score: &Score) -> io::Result<()> {
        let Some(out) = &mut self.rows_out else { return Ok(()) };
        let at =
            |p: f64| score.mixture.quantile(p).map_or_else(String::new, |ln| format!("{:.3}", libm::exp(ln)));
        let gas = &row.gas;
        writeln!(
            out,
            "{},{},{},{},{},{:.3},{:.3},{},{},{},{},{:.6},{},{},{}",
            rows::quoted(&row.stay),
            gas.hours,
            gas.rate_set_per_min,
            gas.volume_set_ml,
            gas.paco2_mmhg,
            score.arithmetic_mmhg,
            score.expected_mmhg,
            at(0.25),
            at(0.75),
            at(0.05),
            at(0.95),
            score.below,
            u8::from(score.in_half()),
            u8::from(score.in_wide()),
            u8::from(score.after_change)
        )
    }

    fn complaints(&self) -> String {
        let named = self.bad_rows.iter().map(|bad| format!("left out, line {}: {}\n", bad.line, bad.message));
        named.collect::<Vec<_>>().concat()
    }

    fn answer(self) -> Review {
        Review {
            format: 1,
            stays: self.stays,
            rows: self.rows,
            skipped: self.skipped,
            bad_rows: self.bad_rows,
            figures: self.all.figures(),
            after_change: self.changed.figures(),
            fitted: fit(&self.sample),
            deciles: *self.all.deciles(),
        }
    }
}
