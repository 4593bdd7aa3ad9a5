//! `tidewright chart`, whole: what is added, what is refused, what is said.

#![allow(clippy::unwrap_used, clippy::indexing_slicing, reason = "a test may stop at the first surprise")]

mod common;

use common::Bed;

const AT: &str = "--at 2026-03-09T09:30:00+01:00";

#[test]
fn flags_are_added_behind_what_stands_there_and_shown() {
    let bed = Bed::preset("injured-lungs");
    let before = bed.text();
    let ran = bed.run(&format!("chart bed.toml --by RT --rate 28 --paco2 \"7 kPa\" --ph 7,31 --drawn-at 2026-03-09T09:20+01:00 --text 'turned \"prone\"' {AT}"));
    let added = "\n[[entry]]\nat = 2026-03-09T09:30:00+01:00\nby = \"RT\"\n\n[entry.settings]\nrate = 28\n\n[entry.gas]\n\
                 drawn_at = 2026-03-09T09:20:00+01:00\nph = 7.31\npaco2 = 52.504\n\n[entry.note]\ntext = \"turned \\\"prone\\\"\"\n";
    // 7 kPa by the definition of the torr: 7·760/101.325 = 52.5043.
    assert_eq!(bed.text(), format!("{before}{added}"));
    assert_eq!((ran.code, ran.err.as_str()), (Some(0), ""));
    assert!(ran.out.starts_with("bed.toml now has entry 3:\n  [[entry]]\n"), "{}", ran.out);
}

#[test]
fn a_dry_run_shows_the_same_and_writes_nothing() {
    let bed = Bed::preset("injured-lungs");
    let before = bed.text();
    let ran = bed.run(&format!("chart bed.toml --rate 28 --dry-run {AT}"));
    assert!(ran.out.starts_with("bed.toml would get (nothing was written) entry 3:\n"), "{}", ran.out);
    assert!(ran.out.contains("  rate = 28\n"));
    assert_eq!((bed.text(), ran.code), (before, Some(0)));
}

#[test]
fn several_entries_come_from_standard_input() {
    let bed = Bed::preset("injured-lungs");
    let input = "[[entry]]\nat = 2026-03-09T09:00:00+01:00\n[entry.settings]\nrate = 28\n[[entry]]\n[entry.gas]\npaco2 = 50\n";
    let ran = bed.run_with(&format!("chart bed.toml --by RT --json {AT}"), input);
    let json: serde_json::Value = serde_json::from_str(&ran.out).unwrap();
    assert_eq!(json["added"], serde_json::json!([3, 4]));
    let text = bed.text();
    // The entry that has no time of its own takes the one of the flag, and both take who charted.
    assert!(text.contains("at = 2026-03-09T09:00:00+01:00\nby = \"RT\"\n\n[entry.settings]\nrate = 28\n"));
    assert!(text.ends_with("at = 2026-03-09T09:30:00+01:00\nby = \"RT\"\n\n[entry.gas]\npaco2 = 50\n"));
}

#[test]
fn a_contradiction_is_named_with_both_its_places_and_nothing_is_written() {
    let bed = Bed::preset("injured-lungs");
    let before = bed.text();
    let ran = bed.run(&format!("chart bed.toml --total-rate 12 {AT}"));
    assert_eq!((ran.code, ran.out.as_str()), (Some(2), ""));
    assert!(ran.err.contains("the total rate, 12/min, is below the set rate, 20/min"), "{}", ran.err);
    assert!(ran.err.contains("rate = 20") && ran.err.ends_with("nothing was written\n"), "{}", ran.err);
    assert_eq!(bed.text(), before);
}

#[test]
fn evidence_that_cannot_be_is_refused_too() {
    let bed = Bed::preset("injured-lungs");
    let before = bed.text();
    // 900 mL/min of CO2 at a PaCO2 of 60 need more alveolar ventilation than is breathed.
    let ran = bed.run(&format!("chart bed.toml --paco2 60 --co2-production 900 {AT}"));
    assert_eq!(ran.code, Some(2), "{}", ran.out);
    assert!(ran.err.contains("alveolar ventilation"), "{}", ran.err);
    assert_eq!(bed.text(), before);
}

#[test]
fn a_value_in_the_wrong_unit_is_asked_about_by_its_flag() {
    let bed = Bed::preset("injured-lungs");
    let ran = bed.run("chart bed.toml --paco2 5.3");
    assert_eq!(
        (ran.code, ran.err.as_str()),
        (
            Some(2),
            "error: --paco2: PaCO2 of 5.3 mmHg is below what is plausible, 10 to 200 mmHg\n\
             help: 5.3 kPa would be plausible (39.8 mmHg): if that was meant, write --paco2 \"5.3 kPa\"\n"
        )
    );
}

#[test]
fn a_plan_is_charted_with_its_forecast_on_what_is_charted_with_it() {
    let bed = Bed::preset("injured-lungs");
    let ran = bed.run(&format!("chart bed.toml --paco2 66 --ph 7.2 --plan rate --to-paco2 50 {AT}"));
    assert_eq!((ran.code, ran.err.as_str()), (Some(0), ""));
    let record = tidewright::case::read::case(bed.text().as_bytes(), &|name| {
        tidewright::case::file::profile(name, None)
    });
    let (record, _) = record.unwrap();
    let plan = record.entries()[3].plan.as_ref().unwrap();
    assert_eq!((record.entries().len(), plan.target_paco2_mmhg), (4, Some(50.0)));
    // What `plan` says on the same record is what was charted, to a tenth.
    let said = bed.run("plan bed.toml --to-paco2 50 --aim rate --json");
    let said: serde_json::Value = serde_json::from_str(&said.out).unwrap();
    let forecast = &said["plans"][0]["forecast"];
    let near = |charted: Option<f64>, key: &str| {
        let said = forecast[key].as_f64().unwrap();
        assert!((charted.unwrap() - said).abs() <= 0.05 + 1e-9, "{key}: {charted:?} {said}");
    };
    near(plan.forecast_paco2_mmhg, "paco2_mmhg");
    near(plan.expected_paco2_mmhg, "paco2_expected_mmhg");
    near(plan.wide_interval_mmhg.map(|it| it[0]), "paco2_low_mmhg");
    near(plan.wide_interval_mmhg.map(|it| it[1]), "paco2_high_mmhg");
    near(plan.half_interval_mmhg.map(|it| it[0]), "paco2_half_low_mmhg");
    assert_eq!(plan.rate_per_min, said["plans"][0]["settings"]["rate_per_min"].as_f64());
}

#[test]
fn a_plan_that_misses_its_goal_says_so() {
    let bed = Bed::preset("injured-lungs");
    let ran = bed.run(&format!("chart bed.toml --plan rate --to-paco2 12 {AT}"));
    assert!(ran.out.contains("! The plan is NOT on the goal"), "{}", ran.out);
    assert!(ran.out.contains("! With this plan beyond its limit: "), "{}", ran.out);
}

#[test]
fn what_cannot_be_charted_says_what_to_do() {
    let bed = Bed::preset("injured-lungs");
    let said = |line: &str, input: &str| {
        let ran = bed.run_with(line, input);
        (ran.code, ran.err.lines().next().unwrap_or("").to_owned())
    };
    assert_eq!(
        said("chart injured-lungs --rate 28", ""),
        (Some(2), "error: injured-lungs is a built-in case and cannot be added to: tidewright cases --show injured-lungs > bed3.toml makes a file of it".to_owned())
    );
    assert_eq!(
        said("chart nowhere.toml --rate 28", ""),
        (Some(3), "error: there is no file nowhere.toml: look at the spelling and the folder".to_owned())
    );
    assert_eq!(said("chart bed.toml", ""), (Some(2), "error: there is nothing to chart".to_owned()));
    assert_eq!(
        said("chart bed.toml", "label = \"x\"\n[[entry]]\n"),
        (Some(2), "error: label stands beside [[entry]], and only entries can be added to a file".to_owned())
    );
    assert_eq!(
        said("chart bed.toml --amends four", ""),
        (Some(2), "error: --amends: \"four\" is not the number of an entry".to_owned())
    );
    assert_eq!(
        said("chart bed.toml --observation rate=24", ""),
        (Some(2), "error: --observation: the observation \"rate=24\" has no minute".to_owned())
    );
}

#[test]
fn a_clock_that_was_set_back_is_noticed() {
    let bed = Bed::with(
        "format = 1\n[[entry]]\nat = 2148-03-09T08:00:00Z\n[entry.settings]\nrate = 20\ntidal_volume = 400\n",
    );
    let before = bed.text();
    let ran = bed.run("chart bed.toml --rate 28");
    assert_eq!((ran.code, bed.text()), (Some(2), before));
    assert!(
        ran.err.contains("this machine's clock says ") && ran.err.contains("2148-03-09 08:00"),
        "{}",
        ran.err
    );
    assert!(ran.err.contains("--at"), "{}", ran.err);
    // Said outright, the time is taken, and the order it makes is spoken of.
    let ran = bed.run("chart bed.toml --rate 28 --at 2148-03-09T07:00Z");
    assert_eq!(ran.code, Some(0));
    assert!(ran.out.contains("before the last one"), "{}", ran.out);
    assert!(ran.out.contains("if the date is wrong"), "{}", ran.out);
}

#[test]
fn a_correction_is_added_and_the_mistake_stays_on_file() {
    let bed = Bed::preset("injured-lungs");
    let before = bed.text();
    bed.run(&format!("chart bed.toml --amends 2 --paco2 58 --text 'misread' {AT}"));
    assert!(bed.text().starts_with(&before) && bed.text().contains("paco2 = 60\n"));
    let said: serde_json::Value =
        serde_json::from_str(&bed.run("plan bed.toml --to-paco2 50 --json").out).unwrap();
    assert_eq!(said["now"]["paco2_mmhg"], serde_json::json!(58.0));
}

#[test]
fn a_breathing_trial_is_charted_minute_by_minute() {
    let bed = Bed::preset("ready-to-wean");
    let started = "--at 2026-03-27T11:00+01:00 --trial-started 2026-03-27T11:00+01:00";
    bed.run(&format!("chart bed.toml --trial-support t-piece --trial-outcome running {started}"));
    let ran = bed.run("chart bed.toml --at 2026-03-27T11:10+01:00 --observation 'minute=10,rate=24,tidal-volume=0.34 L,spo2=95 %'");
    assert_eq!(ran.err, "");
    let added = "\n[entry.trial]\n\n[[entry.trial.observation]]\nminute = 10\nrate = 24\ntidal_volume = 340\nspo2 = 0.95\n";
    assert!(bed.text().ends_with(added), "{}", bed.text());
}
