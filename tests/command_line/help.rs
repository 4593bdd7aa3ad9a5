//! Help, lists, completions and the manual.

use crate::program::{fits, matches, run, shown};

const COMMANDS: [&str; 10] =
    ["plan", "forecast", "chart", "note", "review", "check", "profiles", "cases", "completions", "manual"];

#[test]
fn help_of_every_command() {
    for ask in ["-h", "--help"] {
        for command in COMMANDS {
            let line = format!("{command} {ask}");
            let ran = run(&line);
            assert_eq!((ran.status, ran.err.as_str()), (0, ""), "{line}");
            fits(&line, &ran.out);
            matches(&format!("help_{command}{}", ask.replace('-', "_")), &shown(&line, &ran));
        }
        let ran = run(ask);
        assert_eq!(ran.status, 0);
        fits(ask, &ran.out);
        for command in COMMANDS {
            assert!(ran.out.contains(&format!("  {command}")), "{ask} leaves out {command}");
        }
        matches(&format!("help{}", ask.replace('-', "_")), &shown(ask, &ran));
    }
}

#[test]
fn lists() {
    let mut text = String::new();
    for line in ["cases", "profiles", "check ../presets/cases/leak.toml ../presets/profiles/permissive.toml"]
    {
        let ran = run(line);
        assert_eq!((ran.status, ran.err.as_str()), (0, ""), "{line}");
        fits(line, &ran.out);
        text.push_str(&shown(line, &ran));
        text.push('\n');
    }
    matches("lists", &text);
}

#[test]
fn what_is_shown_to_start_from_is_read_again() {
    for (list, kind) in [("cases", "case"), ("profiles", "profile")] {
        let json: serde_json::Value = serde_json::from_str(&run(&format!("{list} --json")).out).unwrap();
        let names: Vec<&str> =
            json.as_array().unwrap().iter().map(|it| it["name"].as_str().unwrap()).collect();
        assert!(names.len() >= 6, "{list}: {names:?}");
        for name in names {
            let shown = run(&format!("{list} --show {name}")).out;
            let checked = crate::program::run_with("check - --json", shown.as_bytes());
            let checked: serde_json::Value = serde_json::from_str(&checked.out).unwrap();
            assert_eq!(checked["files"][0]["ok"], true, "{name}: {checked}");
            assert_eq!(checked["files"][0]["kind"], kind, "{name}");
        }
    }
}

#[test]
fn completions_and_manual_name_the_commands() {
    for line in [
        "completions bash",
        "completions zsh",
        "completions fish",
        "completions powershell",
        "completions elvish",
        "manual",
    ] {
        let ran = run(line);
        assert_eq!((ran.status, ran.err.as_str()), (0, ""), "{line}");
        for word in ["plan", "forecast", "profiles"] {
            assert!(ran.out.contains(word), "{line} leaves out {word}");
        }
    }
    assert!(run("manual").out.starts_with(".ie") || run("manual").out.contains(".TH tidewright"));
}

#[test]
fn the_version_is_the_package_s() {
    assert_eq!(run("--version").out, format!("tidewright {}\n", env!("CARGO_PKG_VERSION")));
}
