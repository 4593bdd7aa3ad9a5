//! The clock, which only the command line reads, and times as they are typed after a flag.

use jiff::civil::{DateTime, Time};
use jiff::tz::{Offset, TimeZone};
use jiff::{Timestamp, Zoned};

use crate::case::moment::Moment;

/// How a time may be written.
pub const HOW: &str =
    "write 2026-03-04T08:10+01:00, 2026-03-04 08:10 for the clock on this wall, or 08:10 for today";

/// A clock that is ahead by no more than this is taken as right, minutes.
const AHEAD_MIN: f64 = 2.0;

/// The time now, to the second, with the offset of this machine's clock.
pub fn now() -> Moment {
    let now = Zoned::now();
    let second = Timestamp::from_second(now.timestamp().as_second()).unwrap_or_else(|_| now.timestamp());
    Moment { instant: second, offset: whole_minutes(now.offset()) }
}

/// Offsets are written in whole minutes.
fn whole_minutes(offset: Offset) -> Offset {
    Offset::from_seconds(offset.seconds() / 60 * 60).unwrap_or(Offset::UTC)
}

/// A time as it was typed; without an offset it is read off this machine's wall, without a date it is today's.
///
/// # Errors
/// A sentence: it is no time, or a time of day that has not come yet.
pub fn moment(text: &str, now: Moment) -> Result<Moment, String> {
    moment_in(text.trim(), now, &TimeZone::system())
}

fn moment_in(text: &str, now: Moment, zone: &TimeZone) -> Result<Moment, String> {
    let unread = || format!("\"{text}\" is not a time that can be read: {HOW}");
    // A date alone is no time: midnight is not what anybody means by it.
    if !text.contains(':') {
        return Err(unread());
    }
    if let Some((instant, offset)) = with_offset(text) {
        return Ok(Moment { instant, offset });
    }
    if let Ok(wall) = text.parse::<DateTime>() {
        return on_the_wall(wall, zone).ok_or_else(unread);
    }
    let time: Time = text.parse().map_err(|_| unread())?;
    let today = zone.to_datetime(now.instant).date().to_datetime(time);
    let moment = on_the_wall(today, zone).ok_or_else(unread)?;
    if moment.minutes_since(now) > AHEAD_MIN {
        return Err(format!(
            "{text} has not come yet today (it is {now} by this machine's clock): if another day is meant, write the date, \
             as in {}T{text}",
            today.date()
        ));
    }
    Ok(moment)
}

fn with_offset(text: &str) -> Option<(Timestamp, Offset)> {
    let instant: Timestamp = text.parse().ok()?;
    // A timestamp has its offset behind its time, and its date has no more than two hyphens.
    let wall = text.get(10..)?;
    let at = wall.rfind(['+', '-']);
    let offset = match at.and_then(|at| wall.get(at..)) {
        None => Offset::UTC,
        Some(behind) => {
            let digits: String = behind.chars().filter(char::is_ascii_digit).collect();
            let part = |range: std::ops::Range<usize>| {
                digits.get(range).map_or(Some(0), |it| it.parse::<i32>().ok())
            };
            let minutes = part(0..2)? * 60 + part(2..4)?;
            let sign = if behind.starts_with('-') { -1 } else { 1 };
            Offset::from_seconds(sign * minutes * 60).ok()?
        }
    };
    Some((instant, offset))
}

fn on_the_wall(wall: DateTime, zone: &TimeZone) -> Option<Moment> {
    let zoned = zone.to_zoned(wall).ok()?;
    Some(Moment { instant: zoned.timestamp(), offset: whole_minutes(zoned.offset()) })
}

#[cfg(test)]
mod tests {
    use super::*;

    fn zone() -> TimeZone {
        TimeZone::fixed(Offset::from_seconds(3600).unwrap())
    }

    fn at(text: &str) -> Result<String, String> {
        let now = Moment {
            instant: "2026-03-04T07:40:00Z".parse().unwrap(),
            offset: Offset::from_seconds(3600).unwrap(),
        };
        moment_in(text, now, &zone()).map(|it| format!("{} {}", it.instant, it.offset.seconds()))
    }

    #[test]
    fn times_with_an_offset_keep_it() {
        assert_eq!(at("2026-03-04T08:10:00+01:00"), Ok("2026-03-04T07:10:00Z 3600".to_owned()));
        assert_eq!(at("2026-03-04 08:10-05:30"), Ok("2026-03-04T13:40:00Z -19800".to_owned()));
        assert_eq!(at("2026-03-04T08:10Z"), Ok("2026-03-04T08:10:00Z 0".to_owned()));
    }

    #[test]
    fn times_without_one_are_read_off_the_wall() {
        assert_eq!(at("2026-03-04 08:10"), Ok("2026-03-04T07:10:00Z 3600".to_owned()));
        assert_eq!(at("08:10"), Ok("2026-03-04T07:10:00Z 3600".to_owned()));
    }

    #[test]
    fn a_time_that_has_not_come_yet_asks_for_its_date() {
        assert_eq!(
            at("23:50"),
            Err("23:50 has not come yet today (it is 2026-03-04 08:40 by this machine's clock): if another day is meant, \
                 write the date, as in 2026-03-04T23:50"
                .to_owned())
        );
        assert!(at("yesterday").unwrap_err().starts_with("\"yesterday\" is not a time that can be read"));
        assert!(at("2026-03-04").is_err());
    }
}
