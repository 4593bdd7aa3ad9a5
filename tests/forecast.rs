//! Forecasts of what if the patient were different.

#![allow(clippy::unwrap_used, clippy::indexing_slicing, reason = "a test may stop at the first surprise")]

use assert_cmd::Command;
use serde_json::Value;

/// A resistance under trial where none was known makes trapping modelled on an assumed expiratory resistance, so auto-PEEP
/// may be beyond but never within.
#[test]
fn trapping_on_a_resistance_under_trial_is_never_called_within() {
    let case = "format = 1\n[patient]\nsex = \"male\"\nheight = 175\n[[entry]]\n[entry.settings]\ncontrol = \"volume\"\nrate = 18\n\
                tidal_volume = 450\npeep = 8\n[entry.measured]\nplateau = 20\n[entry.gas]\npaco2 = 50\nph = 7.3\n";
    let output = Command::cargo_bin("tidewright")
        .unwrap()
        .args(["forecast", "-", "--json", "--resistance", "11.7"])
        .write_stdin(case)
        .output()
        .unwrap();
    let forecast: Value = serde_json::from_slice(&output.stdout).unwrap();
    let limits = forecast["trial"]["limits"].as_array().unwrap();
    let auto = limits.iter().find(|limit| limit["id"] == "auto_peep").unwrap();
    assert!(auto["value"].as_f64().unwrap() > 0.0);
    assert_eq!(auto["verdict"], "unknown");
}

/// The ids of the cautions of a plan from a case.
fn cautions(case: &str) -> Vec<String> {
    let output = Command::cargo_bin("tidewright")
        .unwrap()
        .args(["plan", "-", "--json", "--to-paco2", "45"])
        .write_stdin(case.to_owned())
        .output()
        .unwrap();
    let plan: Value = serde_json::from_slice(&output.stdout).unwrap();
    let said = plan["cautions"].as_array().unwrap();
    said.iter().map(|caution| caution["id"].as_str().unwrap().to_owned()).collect()
}

const BED: &str = "format = 1\n[patient]\nsex = \"male\"\nheight = 175\n[[entry]]\nat = 2026-03-04T08:00:00Z\n[entry.settings]\n\
                   control = \"volume\"\nrate = 18\ntidal_volume = 450\npeep = 8\n";

/// A gas that may be a slip is asked about before anything is dialled.
#[test]
fn likely_slips_in_a_gas_are_asked_about() {
    let with = |gas: &str| cautions(&format!("{BED}{gas}"));
    assert!(with("[entry.gas]\npaco2 = 10.5\nph = 7.4\n").contains(&"paco2_perhaps_kilopascal".to_owned()));
    assert!(with("[entry.gas]\npaco2 = 63\nph = 7.64\n").contains(&"gas_implausible".to_owned()));
    let compliant = with("[entry.measured]\nplateau = 10\n[entry.gas]\npaco2 = 63\nph = 7.24\n");
    assert!(compliant.contains(&"compliance_implausible".to_owned()));
    let sound = with("[entry.measured]\nplateau = 24\n[entry.gas]\npaco2 = 63\nph = 7.24\n");
    for id in ["paco2_perhaps_kilopascal", "gas_implausible", "compliance_implausible", "gas_unsettled"] {
        assert!(!sound.contains(&id.to_owned()), "{id}");
    }
}

/// A gas drawn minutes after a change is still on its way; one drawn an hour later is not.
#[test]
fn a_gas_drawn_before_the_change_had_settled_is_said() {
    let drawn = |minute: u32| {
        cautions(&format!(
            "{BED}[entry.gas]\npaco2 = 63\nph = 7.24\n[[entry]]\nat = 2026-03-04T09:00:00Z\n[entry.settings]\nrate = 28\n\
             [[entry]]\nat = 2026-03-04T{:02}:{:02}:00Z\n[entry.gas]\npaco2 = 60\nph = 7.25\n",
            9 + minute / 60,
            minute % 60
        ))
    };
    assert!(drawn(2).contains(&"gas_unsettled".to_owned()));
    assert!(!drawn(90).contains(&"gas_unsettled".to_owned()));
}
