//! The record as JSON: every value of every entry under its key with its unit, corrections named, forecasts held against
//! what came.

use serde_json::{Map, Value, json};

use super::SAFETY;
use super::entry_items::outcome_word;
use super::record_note::Told;
use crate::case::entry::{
    Aim, Airway, BreathingTrial, ChartedPlan, Control, Entry, FlowPattern, Observation, Sex, TrialSupport,
};
use crate::case::moment::Moment;
use crate::case::slots;
use crate::case::struck;
use crate::planning::weaning::{Assessment, TrialCourse};
use crate::quantity::input::{INPUTS, Input, Key};
use crate::quantity::unit::Dimension;

/// The note as a JSON value.
pub fn of(told: &Told<'_>) -> Value {
    let record = told.record;
    let entries: Vec<Value> = (1..)
        .zip(record.entries())
        .filter(|(number, entry)| told.shows(*number, entry.at))
        .map(|(number, it)| entry(told, number, it))
        .collect();
    let (now, why) = match &told.now {
        Ok(now) => (serde_json::to_value(now).unwrap_or(Value::Null), Value::Null),
        Err(why) => (Value::Null, json!(why)),
    };
    let reckoned = &told.reckoned;
    json!({
        "format": 1,
        "label": record.label(),
        "profile": record.profile().name,
        "patient": patient(told),
        "entries": entries,
        "forecast_now": now,
        "no_forecast_because": why,
        "forecasts": {
            "held_against_gases": reckoned.reckonings.iter().map(|it| json!({
                "drawn_at": it.drawn_at.map(Moment::rfc3339),
                "counts": it.counts(),
                "of": it,
            })).collect::<Vec<_>>(),
            "waiting": reckoned.waiting.as_ref().map(|it| json!({
                "plan_entry": it.plan_entry,
                "dialled": it.dialled,
                "dialled_at": it.dialled_at.map(Moment::rfc3339),
            })),
            "tally": reckoned.tally,
        },
        "weaning": told.weaning.as_ref().map(weaning),
        "breathing_trials": told.trials.iter().map(trial_course).collect::<Vec<_>>(),
        "caution": SAFETY,
    })
}

/// A key with its unit in the name, as everywhere in the JSON of this program.
pub fn named(input: &Input) -> String {
    let unit = match input.dimension {
        Dimension::Rate => "_per_min",
        Dimension::Volume => "_ml",
        Dimension::GasPressure | Dimension::BloodPressure => "_mmhg",
        Dimension::AirwayPressure => "_cmh2o",
        Dimension::Length => "_cm",
        Dimension::Altitude => "_m",
        Dimension::Mass => "_kg",
        Dimension::Age => "_years",
        Dimension::Time => "_s",
        Dimension::Minutes => "_min",
        Dimension::Flow => "_l_min",
        Dimension::Compliance => "_ml_cmh2o",
        Dimension::Resistance => "_cmh2o_s_l",
        Dimension::GasOutput => "_ml_min",
        Dimension::Temperature => "_c",
        Dimension::Concentration => "_mmol_l",
        Dimension::Ratio => "_expiration_over_inspiration",
        Dimension::VolumePerMass => "_ml_kg",
        Dimension::Power => "_j_min",
        Dimension::PressurePerHour => "_mmhg_per_hour",
        Dimension::Fraction | Dimension::Ph | Dimension::Number => "",
    };
    // "minute" and "settle_minutes" name their unit already.
    let unit = if matches!(input.key, Key::ObservedMinute | Key::SettleMinutes) { "" } else { unit };
    format!("{}{unit}", input.name)
}

fn numbers(table: &str, value: impl Fn(Key) -> Option<f64>) -> Map<String, Value> {
    let of_table = INPUTS.iter().filter(|input| input.table == table);
    of_table.filter_map(|input| Some((named(input), json!(value(input.key)?)))).collect()
}

fn patient(told: &Told<'_>) -> Value {
    let patient = told.record.patient();
    let mut map = numbers("patient", |key| slots::patient_value(patient, key));
    map.insert(
        "sex".to_owned(),
        json!(patient.sex.map(|sex| match sex {
            Sex::Female => "female",
            Sex::Male => "male",
        })),
    );
    map.insert(
        "airway".to_owned(),
        json!(patient.airway.map(|airway| match airway {
            Airway::Native => "native",
            Airway::Tube => "tube",
            Airway::Tracheostomy => "tracheostomy",
        })),
    );
    Value::Object(map)
}

fn entry(told: &Told<'_>, number: usize, it: &Entry) -> Value {
    let mut map = Map::new();
    map.insert("entry".to_owned(), json!(number));
    map.insert("at".to_owned(), json!(it.at.map(Moment::rfc3339)));
    let mut put = |key: &str, value: Value| {
        if !value.is_null() {
            map.insert(key.to_owned(), value);
        }
    };
    put("by", json!(it.by));
    put("amends", json!(it.amends));
    for table in ["settings", "measured", "gas", "weaning"] {
        let mut values = numbers(table, |key| slots::entry_value(it, key));
        words(it, table, &mut values);
        if !values.is_empty() {
            put(table, Value::Object(values));
        }
    }
    put("trial", it.trial.as_ref().map_or(Value::Null, trial));
    put("plan", it.plan.as_ref().map_or(Value::Null, plan));
    put("text", json!(it.text));
    let struck: Vec<Value> = struck::keys(it)
        .into_iter()
        .filter_map(|(table, key)| {
            let by = told.struck.by(number, table, key)?;
            Some(json!({ "table": table, "key": key, "corrected_by_entry": by }))
        })
        .collect();
    if !struck.is_empty() {
        put("struck", json!(struck));
    }
    Value::Object(map)
}

fn words(it: &Entry, table: &str, values: &mut Map<String, Value>) {
    let mut put = |key: &str, value: Value| {
        if !value.is_null() {
            values.insert(key.to_owned(), value);
        }
    };
    match table {
        "settings" => {
            put(
                "control",
                json!(it.settings.control.map(|control| match control {
                    Control::Volume => "volume",
                    Control::Pressure => "pressure",
                    Control::Support => "support",
                })),
            );
            put(
                "flow_pattern",
                json!(it.settings.flow_pattern.map(|pattern| match pattern {
                    FlowPattern::Constant => "constant",
                    FlowPattern::Decelerating => "decelerating",
                })),
            );
        }
        "gas" => put("drawn_at", json!(it.gas.drawn_at.map(Moment::rfc3339))),
        _ => {}
    }
}

fn support(support: TrialSupport) -> Value {
    match support {
        TrialSupport::Pressure(cmh2o) => json!(cmh2o),
        TrialSupport::TPiece => json!("t-piece"),
    }
}

fn observation(it: &Observation) -> Value {
    let mut map = numbers("observation", |key| slots::observation_value(it, key));
    map.insert("minute".to_owned(), json!(it.minute));
    Value::Object(map)
}

fn trial(it: &BreathingTrial) -> Value {
    json!({
        "support_cmh2o": it.support.map(support),
        "started_at": it.started_at.map(Moment::rfc3339),
        "outcome": it.outcome.map(outcome_word),
        "observations": it.observations.iter().map(observation).collect::<Vec<_>>(),
    })
}

fn plan(it: &ChartedPlan) -> Value {
    let mut map = numbers("plan", |key| slots::plan_value(it, key));
    map.insert(
        "aim".to_owned(),
        json!(it.aim.map(|aim| match aim {
            Aim::Rate => "rate",
            Aim::Volume => "volume",
            Aim::Gentle => "gentle",
        })),
    );
    map.insert("half_interval_mmhg".to_owned(), json!(it.half_interval_mmhg));
    map.insert("wide_interval_mmhg".to_owned(), json!(it.wide_interval_mmhg));
    Value::Object(map)
}

fn weaning(it: &Assessment) -> Value {
    json!({
        "entry": it.entry,
        "at": it.at.map(Moment::rfc3339),
        "criteria": it.criteria,
        "indices": it.indices,
    })
}

fn trial_course(it: &TrialCourse) -> Value {
    json!({
        "entries": it.entries,
        "started_at": it.started_at.map(Moment::rfc3339),
        "support_cmh2o": it.support.map(support),
        "outcome": it.outcome.map(outcome_word),
        "observations": it.observations.iter().map(observation).collect::<Vec<_>>(),
        "stop_criteria": it.criteria,
    })
}
