//! One entry and its tables.

use toml::de::{DeTable, DeValue};

use super::schema::{header, home_of, keys};
use super::walk::{Value, Walk};
use crate::case::entry::{
    Aim, BreathingTrial, ChartedPlan, Control, Entry, FlowPattern, Observation, Patient, TrialOutcome,
    TrialSupport,
};
use crate::case::fault::Place;
use crate::case::slots::{ENTRY, OBSERVATION, PATIENT, PLAN, Slot};
use crate::quantity::input::Key;

const AIMS: [(&str, Aim); 3] = [("rate", Aim::Rate), ("volume", Aim::Volume), ("gentle", Aim::Gentle)];
const CONTROLS: [(&str, Control); 3] =
    [("volume", Control::Volume), ("pressure", Control::Pressure), ("support", Control::Support)];
const PATTERNS: [(&str, FlowPattern); 2] =
    [("constant", FlowPattern::Constant), ("decelerating", FlowPattern::Decelerating)];
const OUTCOMES: [(&str, TrialOutcome); 4] = [
    ("passed", TrialOutcome::Passed),
    ("failed", TrialOutcome::Failed),
    ("stopped", TrialOutcome::Stopped),
    ("running", TrialOutcome::Running),
];

impl Walk {
    /// The keys of a table that are single numbers go into their slots; what is left is given to `other`, which
    /// says whether it knew the key.
    fn fill<T>(
        &mut self,
        whole: &mut T,
        slots: &[Slot<T>],
        table: &DeTable<'_>,
        (name, number): (&'static str, Option<usize>),
        mut other: impl FnMut(&mut Self, &mut T, &str, &Value<'_>) -> bool,
    ) {
        for (key, value) in table {
            let slot = slots.iter().find(|slot| {
                let input = slot.key.input();
                input.table == name && input.name == key.get_ref()
            });
            if let Some(slot) = slot {
                let input = slot.key.input();
                let place = Place { entry: number, table: name, key: input.name };
                *(slot.open)(whole) = self.number(&input.plausible(), place, value);
            } else if !other(self, whole, key.get_ref(), value) {
                self.unknown(key, header(name), &keys(name), home_of(key.get_ref(), name));
            }
        }
    }

    pub(super) fn patient(&mut self, value: &Value<'_>) -> Patient {
        use crate::case::entry::{Airway, Sex};
        let mut patient = Patient::default();
        let Some(table) = self.table(Place::top("patient", ""), value, "[patient]") else { return patient };
        self.fill(&mut patient, &PATIENT, table, ("patient", None), |walk, patient, key, value| match key {
            "sex" => {
                let choices = [("female", Sex::Female), ("male", Sex::Male)];
                patient.sex = walk.word(Place::top("patient", "sex"), value, &choices);
                true
            }
            "airway" => {
                let choices = [
                    ("native", Airway::Native),
                    ("tube", Airway::Tube),
                    ("tracheostomy", Airway::Tracheostomy),
                ];
                patient.airway = walk.word(Place::top("patient", "airway"), value, &choices);
                true
            }
            _ => false,
        });
        patient
    }

    /// Entry `number`, from 1.
    pub(super) fn entry(&mut self, number: usize, table: &DeTable<'_>) -> Entry {
        let mut entry = Entry::default();
        for (key, value) in table {
            match key.get_ref().as_ref() {
                "at" => entry.at = self.moment(Place::in_entry(number, "", "at"), value),
                "by" => entry.by = self.text(Place::in_entry(number, "", "by"), value, false, "by = \"RT\""),
                "amends" => self.amends(number, &mut entry, value),
                "settings" => self.numbers(number, &mut entry, "settings", value),
                "measured" => self.numbers(number, &mut entry, "measured", value),
                "gas" => self.numbers(number, &mut entry, "gas", value),
                "weaning" => self.numbers(number, &mut entry, "weaning", value),
                "trial" => entry.trial = self.trial(number, value),
                "plan" => entry.plan = self.plan(number, value),
                "note" => self.note(number, &mut entry, value),
                other => self.unknown(key, header("entry"), &keys("entry"), home_of(other, "entry")),
            }
        }
        entry
    }

    fn numbers(&mut self, number: usize, entry: &mut Entry, name: &'static str, value: &Value<'_>) {
        let Some(table) = self.table(Place::in_entry(number, name, ""), value, header(name)) else { return };
        self.fill(entry, &ENTRY, table, (name, Some(number)), |walk, entry, key, value| match (name, key) {
            ("settings", "control") => {
                entry.settings.control = walk.control(Place::in_entry(number, name, "control"), value);
                true
            }
            ("settings", "flow_pattern") => {
                entry.settings.flow_pattern =
                    walk.word(Place::in_entry(number, name, "flow_pattern"), value, &PATTERNS);
                true
            }
            ("gas", "drawn_at") => {
                entry.gas.drawn_at = walk.moment(Place::in_entry(number, name, "drawn_at"), value);
                true
            }
            _ => false,
        });
    }

    fn control(&mut self, place: Place, value: &Value<'_>) -> Option<Control> {
        let before = self.problems.len();
        let control = self.word(place, value, &CONTROLS);
        for problem in self.problems.iter_mut().skip(before) {
            problem.help.push_str(
                "; a volume-targeted mode with a falling flow is \"volume\" with flow_pattern = \"decelerating\"",
            );
        }
        control
    }

    /// Under the entry itself or, as the note that explains it ends, under its note.
    fn amends(&mut self, number: usize, entry: &mut Entry, value: &Value<'_>) {
        let place = Place::in_entry(number, "", "amends");
        let earlier = self.spans.of(place);
        let read = self.count(place, value, "amends = 2");
        if let (Some(earlier), Some(first), Some(second)) = (earlier, entry.amends, read)
            && first != second
        {
            self.problem(
                place,
                value.span(),
                format!("this entry amends entry {second} here and entry {first} elsewhere"),
                "an entry corrects one other: keep one of the two lines",
            );
            if let Some(problem) = self.problems.last_mut() {
                problem.also.push(earlier);
            }
        }
        entry.amends = read.or(entry.amends);
    }

    fn note(&mut self, number: usize, entry: &mut Entry, value: &Value<'_>) {
        let Some(table) = self.table(Place::in_entry(number, "note", ""), value, header("note")) else {
            return;
        };
        for (key, value) in table {
            match key.get_ref().as_ref() {
                "text" => {
                    let place = Place::in_entry(number, "note", "text");
                    entry.text = self.text(place, value, true, "text = \"turned prone at 9\"");
                }
                "amends" => self.amends(number, entry, value),
                other => self.unknown(key, header("note"), &keys("note"), home_of(other, "note")),
            }
        }
    }

    fn plan(&mut self, number: usize, value: &Value<'_>) -> Option<ChartedPlan> {
        let table = self.table(Place::in_entry(number, "plan", ""), value, header("plan"))?;
        let mut plan = ChartedPlan::default();
        self.fill(&mut plan, &PLAN, table, ("plan", Some(number)), |walk, plan, key, value| {
            let place = |key: &'static str| Place::in_entry(number, "plan", key);
            match key {
                "aim" => plan.aim = walk.word(place("aim"), value, &AIMS),
                "half_interval" => {
                    let input = Key::HalfInterval.input().plausible();
                    plan.half_interval_mmhg = walk.pair(&input, place("half_interval"), value);
                }
                "wide_interval" => {
                    let input = Key::WideInterval.input().plausible();
                    plan.wide_interval_mmhg = walk.pair(&input, place("wide_interval"), value);
                }
                _ => return false,
            }
            true
        });
        Some(plan)
    }

    fn trial(&mut self, number: usize, value: &Value<'_>) -> Option<BreathingTrial> {
        let table = self.table(Place::in_entry(number, "trial", ""), value, header("trial"))?;
        let mut trial =
            BreathingTrial { support: None, started_at: None, outcome: None, observations: Vec::new() };
        let place = |key: &'static str| Place::in_entry(number, "trial", key);
        for (key, value) in table {
            match key.get_ref().as_ref() {
                "support" => trial.support = self.support(place("support"), value),
                "started_at" => trial.started_at = self.moment(place("started_at"), value),
                "outcome" => trial.outcome = self.word(place("outcome"), value, &OUTCOMES),
                "observation" => trial.observations = self.observations(number, value),
                other => self.unknown(key, header("trial"), &keys("trial"), home_of(other, "trial")),
            }
        }
        Some(trial)
    }

    fn support(&mut self, place: Place, value: &Value<'_>) -> Option<TrialSupport> {
        if value.get_ref().as_str() == Some("t-piece") {
            self.spans.insert(place, value.span());
            return Some(TrialSupport::TPiece);
        }
        self.number(&Key::TrialSupport.input().plausible(), place, value).map(TrialSupport::Pressure)
    }

    fn observations(&mut self, number: usize, value: &Value<'_>) -> Vec<Observation> {
        let place = Place::in_entry(number, "observation", "");
        let Some(list) = value.get_ref().as_array() else {
            self.table_list(place, value, header("observation"));
            return Vec::new();
        };
        let mut observations = Vec::new();
        for row in list {
            let Some(table) = self.table(place, row, header("observation")) else { continue };
            let mut observation = Observation::default();
            let mut minute = None;
            let of_table = ("observation", Some(number));
            self.fill(&mut observation, &OBSERVATION, table, of_table, |walk, observation, key, value| {
                if key != "minute" {
                    return false;
                }
                let place = Place::in_entry(number, "observation", "minute");
                minute = Some(value.span());
                let read = walk.number(&Key::ObservedMinute.input().plausible(), place, value);
                observation.minute = read.unwrap_or_default();
                true
            });
            if minute.is_none() {
                let help = "say at which minute of the trial it was made: minute = 10";
                self.problem(place, row.span(), "this observation has no minute", help);
            }
            observations.push(observation);
        }
        observations
    }

    /// A list of tables that was written as something else.
    pub(super) fn table_list(&mut self, place: Place, value: &Value<'_>, header: &str) {
        let single = header.replace("[[", "[").replace("]]", "]");
        let (message, help) = if matches!(value.get_ref(), DeValue::Table(_)) {
            (
                format!("there may be several of these, so the header has two brackets: {header}"),
                "before its tables",
            )
        } else {
            (format!("this must be a table of its own, headed {header}"), "with its keys below it")
        };
        let help = format!("write {header} on a line of its own {help}, not {single}");
        self.problem(place, value.span(), message, help);
    }
}
