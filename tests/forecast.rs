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
