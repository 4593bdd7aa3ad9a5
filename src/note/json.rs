//! Answers as JSON: stable names with their units; null means not known.

use serde::Serialize;

/// An answer as JSON, indented, ending with a line break.
///
/// # Errors
/// Never for the answers of this program; serialisation of a foreign type may fail.
pub fn of(answer: &impl Serialize) -> serde_json::Result<String> {
    let mut text = serde_json::to_string_pretty(answer)?;
    text.push('\n');
    Ok(text)
}
