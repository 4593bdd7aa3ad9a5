//! Every way to be wrong is a file whose name states the fault; what is said about it is a snapshot to be read as a
//! tired clinician would.

#![allow(
    clippy::unwrap_used,
    clippy::panic,
    clippy::indexing_slicing,
    reason = "a test may stop at the first surprise"
)]

use std::fs;
use std::path::{Path, PathBuf};

use tidewright::case::problem::Problem;
use tidewright::case::read::{self, Kind};
use tidewright::case::{file, presets};
use tidewright::cli::complaint;

fn folder() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/invalid")
}

fn problems(bytes: &[u8], path: &Path) -> Vec<Problem> {
    let problems = match read::kind(bytes) {
        Kind::Profile => read::profile(bytes).err(),
        Kind::Case => read::case(bytes, &|name| file::profile(name, Some(path))).err(),
    };
    problems.unwrap_or_default()
}

/// The whole of what a person would see, machine paths left out.
fn drawn(bytes: &[u8], path: &Path) -> String {
    let name = path.file_name().unwrap().to_str().unwrap();
    let text = read::as_shown(bytes);
    let drawn = complaint::draw(&problems(bytes, path), Some((name, &text)), false);
    drawn.replace(folder().to_str().unwrap(), "FOLDER")
}

#[test]
fn every_invalid_file_is_refused_in_words_that_say_what_to_do() {
    let mut settings = insta::Settings::clone_current();
    settings.set_snapshot_path("invalid/snapshots");
    settings.set_prepend_module_to_snapshot(false);
    settings.set_omit_expression(true);
    let mut paths: Vec<PathBuf> = fs::read_dir(folder())
        .unwrap()
        .map(|entry| entry.unwrap().path())
        .filter(|path| path.extension().is_some_and(|extension| extension == "toml"))
        .collect();
    paths.sort();
    assert!(paths.len() >= 70, "only {} files", paths.len());
    for path in paths {
        let name = path.file_stem().unwrap().to_str().unwrap().to_owned();
        let drawn = drawn(&fs::read(&path).unwrap(), &path);
        assert!(drawn.contains("error: ") && drawn.contains("help: "), "{name} is not refused:\n{drawn}");
        assert!(
            !drawn.chars().any(|letter| letter.is_control() && letter != '\n'),
            "{name} moves the cursor"
        );
        settings.bind(|| insta::assert_snapshot!(name, drawn));
    }
}

#[test]
fn a_byte_order_mark_and_windows_line_ends_are_accepted() {
    for preset in &presets::CASES {
        let marked = format!("\u{FEFF}{}", preset.text.replace('\n', "\r\n"));
        assert_eq!(problems(marked.as_bytes(), Path::new("bed.toml")), [], "{}", preset.name);
    }
}

#[test]
fn lines_and_columns_are_right_behind_a_byte_order_mark_and_windows_line_ends() {
    let drawn = drawn("\u{FEFF}format = 1\r\nlabel = 3\r\n".as_bytes(), Path::new("bed.toml"));
    assert!(drawn.contains("bed.toml:2:9"), "{drawn}");
}

#[test]
fn a_folder_a_file_too_large_and_no_file_are_told_apart() {
    let folder = tempfile::tempdir().unwrap();
    let name = |error: file::Unreadable| error.to_string().replace(folder.path().to_str().unwrap(), "FOLDER");
    assert_eq!(name(file::bytes(folder.path()).unwrap_err()), "FOLDER is a folder: name the file in it");
    let large = folder.path().join("large.toml");
    // 20 MB, sparse: it is refused by its size, before it is read.
    fs::File::create(&large).unwrap().set_len(20_000_000).unwrap();
    assert_eq!(
        name(file::bytes(&large).unwrap_err()),
        "FOLDER/large.toml is larger than 8 MiB, which no case or profile is: is it the right file?"
    );
    let absent = folder.path().join("absent.toml");
    assert_eq!(
        name(file::bytes(&absent).unwrap_err()),
        "there is no file FOLDER/absent.toml: look at the spelling and the folder"
    );
    let endless = std::io::repeat(b'#');
    assert_eq!(
        file::bytes_from(endless, Path::new("standard input")).unwrap_err().to_string(),
        "standard input is larger than 8 MiB, which no case or profile is: is it the right file?"
    );
}

#[test]
fn every_truncation_reads_or_is_refused_without_a_panic() {
    for name in ["injured-lungs", "obstruction-pressure"] {
        let whole = presets::case(name).unwrap().text.as_bytes();
        for length in 0..whole.len() {
            let cut = &whole[..length];
            for problem in problems(cut, Path::new("cut.toml")) {
                assert!(!problem.message.is_empty() && !problem.help.is_empty());
                let end = problem.span.map_or(0, |span| span.end);
                assert!(end <= read::as_shown(cut).len(), "{name} cut at {length}");
            }
        }
    }
}

#[test]
fn a_byte_taken_out_anywhere_reads_or_is_drawn_without_a_panic() {
    let whole = presets::case("injured-lungs").unwrap().text.as_bytes();
    for left_out in 0..whole.len() {
        let mut bytes = whole.to_vec();
        bytes.remove(left_out);
        let text = read::as_shown(&bytes);
        let problems = problems(&bytes, Path::new("cut.toml"));
        let drawn = complaint::draw(&problems, Some(("cut.toml", &text)), false);
        assert_eq!(drawn.is_empty(), problems.is_empty());
    }
}

mod anything {
    use proptest::prelude::*;

    use super::{Path, complaint, presets, problems, read};

    /// Lines of real cases in any order, some of them spoilt.
    fn shuffled_lines() -> impl Strategy<Value = String> {
        let lines: Vec<&str> = presets::CASES.iter().flat_map(|preset| preset.text.lines()).collect();
        proptest::collection::vec((0..lines.len(), proptest::option::of((any::<char>(), 0..20_usize))), 0..40)
            .prop_map(move |picks| {
                let mut text = String::from("format = 1\n");
                for (index, spoil) in picks {
                    let mut line = lines[index].to_owned();
                    if let Some((letter, place)) = spoil {
                        let place = line.char_indices().nth(place).map_or(line.len(), |(byte, _)| byte);
                        line.insert(place, letter);
                    }
                    text.push_str(&line);
                    text.push('\n');
                }
                text
            })
    }

    fn is_read_or_drawn(bytes: &[u8]) {
        let text = read::as_shown(bytes);
        let problems = problems(bytes, Path::new("bed.toml"));
        let drawn = complaint::draw(&problems, Some(("bed.toml", &text)), false);
        assert_eq!(drawn.is_empty(), problems.is_empty());
        assert!(!drawn.contains(|letter: char| letter.is_control() && letter != '\n'), "{drawn:?}");
    }

    proptest! {
        #[test]
        fn any_bytes(bytes in proptest::collection::vec(any::<u8>(), 0..200)) {
            is_read_or_drawn(&bytes);
        }

        #[test]
        fn any_order_of_lines(text in shuffled_lines()) {
            is_read_or_drawn(text.as_bytes());
        }
    }
}
