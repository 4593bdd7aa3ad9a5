//! Plans and forecasts of every built-in case, in each way of showing them.

use crate::program::{cases, fits, matches, run, run_with, shown};

/// What is tried on each case: a change that a clinician might think of there.
fn tried(case: &str) -> &'static str {
    match case {
        "after-operation" => "--rate 12 --tidal-volume 450",
        "brain-injury" => "--rate 18",
        "chronic-retainer" => "--rate 12 --apparatus-dead-space 0",
        "fever" => "--co2-production x0.9",
        "injured-lungs" => "--rate 15 --tidal-volume 400",
        "injured-lungs-exchanger" => "--apparatus-dead-space 20",
        "leak" => "--tidal-volume 520",
        "obstruction-pressure" => "--rate 14",
        "obstruction-volume" => "--rate 12 --inspiratory-time 0.8",
        "ready-to-wean" => "--rate 14",
        "three-days" => "--control pressure --rate 26",
        "triggering" => "--tidal-volume 380",
        other => panic!("nothing is tried on the case {other}: add it"),
    }
}

/// The default answer in full; of the others the lines that differ, so that a reader sees what a unit or ASCII changes.
fn answers(line: &str) -> String {
    let usual = run(line);
    let mut text = shown(line, &usual);
    for way in ["--units kPa", "--ascii", "--units kPa --ascii"] {
        let line = format!("{line} {way}");
        let other = run(&line);
        assert_eq!((other.status, &other.err), (usual.status, &usual.err), "{line}");
        for said in [&usual.out, &other.out] {
            fits(&line, said);
        }
        assert!(!way.contains("ascii") || other.out.is_ascii(), "{line} is not ASCII");
        if way == "--units kPa --ascii" {
            continue;
        }
        text.push_str(&format!("\n$ tidewright {line}\n[the lines that differ]\n"));
        let known: Vec<&str> = usual.out.lines().collect();
        for said in other.out.lines().filter(|said| !known.contains(said)) {
            text.push_str(said);
            text.push('\n');
        }
    }
    text
}

#[test]
fn a_plan_of_every_case() {
    for case in cases() {
        matches(&format!("plan_{case}"), &answers(&format!("plan {case}")));
    }
}

#[test]
fn a_forecast_for_every_case() {
    for case in cases() {
        matches(&format!("forecast_{case}"), &answers(&format!("forecast {case} {}", tried(case))));
    }
}

/// The question of the README, with flags alone.
#[test]
fn bedside_numbers_as_flags() {
    let flags =
        "--sex female --height 163 --rate 22 --tidal-volume 380 --peep 10 --paco2 63 --ph 7.24 --plateau 27";
    let mut text = String::new();
    for line in [
        format!("plan {flags} --to-paco2 50"),
        format!("forecast {flags} --try-rate 28"),
        // The least that can be asked: no weight, no lung.
        "forecast --rate 22 --tidal-volume 380 --paco2 63 --try-rate 28".to_owned(),
    ] {
        let ran = run(&line);
        fits(&line, &ran.out);
        text.push_str(&shown(&line, &ran));
        text.push_str("\n\n");
    }
    matches("flags_alone", &text);
}

/// Whatever unit a number comes in, the answer is the same.
#[test]
fn flags_in_other_units_answer_alike() {
    let usual = run(
        "plan --sex female --height 163 --rate 22 --tidal-volume 380 --peep 10 --fio2 0.6 --paco2 63.00518134715025 --ph 7.24 --to-paco2 45.00370096",
    );
    let other = run(
        "plan --sex female --height \"5 ft 4.17322834645669 in\" --rate 22/min --tidal-volume \"0.38 L\" --peep \"10 cmH2O\" --fio2 \"60 %\" --paco2 \"8,4 kPa\" --ph 7,24 --to-paco2 \"6 kPa\"",
    );
    assert_eq!(usual.status, other.status, "{}{}", usual.err, other.err);
    assert_eq!(usual.out, other.out);
    assert!(usual.out.contains("Goal PaCO2 45 mmHg"));
}

#[test]
fn standard_input_is_a_case() {
    let text = include_bytes!("../../presets/cases/injured-lungs.toml");
    let (named, piped) = (run("plan injured-lungs"), run_with("plan -", text));
    assert_eq!((named.out, named.status), (piped.out, piped.status));
    let broken = run_with("plan -", b"format = 1\n[[entry]]\n[entry.settings]\nrate = 220\n");
    matches("standard_input_broken", &shown("plan -", &broken));
}

/// Exit status 0 where a plan is on target, 1 where none is and the nearest is printed.
#[test]
fn a_goal_out_of_reach_is_said_and_ends_in_1() {
    let line = "plan obstruction-pressure --to-paco2 40 --aim rate";
    let ran = run(line);
    assert_eq!(ran.status, 1);
    assert!(ran.out.contains("NOT on the goal"));
    fits(line, &ran.out);
    matches("out_of_reach", &shown(line, &ran));
}

#[test]
fn aims_least_held_and_profile() {
    let mut text = String::new();
    for line in [
        "plan injured-lungs --to-ph 7.30 --aim gentle --least power",
        "plan injured-lungs --aim rate,volume --profile permissive --held fraction",
        "plan injured-lungs --aim rate --steadiness settled --apparatus-dead-space 0",
    ] {
        let ran = run(line);
        fits(line, &ran.out);
        text.push_str(&shown(line, &ran));
        text.push_str("\n\n");
    }
    matches("aims_and_choices", &text);
}

/// Where there is no terminal, the program alone prints the plan of the demonstration case.
#[test]
fn alone_it_plans_the_demonstration_case() {
    assert_eq!(run("").out, run("plan injured-lungs").out);
}

#[test]
fn colour_only_where_asked_and_only_in_verdicts() {
    let plain = run("plan injured-lungs").out;
    assert!(!plain.contains('\u{1b}'));
    let coloured = run("plan injured-lungs --color always").out;
    assert!(coloured.contains('\u{1b}'));
    assert_eq!(
        String::from_utf8(anstream::adapter::strip_bytes(coloured.as_bytes()).into_vec()).unwrap(),
        plain
    );
    let refused =
        crate::program::program().args(["plan", "injured-lungs"]).env("NO_COLOR", "1").output().unwrap();
    assert_eq!(String::from_utf8(refused.stdout).unwrap(), plain);
}
