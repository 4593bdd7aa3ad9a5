//! Adding to a case file: checked as a whole first, then written whole or not at all, and on the disk when told so.
//!
//! No earlier byte is ever changed. Who writes holds a lock on a file beside the case (`.bed3.toml.lock`); a second
//! program is told so and writes nothing. The new text goes, with the old, into a file beside the case that then takes
//! its place: whatever happens in between, the case is either as it was or whole with the new entries.

mod failure;
mod layout;

use std::fs::{self, File, TryLockError};
use std::hash::{DefaultHasher, Hasher};
use std::io::{self, Write};
use std::ops::Range;
use std::path::{Path, PathBuf};

use super::entry::Entry;
use super::file::{self, LARGEST_BYTES, Unreadable};
use super::problem::Spans;
use super::read;
use super::record::Record;

pub use failure::AppendError;

/// What a caller had read: enough to tell whether the file is still the same.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Seen {
    length: usize,
    hash: u64,
}

impl Seen {
    /// The bytes of the file as they were read.
    pub fn of(bytes: &[u8]) -> Self {
        let mut hasher = DefaultHasher::new();
        hasher.write(bytes);
        Self { length: bytes.len(), hash: hasher.finish() }
    }

    /// Whether `bytes` begin with what was seen.
    fn begins(self, bytes: &[u8]) -> bool {
        bytes.get(..self.length).is_some_and(|before| Self::of(before) == self)
    }
}

/// What was added, and the record that now is on the disk.
#[derive(Debug, Clone, PartialEq)]
pub struct Appended {
    /// The record with the new entries.
    pub record: Record,
    /// Where each value stands in the file.
    pub spans: Spans,
    /// The file as it now is, for the next time.
    pub seen: Seen,
    /// The text that was added.
    pub text: String,
    /// The numbers of the new entries, from 1.
    pub numbers: Range<usize>,
    /// How many entries another program had added since the caller read the file; tell the user to look at them.
    pub meanwhile: usize,
}

/// The right to write one case file, while it lives: no other program can take it.
#[derive(Debug)]
pub struct Hold {
    path: PathBuf,
    /// Unlocked when it is dropped; the system does so when the program is killed.
    lock: File,
}

impl Drop for Hold {
    fn drop(&mut self) {
        // Outright, since a process that is just being started by another thread shares the lock until it runs.
        let _ = self.lock.unlock();
    }
}

impl Hold {
    /// Takes the right to write the case at `path`, which need not exist yet.
    ///
    /// # Errors
    /// [`AppendError::Elsewhere`] when another program holds it (open the case read-only then); when the folder is not
    /// there or cannot be written.
    pub fn take(path: &Path) -> Result<Self, AppendError> {
        let path = whole_path(path)?;
        let lock_path = beside(&path, ".lock");
        let refused = |error: io::Error| AppendError::at(&path, error);
        let lock =
            File::options().create(true).truncate(false).write(true).open(lock_path).map_err(refused)?;
        match lock.try_lock() {
            Ok(()) => Ok(Self { path, lock }),
            Err(TryLockError::WouldBlock) => Err(AppendError::Elsewhere(path)),
            Err(TryLockError::Error(error)) => Err(refused(error)),
        }
    }

    /// Adds `entries` at the end of the case, which was last read as `seen`.
    ///
    /// # Errors
    /// As [`append`], but for the lock.
    pub fn append(&self, entries: &[Entry], seen: &Seen) -> Result<Appended, AppendError> {
        let path = &self.path;
        let before = file::bytes(path).map_err(|unreadable| match unreadable {
            Unreadable::Absent(path) => AppendError::Gone(path),
            other => AppendError::Unreadable(other),
        })?;
        let prepared = prepare(path, before, entries, seen)?;
        let mode = fs::metadata(path).map_err(|error| AppendError::at(path, error))?;
        if mode.permissions().readonly() {
            return Err(AppendError::ReadOnly(path.clone()));
        }
        self.replace(&prepared, Some(&mode))?;
        Ok(prepared.appended)
    }

    /// Writes a new case: `text`, then `entries`.
    ///
    /// # Errors
    /// As [`create`], but for the lock.
    pub fn create(&self, text: &str, entries: &[Entry]) -> Result<Appended, AppendError> {
        if self.path.exists() {
            return Err(AppendError::Exists(self.path.clone()));
        }
        let seen = Seen::of(text.as_bytes());
        let prepared = prepare(&self.path, text.as_bytes().to_vec(), entries, &seen)?;
        self.replace(&prepared, None)?;
        Ok(prepared.appended)
    }

    /// Puts the new bytes in the place of the old ones.
    fn replace(&self, prepared: &Prepared, old: Option<&fs::Metadata>) -> Result<(), AppendError> {
        let path = &self.path;
        let refused = |error: io::Error| AppendError::at(path, error);
        let folder = path.parent().unwrap_or_else(|| Path::new("."));
        self.sweep(folder);
        let mut part = tempfile::Builder::new()
            .prefix(&format!("{}.", name_beside(path, "")))
            .suffix(PART)
            .rand_bytes(RANDOM)
            .tempfile_in(folder)
            .map_err(refused)?;
        part.write_all(&prepared.bytes).map_err(refused)?;
        if let Some(old) = old {
            keep_access(part.as_file(), old).map_err(refused)?;
        }
        part.as_file().sync_all().map_err(refused)?;
        match old {
            Some(_) => {
                // An editor asks nobody for the right to write: look once more, just before.
                let still = file::bytes(path).is_ok_and(|bytes| prepared.before_is(&bytes));
                if !still {
                    return Err(AppendError::Changed(path.clone()));
                }
                part.persist(path).map_err(|error| refused(error.error))?;
            }
            None => {
                part.persist_noclobber(path).map_err(|error| match error.error.kind() {
                    io::ErrorKind::AlreadyExists => AppendError::Exists(path.clone()),
                    _ => refused(error.error),
                })?;
            }
        }
        // The new name is on the disk only when its folder is.
        if cfg!(unix) {
            File::open(folder).and_then(|folder| folder.sync_all()).map_err(refused)?;
        }
        Ok(())
    }

    /// Takes away what a program that was killed while writing this case left behind. Nobody else can be writing it now.
    fn sweep(&self, folder: &Path) {
        let start = format!("{}.", name_beside(&self.path, ""));
        for entry in fs::read_dir(folder).into_iter().flatten().flatten() {
            let name = entry.file_name();
            let random = name
                .to_str()
                .and_then(|name| name.strip_prefix(&start))
                .and_then(|rest| rest.strip_suffix(PART));
            if random.is_some_and(|it| {
                it.len() == RANDOM && it.chars().all(|letter| letter.is_ascii_alphanumeric())
            }) {
                // Left behind once more at worst.
                let _ = fs::remove_file(entry.path());
            }
        }
    }
}

const PART: &str = ".part";
/// Random letters in the name of a part.
const RANDOM: usize = 6;

/// Adds `entries` at the end of the case at `path`, which was last read as `seen`.
///
/// When this returns `Ok`, the entries are on the disk. When it returns an error, the file is as it was; but for
/// [`AppendError::Refused`] from the last step, where it may also be whole with the new entries.
/// Entries that others added at the end since `seen` are kept, and counted in [`Appended::meanwhile`].
///
/// # Errors
/// The file is held by another program, gone, changed in what was read, read-only, or would not be valid with the new
/// entries (nothing is written then); there is nothing to add; the system refuses.
pub fn append(path: &Path, entries: &[Entry], seen: &Seen) -> Result<Appended, AppendError> {
    Hold::take(path)?.append(entries, seen)
}

/// Writes a new case at `path`: `text`, then `entries`. Only its owner may read it.
///
/// # Errors
/// There is a file of that name already, the case would not be valid, the system refuses.
pub fn create(path: &Path, text: &str, entries: &[Entry]) -> Result<Appended, AppendError> {
    Hold::take(path)?.create(text, entries)
}

/// What [`append`] would add and lead to, without writing or locking anything.
///
/// # Errors
/// As [`append`], as far as it can be known without writing.
pub fn rehearse(path: &Path, entries: &[Entry], seen: &Seen) -> Result<Appended, AppendError> {
    let path = whole_path(path)?;
    let before = file::bytes(&path).map_err(AppendError::Unreadable)?;
    prepare(&path, before, entries, seen).map(|prepared| prepared.appended)
}

/// The bytes to write, and what is told when they are.
struct Prepared {
    bytes: Vec<u8>,
    before: usize,
    appended: Appended,
}

impl Prepared {
    fn before_is(&self, bytes: &[u8]) -> bool {
        self.bytes.get(..self.before) == Some(bytes)
    }
}

fn prepare(path: &Path, before: Vec<u8>, entries: &[Entry], seen: &Seen) -> Result<Prepared, AppendError> {
    if !seen.begins(&before) {
        return Err(AppendError::Changed(path.to_owned()));
    }
    let profiles = |name: &str| file::profile(name, Some(path));
    // As long as nobody added anything, what was read is what is there.
    let known = before.len() == seen.length;
    let text = layout::to_add(&before, entries);
    let mut bytes = before;
    let length = bytes.len();
    bytes.extend_from_slice(text.as_bytes());
    if bytes.len() as u64 > LARGEST_BYTES {
        return Err(AppendError::Full(path.to_owned()));
    }
    let (record, spans) = read::case(&bytes, &profiles)
        .map_err(|problems| AppendError::Invalid { text: read::as_shown(&bytes).into_owned(), problems })?;
    let whole = record.entries().len();
    let first = whole - entries.len().min(whole) + 1;
    // What is on the disk must say what was meant, or it is not written.
    if record.entries().get(first - 1..) != Some(entries) {
        return Err(AppendError::Unfaithful(path.to_owned()));
    }
    let meanwhile = if known {
        0
    } else {
        let read = bytes.get(..seen.length).unwrap_or_default();
        let read = read::draft(read, &profiles).map_or(0, |typed| typed.draft.entries.len());
        whole.saturating_sub(entries.len() + read)
    };
    let seen = Seen::of(&bytes);
    let appended = Appended { record, spans, seen, text, numbers: first..whole + 1, meanwhile };
    Ok(Prepared { bytes, before: length, appended })
}

/// The path with its folder, links followed: what is replaced is the file itself, never a link to it.
fn whole_path(path: &Path) -> Result<PathBuf, AppendError> {
    if let Ok(whole) = path.canonicalize() {
        return if whole.is_dir() {
            Err(AppendError::Unreadable(Unreadable::Folder(whole)))
        } else {
            Ok(whole)
        };
    }
    let folder = match path.parent() {
        Some(folder) if !folder.as_os_str().is_empty() => folder,
        _ => Path::new("."),
    };
    let name =
        path.file_name().ok_or_else(|| AppendError::Unreadable(Unreadable::Folder(path.to_owned())))?;
    let folder = folder.canonicalize().map_err(|error| match error.kind() {
        io::ErrorKind::NotFound => AppendError::NoFolder(folder.to_owned()),
        _ => AppendError::at(path, error),
    })?;
    Ok(folder.join(name))
}

/// A hidden name beside the case: `.bed3.toml.lock`.
fn name_beside(path: &Path, ending: &str) -> String {
    let name = path.file_name().unwrap_or_default().to_string_lossy();
    format!(".{name}{ending}")
}

fn beside(path: &Path, ending: &str) -> PathBuf {
    path.with_file_name(name_beside(path, ending))
}

/// Who could read and write the old file may do so with the new one, and nobody else.
#[cfg(unix)]
fn keep_access(part: &File, old: &fs::Metadata) -> io::Result<()> {
    use std::os::unix::fs::{MetadataExt, PermissionsExt, fchown};
    let new = part.metadata()?;
    let mut mode = old.mode() & 0o777;
    if new.uid() != old.uid() {
        // Where the system forbids it the file changes hands, as it must when a colleague writes it.
        let _ = fchown(part, Some(old.uid()), None);
    }
    if new.gid() != old.gid() && fchown(part, None, Some(old.gid())).is_err() {
        // Another group stands there now: what the old one was allowed is not its to have.
        mode &= !0o070;
    }
    part.set_permissions(fs::Permissions::from_mode(mode))
}

#[cfg(not(unix))]
fn keep_access(part: &File, old: &fs::Metadata) -> io::Result<()> {
    part.set_permissions(old.permissions())
}

#[cfg(test)]
mod tests;
