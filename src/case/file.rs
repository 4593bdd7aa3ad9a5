//! Files: their bytes, within bounds, and the profiles beside a case.

use std::fs::File;
use std::io::{self, Read};
use std::path::{Path, PathBuf};

use super::presets;
use super::profile::Profile;
use super::read;

/// No record of one patient comes near this; a larger file is another kind of file.
pub const LARGEST_BYTES: u64 = 8 * 1024 * 1024;

/// A file that cannot be read at all.
#[derive(Debug, thiserror::Error)]
pub enum Unreadable {
    /// There is no such file.
    #[error("there is no file {0}: look at the spelling and the folder")]
    Absent(PathBuf),
    /// It is a folder.
    #[error("{0} is a folder: name the file in it")]
    Folder(PathBuf),
    /// It is too large to be a case or a profile.
    #[error("{0} is larger than 8 MiB, which no case or profile is: is it the right file?")]
    Large(PathBuf),
    /// The system refused.
    #[error("{path} cannot be read: {error}")]
    Refused {
        /// The file.
        path: PathBuf,
        /// What the system said.
        error: io::Error,
    },
}

/// The bytes of a file.
///
/// # Errors
/// When there is none, when it is a folder or larger than 8 MiB (told before all of it is read), when the system
/// refuses.
pub fn bytes(path: &Path) -> Result<Vec<u8>, Unreadable> {
    let refused = |error: io::Error| match error.kind() {
        io::ErrorKind::NotFound => Unreadable::Absent(path.to_owned()),
        io::ErrorKind::IsADirectory => Unreadable::Folder(path.to_owned()),
        _ => Unreadable::Refused { path: path.to_owned(), error },
    };
    let file = File::open(path).map_err(refused)?;
    let facts = file.metadata().map_err(refused)?;
    if facts.is_dir() {
        return Err(Unreadable::Folder(path.to_owned()));
    }
    if facts.len() > LARGEST_BYTES {
        return Err(Unreadable::Large(path.to_owned()));
    }
    bytes_from(file, path)
}

/// The bytes of a stream; `name` is what errors call it.
///
/// # Errors
/// When it is larger than 8 MiB, when the system refuses.
pub fn bytes_from(stream: impl Read, name: &Path) -> Result<Vec<u8>, Unreadable> {
    let mut bytes = Vec::new();
    // A pipe has no length to ask for: one byte more than allowed tells.
    stream
        .take(LARGEST_BYTES + 1)
        .read_to_end(&mut bytes)
        .map_err(|error| Unreadable::Refused { path: name.to_owned(), error })?;
    if bytes.len() as u64 > LARGEST_BYTES { Err(Unreadable::Large(name.to_owned())) } else { Ok(bytes) }
}

/// A profile by name: a built-in one, else a file, its path counted from the folder of the case.
///
/// # Errors
/// A sentence: neither built in nor a file, or the file cannot be read or is faulty.
pub fn profile(name: &str, case: Option<&Path>) -> Result<Profile, String> {
    if let Some(preset) = presets::profile(name) {
        return read::profile(preset.text.as_bytes())
            .map_err(|_| format!("the built-in profile {name} is faulty; report this"));
    }
    let folder = case.and_then(Path::parent).unwrap_or_else(|| Path::new(""));
    let path = folder.join(name);
    let bytes = bytes(&path).map_err(|unreadable| match unreadable {
        Unreadable::Absent(path) => {
            let built_in = presets::PROFILES.map(|preset| preset.name);
            let near = read::nearest(name, &built_in);
            let near = near.map_or_else(String::new, |near| format!(" (did you mean {near}?)"));
            format!("there is no built-in profile \"{name}\"{near}, and no file {}", path.display())
        }
        other => other.to_string(),
    })?;
    read::profile(&bytes).map_err(|problems| {
        let count = problems.len();
        let errors = if count == 1 { "an error".to_owned() } else { format!("{count} errors") };
        let path = path.display();
        format!("the profile {path} has {errors}: tidewright check {path} shows what is wrong")
    })
}
