//! Running the program, and keeping what it said as a snapshot.

use std::path::Path;
use std::process::Output;

use tidewright::case::presets::CASES;

/// The columns that plain text keeps to.
pub const WIDTH: usize = 80;

/// What a run said and how it ended.
pub struct Ran {
    /// Standard output.
    pub out: String,
    /// Standard error.
    pub err: String,
    /// Exit status.
    pub status: i32,
}

/// The program, for a terminal of 80 columns and no colour.
pub fn program() -> assert_cmd::Command {
    let mut command = assert_cmd::cargo::cargo_bin_cmd!("tidewright");
    command.current_dir(Path::new(env!("CARGO_MANIFEST_DIR")).join("tests"));
    command.env("COLUMNS", WIDTH.to_string()).env("TZ", "UTC").env_remove("NO_COLOR");
    command
}

/// Runs it with the words of a line and something on standard input. Quotation marks hold words together.
pub fn run_with(line: &str, input: &[u8]) -> Ran {
    let output: Output = program().args(words(line)).write_stdin(input).output().unwrap();
    let text = |bytes: Vec<u8>| String::from_utf8(bytes).unwrap();
    Ran { out: text(output.stdout), err: text(output.stderr), status: output.status.code().unwrap() }
}

/// Runs it with nothing on standard input.
pub fn run(line: &str) -> Ran {
    run_with(line, b"")
}

/// The words of a line as a shell would part them.
fn words(line: &str) -> Vec<String> {
    line.split('"')
        .enumerate()
        .flat_map(|(place, part)| {
            if place % 2 == 1 {
                vec![part.to_owned()]
            } else {
                part.split_whitespace().map(str::to_owned).collect()
            }
        })
        .collect()
}

/// Call, status, output and errors as one text.
pub fn shown(line: &str, ran: &Ran) -> String {
    let err = if ran.err.is_empty() { String::new() } else { format!("\n[errors]\n{}", ran.err) };
    format!("$ tidewright {line}\n[status {}]\n{}{err}", ran.status, ran.out)
}

/// Checks a text against its snapshot.
pub fn matches(name: &str, text: &str) {
    let mut settings = insta::Settings::clone_current();
    settings.set_snapshot_path("snapshots");
    settings.set_prepend_module_to_snapshot(false);
    settings.set_omit_expression(true);
    settings.bind(|| insta::assert_snapshot!(name, text));
}

/// Names of the built-in cases.
pub fn cases() -> impl Iterator<Item = &'static str> {
    CASES.iter().map(|preset| preset.name)
}

/// Fails on a line too long for the terminal.
pub fn fits(line: &str, text: &str) {
    for said in text.lines() {
        assert!(said.chars().count() <= WIDTH, "{line}: {} columns: {said}", said.chars().count());
    }
}
