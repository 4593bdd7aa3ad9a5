//! The keys of JSON answers are a contract: exactly those that `docs` and the design of files promise, typed here from that
//! text and not from the program.

use std::collections::BTreeSet;

use serde_json::Value;

use super::{run, run_with};

const BASELINE: &str = "predicted_weight_kg co2_production_ml_min co2_evidence trapping_evidence series_dead_space_ml \
    alveolar_dead_space_fraction dead_space_fraction compliance_ml_cmh2o inspiratory_resistance_cmh2o_s_l \
    expiratory_resistance_cmh2o_s_l expiratory_time_constant_s base_excess_mmol_l bicarbonate_mmol_l ventilatory_ratio \
    pao2_fio2_mmhg alveolar_po2_mmhg alveolar_arterial_po2_mmhg";

const OUTCOME: &str = "rate_per_min tidal_volume_ml tidal_volume_ml_kg inspiratory_time_s expiratory_time_s \
    minute_ventilation_l_min alveolar_ventilation_l_min apparatus_dead_space_ml series_dead_space_ml \
    alveolar_dead_space_ml dead_space_fraction dead_space_loss_l_min paco2_mmhg paco2_expected_mmhg \
    paco2_half_low_mmhg paco2_half_high_mmhg paco2_low_mmhg paco2_high_mmhg chance_on_target ph bicarbonate_mmol_l \
    end_tidal_co2_mmhg auto_peep_cmh2o total_peep_cmh2o plateau_cmh2o peak_cmh2o driving_pressure_cmh2o \
    mean_airway_pressure_cmh2o trapped_volume_ml expiratory_time_constants mechanical_power_j_min load_index limits";

const SETTINGS: &str = "control rate_per_min tidal_volume_ml inspiratory_pressure_cmh2o peep_cmh2o fio2 \
    inspiratory_time_s apparatus_dead_space_ml";

const LIMITS: [&str; 11] = [
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

fn has(value: &Value, keys: &str, what: &str) {
    let found: BTreeSet<&str> = value.as_object().unwrap().keys().map(String::as_str).collect();
    let promised: BTreeSet<&str> = keys.split_whitespace().collect();
    assert_eq!(found, promised, "{what}");
}

fn outcome(value: &Value, more: &str, what: &str) {
    has(value, &format!("{OUTCOME} {more}"), what);
    for limit in value["limits"].as_array().unwrap() {
        has(limit, "id value min max unit verdict", what);
        assert!(LIMITS.contains(&limit["id"].as_str().unwrap()), "{limit}");
        assert!(["within", "near", "beyond", "unknown"].contains(&limit["verdict"].as_str().unwrap()));
        assert_eq!(limit["value"].is_null(), limit["verdict"] == "unknown", "{limit}");
    }
}

fn course(value: &Value) {
    has(value, "points settled_minutes next_gas_minutes", "course");
    let points = value["points"].as_array().unwrap();
    let minutes: Vec<f64> = points.iter().map(|point| point["minutes"].as_f64().unwrap()).collect();
    assert_eq!(minutes, [0.0, 5.0, 10.0, 20.0, 30.0, 60.0]);
    for point in points {
        has(point, "minutes paco2_mmhg ph", "course");
    }
}

fn baseline(value: &Value) {
    has(value, BASELINE, "baseline");
    let evidence = ["dead_space", "co2_production", "end_tidal", "estimated"];
    assert!(evidence.contains(&value["co2_evidence"].as_str().unwrap()));
    let trapping = ["measured", "given", "assumed", "unknown"];
    assert!(trapping.contains(&value["trapping_evidence"].as_str().unwrap()));
}

fn answer(line: &str) -> Value {
    let ran = run(line);
    assert_eq!(ran.err, "", "{line}");
    serde_json::from_str(&ran.out).unwrap()
}

#[test]
fn plan() {
    let built_in = [
        "injured-lungs",
        "injured-lungs-exchanger",
        "three-days",
        "triggering",
        "leak",
        "obstruction-pressure",
    ];
    let mut summits = 0;
    for case in built_in {
        let plan = answer(&format!("plan {case} --json"));
        has(&plan, "format label baseline now target plans summit levers course cautions", case);
        assert_eq!(plan["format"], 1);
        baseline(&plan["baseline"]);
        outcome(&plan["now"], "paco2_is", case);
        assert_eq!(plan["now"]["paco2_is"], if case == "three-days" { "forecast" } else { "measured" });
        assert_eq!(plan["now"]["paco2_expected_mmhg"].is_null(), plan["now"]["paco2_is"] == "measured");
        has(&plan["target"], "paco2_mmhg ph asked", case);
        assert_eq!(plan["target"]["asked"], "profile");
        let lines = plan["plans"].as_array().unwrap();
        let aims: Vec<&str> = lines.iter().map(|line| line["aim"].as_str().unwrap()).collect();
        let wanted: &[&str] =
            if case == "triggering" { &["rate", "volume"] } else { &["rate", "volume", "gentle"] };
        assert_eq!(aims, wanted, "{case}");
        for line in lines {
            has(line, "aim exact settings forecast on_target within_limits blocked_by", case);
            has(&line["settings"], SETTINGS, case);
            outcome(&line["forecast"], "", case);
            assert!(line["aim"] != "gentle" || line["exact"].is_null());
            for id in line["blocked_by"].as_array().unwrap() {
                assert!(LIMITS.contains(&id.as_str().unwrap()), "{id}");
            }
        }
        if !plan["summit"].is_null() {
            summits += 1;
            has(&plan["summit"], "rate_per_min paco2_mmhg", case);
        }
        for lever in plan["levers"].as_array().unwrap() {
            has(
                lever,
                "id step unit paco2_change_mmhg ph_change driving_pressure_change_cmh2o mechanical_power_change_j_min",
                case,
            );
        }
        course(&plan["course"]);
        plan["cautions"].as_array().unwrap().iter().for_each(|caution| has(caution, "id text", case));
    }
    assert_eq!(summits, 1, "obstruction-pressure is past its summit");
    assert_eq!(answer("plan leak --json --to-paco2 45")["target"]["asked"], "paco2");
    assert_eq!(answer("plan leak --json --to-ph 7.35")["target"]["asked"], "ph");
}

#[test]
fn forecast() {
    for line in ["injured-lungs --rate 24", "obstruction-pressure --control volume", "three-days"] {
        let forecast = answer(&format!("forecast {line} --json"));
        has(&forecast, "format label baseline now trial settings held course cautions", line);
        assert_eq!(forecast["format"], 1);
        baseline(&forecast["baseline"]);
        outcome(&forecast["now"], "paco2_is", line);
        outcome(&forecast["trial"], "", line);
        has(&forecast["settings"], SETTINGS, line);
        has(&forecast["held"], "split volume fraction", line);
        course(&forecast["course"]);
        forecast["cautions"].as_array().unwrap().iter().for_each(|caution| has(caution, "id text", line));
    }
}

/// Units are for eyes only: JSON is in the units its names say.
#[test]
fn json_hears_no_units() {
    for line in ["plan injured-lungs --json", "forecast fever --rate 22 --json"] {
        assert_eq!(run(line).out, run(&format!("{line} --units kPa")).out);
    }
}

#[test]
fn check() {
    let ran = run_with("check - --json", "format = 1\n[[entry]]\n[entry.settings]\nrate = 220\nrat = 3\n");
    assert_eq!((ran.code, ran.err.as_str()), (Some(2), ""));
    let checked: Value = serde_json::from_str(&ran.out).unwrap();
    has(&checked, "files", "check");
    let file = &checked["files"][0];
    has(file, "path kind ok errors", "check");
    assert_eq!(file["kind"], "case");
    assert_eq!(file["ok"], false);
    let errors = file["errors"].as_array().unwrap();
    // By hand: "rate = 220" is line 4, its value begins at column 8; "rat" is line 5, column 1.
    let places: Vec<(u64, u64)> = errors
        .iter()
        .map(|error| (error["line"].as_u64().unwrap(), error["column"].as_u64().unwrap()))
        .collect();
    assert_eq!(places, [(4, 8), (5, 1)]);
    for error in errors {
        has(error, "line column message help", "check");
    }
    let profile = run_with("check - --json", "format = 1\nname = \"ours\"\n[target]\npaco2 = [35, 45]\n");
    let checked: Value = serde_json::from_str(&profile.out).unwrap();
    assert_eq!(checked["files"][0]["kind"], "profile");
}
