//! How new entries are laid out behind what stands in a file: its line ends, one empty line between.

use crate::case::entry::Entry;
use crate::case::write;

/// The text to add behind `before`.
pub(super) fn to_add(before: &[u8], entries: &[Entry]) -> String {
    let mut text = String::new();
    if !before.is_empty() && !before.ends_with(b"\n") {
        text.push('\n');
    }
    for entry in entries {
        text.push('\n');
        text.push_str(&write::entry(entry));
    }
    if uses_crlf(before) { text.replace('\n', "\r\n") } else { text }
}

/// Whether the file's lines end as on some systems, with a carriage return before the line feed.
fn uses_crlf(bytes: &[u8]) -> bool {
    let end = bytes.iter().position(|byte| *byte == b'\n');
    end.and_then(|end| end.checked_sub(1)).and_then(|at| bytes.get(at)) == Some(&b'\r')
}
