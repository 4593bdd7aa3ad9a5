//! What `check --json` says of each file.

use serde::Serialize;

use crate::case::problem::{Lines, Problem};
use crate::case::read::Kind;

/// Every file that was checked.
#[derive(Debug, Clone, PartialEq, Eq, Serialize)]
pub struct Checked {
    /// One a file, in the order they were named.
    pub files: Vec<CheckedFile>,
}

/// One file.
#[derive(Debug, Clone, PartialEq, Eq, Serialize)]
pub struct CheckedFile {
    /// As it was named.
    pub path: String,
    /// `case` or `profile`.
    pub kind: &'static str,
    /// Whether nothing is wrong with it.
    pub ok: bool,
    /// Everything that is wrong with it.
    pub errors: Vec<CheckedError>,
}

/// One thing wrong.
#[derive(Debug, Clone, PartialEq, Eq, Serialize)]
pub struct CheckedError {
    /// From 1; `null` when the file could not be read.
    pub line: Option<usize>,
    /// From 1, in characters; `null` when the file could not be read.
    pub column: Option<usize>,
    /// What is wrong.
    pub message: String,
    /// What to do about it.
    pub help: String,
}

impl CheckedFile {
    /// A file with its problems; `text` is the text as shown.
    pub fn new(path: &str, kind: Kind, text: &str, problems: &[Problem]) -> Self {
        let lines = Lines::of(text);
        let errors = problems.iter().map(|problem| {
            let place = problem.span.as_ref().map(|span| lines.position(span.start));
            CheckedError {
                line: place.map(|(line, _)| line),
                column: place.map(|(_, column)| column),
                message: problem.message.clone(),
                help: problem.help.clone(),
            }
        });
        let kind = match kind {
            Kind::Case => "case",
            Kind::Profile => "profile",
        };
        Self { path: path.to_owned(), kind, ok: problems.is_empty(), errors: errors.collect() }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_contract_of_check_json() {
        let problem = Problem::at(6..7, "wrong", "mend it");
        let files = vec![CheckedFile::new("bed.toml", Kind::Case, "a = 1\nb = 2\n", &[problem])];
        let json = serde_json::to_string(&Checked { files }).unwrap();
        // Spelled out in the contract of `check --json`.
        let expected = r#"{"files":[{"path":"bed.toml","kind":"case","ok":false,"errors":[{"line":2,"column":1,"message":"wrong","help":"mend it"}]}]}"#;
        assert_eq!(json, expected);
    }
}
