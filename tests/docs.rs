//! The documents are kept true: tables come from the table of inputs, and what a document shows was run.
//!
//! `UPDATE_DOCS=1 cargo test --test docs` writes them anew; read the difference before it is kept.

#![allow(
    clippy::unwrap_used,
    clippy::indexing_slicing,
    clippy::panic,
    reason = "a test may stop at the first surprise"
)]

mod common;

use std::fmt::Write as _;
use std::fs;
use std::path::{Path, PathBuf};

use common::{Bed, words};
use tidewright::quantity::input::INPUTS;

fn document(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("docs").join(name)
}

fn compare(name: &str, made: &str) {
    let path = document(name);
    let stands = fs::read_to_string(&path).unwrap();
    if stands == made {
        return;
    }
    if std::env::var_os("UPDATE_DOCS").is_some() {
        fs::write(&path, made).unwrap();
        return;
    }
    let differs = stands.lines().zip(made.lines()).position(|(one, other)| one != other);
    let line = differs.unwrap_or_else(|| stands.lines().count().min(made.lines().count()));
    let at = |text: &str| text.lines().nth(line).unwrap_or("(the end)").to_owned();
    panic!(
        "docs/{name}, line {}: it says\n  {}\nand should say\n  {}\nUPDATE_DOCS=1 cargo test --test docs writes it anew",
        line + 1,
        at(&stands),
        at(made)
    );
}

/// The table of inputs of one table of a case file.
fn table(name: &str) -> String {
    let header = match name {
        "patient" => "[patient]".to_owned(),
        "observation" => "[[entry.trial.observation]]".to_owned(),
        other => format!("[entry.{other}]"),
    };
    let mut text = format!(
        "`{header}`\n\n| key | what | unit | from, to | for example | when not given |\n| --- | --- | --- | --- | --- | --- |\n"
    );
    for input in INPUTS.iter().filter(|input| input.table == name) {
        let unit = input.unit();
        let default = input.default.map_or_else(String::new, |value| {
            let shown = input.shown(value);
            if shown == "1:2" { "1:2, said so".to_owned() } else { shown }
        });
        let range = input.plausible().range();
        // "4 to 60/min" stands beside its unit.
        let range = range.strip_suffix(unit.trim_start_matches('1')).unwrap_or(&range).trim();
        let example = input.example.replace('|', "\\|");
        let _ = writeln!(
            text,
            "| `{}` | {} | {unit} | {range} | `{}` | {default} |",
            input.name,
            input.words,
            example.replace(" (or ", "` or `").replace(" or \"", "` or `\"").trim_end_matches(')')
        );
    }
    text
}

#[test]
fn the_tables_of_case_files_are_the_table_of_inputs() {
    let stands = fs::read_to_string(document("cases.md")).unwrap();
    let mut made = String::new();
    let mut rest = stands.as_str();
    let mut tables = 0;
    while let Some((before, after)) = rest.split_once("<!-- table ") {
        let (name, after) = after.split_once(" -->\n").unwrap();
        let (_, after) = after.split_once("<!-- end -->").unwrap();
        let _ = write!(made, "{before}<!-- table {name} -->\n{}<!-- end -->", table(name));
        rest = after;
        tables += 1;
    }
    made.push_str(rest);
    let known: std::collections::BTreeSet<&str> = INPUTS.iter().map(|input| input.table).collect();
    assert_eq!(tables, known.len());
    compare("cases.md", &made);
}

/// Writes the files that a document shows, runs what it runs, and returns it with the output that came.
fn played(text: &str, bed: &Bed) -> String {
    let mut made = String::new();
    let mut lines = text.lines();
    while let Some(line) = lines.next() {
        made.push_str(line);
        made.push('\n');
        let fence = line.strip_prefix("```");
        if let Some(name) = fence.and_then(|it| it.split_once("file=")).map(|(_, name)| name) {
            let body: Vec<&str> = lines.by_ref().take_while(|line| *line != "```").collect();
            fs::write(bed.folder.path().join(name), format!("{}\n", body.join("\n"))).unwrap();
            let _ = writeln!(made, "{}\n```", body.join("\n"));
        } else if fence == Some("console") {
            let body: Vec<&str> = lines.by_ref().take_while(|line| *line != "```").collect();
            for command in commands(&body) {
                let _ = writeln!(made, "$ {}", command.join(" \\\n    "));
                made.push_str(&run(&command.join(" "), bed));
            }
            made.push_str("```\n");
        }
    }
    made
}

/// The commands of a console block, each with its continued lines.
fn commands(body: &[&str]) -> Vec<Vec<String>> {
    let mut commands: Vec<Vec<String>> = Vec::new();
    let mut goes_on = false;
    for line in body {
        let begins = line.strip_prefix("$ ");
        if let Some(text) = begins.or(goes_on.then(|| line.trim())) {
            let (text, more) = text.strip_suffix('\\').map_or((text, false), |text| (text.trim_end(), true));
            if begins.is_some() {
                commands.push(Vec::new());
            }
            commands.last_mut().unwrap().push(text.to_owned());
            goes_on = more;
        }
    }
    commands
}

fn run(command: &str, bed: &Bed) -> String {
    let (line, to) = command.split_once(" > ").map_or((command, None), |(line, to)| (line, Some(to)));
    let (line, from) = line.split_once(" < ").map_or((line, None), |(line, from)| (line, Some(from)));
    let line = line.strip_prefix("tidewright ").unwrap_or_else(|| panic!("{command} is not run here"));
    assert!(!words(line).is_empty());
    let input =
        from.map_or_else(String::new, |name| fs::read_to_string(bed.folder.path().join(name)).unwrap());
    let ran = bed.run_with(line, &input);
    let out = format!("{}{}", ran.out, ran.err);
    match to {
        Some(name) => {
            fs::write(bed.folder.path().join(name), ran.out).unwrap();
            ran.err
        }
        None => out,
    }
}

#[test]
fn the_small_case_is_valid_and_means_what_it_says() {
    let bed = Bed::with("");
    played(&fs::read_to_string(document("cases.md")).unwrap(), &bed);
    let ran = bed.run("check bay3.toml");
    assert_eq!((ran.code, ran.out.as_str(), ran.err.as_str()), (Some(0), "bay3.toml: nothing wrong\n", ""));
    let note = bed.run("note bay3.toml").out;
    assert!(note.contains("entry 3 corrects it") && note.contains("rate 26/min"), "{note}");
}

#[test]
fn a_whole_shift_happens_as_it_is_told() {
    let told = fs::read_to_string(document("shift.md")).unwrap();
    let bed = Bed::with("");
    let made = played(&told, &bed);
    compare("shift.md", &made);
    // What it promises: two gases, one change, a failed criterion, a note and a bundle.
    for promised in ["inside the inner range", "CROSSED", "Ventilation note: Bay 3", "now has entry"] {
        assert!(made.contains(promised), "{promised}");
    }
    assert!(bed.folder.path().join("bundle.json").exists());
}
