//! The program in a real pseudo-terminal: it opens, turns, charts, is killed, recovers, and leaves the terminal sane.
//!
//! Nothing here waits for a time: content is waited for, with a deadline.

use std::io::{Read, Write};
use std::path::Path;
use std::sync::mpsc::{Receiver, RecvTimeoutError, channel};
use std::time::{Duration, Instant};

use portable_pty::{Child, CommandBuilder, MasterPty, PtySize, native_pty_system};
use tidewright::case::presets;

/// Content that has not come by then will not come.
const DEADLINE: Duration = Duration::from_secs(45);

struct Screen {
    master: Box<dyn MasterPty + Send>,
    child: Box<dyn Child + Send + Sync>,
    keys: Box<dyn Write + Send>,
    output: Receiver<Vec<u8>>,
    parser: vt100::Parser,
    raw: Vec<u8>,
}

impl Screen {
    fn open(folder: &Path, arguments: &[&str], environment: &[(&str, &str)]) -> Self {
        let size = PtySize { rows: 30, cols: 100, pixel_width: 0, pixel_height: 0 };
        let pair = native_pty_system().openpty(size).unwrap();
        let mut command = CommandBuilder::new(env!("CARGO_BIN_EXE_tidewright"));
        command.args(arguments);
        command.cwd(folder);
        command.env_clear();
        command.env("HOME", folder);
        command.env("XDG_STATE_HOME", folder.join("state"));
        command.env("TERM", "xterm-256color");
        // Says what the ground is, so that the terminal is not asked.
        command.env("COLORFGBG", "15;0");
        for (name, value) in environment {
            command.env(name, value);
        }
        let child = pair.slave.spawn_command(command).unwrap();
        drop(pair.slave);
        let mut reader = pair.master.try_clone_reader().unwrap();
        let keys = pair.master.take_writer().unwrap();
        let (send, output) = channel();
        std::thread::spawn(move || {
            let mut part = [0; 4096];
            while let Ok(count) = reader.read(&mut part) {
                if count == 0 || send.send(part[..count].to_vec()).is_err() {
                    break;
                }
            }
        });
        Self {
            master: pair.master,
            child,
            keys,
            output,
            parser: vt100::Parser::new(30, 100, 0),
            raw: Vec::new(),
        }
    }

    fn press(&mut self, keys: &str) -> &mut Self {
        self.keys.write_all(keys.as_bytes()).unwrap();
        self.keys.flush().unwrap();
        self
    }

    /// Waits until the screen says `words`.
    fn says(&mut self, words: &str) -> &mut Self {
        self.until(&format!("the screen to say {words}"), |screen| {
            screen.parser.screen().contents().contains(words)
        })
    }

    fn until(&mut self, what: &str, reached: impl Fn(&Self) -> bool) -> &mut Self {
        let end = Instant::now() + DEADLINE;
        while !reached(self) {
            match self.output.recv_timeout(end.saturating_duration_since(Instant::now())) {
                Ok(part) => {
                    self.parser.process(&part);
                    self.raw.extend(part);
                }
                Err(RecvTimeoutError::Timeout | RecvTimeoutError::Disconnected) => {
                    panic!("waited in vain for {what}:\n{}", self.parser.screen().contents())
                }
            }
        }
        self
    }

    /// Waits for the program to end; gives its exit status.
    fn ended(&mut self) -> u32 {
        let end = Instant::now() + DEADLINE;
        loop {
            while let Ok(part) = self.output.try_recv() {
                self.parser.process(&part);
                self.raw.extend(part);
            }
            if let Some(status) = self.child.try_wait().unwrap() {
                while let Ok(part) = self.output.recv_timeout(Duration::from_millis(200)) {
                    self.parser.process(&part);
                    self.raw.extend(part);
                }
                return status.exit_code();
            }
            assert!(Instant::now() < end, "the program does not end");
            std::thread::yield_now();
        }
    }

    /// Waits until the program stands still, as a shell does before it lets it go on; known from `/proc`, where there is one.
    fn stopped(&self) {
        let stat = format!("/proc/{}/stat", self.child.process_id().unwrap());
        let end = Instant::now() + DEADLINE;
        while let Ok(text) = std::fs::read_to_string(&stat) {
            if text.rsplit(')').next().is_some_and(|rest| rest.trim_start().starts_with('T')) {
                return;
            }
            assert!(Instant::now() < end, "the program does not stop");
            std::thread::yield_now();
        }
    }

    /// The terminal is as a shell expects it: first screen, cursor shown, no mouse, no bracketed paste, cooked keys.
    fn is_sane(&self) {
        let screen = self.parser.screen();
        assert!(!screen.alternate_screen(), "the other screen is left on");
        assert!(!screen.hide_cursor(), "the cursor is left hidden");
        assert!(!screen.bracketed_paste(), "bracketed paste is left on");
        assert_eq!(
            screen.mouse_protocol_mode(),
            vt100::MouseProtocolMode::None,
            "the mouse is left captured"
        );
        let modes = self.master.get_termios().unwrap();
        assert!(format!("{:?}", modes.local_flags).contains("ICANON"), "keys are left raw");
    }

    fn signal(&self, name: &str) {
        let id = self.child.process_id().unwrap().to_string();
        let done = std::process::Command::new("kill").args(["-s", name, &id]).status().unwrap();
        assert!(done.success());
    }
}

fn bed(folder: &Path) -> std::path::PathBuf {
    let path = folder.join("bed.toml");
    std::fs::write(&path, presets::case("injured-lungs").unwrap().text).unwrap();
    path
}

#[test]
fn it_opens_turns_charts_is_killed_recovers_and_quits() {
    let folder = tempfile::tempdir().unwrap();
    let path = bed(folder.path());
    let known = std::fs::read(&path).unwrap();

    let mut first = Screen::open(folder.path(), &["bed.toml"], &[]);
    first.says("Bed 3").says("rate /min").press("llllll").says("‹ *26 ›");
    first.press("c").says("rate = 26").press("\r").says("Charted as entry 3 in bed.toml");
    let charted = std::fs::read(&path).unwrap();
    assert!(charted.starts_with(&known) && charted.len() > known.len());
    first.press("e").says("A new entry").press("\r7.31\r48").says("48");
    first.signal("KILL");
    first.ended();
    assert_eq!(std::fs::read(&path).unwrap(), charted, "a kill changes nothing that was charted");

    let mut again = Screen::open(folder.path(), &["bed.toml"], &[]);
    again.says("Typed before and not charted").says("ph: 7.31").says("paco2: 48");
    again.press("\r").says("A new entry").says("Brought back: the form");
    again.press("\x1b[6~\r").says("Charted as entry 4");
    let text = std::fs::read_to_string(&path).unwrap();
    assert!(text.ends_with("[entry.gas]\nph = 7.31\npaco2 = 48\n"), "{text}");
    again.press("q");
    assert_eq!(again.ended(), 0);
    again.is_sane();

    let kept = folder.path().join("state/tidewright");
    assert_eq!(std::fs::read_dir(kept).unwrap().count(), 0, "what was charted is still kept");
    let left = std::fs::read_dir(folder.path()).unwrap().map(|entry| entry.unwrap().file_name());
    let mut left: Vec<_> = left.map(|name| name.into_string().unwrap()).collect();
    left.sort();
    assert_eq!(left, [".bed.toml.lock", "bed.toml", "state"]);
}

#[test]
fn signals_leave_the_terminal_sane_and_keep_what_was_typed() {
    for (signal, status) in [("TERM", 143), ("HUP", 129), ("INT", 130)] {
        let folder = tempfile::tempdir().unwrap();
        bed(folder.path());
        let mut screen = Screen::open(folder.path(), &["bed.toml"], &[]);
        screen.says("rate /min").press("l").says("‹ *21 ›");
        screen.signal(signal);
        let ended = screen.ended();
        // A shell counts a death by signal as 128 and its number; the pseudo-terminal library says 1.
        assert!(ended == status || ended == 1, "{signal}: {ended}");
        screen.is_sane();
        let mut again = Screen::open(folder.path(), &["bed.toml"], &[]);
        again.says("rate: 21").press("\x1b").says("‹ 20 ›").press("q");
        assert_eq!(again.ended(), 0);
    }
}

#[test]
fn without_colour_marks_stay_reversed_and_bold_and_no_colour_is_sent() {
    let folder = tempfile::tempdir().unwrap();
    let mut screen = Screen::open(folder.path(), &["leak"], &[("NO_COLOR", "1")]);
    screen.says("rate /min").press("l").says("‹ *16 ›");
    let shown = screen.parser.screen();
    let marked = (0..30)
        .flat_map(|row| (0..100).map(move |column| (row, column)))
        .filter_map(|(row, column)| shown.cell(row, column))
        .filter(|cell| cell.inverse());
    assert!(marked.count() >= 7, "the marked value is not reversed");
    let coloured = (0..30)
        .flat_map(|row| (0..100).map(move |column| (row, column)))
        .filter_map(|(row, column)| shown.cell(row, column))
        .filter(|cell| cell.fgcolor() != vt100::Color::Default || cell.bgcolor() != vt100::Color::Default);
    assert_eq!(coloured.count(), 0);
    screen.press("\x03");
    assert_eq!(screen.ended(), 0);
    screen.is_sane();
}

#[test]
fn pasted_text_turns_nothing_and_a_late_answer_about_colours_is_dropped() {
    let folder = tempfile::tempdir().unwrap();
    let mut screen = Screen::open(folder.path(), &["leak"], &[]);
    screen.says("rate /min").press("\x1b[200~lllq\x1b[201~").says("was dropped").says("‹ 15 ›");
    screen.press("\x1b]11;rgb:1111/2222/3333\x1b\\").press("l").says("‹ *16 ›");
    screen.press("q");
    assert_eq!(screen.ended(), 0);
}

#[test]
fn it_follows_a_resize_and_says_when_there_is_too_little_room() {
    let folder = tempfile::tempdir().unwrap();
    let mut screen = Screen::open(folder.path(), &["leak"], &[]);
    screen.says("rate /min");
    for (rows, cols, words) in [(10, 40, "cells are needed"), (24, 80, "Leads to"), (30, 100, "total rate")] {
        screen.parser = vt100::Parser::new(rows, cols, 0);
        screen.master.resize(PtySize { rows, cols, pixel_width: 0, pixel_height: 0 }).unwrap();
        screen.says(words);
    }
    screen.press("q");
    assert_eq!(screen.ended(), 0);
}

#[test]
fn drawings_are_synchronized_and_idle_draws_nothing() {
    let folder = tempfile::tempdir().unwrap();
    let mut screen = Screen::open(folder.path(), &["leak"], &[]);
    screen.says("rate /min").press("l").says("‹ *16 ›");
    let text = String::from_utf8_lossy(&screen.raw).into_owned();
    let (begins, ends) = (text.matches("\x1b[?2026h").count(), text.matches("\x1b[?2026l").count());
    assert!(begins >= 2 && begins - ends <= 1, "{begins} {ends}");
    // What comes within half a second of silence would be a redraw.
    while screen.output.recv_timeout(Duration::from_millis(100)).is_ok() {}
    assert!(screen.output.recv_timeout(Duration::from_millis(500)).is_err(), "something is drawn while idle");
    screen.press("q");
    assert_eq!(screen.ended(), 0);
}

#[test]
fn ctrl_z_stops_with_the_terminal_given_back_and_continues() {
    let folder = tempfile::tempdir().unwrap();
    let mut screen = Screen::open(folder.path(), &["leak"], &[]);
    screen.says("rate /min").press("l").says("‹ *16 ›");
    screen.press("\x1a").until("the first screen", |screen| !screen.parser.screen().alternate_screen());
    screen.is_sane();
    screen.stopped();
    screen.signal("CONT");
    screen.until("the other screen", |screen| screen.parser.screen().alternate_screen()).says("‹ *16 ›");
    screen.press("l").says("‹ *17 ›").press("q");
    assert_eq!(screen.ended(), 0);
}

#[test]
fn without_a_terminal_it_prints_the_plan() {
    let output =
        std::process::Command::new(env!("CARGO_BIN_EXE_tidewright")).arg("injured-lungs").output().unwrap();
    let text = String::from_utf8(output.stdout).unwrap();
    assert!(text.contains("gentlest") && !text.contains('\x1b'), "{text}");
}
