//! Times: a date, a time of day and the offset from UTC, all three.

use jiff::civil::{Date, Time};
use jiff::tz::Offset;
use toml::de::DeValue;
use toml::value::Datetime;

use super::walk::{Value, Walk};
use crate::case::fault::Place;
use crate::case::moment::Moment;

/// Years a record may speak of; a year outside is a slip.
const YEARS: std::ops::RangeInclusive<i16> = 1950..=2150;

impl Walk {
    /// A time with its offset.
    pub(super) fn moment(&mut self, place: Place, value: &Value<'_>) -> Option<Moment> {
        self.spans.insert(place, value.span());
        let example = format!("{} = 2026-03-04T08:10:00+01:00", place.key);
        let DeValue::Datetime(typed) = value.get_ref() else {
            let (message, help) = if value.get_ref().is_str() {
                (format!("{} stands in quotation marks, and a time does not", place.key), "without the marks")
            } else {
                (format!("{} must be a date and time with its offset from UTC", place.key), "in full")
            };
            self.problem(place, value.span(), message, format!("write it {help}, for example {example}"));
            return None;
        };
        match moment(typed) {
            Ok(moment) => Some(moment),
            Err(lack) => {
                self.problem(
                    place,
                    value.span(),
                    format!("{} {lack}", place.key),
                    format!("write, for example, {example}"),
                );
                None
            }
        }
    }
}

fn moment(typed: &Datetime) -> Result<Moment, String> {
    let date = typed.date.ok_or("has no date")?;
    let time = typed.time.ok_or("has no time of day")?;
    let minutes = match typed.offset {
        Some(toml::value::Offset::Z) => 0,
        Some(toml::value::Offset::Custom { minutes }) => i32::from(minutes),
        None => return Err("has no offset from UTC, so nobody elsewhere could tell when it was".to_owned()),
    };
    let small = |number: u8| i8::try_from(number).unwrap_or(-1);
    let year = i16::try_from(date.year).unwrap_or(-1);
    if !YEARS.contains(&year) {
        return Err(format!("lies in the year {}", date.year));
    }
    let no_such = |_| "is no time that exists".to_owned();
    let day = Date::new(year, small(date.month), small(date.day)).map_err(no_such)?;
    let nanosecond = i32::try_from(time.nanosecond.unwrap_or(0)).unwrap_or(-1);
    let clock = Time::new(small(time.hour), small(time.minute), small(time.second.unwrap_or(0)), nanosecond)
        .map_err(no_such)?;
    let offset = Offset::from_seconds(minutes * 60).map_err(no_such)?;
    let instant = offset.to_timestamp(day.to_datetime(clock)).map_err(no_such)?;
    Ok(Moment { instant, offset })
}
