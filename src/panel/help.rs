//! Looking things up: every key, and what every line and limit means with its source.

use super::action::Action;
use super::key::{KEYS, KeyRow, When};
use super::line::{LINES, LineRow};

/// Something that can be found.
#[derive(Clone, Copy)]
pub enum Found {
    /// A key.
    Key(&'static KeyRow),
    /// A line.
    Line(&'static LineRow),
}

impl Found {
    fn words(self) -> [&'static str; 4] {
        match self {
            Self::Key(row) => [row.shown, row.does, row.when.heading(), ""],
            Self::Line(row) => [row.name, row.meaning, row.source, "line"],
        }
    }
}

/// What is found for a search, each word anywhere; everything for an empty one. Keys first, then lines.
pub fn found(query: &str) -> Vec<Found> {
    let words: Vec<String> = query.split_whitespace().map(str::to_lowercase).collect();
    let keys = When::ALL
        .into_iter()
        .flat_map(|when| KEYS.iter().filter(move |row| row.when == when))
        .map(Found::Key);
    keys.chain(LINES.iter().map(Found::Line))
        .filter(|found| {
            let text = found.words().join(" ").to_lowercase();
            words.iter().all(|word| text.contains(word.as_str()))
        })
        .collect()
}

/// What Enter does on the one marked: the key's own action when looking, the line's mark.
pub fn chosen(query: &str, at: usize) -> Option<Action> {
    match found(query).get(at)? {
        Found::Key(row) if row.when == When::Look => row.presses.first().map(|(_, action)| action.clone()),
        Found::Key(_) => None,
        Found::Line(row) => Some(Action::MarkLine(row.id)),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::panel::line::LineId;

    #[test]
    fn a_search_finds_by_meaning_and_enter_goes_there() {
        assert_eq!(chosen("fever shivering", 0), Some(Action::MarkLine(LineId::Co2Output)));
        assert_eq!(chosen("gentlest pair", 0), Some(Action::Gentlest));
        assert!(found("no such word anywhere").is_empty());
    }
}
