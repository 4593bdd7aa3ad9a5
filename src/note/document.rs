//! A note before it has a face: headings, lines, items and tables, with struck words marked as such.

/// A stretch of words.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Piece {
    /// As it stands.
    Plain(String),
    /// What somebody typed: shown as it is, and harmless.
    Typed(String),
    /// Struck by the entry of this number.
    Struck(String, usize),
}

/// The words of one line.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct Words(pub Vec<Piece>);

impl Words {
    /// Adds words as they stand.
    #[must_use]
    pub fn and(mut self, text: impl Into<String>) -> Self {
        self.0.push(Piece::Plain(text.into()));
        self
    }

    /// Adds what somebody typed.
    #[must_use]
    pub fn typed(mut self, text: impl Into<String>) -> Self {
        self.0.push(Piece::Typed(text.into()));
        self
    }

    /// Several, with something between.
    pub fn joined(parts: impl IntoIterator<Item = Self>, between: &str) -> Self {
        let mut words = Self::default();
        for part in parts {
            if !words.0.is_empty() {
                words = words.and(between);
            }
            words.0.extend(part.0);
        }
        words
    }
}

impl<T: Into<String>> From<T> for Words {
    fn from(text: T) -> Self {
        Self::default().and(text)
    }
}

/// A part of a note.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Block {
    /// The title of the note.
    Title(Words),
    /// A heading.
    Heading(String),
    /// A line of its own.
    Line(Words),
    /// One of several.
    Item(Words),
    /// One of several beneath an item.
    Below(Words),
    /// A caution.
    Caution(String),
    /// Room before what follows.
    Gap,
    /// A table: its head and its rows.
    Table(Vec<String>, Vec<Vec<String>>),
}

/// What somebody typed, on one line and with nothing in it that moves a cursor or turns the reading direction.
pub fn harmless(text: &str) -> String {
    let plain = text.trim().replace(['\n', '\r', '\t'], " ");
    plain
        .chars()
        .map(|letter| {
            let turns = matches!(letter, '\u{200E}' | '\u{200F}' | '\u{202A}'..='\u{202E}' | '\u{2066}'..='\u{2069}' | '\u{2028}' | '\u{2029}');
            if letter.is_control() || turns { '\u{FFFD}' } else { letter }
        })
        .collect()
}

/// The same, and nothing that a spreadsheet would compute where it begins a line or a field.
pub fn no_formula(text: &str) -> String {
    let text = harmless(text);
    if text.starts_with(['=', '+', '-', '@']) { format!("'{text}") } else { text }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_spreadsheet_computes_nothing_that_was_typed() {
        for text in ["=1+1", "+49", "-x", "@SUM(A1)", "\t=1+1", "\n=1"] {
            assert!(no_formula(text).starts_with('\''), "{text:?}");
        }
        assert_eq!(no_formula("Bay 3"), "Bay 3");
    }

    #[test]
    fn what_was_typed_cannot_move_a_cursor() {
        assert_eq!(
            harmless("two\nlines\u{1b}[2J \u{202e}back\u{9b}"),
            "two lines\u{FFFD}[2J \u{FFFD}back\u{FFFD}"
        );
    }
}
