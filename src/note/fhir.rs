//! The record as a FHIR R4B bundle: measurements and settings with LOINC and UCUM where their codes have been seen, all
//! else under a code system of our own, and forecasts marked as such and never as measurements.

mod codes;

use serde_json::{Map, Value, json};

use super::SAFETY;
use super::document::harmless;
use super::entry_items::{observed, outcome_word};
use super::face::Face;
use super::record_note::Told;
use crate::case::entry::{ChartedPlan, Sex};
use crate::case::moment::Moment;
use crate::case::record::Occasion;
use crate::case::slots::{entry_value, patient_value};
use crate::physiology::weaning::rapid_shallow_breathing_index;
use crate::planning::baseline::gas_exchange::predicted_weight_kg;
use crate::planning::weaning::TrialCourse;
use crate::quantity::input::{INPUTS, Input, Key};
use codes::{Coded, coded};

/// The code system of what has no LOINC code here.
pub const QUANTITIES: &str = "urn:tidewright:quantity";
/// The code system of forecasts.
pub const FORECASTS: &str = "urn:tidewright:forecast";
/// The system of the label, which is never a name.
pub const LABELS: &str = "urn:tidewright:label";
const LOINC: &str = "http://loinc.org";
const UCUM: &str = "http://unitsofmeasure.org";

/// The note as a bundle.
pub fn of(told: &Told<'_>) -> Value {
    let mut bundle = Bundle::new(told);
    bundle.patient(told);
    for (number, entry) in (1..).zip(told.record.entries()) {
        if !told.shows(number, entry.at) {
            continue;
        }
        // What a later entry corrects is exported as the mistake it was.
        for input in INPUTS.iter().filter(|it| entry_value(entry, it.key).is_some()) {
            if let (Some(_), Some(value)) =
                (told.struck.by(number, input.table, input.name), entry_value(entry, input.key))
            {
                let at = if input.table == "gas" { entry.gas.drawn_at.or(entry.at) } else { entry.at };
                bundle.quantity(&Seen {
                    number,
                    input,
                    value,
                    at,
                    status: "entered-in-error",
                    by: entry.by.as_deref(),
                });
            }
        }
    }
    for occasion in told.record.occasions().iter().filter(|it| told.shows(it.number, it.at)) {
        bundle.occasion(told, occasion);
    }
    for trial in &told.trials {
        bundle.trial(trial);
    }
    bundle.finish()
}

/// One value as it was charted.
struct Seen<'a> {
    number: usize,
    input: &'a Input,
    value: f64,
    at: Option<Moment>,
    status: &'static str,
    by: Option<&'a str>,
}

struct Bundle {
    seed: String,
    patient: String,
    entries: Vec<Value>,
}

impl Bundle {
    fn new(told: &Told<'_>) -> Self {
        let first = told.record.occasions().first().and_then(|it| it.at);
        // A bed has many patients: the first entry's time tells them apart.
        let seed = format!("{}\n{}", told.record.label(), first.map_or_else(String::new, Moment::rfc3339));
        Self { patient: uuid(&[&seed, "patient"]), seed, entries: Vec::new() }
    }

    fn add(&mut self, url: &str, resource: Map<String, Value>) {
        let mut entry = Map::new();
        entry.insert("fullUrl".to_owned(), json!(url));
        entry.insert("resource".to_owned(), Value::Object(resource));
        self.entries.push(Value::Object(entry));
    }

    fn finish(self) -> Value {
        json!({ "resourceType": "Bundle", "type": "collection", "entry": self.entries })
    }

    fn patient(&mut self, told: &Told<'_>) {
        let patient = told.record.patient();
        let mut resource = Map::new();
        resource.insert("resourceType".to_owned(), json!("Patient"));
        let label = harmless(told.record.label());
        if !label.is_empty() {
            resource.insert("identifier".to_owned(), json!([{ "system": LABELS, "value": label }]));
        }
        let gender = patient.sex.map(|sex| if sex == Sex::Female { "female" } else { "male" });
        if let Some(gender) = gender {
            resource.insert("gender".to_owned(), json!(gender));
        }
        let url = self.patient.clone();
        self.add(&url, resource);
        let first = told.record.occasions().first().and_then(|it| it.at);
        for input in INPUTS.iter().filter(|it| it.table == "patient") {
            let given = patient_value(patient, input.key);
            let value = if input.key == Key::PredictedWeight { predicted_weight_kg(patient) } else { given };
            if let Some(value) = value {
                self.quantity(&Seen { number: 0, input, value, at: first, status: "final", by: None });
            }
        }
    }

    fn occasion(&mut self, told: &Told<'_>, occasion: &Occasion) {
        let entry = &occasion.entry;
        let typed = occasion.number.checked_sub(1).and_then(|it| told.record.entries().get(it));
        for input in INPUTS {
            let Some(value) = entry_value(entry, input.key) else { continue };
            let as_typed = typed.and_then(|typed| entry_value(typed, input.key));
            let same = as_typed.is_some_and(|typed| typed.to_bits() == value.to_bits());
            let status = if same { "final" } else { "corrected" };
            let at = if input.table == "gas" { occasion.drawn_at() } else { occasion.at };
            self.quantity(&Seen {
                number: occasion.number,
                input: &input,
                value,
                at,
                status,
                by: entry.by.as_deref(),
            });
        }
        if let Some((pao2, fio2)) = entry.gas.pao2_mmhg.zip(occasion.in_force.fio2()) {
            let seen = (occasion.number, "pao2_fio2", occasion.drawn_at());
            self.observation(seen, &codes::PAO2_FIO2, pao2 / fio2, "final", entry.by.as_deref());
        }
        let weaning = &entry.weaning;
        if let Some((rate, volume)) =
            weaning.spontaneous_rate_per_min.zip(weaning.spontaneous_tidal_volume_ml)
        {
            let value = rapid_shallow_breathing_index(rate, volume);
            let seen = (occasion.number, "rapid_shallow_breathing_index", occasion.at);
            self.observation(seen, &codes::RAPID_SHALLOW, value, "final", entry.by.as_deref());
        }
        if let Some(plan) = &entry.plan {
            self.forecast(occasion, plan);
        }
    }

    fn quantity(&mut self, seen: &Seen<'_>) {
        let coded = coded(seen.input);
        let value = coded.value(seen.value);
        let key = format!("{}.{}", seen.input.table, seen.input.name);
        self.observation((seen.number, &key, seen.at), &coded, value, seen.status, seen.by);
    }

    /// `value` is in the unit of `coded` already.
    fn observation(
        &mut self,
        (number, key, at): (usize, &str, Option<Moment>),
        coded: &Coded,
        value: f64,
        status: &str,
        by: Option<&str>,
    ) {
        let mut resource = self.head(status, at);
        resource.insert("code".to_owned(), concept(coded, key));
        resource.insert("valueQuantity".to_owned(), amount(value, coded));
        if let Some(by) = by {
            resource.insert("performer".to_owned(), json!([{ "display": harmless(by) }]));
        }
        let url = uuid(&[&self.seed, &number.to_string(), key, status]);
        self.add(&url, resource);
    }

    fn head(&self, status: &str, at: Option<Moment>) -> Map<String, Value> {
        let mut resource = Map::new();
        resource.insert("resourceType".to_owned(), json!("Observation"));
        resource.insert("status".to_owned(), json!(status));
        resource.insert("subject".to_owned(), json!({ "reference": self.patient }));
        if let Some(at) = at {
            resource.insert("effectiveDateTime".to_owned(), json!(at.rfc3339()));
        }
        resource
    }

    /// A forecast: preliminary, under its own code system, and with the word in it.
    fn forecast(&mut self, occasion: &Occasion, plan: &ChartedPlan) {
        let Some(expected) = plan.expected_paco2_mmhg.or(plan.forecast_paco2_mmhg) else { return };
        let code = |code: &str, display: &str| json!({ "coding": [{ "system": FORECASTS, "code": code, "display": display }], "text": display });
        let mut resource = self.head("preliminary", occasion.at);
        resource.insert("code".to_owned(), code("paco2", "Forecast of arterial PCO2 (not a measurement)"));
        resource.insert("valueQuantity".to_owned(), mmhg(expected));
        let ends = [
            (plan.half_interval_mmhg, "half", "1 gas in 2"),
            (plan.wide_interval_mmhg, "wide", "9 gases in 10"),
        ];
        let mut components = Vec::new();
        for (interval, id, words) in ends {
            let Some([low, high]) = interval else { continue };
            for (value, side) in [(low, "low"), (high, "high")] {
                let display =
                    format!("Forecast of arterial PCO2, {side} end within which {words} should fall");
                components.push(json!({
                    "code": code(&format!("paco2-{id}-{side}"), &display),
                    "valueQuantity": mmhg(value),
                }));
            }
        }
        if !components.is_empty() {
            resource.insert("component".to_owned(), json!(components));
        }
        let dialled = super::entry_items::dialled(plan, Face::default());
        let text = format!("Forecast, not a measurement, if {dialled} are set. {SAFETY}");
        resource.insert("note".to_owned(), json!([{ "text": text }]));
        let url = uuid(&[&self.seed, &occasion.number.to_string(), "forecast"]);
        self.add(&url, resource);
    }

    /// A breathing trial as words: no code has been seen for it.
    fn trial(&mut self, trial: &TrialCourse) {
        let status = if trial.runs() { "preliminary" } else { "final" };
        let mut resource = self.head(status, trial.started_at);
        let display = "Spontaneous breathing trial";
        resource.insert(
            "code".to_owned(),
            json!({ "coding": [{ "system": QUANTITIES, "code": "breathing_trial", "display": display }], "text": display }),
        );
        resource
            .insert("valueString".to_owned(), json!(trial.outcome.map_or("no end recorded", outcome_word)));
        let notes: Vec<Value> = trial
            .observations
            .iter()
            .map(|it| json!({ "text": format!("minute {}: {}", it.minute, observed(it, Face::default())) }))
            .collect();
        if !notes.is_empty() {
            resource.insert("note".to_owned(), json!(notes));
        }
        let first = trial.entries.first().map_or_else(String::new, usize::to_string);
        let url = uuid(&[&self.seed, &first, "trial"]);
        self.add(&url, resource);
    }
}

fn mmhg(value: f64) -> Value {
    amount(value, &codes::PAO2_FIO2)
}

fn amount(value: f64, coded: &Coded) -> Value {
    // Millionths: what arithmetic adds behind them is no measurement.
    let value = (value * 1e6).round() / 1e6;
    let mut amount = Map::new();
    amount.insert("value".to_owned(), json!(value));
    // A unit without words is left out: FHIR has no empty strings.
    if !coded.unit.is_empty() {
        amount.insert("unit".to_owned(), json!(coded.unit));
    }
    amount.insert("system".to_owned(), json!(UCUM));
    amount.insert("code".to_owned(), json!(coded.ucum));
    Value::Object(amount)
}

fn concept(coded: &Coded, key: &str) -> Value {
    let coding = match coded.loinc {
        Some(loinc) => json!({ "system": LOINC, "code": loinc }),
        None => json!({ "system": QUANTITIES, "code": key.replace('.', "-"), "display": coded.words }),
    };
    json!({ "coding": [coding], "text": coded.words })
}

/// A name of its own for a resource, the same whenever the same record is exported: 128 bits of FNV-1a over its parts,
/// as a UUID of version 8 (RFC 9562, the version for such schemes).
fn uuid(parts: &[&str]) -> String {
    // Offset basis and prime of the 128-bit FNV-1a, as its authors publish them.
    let mut hash: u128 = 0x6c62_272e_07bb_0142_62b8_2175_6295_c58d;
    for part in parts {
        for byte in part.bytes().chain([0]) {
            hash ^= u128::from(byte);
            hash = hash.wrapping_mul(0x0000_0000_0100_0000_0000_0000_0000_013b);
        }
    }
    let hash = (hash & !(0xF << 76) & !(0x3 << 62)) | (0x8 << 76) | (0x2 << 62);
    let digits = format!("{hash:032x}");
    let part = |range: std::ops::Range<usize>| digits.get(range).unwrap_or("");
    format!("urn:uuid:{}-{}-{}-{}-{}", part(0..8), part(8..12), part(12..16), part(16..20), part(20..32))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_of_resources_are_uuids_of_version_8() {
        let name = uuid(&["Bay 3", "1", "gas.paco2"]);
        assert_eq!(name.len(), "urn:uuid:".len() + 36);
        assert_eq!((name.get(23..24), name.get(9 + 14..9 + 15)), (Some("8"), Some("8")), "{name}");
        assert!(matches!(name.get(9 + 19..9 + 20), Some("8" | "9" | "a" | "b")), "{name}");
        assert_ne!(name, uuid(&["Bay 3", "11", "gas.paco2"]));
        assert_ne!(uuid(&["a", "b"]), uuid(&["ab", ""]));
    }
}
