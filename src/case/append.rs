//! Adding an entry to a case file: whole or not at all, on the disk before anyone is told, earlier bytes untouched.

use std::fs::{self, File, TryLockError};
use std::io::{self, Write};
use std::path::{Path, PathBuf};

use super::entry::Entry;
use super::file::{self, Unreadable};
use super::read;
use super::record::Record;
use super::write;

/// Why nothing was added. The file is as it was.
#[derive(Debug, thiserror::Error)]
pub enum NotAdded {
    /// Another program holds the file.
    #[error("another program has {0} open for charting: close it there, or read on here")]
    Held(PathBuf),
    /// The file is not what was read.
    #[error("{0} was changed by someone else since it was read: nothing was added. Open it again and look")]
    Changed(PathBuf),
    /// There is a file of that name.
    #[error("there is a file {0} already: choose another name")]
    There(PathBuf),
    /// The entry does not fit the record.
    #[error("{0}")]
    Faulty(String),
    /// The file cannot be read.
    #[error(transparent)]
    Unreadable(#[from] Unreadable),
    /// The system refused.
    #[error("{path} cannot be written, and is as it was: {error}")]
    Refused {
        /// The file.
        path: PathBuf,
        /// What the system said.
        error: io::Error,
    },
}

/// The right to chart in a file, held until dropped: a lock on a file beside it.
#[derive(Debug)]
pub struct Hold {
    // Closed, and so unlocked, when dropped.
    _lock: File,
    beside: PathBuf,
}

impl Drop for Hold {
    fn drop(&mut self) {
        // Taken away while still locked; whoever opened it meanwhile finds that it is gone and tries again.
        let _ = fs::remove_file(&self.beside);
    }
}

/// Takes the right to chart in `path`, without waiting.
///
/// # Errors
/// When another program holds it, or the folder cannot be written.
pub fn hold(path: &Path) -> Result<Hold, NotAdded> {
    let refused = |error| NotAdded::Refused { path: path.to_owned(), error };
    // The same file by another name is the same file.
    let real = fs::canonicalize(path).unwrap_or_else(|_| path.to_owned());
    let name = real.file_name().unwrap_or_default().to_string_lossy();
    let beside = folder_of(&real).join(format!(".{name}.lock"));
    loop {
        let lock = File::options().create(true).append(true).open(&beside).map_err(refused)?;
        match lock.try_lock() {
            Ok(()) => {}
            Err(TryLockError::WouldBlock) => return Err(NotAdded::Held(path.to_owned())),
            Err(TryLockError::Error(error)) => return Err(refused(error)),
        }
        if still_there(&lock, &beside) {
            return Ok(Hold { _lock: lock, beside });
        }
    }
}

/// Whether the file locked is the one that others would find.
#[cfg(unix)]
fn still_there(lock: &File, beside: &Path) -> bool {
    use std::os::unix::fs::MetadataExt;
    let same =
        |one: &fs::Metadata, other: &fs::Metadata| (one.dev(), one.ino()) == (other.dev(), other.ino());
    lock.metadata().is_ok_and(|held| fs::metadata(beside).is_ok_and(|found| same(&held, &found)))
}

#[cfg(not(unix))]
fn still_there(_: &File, _: &Path) -> bool {
    true
}

fn folder_of(path: &Path) -> &Path {
    path.parent().filter(|folder| !folder.as_os_str().is_empty()).unwrap_or_else(|| Path::new("."))
}

/// Adds `entry` to the file that was read as `known` bytes; gives the new bytes and the record they hold.
///
/// # Errors
/// When the file changed since, when the record would be faulty, when the system refuses. The file is then as it was.
pub fn append(path: &Path, known: &[u8], entry: &Entry) -> Result<(Vec<u8>, Record), NotAdded> {
    // Through a link the file itself is written, not the link replaced.
    let real = fs::canonicalize(path).map_err(|error| NotAdded::Refused { path: path.to_owned(), error })?;
    if file::bytes(&real)? != known {
        return Err(NotAdded::Changed(path.to_owned()));
    }
    let bytes = with_entry(known, entry);
    let record = checked(&bytes, path)?;
    let mode = fs::metadata(&real).map(|facts| facts.permissions()).ok();
    put(&real, &bytes, mode, false).map_err(|error| refused(path, error))?;
    Ok((bytes, record))
}

/// Begins a new file with `text` and adds `entry`; for its owner's eyes only.
///
/// # Errors
/// When there is a file of that name, when the record would be faulty, when the system refuses.
pub fn create(path: &Path, text: &str, entry: &Entry) -> Result<(Vec<u8>, Record), NotAdded> {
    if path.exists() {
        return Err(NotAdded::There(path.to_owned()));
    }
    let bytes = with_entry(text.as_bytes(), entry);
    let record = checked(&bytes, path)?;
    put(path, &bytes, None, true).map_err(|error| refused(path, error))?;
    Ok((bytes, record))
}

fn refused(path: &Path, error: io::Error) -> NotAdded {
    if error.kind() == io::ErrorKind::AlreadyExists {
        NotAdded::There(path.to_owned())
    } else {
        NotAdded::Refused { path: path.to_owned(), error }
    }
}

/// The bytes known, a line end where the last line lacks one, an empty line, the entry; line ends as in the file.
fn with_entry(known: &[u8], entry: &Entry) -> Vec<u8> {
    let mut text = String::new();
    if !known.is_empty() && !known.ends_with(b"\n") {
        text.push('\n');
    }
    text.push('\n');
    text.push_str(&write::entry(entry));
    if known.windows(2).any(|pair| pair == b"\r\n") {
        text = text.replace('\n', "\r\n");
    }
    [known, text.as_bytes()].concat()
}

fn checked(bytes: &[u8], path: &Path) -> Result<Record, NotAdded> {
    read::case(bytes, &|name| file::profile(name, Some(path))).map(|(record, _)| record).map_err(|problems| {
        let sentences: Vec<String> =
            problems.iter().map(|problem| format!("{}: {}", problem.message, problem.help)).collect();
        NotAdded::Faulty(sentences.join("; "))
    })
}

/// Writes all of `bytes` beside `path`, onto the disk, then moves it there in one step.
fn put(path: &Path, bytes: &[u8], mode: Option<fs::Permissions>, new: bool) -> io::Result<()> {
    let folder = folder_of(path);
    let mut beside = tempfile::NamedTempFile::new_in(folder)?;
    beside.write_all(bytes)?;
    if let Some(mode) = mode {
        beside.as_file().set_permissions(mode)?;
    }
    beside.as_file().sync_all()?;
    if new {
        beside.persist_noclobber(path).map_err(|error| error.error)?;
    } else {
        beside.persist(path).map_err(|error| error.error)?;
    }
    sync_folder(folder)
}

#[cfg(unix)]
fn sync_folder(folder: &Path) -> io::Result<()> {
    File::open(folder)?.sync_all()
}

#[cfg(not(unix))]
fn sync_folder(_: &Path) -> io::Result<()> {
    Ok(())
}

#[cfg(test)]
mod tests;
