//! The house: what a layer may not name, and what stands at the top level.

#![allow(
    clippy::unwrap_used,
    clippy::panic,
    clippy::indexing_slicing,
    clippy::doc_markdown,
    clippy::cast_precision_loss,
    clippy::too_many_lines,
    clippy::format_push_string,
    clippy::float_cmp,
    reason = "a test may stop at the first surprise, and its tables are long"
)]
use std::fs;
use std::path::{Path, PathBuf};

const LAYERS: [&str; 7] = ["quantity", "physiology", "case", "planning", "note", "cli", "panel"];
/// Files longer than this hold more than one idea.
const MOST_LINES: usize = 600;

fn root() -> &'static Path {
    Path::new(env!("CARGO_MANIFEST_DIR"))
}

fn sources(folder: &Path, found: &mut Vec<PathBuf>) {
    let Ok(entries) = fs::read_dir(folder) else { return };
    for entry in entries {
        let path = entry.unwrap().path();
        if path.is_dir() {
            sources(&path, found);
        } else if path.extension().is_some_and(|ending| ending == "rs") {
            found.push(path);
        }
    }
}

/// The files of a layer: `src/layer.rs` and everything under `src/layer/`.
fn layer(name: &str) -> Vec<PathBuf> {
    let mut found = Vec::new();
    let single = root().join("src").join(format!("{name}.rs"));
    if single.exists() {
        found.push(single);
    }
    sources(&root().join("src").join(name), &mut found);
    found
}

/// The code of a file: comments and tests left out.
fn code(path: &Path) -> String {
    let text = fs::read_to_string(path).unwrap();
    let text = text.split("#[cfg(test)]").next().unwrap();
    text.lines().filter(|line| !line.trim_start().starts_with("//")).collect::<Vec<_>>().join("\n")
}

fn must_not_name(layers: &[&str], words: &[&str], except: &[&str]) {
    for name in layers {
        for path in layer(name) {
            let shown = path.strip_prefix(root()).unwrap().display().to_string();
            if except.iter().any(|allowed| shown.starts_with(allowed)) || shown.ends_with("/tests.rs") {
                continue;
            }
            let code = code(&path);
            for word in words {
                assert!(!code.contains(word), "{shown} names {word}, which its layer may not");
            }
        }
    }
}

#[test]
fn arrows_only_point_down() {
    for (height, name) in LAYERS.iter().enumerate() {
        // The two faces, cli and panel, may open one another: the command line starts the panel.
        let above: Vec<String> = LAYERS
            .iter()
            .skip(height + 1)
            .filter(|other| !(*name == "cli" && **other == "panel"))
            .map(|other| format!("crate::{other}"))
            .collect();
        let above: Vec<&str> = above.iter().map(String::as_str).collect();
        must_not_name(&[name], &above, &[]);
    }
}

#[test]
fn quantities_stand_on_the_standard_library_alone() {
    must_not_name(
        &["quantity"],
        &["crate::case", "crate::physiology", "serde", "jiff", "toml", "libm", "clap"],
        &[],
    );
}

#[test]
fn the_engine_knows_no_file_clock_dice_environment_or_screen() {
    let words = [
        "std::fs",
        "std::env",
        "std::io",
        "std::net",
        "std::process",
        "SystemTime",
        "Instant",
        "Zoned::now",
        "Timestamp::now",
        "rand",
        "ratatui",
        "crossterm",
        "println!",
        "eprintln!",
        "std::thread",
    ];
    must_not_name(&["quantity", "physiology", "planning"], &words, &[]);
}

#[test]
fn only_the_panel_names_the_terminal_crates() {
    must_not_name(
        &["quantity", "physiology", "case", "planning", "note", "cli"],
        &["ratatui", "crossterm"],
        &[],
    );
}

#[test]
fn only_doors_touch_files() {
    let doors = ["src/case/file.rs", "src/case/append"];
    must_not_name(&["case", "note"], &["std::fs", "File::open", "File::create"], &doors);
}

#[test]
fn the_top_level_is_as_agreed() {
    let agreed = [
        "Cargo.toml",
        "Cargo.lock",
        "README.md",
        "DEVELOPERS.md",
        "LICENSE",
        "src",
        "tests",
        "presets",
        "docs",
        "target",
    ];
    for entry in fs::read_dir(root()).unwrap() {
        let name = entry.unwrap().file_name().into_string().unwrap();
        assert!(
            name.starts_with('.') || agreed.contains(&name.as_str()),
            "{name} does not belong at the top level"
        );
    }
    for needed in agreed.iter().filter(|name| **name != "target") {
        assert!(root().join(needed).exists(), "{needed} is missing");
    }
}

#[test]
fn no_file_holds_more_than_one_idea_fits() {
    let mut all = Vec::new();
    sources(&root().join("src"), &mut all);
    sources(&root().join("tests"), &mut all);
    assert!(all.len() > 50);
    for path in all {
        let lines = fs::read_to_string(&path).unwrap().lines().count();
        assert!(lines <= MOST_LINES, "{} has {lines} lines", path.display());
    }
}
