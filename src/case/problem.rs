//! Faults with the place they have in a text, ready to be drawn or listed.

use std::collections::BTreeMap;
use std::ops::Range;

use super::fault::{Fault, Place};

/// One thing wrong with a text or with flags.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Problem {
    /// What is wrong, a sentence with its values.
    pub message: String,
    /// What was expected, with an example, or what to do.
    pub help: String,
    /// The bytes at fault in the text as shown; `None` when it came from flags.
    pub span: Option<Range<usize>>,
    /// Other bytes that the fault rests on.
    pub also: Vec<Range<usize>>,
    /// The values at fault, the most telling first; may be empty.
    pub places: Vec<Place>,
}

impl Problem {
    /// A problem at `span` of the text.
    pub fn at(span: Range<usize>, message: impl Into<String>, help: impl Into<String>) -> Self {
        Self {
            message: message.into(),
            help: help.into(),
            span: Some(span),
            also: Vec::new(),
            places: Vec::new(),
        }
    }
}

impl From<Fault> for Problem {
    /// Without a text: flags.
    fn from(fault: Fault) -> Self {
        Self { message: fault.message, help: fault.help, span: None, also: Vec::new(), places: fault.places }
    }
}

/// Where each value stands in the text it was read from.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct Spans {
    spans: BTreeMap<Place, Range<usize>>,
}

impl Spans {
    pub(super) fn insert(&mut self, place: Place, span: Range<usize>) {
        self.spans.insert(place, span);
    }

    /// The bytes of the value at `place`.
    pub fn of(&self, place: Place) -> Option<Range<usize>> {
        self.spans.get(&place).cloned()
    }

    /// The bytes of the value at `place`; where it was not given, those of its table, or of its entry.
    pub fn nearest(&self, place: Place) -> Option<Range<usize>> {
        self.of(place)
            .or_else(|| self.of(Place { key: "", ..place }))
            .or_else(|| place.entry.and_then(|_| self.of(Place { key: "", table: "", ..place })))
    }

    /// A fault with its places found in the text; without a span when none of them stands there.
    pub fn locate(&self, fault: Fault) -> Problem {
        let mut given = fault.places.iter().filter_map(|place| self.of(*place));
        let first = fault.places.first().and_then(|place| self.nearest(*place));
        let span = first.or_else(|| given.next());
        let mut also: Vec<Range<usize>> = Vec::new();
        for other in fault.places.iter().filter_map(|place| self.of(*place)) {
            if Some(&other) != span.as_ref() && !also.contains(&other) {
                also.push(other);
            }
        }
        Problem { span, also, ..Problem::from(fault) }
    }
}

/// Where the lines of a text begin, for many look-ups.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Lines<'t> {
    text: &'t str,
    starts: Vec<usize>,
}

impl<'t> Lines<'t> {
    /// The lines of `text`.
    pub fn of(text: &'t str) -> Self {
        let starts = std::iter::once(0).chain(text.match_indices('\n').map(|(end, _)| end + 1)).collect();
        Self { text, starts }
    }

    /// The line and column of a byte, both from 1, the column counted in characters.
    pub fn position(&self, byte: usize) -> (usize, usize) {
        let byte = byte.min(self.text.len());
        let line = self.starts.partition_point(|start| *start <= byte);
        let start = line.checked_sub(1).and_then(|index| self.starts.get(index)).copied().unwrap_or(0);
        let column = self.text.get(start..byte).unwrap_or("").chars().count();
        (line, column + 1)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn columns_are_counted_in_characters() {
        let position = |text: &str, byte: usize| Lines::of(text).position(byte);
        assert_eq!(position("", 0), (1, 1));
        assert_eq!(position("a\nbü = 1", 5), (2, 3));
        assert_eq!(position("a\r\nb", 3), (2, 1));
        assert_eq!(position("a\n", 2), (2, 1));
        assert_eq!(position("abc", 99), (1, 4));
    }

    #[test]
    fn a_missing_value_is_drawn_at_its_table_or_its_entry() {
        let mut spans = Spans::default();
        spans.insert(Place::in_entry(1, "", ""), 10..19);
        spans.insert(Place::in_entry(1, "settings", ""), 30..46);
        assert_eq!(spans.nearest(Place::in_entry(1, "settings", "peep")), Some(30..46));
        assert_eq!(spans.nearest(Place::in_entry(1, "gas", "paco2")), Some(10..19));
        assert_eq!(spans.nearest(Place::in_entry(2, "gas", "paco2")), None);
    }
}
