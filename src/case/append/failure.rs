//! Why nothing was added to a case file.

use std::io;
use std::path::{Path, PathBuf};

use crate::case::file::Unreadable;
use crate::case::problem::Problem;

/// Why nothing was written.
#[derive(Debug, thiserror::Error)]
pub enum AppendError {
    /// Another program holds the file.
    #[error("{0} is open elsewhere, so here it is read-only: close it there, then chart again")]
    Elsewhere(PathBuf),
    /// The file is no longer there.
    #[error("{0} is gone: it was moved or deleted since it was opened; put it back, then chart again")]
    Gone(PathBuf),
    /// What had been read was changed.
    #[error(
        "{0} was changed since it was read, and not only added to: nothing was written; open it again, look at it, then \
         chart again"
    )]
    Changed(PathBuf),
    /// The file may not be written.
    #[error("{0} is marked read-only: nothing was written; let its owner allow writing, then chart again")]
    ReadOnly(PathBuf),
    /// There is a file of this name.
    #[error("{0} is there already: choose another name")]
    Exists(PathBuf),
    /// The folder is not there.
    #[error("there is no folder {0}: make it, or choose another")]
    NoFolder(PathBuf),
    /// The record would be larger than can be read again.
    #[error(
        "{0} would grow beyond 8 MiB, more than can be read again: nothing was written; begin a new file"
    )]
    Full(PathBuf),
    /// The text would not read back as what was meant.
    #[error(
        "{0}: what was to be added would not read back as it was meant, so nothing was written; report this"
    )]
    Unfaithful(PathBuf),
    /// The record would not be valid.
    #[error("the record would contradict itself, so nothing was written{}", first(.problems))]
    Invalid {
        /// The text that would have been written, as shown.
        text: String,
        /// What is wrong with it.
        problems: Vec<Problem>,
    },
    /// The file cannot be read.
    #[error(transparent)]
    Unreadable(#[from] Unreadable),
    /// The folder may not be written.
    #[error(
        "the folder {0} cannot be written to: nothing was written; let its owner allow writing, or chart in another"
    )]
    Locked(PathBuf),
    /// No room is left.
    #[error(
        "there is no room for {0} (the disk is full, or files may not grow so large): nothing was written; make room, then chart again"
    )]
    DiskFull(PathBuf),
    /// The system refused.
    #[error("{path} cannot be written: {error}; look at the file before you chart again")]
    Refused {
        /// The file.
        path: PathBuf,
        /// What the system said.
        error: io::Error,
    },
}

impl AppendError {
    /// What the system said about the case at `path`.
    pub(super) fn at(path: &Path, error: io::Error) -> Self {
        match error.kind() {
            io::ErrorKind::PermissionDenied | io::ErrorKind::ReadOnlyFilesystem => {
                Self::Locked(path.parent().unwrap_or_else(|| Path::new(".")).to_owned())
            }
            io::ErrorKind::StorageFull | io::ErrorKind::QuotaExceeded | io::ErrorKind::FileTooLarge => {
                Self::DiskFull(path.to_owned())
            }
            _ => Self::Refused { path: path.to_owned(), error },
        }
    }
}

fn first(problems: &[Problem]) -> String {
    problems.first().map_or_else(String::new, |problem| format!(": {}; {}", problem.message, problem.help))
}
