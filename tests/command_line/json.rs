//! The keys of JSON answers: exactly those of the contract, in every case, in either command.

use std::collections::BTreeSet;

use serde_json::Value;

use crate::program::{cases, run};

// Typed from the contract of files and JSON, not from the program.
const PLAN: &[&str] =
    &["format", "label", "baseline", "now", "target", "plans", "summit", "levers", "course", "cautions"];
const FORECAST: &[&str] =
    &["format", "label", "baseline", "now", "trial", "settings", "held", "course", "cautions"];
const BASELINE: &[&str] = &[
    "predicted_weight_kg",
    "co2_production_ml_min",
    "co2_evidence",
    "trapping_evidence",
    "series_dead_space_ml",
    "alveolar_dead_space_fraction",
    "dead_space_fraction",
    "compliance_ml_cmh2o",
    "inspiratory_resistance_cmh2o_s_l",
    "expiratory_resistance_cmh2o_s_l",
    "expiratory_time_constant_s",
    "base_excess_mmol_l",
    "bicarbonate_mmol_l",
    "ventilatory_ratio",
    "pao2_fio2_mmhg",
    "alveolar_po2_mmhg",
    "alveolar_arterial_po2_mmhg",
];
const OUTCOME: &[&str] = &[
    "rate_per_min",
    "tidal_volume_ml",
    "tidal_volume_ml_kg",
    "inspiratory_time_s",
    "expiratory_time_s",
    "minute_ventilation_l_min",
    "alveolar_ventilation_l_min",
    "apparatus_dead_space_ml",
    "series_dead_space_ml",
    "alveolar_dead_space_ml",
    "dead_space_fraction",
    "dead_space_loss_l_min",
    "paco2_mmhg",
    "paco2_expected_mmhg",
    "paco2_half_low_mmhg",
    "paco2_half_high_mmhg",
    "paco2_low_mmhg",
    "paco2_high_mmhg",
    "chance_on_target",
    "ph",
    "bicarbonate_mmol_l",
    "end_tidal_co2_mmhg",
    "auto_peep_cmh2o",
    "total_peep_cmh2o",
    "plateau_cmh2o",
    "peak_cmh2o",
    "driving_pressure_cmh2o",
    "mean_airway_pressure_cmh2o",
    "trapped_volume_ml",
    "expiratory_time_constants",
    "mechanical_power_j_min",
    "load_index",
    "limits",
];
const SETTINGS: &[&str] = &[
    "control",
    "rate_per_min",
    "tidal_volume_ml",
    "inspiratory_pressure_cmh2o",
    "peep_cmh2o",
    "fio2",
    "inspiratory_time_s",
    "apparatus_dead_space_ml",
];
const LIMIT: &[&str] = &["id", "value", "min", "max", "unit", "verdict"];
const LIMIT_IDS: &[&str] = &[
    "tidal_volume_per_kg",
    "plateau",
    "driving_pressure",
    "rate",
    "auto_peep",
    "expiratory_time_constants",
    "mechanical_power",
    "load_index",
    "ph",
    "paco2",
    "paco2_fall_per_hour",
];
const PLAN_LINE: &[&str] =
    &["aim", "exact", "settings", "forecast", "on_target", "within_limits", "blocked_by"];
const LEVER: &[&str] = &[
    "id",
    "step",
    "unit",
    "paco2_change_mmhg",
    "ph_change",
    "driving_pressure_change_cmh2o",
    "mechanical_power_change_j_min",
];
const COURSE: &[&str] = &["points", "settled_minutes", "next_gas_minutes"];

fn keys(value: &Value, expected: &[&str], at: &str) {
    let found: BTreeSet<&str> =
        value.as_object().unwrap_or_else(|| panic!("{at}: {value}")).keys().map(String::as_str).collect();
    let expected: BTreeSet<&str> = expected.iter().copied().collect();
    assert_eq!(found, expected, "{at}");
}

fn one_of(value: &Value, words: &[&str], at: &str) {
    assert!(value.as_str().is_some_and(|word| words.contains(&word)), "{at}: {value}");
}

fn outcome(value: &Value, at: &str) {
    keys(value, OUTCOME, at);
    for limit in value["limits"].as_array().unwrap() {
        keys(limit, LIMIT, at);
        one_of(&limit["id"], LIMIT_IDS, at);
        one_of(&limit["verdict"], &["within", "near", "beyond", "unknown"], at);
        assert!(limit["verdict"] != "within" || limit["value"].is_number(), "{at}: unknown is never within");
    }
}

fn now(value: &Value, at: &str) {
    let mut value = value.clone();
    let paco2_is = value.as_object_mut().unwrap().remove("paco2_is").unwrap();
    one_of(&paco2_is, &["measured", "forecast"], at);
    outcome(&value, at);
    let uncertain = [
        "paco2_expected_mmhg",
        "paco2_half_low_mmhg",
        "paco2_half_high_mmhg",
        "paco2_low_mmhg",
        "paco2_high_mmhg",
        "chance_on_target",
    ];
    assert!(paco2_is != "measured" || uncertain.iter().all(|key| value[*key].is_null()), "{at}: {value}");
}

fn shared(answer: &Value, at: &str) {
    assert_eq!(answer["format"], 1, "{at}");
    keys(&answer["baseline"], BASELINE, at);
    one_of(
        &answer["baseline"]["co2_evidence"],
        &["dead_space", "co2_production", "end_tidal", "estimated"],
        at,
    );
    one_of(&answer["baseline"]["trapping_evidence"], &["measured", "given", "assumed", "unknown"], at);
    now(&answer["now"], at);
    if !answer["course"].is_null() {
        keys(&answer["course"], COURSE, at);
        let points = answer["course"]["points"].as_array().unwrap();
        points.iter().for_each(|point| keys(point, &["minutes", "paco2_mmhg", "ph"], at));
        let minutes: Vec<f64> = points.iter().map(|point| point["minutes"].as_f64().unwrap()).collect();
        assert_eq!(minutes, [0.0, 5.0, 10.0, 20.0, 30.0, 60.0], "{at}");
    }
    let mut ids = BTreeSet::new();
    for caution in answer["cautions"].as_array().unwrap() {
        keys(caution, &["id", "text"], at);
        assert!(ids.insert(caution["id"].as_str().unwrap()), "{at}: {caution} twice");
    }
}

fn plan(answer: &Value, at: &str) {
    keys(answer, PLAN, at);
    shared(answer, at);
    keys(&answer["target"], &["paco2_mmhg", "ph", "asked"], at);
    one_of(&answer["target"]["asked"], &["paco2", "ph", "profile"], at);
    let plans = answer["plans"].as_array().unwrap();
    let aims: Vec<&str> = plans.iter().map(|plan| plan["aim"].as_str().unwrap()).collect();
    let in_order: Vec<&str> =
        ["rate", "volume", "gentle"].into_iter().filter(|aim| aims.contains(aim)).collect();
    assert_eq!(aims, in_order, "{at}");
    for line in plans {
        keys(line, PLAN_LINE, at);
        keys(&line["settings"], SETTINGS, at);
        one_of(&line["settings"]["control"], &["volume", "pressure"], at);
        assert_ne!(
            line["settings"]["tidal_volume_ml"].is_null(),
            line["settings"]["inspiratory_pressure_cmh2o"].is_null()
        );
        outcome(&line["forecast"], at);
        assert!(line["on_target"].is_boolean());
        assert!(line["aim"] != "gentle" || line["exact"].is_null(), "{at}: gentle has no exact answer");
        for id in line["blocked_by"].as_array().unwrap() {
            one_of(id, LIMIT_IDS, at);
        }
        let verdicts: Vec<&str> = line["forecast"]["limits"]
            .as_array()
            .unwrap()
            .iter()
            .map(|limit| limit["verdict"].as_str().unwrap())
            .collect();
        let kept = match () {
            () if verdicts.contains(&"beyond") => Value::Bool(false),
            () if verdicts.contains(&"unknown") => Value::Null,
            () => Value::Bool(true),
        };
        assert_eq!(line["within_limits"], kept, "{at}");
    }
    if !answer["summit"].is_null() {
        keys(&answer["summit"], &["rate_per_min", "paco2_mmhg"], at);
    }
    for lever in answer["levers"].as_array().unwrap() {
        keys(lever, LEVER, at);
        one_of(
            &lever["id"],
            &["rate", "tidal_volume", "inspiratory_pressure", "apparatus_dead_space", "co2_production"],
            at,
        );
    }
}

fn answered(line: &str) -> Value {
    let ran = run(line);
    assert!(ran.status <= 1 && ran.err.is_empty(), "{line}: {}", ran.err);
    serde_json::from_str(&ran.out).unwrap_or_else(|error| panic!("{line}: {error}"))
}

const FLAGS: &str = "--rate 22 --tidal-volume 380 --paco2 63";

#[test]
fn plan_has_exactly_the_keys_of_the_contract() {
    let mut answers = 0;
    for case in cases().filter(|case| *case != "ready-to-wean") {
        for more in ["", "--to-paco2 45", "--to-ph 7.4 --aim gentle"] {
            let line = format!("plan {case} --json {more}");
            plan(&answered(&line), &line);
            answers += 1;
        }
    }
    let line = format!("plan {FLAGS} --json");
    // Without a pH there is no band of pH to aim at.
    plan(&answered(&format!("{line} --to-paco2 50")), &line);
    assert!(answers >= 30);
}

#[test]
fn forecast_has_exactly_the_keys_of_the_contract() {
    let lines = cases()
        .filter(|case| *case != "ready-to-wean")
        .map(|case| format!("forecast {case} --rate 20 --json"));
    for line in lines.chain([format!("forecast {FLAGS} --try-rate 26 --json")]) {
        let answer = answered(&line);
        keys(&answer, FORECAST, &line);
        shared(&answer, &line);
        outcome(&answer["trial"], &line);
        keys(&answer["settings"], SETTINGS, &line);
        keys(&answer["held"], &["split", "volume", "fraction"], &line);
    }
}

/// `--units` changes texts alone: JSON has its unit in every name.
#[test]
fn json_knows_no_choice_of_unit() {
    for line in ["plan injured-lungs --json", "forecast leak --rate 18 --json"] {
        assert_eq!(run(line).out, run(&format!("{line} --units kPa --ascii")).out);
    }
}

#[test]
fn check_has_exactly_the_keys_of_the_contract() {
    let ran = run("check invalid/tenfold-rate-220.toml ../presets/profiles/obstructed.toml --json");
    assert_eq!(ran.status, 2, "{}", ran.err);
    let answer: Value = serde_json::from_str(&ran.out).unwrap();
    keys(&answer, &["files"], "check");
    let files = answer["files"].as_array().unwrap();
    for file in files {
        keys(file, &["path", "kind", "ok", "errors"], "check");
    }
    assert_eq!((files[0]["kind"].as_str(), files[1]["kind"].as_str()), (Some("case"), Some("profile")));
    assert_eq!((files[0]["ok"].as_bool(), files[1]["ok"].as_bool()), (Some(false), Some(true)));
    let error = &files[0]["errors"][0];
    keys(error, &["line", "column", "message", "help"], "check");
    assert!(error["line"].as_u64().unwrap() >= 1 && error["column"].as_u64().unwrap() >= 1);
}

#[test]
fn review_has_exactly_the_keys_of_the_contract() {
    let answer = answered("review reference/data/open_icu_gases.csv --json");
    const FIGURES: [&str; 7] = [
        "forecasts",
        "wide_coverage",
        "half_coverage",
        "mean_absolute_log_error",
        "arithmetic_mean_absolute_log_error",
        "carried_over_mean_absolute_log_error",
        "mean_log_density",
    ];
    let mut all = vec!["format", "stays", "rows", "skipped", "bad_rows", "after_change", "fitted"];
    all.extend(FIGURES);
    keys(&answer, &all, "review");
    keys(&answer["after_change"], &FIGURES, "after_change");
    keys(
        &answer["fitted"],
        &[
            "gas",
            "wander_per_hour",
            "change",
            "mean_log_density",
            "cross_validated_wide_coverage",
            "cross_validated_half_coverage",
        ],
        "fitted",
    );
}
