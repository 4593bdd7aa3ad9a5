//! `docs/panel.md` is true: its keys and lines are the tables', its screens are what the keys lead to.
//!
//! `UPDATE_DOCS=1 cargo test --test panel docs` writes what the test would compare.

use std::fmt::Write as _;
use std::path::Path;

use tidewright::panel::key::{When, rows};
use tidewright::panel::line::LINES;

use crate::hands::Hands;

fn keys() -> String {
    let mut out = String::new();
    for when in When::ALL {
        writeln!(out, "\n### {}\n\n| key | does |\n| --- | --- |", when.heading()).unwrap();
        for row in rows(when) {
            writeln!(out, "| `{}` | {} |", row.shown, row.does).unwrap();
        }
    }
    out
}

fn lines() -> String {
    let mut out = "\n| line | means | how, and where from |\n| --- | --- | --- |\n".to_owned();
    for row in &LINES {
        writeln!(out, "| {} | {} | {} |", row.name, row.meaning, row.source).unwrap();
    }
    out
}

fn screen(what: &str) -> String {
    let mut words = what.split_whitespace();
    let case = words.next().unwrap();
    let (width, height) = words.next().unwrap().split_once('x').unwrap();
    let keys: Vec<&str> = words.collect();
    let mut hands = Hands::on(case);
    hands.press(&keys.join(" "));
    format!("\n```text\n{}```\n", hands.screen(width.parse().unwrap(), height.parse().unwrap()))
}

/// What should stand between a marker and its end.
fn due(marker: &str) -> Option<String> {
    match marker.split_once(": ") {
        _ if marker == "keys" => Some(keys()),
        _ if marker == "lines" => Some(lines()),
        Some(("screen", what)) => Some(screen(what)),
        _ => None,
    }
}

#[test]
fn the_panels_page_is_true() {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("docs/panel.md");
    let page = std::fs::read_to_string(&path).unwrap();
    let mut out = String::new();
    let mut rest = page.as_str();
    let mut screens = 0;
    while let Some((before, after)) = rest.split_once("<!-- ") {
        let (marker, after) = after.split_once(" -->").unwrap();
        out.push_str(&format!("{before}<!-- {marker} -->"));
        rest = after;
        if let Some(due) = due(marker) {
            let name = marker.split(':').next().unwrap();
            screens += usize::from(name == "screen");
            let end = format!("<!-- end {name} -->");
            let (_, after) = after.split_once(&end).unwrap_or_else(|| panic!("{marker} has no end"));
            out.push_str(&format!("\n{due}\n{end}"));
            rest = after;
        }
    }
    out.push_str(rest);
    assert!(screens >= 4, "the walk-throughs have lost their screens");
    if std::env::var_os("UPDATE_DOCS").is_some() {
        std::fs::write(&path, &out).unwrap();
    } else {
        assert_eq!(
            page, out,
            "docs/panel.md is not true any more: UPDATE_DOCS=1 cargo test --test panel docs"
        );
    }
}
