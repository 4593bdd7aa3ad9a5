//! A case file in a folder of its own, and the program run on it.

#![allow(
    dead_code,
    clippy::unwrap_used,
    clippy::panic,
    reason = "each test file uses its share; a test may stop at the first surprise"
)]

use std::fs;
use std::path::PathBuf;
use std::process::Output;

use tempfile::TempDir;

/// What a run said and how it ended.
#[derive(Debug, PartialEq, Eq)]
pub struct Ran {
    /// Standard output.
    pub out: String,
    /// Standard error.
    pub err: String,
    /// Exit status.
    pub code: Option<i32>,
}

impl From<Output> for Ran {
    fn from(output: Output) -> Self {
        let text = |bytes: Vec<u8>| String::from_utf8(bytes).unwrap();
        Self { out: text(output.stdout), err: text(output.stderr), code: output.status.code() }
    }
}

/// A folder with one case file in it.
pub struct Bed {
    pub folder: TempDir,
    pub path: PathBuf,
}

impl Bed {
    /// With this text as `bed.toml`.
    pub fn with(text: &str) -> Self {
        let folder = TempDir::new().unwrap();
        let path = folder.path().join("bed.toml");
        fs::write(&path, text).unwrap();
        Self { folder, path }
    }

    /// With a built-in case as `bed.toml`.
    pub fn preset(name: &str) -> Self {
        Self::with(tidewright::case::presets::case(name).unwrap().text)
    }

    pub fn text(&self) -> String {
        fs::read_to_string(&self.path).unwrap()
    }

    /// Runs the program in the folder: the arguments of a line, split at spaces but for what stands in quotation marks.
    pub fn run(&self, line: &str) -> Ran {
        self.run_with(line, "")
    }

    /// The same with something on standard input.
    pub fn run_with(&self, line: &str, input: &str) -> Ran {
        let mut command = assert_cmd::cargo::cargo_bin_cmd!("tidewright");
        command.current_dir(self.folder.path()).env("TZ", "UTC").env_remove("NO_COLOR");
        command.args(words(line)).write_stdin(input).output().unwrap().into()
    }
}

/// The words of a line as a shell would part them; quotation marks of either kind hold words together.
pub fn words(line: &str) -> Vec<String> {
    let mut words = vec![String::new()];
    let mut open = None;
    for letter in line.chars() {
        match (open, letter) {
            (Some(mark), letter) if mark == letter => open = None,
            (None, '"' | '\'') => open = Some(letter),
            (None, ' ') => words.push(String::new()),
            (_, letter) => words.last_mut().unwrap().push(letter),
        }
    }
    words.retain(|word| !word.is_empty());
    words
}
