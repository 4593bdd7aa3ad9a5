//! What goes wrong around a case file: a program killed, a folder that cannot be written, no room, a text cut short, a
//! record that is very long. The file is either as it was or whole with the new entry, and what was reported is there.

#![cfg(unix)]
#![allow(
    clippy::unwrap_used,
    clippy::indexing_slicing,
    clippy::panic,
    clippy::cast_possible_truncation,
    reason = "a test may stop at the first surprise"
)]

mod common;

use std::fmt::Write as _;
use std::fs;
use std::io::Read;
use std::os::unix::fs::PermissionsExt;
use std::os::unix::process::CommandExt;
use std::path::Path;
use std::process::{Command, Stdio};
use std::time::{Duration, Instant};

use common::{Bed, Ran, words};
use tidewright::case::append::{AppendError, Seen, append};
use tidewright::case::entry::Entry;
use tidewright::case::moment::Moment;
use tidewright::case::record::Record;
use tidewright::case::{file, presets, read};
use tidewright::cli::complaint;

fn program() -> Command {
    Command::new(assert_cmd::cargo::cargo_bin!("tidewright"))
}

fn record(text: &[u8]) -> Result<Record, Vec<tidewright::case::problem::Problem>> {
    read::case(text, &|name| file::profile(name, None)).map(|(record, _)| record)
}

/// Delays that are spread over the whole life of the program: a linear congruence, so that a failure can be repeated.
struct Dice(u64);

impl Dice {
    fn below(&mut self, limit: u64) -> u64 {
        // Constants of Knuth's MMIX.
        self.0 = self.0.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        (self.0 >> 33) % limit.max(1)
    }
}

#[test]
fn killed_500_times_every_file_is_valid_and_every_entry_reported_is_there() {
    let bed = Bed::with(
        "format = 1\n[[entry]]\nat = 2026-03-04T08:00:00Z\n[entry.settings]\nrate = 20\ntidal_volume = 400\n",
    );
    let chart = |mark: &str| {
        let mut command = program();
        command.current_dir(bed.folder.path());
        command.args(["chart", "bed.toml", "--at", "2026-03-04T09:00:00Z", "--text", mark]);
        command.stdin(Stdio::null()).stdout(Stdio::piped()).stderr(Stdio::null());
        command
    };
    let begun = Instant::now();
    let mut life = Duration::ZERO;
    for warm in 0..5 {
        let one = Instant::now();
        assert!(chart(&format!("warm-{warm}-")).output().unwrap().status.success());
        life = life.max(one.elapsed());
    }
    let mut dice = Dice(20_260_304);
    let mut before = bed.text();
    let (mut reported, mut silent, mut unreported_but_there) = (0, 0, 0);
    for turn in 0..500 {
        let mark = format!("turn-{turn}-");
        let mut child = chart(&mark).spawn().unwrap();
        std::thread::sleep(Duration::from_micros(dice.below(life.as_micros() as u64 * 5 / 4)));
        child.kill().unwrap();
        let mut out = String::new();
        child.stdout.take().unwrap().read_to_string(&mut out).unwrap();
        child.wait().unwrap();
        let text = bed.text();
        assert!(text.starts_with(&before), "turn {turn}: earlier bytes changed");
        let whole = record(text.as_bytes()).unwrap_or_else(|problems| panic!("turn {turn}: {problems:?}"));
        let there = whole.entries().iter().any(|entry| entry.text.as_deref() == Some(mark.as_str()));
        match (out.contains("now has entry"), there) {
            (true, there) => {
                assert!(there, "turn {turn}: reported and not there");
                reported += 1;
            }
            (false, true) => unreported_but_there += 1,
            (false, false) => silent += 1,
        }
        before = text;
    }
    println!(
        "500 kills in {:.1} s: {reported} reported and there, {unreported_but_there} there before the report, {silent} left no trace",
        begun.elapsed().as_secs_f64()
    );
    // The kills fell on both sides of the write, or they would prove nothing.
    assert!(reported >= 20 && silent >= 20, "{reported} reported, {silent} silent");
    // The lock died with its holder, and what the killed left behind is swept by the next who writes.
    assert!(chart("last-").output().unwrap().status.success());
    let left: Vec<String> = fs::read_dir(bed.folder.path())
        .unwrap()
        .map(|entry| entry.unwrap().file_name().into_string().unwrap())
        .filter(|name| name.contains(".part"))
        .collect();
    assert_eq!(left, Vec::<String>::new());
}

/// Runs the program as somebody without the powers of root, who may write anywhere.
fn as_nobody(folder: &Path, line: &str) -> Ran {
    let mut command = program();
    command.current_dir(folder).args(words(line)).stdin(Stdio::null()).env("TZ", "UTC");
    if fs::metadata("/proc/self").is_ok_and(|facts| std::os::unix::fs::MetadataExt::uid(&facts) == 0) {
        // 65534 is nobody on Linux.
        command.uid(65534).gid(65534);
    }
    command.output().unwrap().into()
}

#[test]
fn a_folder_that_cannot_be_written_is_named_and_the_file_is_as_it_was() {
    let bed = Bed::preset("injured-lungs");
    let before = bed.text();
    fs::set_permissions(&bed.path, fs::Permissions::from_mode(0o644)).unwrap();
    fs::set_permissions(bed.folder.path(), fs::Permissions::from_mode(0o555)).unwrap();
    let ran = as_nobody(bed.folder.path(), "chart bed.toml --rate 28 --at 2026-03-09T09:30Z");
    let noted = as_nobody(bed.folder.path(), "note bed.toml --brief");
    fs::set_permissions(bed.folder.path(), fs::Permissions::from_mode(0o755)).unwrap();
    assert_eq!((ran.code, ran.out.as_str()), (Some(3), ""), "{}", ran.err);
    assert!(
        ran.err.contains("the folder ") && ran.err.contains("cannot be written to: nothing was written"),
        "{}",
        ran.err
    );
    assert_eq!(bed.text(), before);
    // What only reads still works.
    assert_eq!(noted.code, Some(0), "{}", noted.err);
}

#[test]
fn a_file_marked_read_only_is_not_replaced() {
    let bed = Bed::preset("injured-lungs");
    let before = bed.text();
    fs::set_permissions(&bed.path, fs::Permissions::from_mode(0o444)).unwrap();
    let ran = bed.run("chart bed.toml --rate 28 --at 2026-03-09T09:30Z");
    assert_eq!((ran.code, bed.text()), (Some(3), before));
    assert!(ran.err.contains("is marked read-only"), "{}", ran.err);
}

#[test]
fn without_room_nothing_is_written_and_it_is_said() {
    let bed = Bed::preset("injured-lungs");
    let before = bed.text();
    let chart = "chart bed.toml --rate 28 --at 2026-03-09T09:30Z";
    let program = program().get_program().to_owned();
    // Files may not grow beyond 1 KiB in this shell; with the signal ignored the system answers as a full disk would.
    for (trap, code) in [("trap '' XFSZ; ", Some(3)), ("", None)] {
        let script = format!("{trap}ulimit -f 1; exec \"$0\" \"$@\"");
        let mut shell = Command::new("bash");
        shell.arg("-c").arg(script).arg(&program).args(words(chart)).current_dir(bed.folder.path());
        let ran: Ran = shell.stdin(Stdio::null()).output().unwrap().into();
        assert_eq!((ran.code, ran.out.as_str()), (code, ""), "{}", ran.err);
        assert!(code.is_none() || ran.err.contains("there is no room for "), "{}", ran.err);
        assert_eq!(bed.text(), before);
    }
    assert_eq!(bed.run(chart).code, Some(0));
}

#[test]
fn while_one_program_holds_the_file_another_is_told_and_may_still_read() {
    let bed = Bed::preset("injured-lungs");
    let before = bed.text();
    let hold = tidewright::case::append::Hold::take(&bed.path).unwrap();
    let ran = bed.run("chart bed.toml --rate 28 --at 2026-03-09T09:30Z");
    assert_eq!((ran.code, bed.text()), (Some(3), before));
    assert!(ran.err.contains("is open elsewhere, so here it is read-only"), "{}", ran.err);
    assert_eq!(bed.run("note bed.toml --brief").code, Some(0));
    drop(hold);
    assert_eq!(bed.run("chart bed.toml --rate 28 --at 2026-03-09T09:30Z").code, Some(0));
}

#[test]
fn ten_at_once_lose_nothing() {
    let bed = Bed::preset("injured-lungs");
    let children: Vec<_> = (0..10)
        .map(|turn| {
            let mut command = program();
            command.current_dir(bed.folder.path());
            command.args([
                "chart",
                "bed.toml",
                "--at",
                "2026-03-09T09:30Z",
                "--text",
                &format!("turn-{turn}-"),
            ]);
            command.stdin(Stdio::null()).stdout(Stdio::piped()).stderr(Stdio::piped()).spawn().unwrap()
        })
        .collect();
    let ran: Vec<Ran> = children.into_iter().map(|child| child.wait_with_output().unwrap().into()).collect();
    let text = bed.text();
    for (turn, ran) in ran.iter().enumerate() {
        let told = ran.code == Some(0);
        assert_eq!(text.contains(&format!("turn-{turn}-")), told, "{}", ran.err);
        assert!(told || ran.err.contains("is open elsewhere"), "{}", ran.err);
    }
    assert!(ran.iter().any(|ran| ran.code == Some(0)));
    assert!(record(text.as_bytes()).is_ok());
}

fn gas() -> Entry {
    let at = Moment { instant: "2027-01-01T08:00:00Z".parse().unwrap(), offset: jiff::tz::Offset::UTC };
    let mut entry = Entry { at: Some(at), ..Entry::default() };
    entry.gas.paco2_mmhg = Some(52.0);
    entry
}

#[test]
fn every_truncation_of_a_case_is_read_or_refused_in_words_that_say_what_to_do() {
    let whole = presets::case("three-days").unwrap().text.as_bytes();
    let (mut read, mut refused) = (0, 0);
    for length in 0..=whole.len() {
        let cut = &whole[..length];
        match record(cut) {
            Ok(_) => read += 1,
            Err(problems) => {
                refused += 1;
                assert!(!problems.is_empty());
                for problem in &problems {
                    assert!(!problem.message.is_empty() && !problem.help.is_empty(), "cut at {length}");
                }
                let shown = read::as_shown(cut);
                let drawn = complaint::draw(&problems, Some(("bed.toml", &shown)), false);
                assert!(drawn.contains("error: ") && drawn.contains("help: "), "cut at {length}: {drawn}");
            }
        }
    }
    println!("{} cuts: {read} read, {refused} refused", whole.len() + 1);
    assert!(read > 100 && refused > 1000, "{read} read, {refused} refused");
}

#[test]
fn nothing_is_added_to_a_case_cut_short_unless_the_whole_is_valid() {
    let whole = presets::case("three-days").unwrap().text;
    let bed = Bed::with("");
    let (mut added, mut refused) = (0, 0);
    for length in (0..=whole.len()).filter(|length| whole.is_char_boundary(*length)).step_by(11) {
        let cut = &whole[..length];
        fs::write(&bed.path, cut).unwrap();
        match append(&bed.path, &[gas()], &Seen::of(cut.as_bytes())) {
            Ok(_) => {
                added += 1;
                assert!(
                    bed.text().starts_with(cut) && record(bed.text().as_bytes()).is_ok(),
                    "cut at {length}"
                );
            }
            Err(error) => {
                refused += 1;
                assert!(matches!(error, AppendError::Invalid { .. }), "cut at {length}: {error}");
                assert_eq!(bed.text(), cut, "cut at {length}");
            }
        }
    }
    assert!(added > 10 && refused > 100, "{added} added, {refused} refused");
}

/// A record of `count` entries: a gas every half hour, a plan now and then.
fn long(count: usize) -> String {
    let mut text = String::from(
        "format = 1\nlabel = \"Bay 9\"\n[patient]\nsex = \"male\"\nheight = 175\n[[entry]]\nat = 2026-01-01T00:00:00Z\n\
         [entry.settings]\nrate = 20\ntidal_volume = 420\npeep = 8\nfio2 = 0.5\n[entry.measured]\nplateau = 22\ntotal_peep = 9\n",
    );
    let start: jiff::Timestamp = "2026-01-01T00:00:00Z".parse().unwrap();
    for number in 1..count {
        let at = start + jiff::SignedDuration::from_mins(30 * i64::try_from(number).unwrap());
        writeln!(text, "\n[[entry]]\nat = {at}").unwrap();
        if number % 5 == 0 {
            text.push_str("[entry.plan]\nrate = 20\ntidal_volume = 420\nexpected_paco2 = 46\nhalf_interval = [43, 49]\nwide_interval = [36, 58]\nsettle_minutes = 10\n");
        } else {
            writeln!(text, "[entry.gas]\nph = 7.{}\npaco2 = {}", 30 + number % 9, 40 + number % 13).unwrap();
        }
    }
    text
}

#[test]
fn a_record_of_ten_thousand_entries_opens_is_charted_and_noted() {
    let bed = Bed::with(&long(10_000));
    let timed = |line: &str| {
        let begun = Instant::now();
        let ran = bed.run(line);
        assert_eq!((ran.code, ran.err.as_str()), (Some(0), ""), "{line}");
        (begun.elapsed(), ran.out)
    };
    let (noted, brief) = timed("note bed.toml --brief");
    let (charted, _) = timed("chart bed.toml --rate 22 --at 2027-01-01T00:00Z");
    let (checked, _) = timed("check bed.toml");
    println!("10,000 entries: brief note {noted:?}, charted {charted:?}, checked {checked:?}");
    assert!(brief.contains("inside the outer range"), "{brief}");
    // Not a measurement, which a busy machine would spoil: only that nothing grows with the square.
    for took in [noted, charted, checked] {
        assert!(took < Duration::from_secs(20), "{took:?}");
    }
}

#[test]
fn gases_out_of_order_are_read_in_order_and_spoken_of() {
    let bed = Bed::preset("injured-lungs");
    // Charted last, drawn and dated before everything else.
    let ran = bed.run("chart bed.toml --paco2 80 --ph 7.1 --at 2026-03-01T08:00+01:00 --rate 20 --tidal-volume 300 --peep 10 --control volume");
    assert_eq!(ran.code, Some(0), "{}", ran.err);
    assert!(ran.out.contains("before the last one"), "{}", ran.out);
    let plan = bed.run("plan bed.toml --to-paco2 50");
    // Still planned from the gas of 60 mmHg, which is the latest in time.
    assert!(
        plan.out.contains("PaCO2 60 mmHg") && plan.out.contains("do not stand in the order of their times"),
        "{}",
        plan.out
    );
}

#[test]
fn a_label_from_elsewhere_cannot_reach_a_terminal_or_a_spreadsheet() {
    use tidewright::note::record_note::{Since, Told};
    use tidewright::note::{fhir, record_brief, record_csv, record_json, record_markdown, record_text};
    let text = presets::case("three-days").unwrap().text;
    let typed = read::draft(text.as_bytes(), &|name| file::profile(name, None)).unwrap();
    // No file can hold this; a program that uses the library could.
    let mut draft = typed.draft;
    draft.label = Some("=1+1\n\u{1b}[2J\u{9b}31m\u{202e}".to_owned());
    draft.entries[4].text = Some("-2\r\n\u{1b}]0;x\u{7}".to_owned());
    draft.entries[4].by = Some("@SUM(A1)\u{1b}c".to_owned());
    let record = Record::check(draft).unwrap();
    let told = Told::of(&record, Since::Start);
    let face = tidewright::note::face::Face::default();
    let json = |value: &serde_json::Value| serde_json::to_string_pretty(value).unwrap();
    for (kind, text) in [
        ("text", record_text::of(&told, face)),
        ("markdown", record_markdown::of(&told, face)),
        ("brief", record_brief::of(&told, face)),
        ("csv", record_csv::of(&told).unwrap()),
        ("json", json(&record_json::of(&told))),
        ("fhir", json(&fhir::of(&told))),
    ] {
        let control = text.chars().find(|it| it.is_control() && !matches!(it, '\n' | '\r'));
        // JSON writes C1 controls and turns as they are; a terminal is no place to read it from.
        assert!(control.is_none() || (kind == "json" && control == Some('\u{9b}')), "{kind}: {control:?}");
        for line in text.lines() {
            assert!(!line.starts_with(['=', '+', '@']), "{kind}: {line}");
        }
        assert!(
            kind != "csv"
                || text.lines().skip(1).all(|line| line.starts_with("'=") || line.starts_with("\"'=")),
            "{text}"
        );
    }
}
