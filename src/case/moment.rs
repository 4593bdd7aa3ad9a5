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

    /// This many minutes later, on the same wall clock.
    #[must_use]
    pub fn later_by_minutes(self, minutes: f64) -> Self {
        #[allow(
            clippy::cast_possible_truncation,
            reason = "minutes of a record, far below 2^63 seconds; saturates"
        )]
        let seconds = (minutes * 60.0).round() as i64;
        let second = self.instant.as_second().saturating_add(seconds);
        Self { instant: Timestamp::from_second(second).unwrap_or(self.instant), offset: self.offset }
    }

    /// The time of day on the wall where it was charted: `08:10`.
    pub fn clock(self) -> String {
        self.offset.to_datetime(self.instant).strftime("%H:%M").to_string()
    }

    /// As standards for exchange have it: `2026-03-04T08:10:00+01:00`.
    pub fn rfc3339(self) -> String {
        super::write::moment(self)
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
