//! An entry from the flags of `chart`.

use clap::ArgMatches;

use super::arguments::inputs;
use crate::case::entry::{
    BreathingTrial, Control, Entry, FlowPattern, Observation, TrialOutcome, TrialSupport,
};
use crate::case::fault::{Fault, Place};
use crate::case::moment::Moment;
use crate::case::problem::Problem;
use crate::case::{flag, slots};
use crate::cli::clock;
use crate::quantity::input::Key;
use crate::quantity::unit::Dimension;

/// Whether the flags chart anything but a plan.
pub fn given(matches: &ArgMatches) -> bool {
    let others = [
        "text",
        "amends",
        "control",
        "flow_pattern",
        "drawn_at",
        "trial_support",
        "trial_started",
        "trial_outcome",
        "observation",
    ];
    inputs().map(|input| input.name).chain(others).any(|id| matches.contains_id(id))
}

/// The entry that the flags describe, to be entry `number`.
///
/// # Errors
/// Every flag that cannot be read.
pub fn of(matches: &ArgMatches, number: usize, now: Moment) -> Result<Entry, Vec<Problem>> {
    let mut reader = Reader { matches, number, now, faults: Vec::new() };
    let entry = reader.entry();
    if reader.faults.is_empty() {
        Ok(entry)
    } else {
        Err(reader.faults.into_iter().map(Problem::from).collect())
    }
}

/// Numbers that were converted from another unit, kept to a thousandth of the default one: far finer than anything
/// measures, and fit to be read in the file.
pub fn tidied(mut entry: Entry) -> Entry {
    for input in inputs().filter(|input| input.dimension != Dimension::Ratio) {
        if let Some(Some(value)) = slots::entry_slot(&mut entry, input.key) {
            *value = (*value * 1000.0).round() / 1000.0;
        }
    }
    entry
}

/// When the entry was charted: `--at`, else now.
///
/// # Errors
/// It cannot be read.
pub fn at(matches: &ArgMatches, now: Moment) -> Result<Moment, Problem> {
    let Some(text) = matches.get_one::<String>("at") else { return Ok(now) };
    clock::moment(text, now).map_err(|sentence| unread_time("at", &sentence).into())
}

fn unread_time(key: &'static str, sentence: &str) -> Fault {
    let (message, help) = sentence.split_once(": ").unwrap_or((sentence, clock::HOW));
    Fault::new([Place::top("", key)], message, help)
}

struct Reader<'m> {
    matches: &'m ArgMatches,
    number: usize,
    now: Moment,
    faults: Vec<Fault>,
}

impl Reader<'_> {
    fn word(&self, id: &str) -> Option<&str> {
        self.matches.get_one::<String>(id).map(String::as_str)
    }

    fn kept<T>(&mut self, read: Result<T, Fault>) -> Option<T> {
        read.map_err(|fault| self.faults.push(fault)).ok()
    }

    fn moment(&mut self, id: &'static str) -> Option<Moment> {
        let text = self.word(id)?.to_owned();
        let read = clock::moment(&text, self.now).map_err(|sentence| unread_time(id, &sentence));
        self.kept(read)
    }

    fn entry(&mut self) -> Entry {
        let mut entry = Entry { text: self.word("text").map(str::to_owned), ..Entry::default() };
        for input in inputs() {
            let Some(text) = self.word(input.name).map(str::to_owned) else { continue };
            let read = flag::number(input.key, Some(self.number), &text);
            let value = self.kept(read);
            if let Some(slot) = slots::entry_slot(&mut entry, input.key) {
                *slot = value;
            }
        }
        entry.settings.control = self.word("control").map(|word| match word {
            "volume" => Control::Volume,
            "pressure" => Control::Pressure,
            _ => Control::Support,
        });
        entry.settings.flow_pattern = self.word("flow_pattern").map(|word| match word {
            "constant" => FlowPattern::Constant,
            _ => FlowPattern::Decelerating,
        });
        entry.gas.drawn_at = self.moment("drawn_at");
        entry.trial = self.trial();
        entry.amends = self.amends();
        entry
    }

    fn amends(&mut self) -> Option<usize> {
        let text = self.word("amends")?;
        let read = text.trim().parse().map_err(|_| {
            Fault::new(
                [Place::in_entry(self.number, "", "amends")],
                format!("\"{text}\" is not the number of an entry"),
                "count the entries from 1 at the top of the file; tidewright note numbers them: --amends 4",
            )
        });
        self.kept(read)
    }

    fn trial(&mut self) -> Option<BreathingTrial> {
        let ids = ["trial_support", "trial_started", "trial_outcome", "observation"];
        if !ids.iter().any(|id| self.matches.contains_id(id)) {
            return None;
        }
        let support = self.word("trial_support").map(str::to_owned);
        let observations: Vec<String> =
            self.matches.get_many::<String>("observation").into_iter().flatten().cloned().collect();
        Some(BreathingTrial {
            support: support.and_then(|text| self.support(&text)),
            started_at: self.moment("trial_started"),
            outcome: self.word("trial_outcome").map(|word| match word {
                "passed" => TrialOutcome::Passed,
                "failed" => TrialOutcome::Failed,
                "stopped" => TrialOutcome::Stopped,
                _ => TrialOutcome::Running,
            }),
            observations: observations.iter().filter_map(|text| self.observation(text)).collect(),
        })
    }

    fn support(&mut self, text: &str) -> Option<TrialSupport> {
        if text.trim().eq_ignore_ascii_case("t-piece") {
            return Some(TrialSupport::TPiece);
        }
        let read = flag::number(Key::TrialSupport, Some(self.number), text).map_err(|fault| {
            let places = [Place::in_entry(self.number, "trial", "trial_support")];
            Fault::new(places, fault.message, "write --trial-support 5 (cmH2O), or --trial-support t-piece")
        });
        self.kept(read).map(TrialSupport::Pressure)
    }

    /// `minute=10,rate=24,spo2=95 %`
    fn observation(&mut self, text: &str) -> Option<Observation> {
        let mut observation = Observation::default();
        let mut minute = None;
        for part in text.split([',', ';']).map(str::trim).filter(|part| !part.is_empty()) {
            let read = self.observed(part);
            let (key, value) = self.kept(read)?;
            if key == Key::ObservedMinute {
                minute = Some(value);
            } else if let Some(slot) = slots::observation_slot(&mut observation, key) {
                *slot = Some(value);
            }
        }
        let minute = minute.ok_or_else(|| {
            self.wrong_observation(
                format!("the observation \"{text}\" has no minute"),
                "say at which minute of the trial it was made: minute=10,rate=24",
            )
        });
        observation.minute = self.kept(minute)?;
        Some(observation)
    }

    fn observed(&self, part: &str) -> Result<(Key, f64), Fault> {
        let help = "write minute=10,rate=24,tidal_volume=340,heart_rate=102,systolic_pressure=138,spo2=0.95, or some of them";
        let wrong = |message: String| self.wrong_observation(message, help);
        let (name, value) =
            part.split_once('=').ok_or_else(|| wrong(format!("\"{part}\" is not key=value")))?;
        let name = name.trim().replace('-', "_");
        let key = Key::find("observation", &name)
            .ok_or_else(|| wrong(format!("an observation has no key {name}")))?;
        let value = flag::number(key, Some(self.number), value.trim())
            .map_err(|fault| self.wrong_observation(fault.message, help))?;
        Ok((key, value))
    }

    fn wrong_observation(&self, message: String, help: &str) -> Fault {
        Fault::new([Place::in_entry(self.number, "observation", "observation")], message, help)
    }
}
