//! A time as it stands in a record: an instant with the offset it was written with.

use jiff::{Timestamp, tz::Offset};

/// An instant and the offset from UTC it was charted with.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Moment {
    /// The instant.
    pub instant: Timestamp,
    /// The wall clock's offset where it was charted.
    pub offset: Offset,
}

impl Moment {
    /// Hours from `earlier` to this moment; negative when this one is the earlier.
    pub fn hours_since(self, earlier: Self) -> f64 {
        (self.instant.as_millisecond() - earlier.instant.as_millisecond()) as f64 / 3_600_000.0
    }

    /// Minutes from `earlier` to this moment; negative when this one is the earlier.
    pub fn minutes_since(self, earlier: Self) -> f64 {
        self.hours_since(earlier) * 60.0
    }
}

impl PartialOrd for Moment {
    fn partial_cmp(&self, other: &Self) -> Option<std::cmp::Ordering> {
        Some(self.cmp(other))
    }
}

impl Ord for Moment {
    fn cmp(&self, other: &Self) -> std::cmp::Ordering {
        self.instant.cmp(&other.instant)
    }
}

impl std::fmt::Display for Moment {
    /// The wall clock where it was charted: `2026-03-09 08:10`.
    fn fmt(&self, out: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(out, "{}", self.offset.to_datetime(self.instant).strftime("%Y-%m-%d %H:%M"))
    }
}
