//! The command line as a person meets it: each call's output, errors and exit status together, as a snapshot to be read
//! as a tired clinician would.

#![allow(
    clippy::unwrap_used,
    clippy::panic,
    clippy::indexing_slicing,
    reason = "a test may stop at the first surprise"
)]

mod common;
#[path = "command_line/json_keys.rs"]
mod json_keys;

use std::process::Command;

use common::{Ran, words};
use tempfile::TempDir;
use tidewright::case::presets::{self, CASES};

/// Runs the program in an empty folder, 80 columns wide, with `input` on standard input.
fn run_with(line: &str, input: &str) -> Ran {
    let folder = TempDir::new().unwrap();
    let mut command = assert_cmd::cargo::cargo_bin_cmd!("tidewright");
    command.current_dir(folder.path()).env("TZ", "UTC").env("COLUMNS", "80").env_remove("NO_COLOR");
    command.args(words(line)).write_stdin(input).output().unwrap().into()
}

fn run(line: &str) -> Ran {
    run_with(line, "")
}

/// What a person would see of a call, and how it ended.
fn seen(line: &str, ran: &Ran) -> String {
    let status = ran.code.map_or("none".to_owned(), |code| code.to_string());
    format!(
        "$ tidewright {line}\nexit status {status}\n== output\n{}== errors\n{}",
        ran.out,
        // The name of the program file differs between systems.
        ran.err.replace("tidewright.exe", "tidewright")
    )
}

/// Takes the snapshot of a call, and gives back what was said for closer looks.
fn snap_with(name: &str, line: &str, input: &str) -> Ran {
    let ran = run_with(line, input);
    let mut settings = insta::Settings::clone_current();
    settings.set_snapshot_path("snapshots");
    settings.set_prepend_module_to_snapshot(false);
    settings.set_omit_expression(true);
    settings.bind(|| insta::assert_snapshot!(name, seen(line, &ran)));
    ran
}

fn snap(name: &str, line: &str) -> Ran {
    snap_with(name, line, "")
}

/// A text answer keeps to 80 columns and never moves the cursor.
fn assert_fits(name: &str, ran: &Ran) {
    for line in ran.out.lines() {
        assert!(line.chars().count() <= 80, "{name}: {} columns: {line}", line.chars().count());
    }
    assert!(!ran.out.chars().any(|letter| letter.is_control() && letter != '\n'), "{name}");
}

/// The bedside numbers of one patient, as flags.
const FLAGS: &str =
    "--sex female --height 163 --rate 22 --tidal-volume 380 --peep 10 --paco2 63 --ph 7.24 --plateau 27";

#[test]
fn the_plan_of_every_built_in_case() {
    for preset in &CASES {
        let ran = snap(&format!("plan-{}", preset.name), &format!("plan {}", preset.name));
        assert_fits(preset.name, &ran);
        let refused = preset.name == "ready-to-wean";
        assert_eq!(ran.code, Some(if refused { 2 } else { 0 }), "{}", preset.name);
        assert_eq!(ran.out.is_empty(), refused, "{}", preset.name);
    }
}

#[test]
fn plans_asked_for_in_other_ways() {
    for (name, line, code) in [
        ("plan-to-paco2", "plan injured-lungs --to-paco2 50".to_owned(), 0),
        ("plan-to-paco2-kpa", "plan injured-lungs --to-paco2 '6.5 kPa' --units kPa".to_owned(), 0),
        ("plan-to-ph", "plan chronic-retainer --to-ph 7.4".to_owned(), 0),
        ("plan-to-ph-kpa-ascii", "plan injured-lungs --to-ph 7.32 --units kPa --ascii".to_owned(), 0),
        (
            "plan-beyond-summit-kpa",
            "plan obstruction-pressure --aim rate --to-paco2 50 --units kPa".to_owned(),
            1,
        ),
        ("plan-ascii", "plan obstruction-volume --ascii".to_owned(), 0),
        ("plan-held-volume", "plan injured-lungs --held volume".to_owned(), 0),
        ("plan-held-fraction-settled", "plan leak --held fraction --steadiness settled".to_owned(), 0),
        ("plan-aim-gentle-least-power", "plan injured-lungs --aim gentle --least power".to_owned(), 0),
        ("plan-another-profile", "plan injured-lungs --profile permissive --aim rate,gentle".to_owned(), 0),
        (
            "plan-after-a-trial",
            "plan injured-lungs-exchanger --apparatus-dead-space 20 --peep 8".to_owned(),
            0,
        ),
        ("plan-off-target", "plan injured-lungs-exchanger --aim gentle".to_owned(), 1),
        ("plan-flags-alone", format!("plan {FLAGS} --to-paco2 50"), 0),
        ("plan-flags-with-a-trial", format!("plan {FLAGS} --peak 38 --try-apparatus-dead-space 45"), 0),
        ("plan-few-flags", "plan --rate 20 --tidal-volume 200 --paco2 60 --ph 7.2".to_owned(), 0),
        ("plan-flags-without-ph", "plan --rate 20 --tidal-volume 450 --paco2 60 --to-paco2 45".to_owned(), 0),
        ("no-arguments", String::new(), 0),
        ("a-case-alone", "fever --units kPa".to_owned(), 0),
    ] {
        let ran = snap(name, &line);
        assert_fits(name, &ran);
        assert_eq!(ran.code, Some(code), "{name}: {}", ran.err);
        assert_eq!(ran.err, "", "{name}");
        assert_eq!(line.contains("--ascii"), ran.out.is_ascii(), "{name}");
    }
}

#[test]
fn forecasts() {
    for (name, line) in [
        ("forecast-rate-and-volume", "forecast injured-lungs --rate 15 --tidal-volume 400".to_owned()),
        ("forecast-nothing-changed", "forecast injured-lungs".to_owned()),
        ("forecast-of-a-case-already-forecast", "forecast three-days --rate 20 --units kPa".to_owned()),
        (
            "forecast-switch-to-pressure",
            "forecast injured-lungs --control pressure --peep 8 --inspiratory-time 0.7 --ascii".to_owned(),
        ),
        ("forecast-switch-to-volume", "forecast obstruction-pressure --control volume --rate 14".to_owned()),
        ("forecast-past-the-summit", "forecast obstruction-pressure --rate 34".to_owned()),
        ("forecast-triggering", "forecast triggering --rate 10".to_owned()),
        ("forecast-exchanger-out", "forecast injured-lungs-exchanger --apparatus-dead-space 10".to_owned()),
        ("forecast-fever-treated", "forecast fever --co2-production x0.85".to_owned()),
        ("forecast-stiffer-lung", "forecast injured-lungs --compliance 18 --resistance 20".to_owned()),
        ("forecast-flags-alone", format!("forecast {FLAGS} --try-rate 28 --try-fio2 0.5")),
        (
            "forecast-no-weight",
            "forecast --rate 20 --tidal-volume 200 --paco2 60 --try-tidal-volume 150".to_owned(),
        ),
        ("forecast-little-room", format!("forecast {FLAGS} --try-tidal-volume 110")),
    ] {
        let ran = snap(name, &line);
        assert_fits(name, &ran);
        assert_eq!(ran.code, Some(0), "{name}: {}", ran.err);
        assert_eq!(ran.err, "", "{name}");
    }
}

#[test]
fn a_case_on_standard_input() {
    let text = presets::case("brain-injury").unwrap().text;
    let piped = snap_with("plan-from-standard-input", "plan - --aim rate", text);
    assert_eq!(piped.out, run("plan brain-injury --aim rate").out);
    let wrong = snap_with("plan-wrong-standard-input", "plan -", &text.replace("rate = 13", "rate = 130"));
    assert_eq!((wrong.code, wrong.out.as_str()), (Some(2), ""));
    let empty = snap_with("plan-empty-standard-input", "plan -", "");
    assert_eq!((empty.code, empty.out.as_str()), (Some(2), ""));
}

#[test]
fn wrong_calls_say_what_to_do_on_standard_error() {
    for (name, line) in [
        ("wrong-no-case", "plan"),
        ("wrong-aim", "plan injured-lungs --aim sideways"),
        ("wrong-unknown-flag", "plan injured-lungs --tidalvolume 380"),
        ("wrong-two-goals", "plan injured-lungs --to-paco2 40 --to-ph 7.3"),
        ("wrong-goal-in-kpa", "plan injured-lungs --to-paco2 5"),
        ("wrong-goal-in-words", "plan injured-lungs --to-paco2 fifty"),
        ("wrong-goal-ph-tenfold", "plan injured-lungs --to-ph 73.2"),
        ("wrong-goal-ph-out-of-reach", "plan injured-lungs --to-ph 8"),
        ("wrong-goal-ph-without-ph", "plan --rate 20 --tidal-volume 450 --paco2 60 --to-ph 7.3"),
        ("wrong-band-without-ph", "plan --rate 20 --tidal-volume 450 --paco2 60"),
        ("wrong-two-cases", "plan injured-lungs leak"),
        ("wrong-profile", "plan injured-lungs --profile lung-protectiv"),
        ("wrong-patient-flag-with-case", "forecast injured-lungs --ph 7.3"),
        ("wrong-try-with-case", "forecast injured-lungs --try-rate 20"),
        ("wrong-no-expiration", "forecast injured-lungs --rate 60"),
        ("wrong-support-tried", "forecast injured-lungs --control support"),
        ("wrong-pressure-in-volume-control", "forecast injured-lungs --inspiratory-pressure 20"),
        ("wrong-two-timings", "forecast injured-lungs --flow 60 --ratio 1:2"),
        ("wrong-co2-factor", "forecast injured-lungs --co2-production x9"),
        ("wrong-no-useful-breath", "forecast injured-lungs-exchanger --tidal-volume 150"),
        ("wrong-switch-without-lung", "forecast triggering --control pressure"),
        ("wrong-held-unknown", "plan --rate 20 --tidal-volume 450 --paco2 60 --to-paco2 45 --held volume"),
        ("wrong-support", "plan ready-to-wean --to-paco2 45"),
        ("wrong-support-as-flags", "plan --control support --inspiratory-pressure 10 --peep 5 --paco2 60"),
        ("wrong-no-gas", "plan --rate 20 --tidal-volume 450"),
        ("wrong-case-name", "cases --show injured"),
        ("wrong-profile-name", "profiles --show injured"),
        ("wrong-shell", "completions csh"),
        ("wrong-nothing-to-check", "check"),
    ] {
        let ran = snap(name, line);
        assert_eq!((ran.code, ran.out.as_str()), (Some(2), ""), "{name}");
        assert!(ran.err.starts_with("error: "), "{name}: {}", ran.err);
    }
}

#[test]
fn an_absent_file_is_another_status() {
    for (name, line) in [
        ("absent-case", "plan no-such-bed.toml"),
        ("absent-case-looks-like-a-command", "plann"),
        ("absent-file-to-check", "check no-such-bed.toml"),
    ] {
        let ran = snap(name, line);
        assert_eq!((ran.code, ran.out.as_str()), (Some(3), ""), "{name}");
    }
}

#[test]
fn slips_typed_as_flags_are_asked_about_and_never_repaired() {
    let base = "plan --sex female --height 163 --rate 22 --tidal-volume 380 --peep 10 --fio2 0.6 --paco2 63 --ph 7.24 --plateau 27";
    assert_eq!(run(base).code, Some(0));
    for (name, slip) in [
        ("slip-rate", "--rate 220"),
        ("slip-tidal-volume", "--tidal-volume 38"),
        ("slip-tidal-volume-in-litres", "--tidal-volume 0.38"),
        ("slip-paco2-in-kpa", "--paco2 5.3"),
        ("slip-paco2", "--paco2 630"),
        ("slip-ph", "--ph 72.4"),
        ("slip-height-in-metres", "--height 1.63"),
        ("slip-fio2-in-percent", "--fio2 60"),
        ("slip-peep", "--peep 100"),
        ("slip-plateau", "--plateau 270"),
        ("slip-plateau-below-peep", "--plateau 9"),
        ("slip-in-words", "--rate fast"),
    ] {
        let flag = slip.split(' ').next().unwrap();
        let line: Vec<String> = format!("{base} ")
            .split(" --")
            .map(|part| part.trim().to_owned())
            .map(
                |part| {
                    if part.starts_with(&format!("{} ", &flag[2..])) { slip[2..].to_owned() } else { part }
                },
            )
            .collect();
        let ran = snap(name, &line.join(" --"));
        assert_eq!((ran.code, ran.out.as_str()), (Some(2), ""), "{name}");
        assert!(ran.err.contains("help: "), "{name}: {}", ran.err);
    }
}

const COMMANDS: [&str; 10] =
    ["", "plan", "forecast", "chart", "review", "check", "profiles", "cases", "completions", "manual"];

#[test]
fn help_of_every_command() {
    for command in COMMANDS {
        let name = if command.is_empty() { "all" } else { command };
        for (form, flag) in [("short", "-h"), ("long", "--help")] {
            let ran = snap(&format!("help-{name}-{form}"), format!("{command} {flag}").trim());
            assert_eq!((ran.code, ran.err.as_str()), (Some(0), ""), "{name}");
        }
    }
}

#[test]
fn lists_and_checks() {
    for (name, line) in [
        ("list-cases", "cases"),
        ("list-profiles", "profiles"),
        ("show-profile", "profiles --show obstructed"),
    ] {
        assert_eq!(snap(name, line).code, Some(0));
    }
    let bed = common::Bed::preset("leak");
    assert_eq!(bed.run("check bed.toml").out, "bed.toml: nothing wrong\n");
    assert_eq!(run("cases --show leak").out, presets::case("leak").unwrap().text);
}

#[test]
fn completions_and_manual_are_there() {
    for shell in ["bash", "elvish", "fish", "powershell", "zsh"] {
        let ran = run(&format!("completions {shell}"));
        assert_eq!(ran.code, Some(0));
        assert!(ran.out.contains("tidewright") && ran.out.contains("to-paco2"), "{shell}");
    }
    let manual = run("manual");
    assert_eq!(manual.code, Some(0));
    assert!(manual.out.starts_with(".ie") || manual.out.contains(".TH tidewright"), "{}", manual.out);
}

#[test]
fn a_closed_pipe_ends_quietly() {
    for (line, code) in [
        ("plan injured-lungs", 0),
        ("plan injured-lungs --json", 0),
        ("plan injured-lungs-exchanger --aim gentle", 1),
        ("completions bash", 0),
    ] {
        let (reader, writer) = std::io::pipe().unwrap();
        drop(reader);
        let ran = Command::new(assert_cmd::cargo::cargo_bin!("tidewright"))
            .args(words(line))
            .stdout(writer)
            .output()
            .unwrap();
        assert_eq!(String::from_utf8_lossy(&ran.stderr), "", "{line}");
        assert_eq!(ran.status.code(), Some(code), "{line}");
    }
}

#[test]
fn errors_never_mix_with_output_and_colour_only_adds_escapes() {
    let plain = run("plan injured-lungs-exchanger");
    let coloured = run("plan injured-lungs-exchanger --color always");
    assert!(coloured.out.contains("\u{1b}[") && !plain.out.contains('\u{1b}'));
    let mut bare = String::new();
    let mut rest = coloured.out.as_str();
    while let Some((before, escape)) = rest.split_once('\u{1b}') {
        bare.push_str(before);
        rest = escape.split_once('m').unwrap().1;
    }
    bare.push_str(rest);
    assert_eq!(bare, plain.out);
}
