//! The command line: arguments in, one answer out, an exit status.

mod answer;
mod arguments;
mod bedside;
mod chart;
pub mod checked;
mod clock;
pub mod complaint;
mod note;
#[cfg(feature = "panel")]
mod panel;
mod review;
mod source;
mod trial;

use std::io::{self, IsTerminal, Write};
use std::process::ExitCode;

use clap::ArgMatches;

pub use arguments::command;

/// How a run ends.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Status {
    /// Done.
    Done,
    /// No plan is on target; the nearest was printed.
    OffTarget,
    /// Bad input or usage.
    BadInput,
    /// Could not read or write.
    Unreadable,
}

impl From<Status> for ExitCode {
    fn from(status: Status) -> Self {
        Self::from(match status {
            Status::Done => 0,
            Status::OffTarget => 1,
            Status::BadInput => 2,
            Status::Unreadable => 3,
        })
    }
}

/// What a run says: on standard output, on standard error, and how it ends.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Said {
    /// For standard output.
    pub out: String,
    /// For standard error.
    pub err: String,
    /// How it ends.
    pub status: Status,
}

impl Said {
    /// An answer.
    pub fn answer(out: String, status: Status) -> Self {
        Self { out, err: String::new(), status }
    }

    /// A complaint.
    pub fn complaint(err: String, status: Status) -> Self {
        Self { out: String::new(), err, status }
    }
}

/// Runs the program with the arguments of the process and prints what it says. A closed pipe ends quietly.
pub fn run() -> ExitCode {
    let matches = match command().try_get_matches() {
        Ok(matches) => matches,
        Err(error) => {
            // Help and version are answers; everything else is usage.
            let status = if error.use_stderr() { Status::BadInput } else { Status::Done };
            return match error.print() {
                Err(unwritten) if unwritten.kind() != io::ErrorKind::BrokenPipe => Status::Unreadable.into(),
                _ => status.into(),
            };
        }
    };
    print(&dispatch(&matches))
}

fn print(said: &Said) -> ExitCode {
    let written =
        io::stdout().lock().write_all(said.out.as_bytes()).and_then(|()| io::stdout().lock().flush());
    let complained = io::stderr().lock().write_all(said.err.as_bytes());
    match written.and(complained) {
        Ok(()) => said.status.into(),
        Err(error) if error.kind() == io::ErrorKind::BrokenPipe => said.status.into(),
        Err(_) => Status::Unreadable.into(),
    }
}

fn dispatch(matches: &ArgMatches) -> Said {
    let colour = Colours::chosen(matches);
    let said = match matches.subcommand() {
        Some(("plan", matches)) => answer::plan(matches, colour),
        Some(("forecast", matches)) => answer::forecast(matches, colour),
        Some(("chart", matches)) => chart::chart(matches, colour),
        Some(("note", matches)) => note::note(matches, colour),
        Some(("review", matches)) => review::review(matches, colour),
        Some(("check", matches)) => answer::check(matches, colour),
        Some(("profiles", matches)) => answer::profiles(matches, colour),
        Some(("cases", matches)) => answer::cases(matches, colour),
        Some(("completions", matches)) => Ok(answer::completions(matches)),
        Some(("manual", _)) => answer::manual(),
        _ => opened(matches, colour),
    };
    said.unwrap_or_else(|complaint| complaint)
}

/// `tidewright` alone or with a case: the panel, or the plan where there is no terminal to open it on.
fn opened(matches: &ArgMatches, colour: Colours) -> Result<Said, Said> {
    #[cfg(feature = "panel")]
    if panel::can_open(matches) {
        return panel::open(matches, colour);
    }
    answer::plan_of(matches, colour)
}

/// Whether output and errors are coloured.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Colours {
    /// Standard output.
    pub out: bool,
    /// Standard error.
    pub err: bool,
}

impl Colours {
    /// `--color` first, then `NO_COLOR`, then whether it goes to a terminal.
    fn chosen(matches: &ArgMatches) -> Self {
        let matches = matches.subcommand().map_or(matches, |(_, matches)| matches);
        match matches.get_one::<String>("color").map(String::as_str) {
            Some("always") => Self { out: true, err: true },
            Some("never") => Self { out: false, err: false },
            _ => {
                let refused = std::env::var_os("NO_COLOR").is_some_and(|value| !value.is_empty());
                Self {
                    out: !refused && io::stdout().is_terminal(),
                    err: !refused && io::stderr().is_terminal(),
                }
            }
        }
    }
}
