//! One field's text into the entry.

use jiff::civil::{DateTime, Time};

use super::super::line::{Slip, quantity};
use super::FieldId;
use crate::case::entry::{Control, Entry};
use crate::case::moment::Moment;
use crate::case::slots::entry_slot;
use crate::quantity::show::PressureUnit;

/// A clock may run ahead of ours by this many minutes before a time is taken for yesterday's: common practice.
const AHEAD_MIN: f64 = 5.0;

/// Reads the text of a field into `entry`; empty text leaves it as it is.
pub fn field(
    id: FieldId,
    text: &str,
    clock: Moment,
    unit: PressureUnit,
    entry: &mut Entry,
) -> Result<(), Slip> {
    let text = text.trim();
    if text.is_empty() {
        return Ok(());
    }
    match id {
        FieldId::DrawnAt => entry.gas.drawn_at = Some(moment(text, clock)?),
        FieldId::Number(key) => {
            let value = quantity(text, key, unit)?;
            if let Some(slot) = entry_slot(entry, key) {
                *slot = Some(value);
            }
        }
        FieldId::Control => entry.settings.control = Some(control(text)?),
        FieldId::Text => entry.text = Some(plain(text)?),
        FieldId::By => entry.by = Some(plain(text)?),
    }
    Ok(())
}

/// Text without what could move the cursor of a later reader.
fn plain(text: &str) -> Result<String, Slip> {
    if text.chars().any(char::is_control) {
        return Err(Slip {
            message: "the text holds a control character".to_owned(),
            help: "type it as plain words".to_owned(),
        });
    }
    Ok(text.to_owned())
}

fn control(text: &str) -> Result<Control, Slip> {
    match text.to_lowercase().as_str() {
        "volume" | "v" => Ok(Control::Volume),
        "pressure" | "p" => Ok(Control::Pressure),
        "support" | "s" => Ok(Control::Support),
        _ => Err(Slip {
            message: format!("\"{text}\" is no control"),
            help: "write volume, pressure or support".to_owned(),
        }),
    }
}

/// "08:10" is the latest ten past eight, "2026-03-09 08:10" that day's; both at the offset of our clock.
fn moment(text: &str, clock: Moment) -> Result<Moment, Slip> {
    let astray = || Slip {
        message: format!("\"{text}\" is no time"),
        help: "write 08:10, or 2026-03-09 08:10".to_owned(),
    };
    let at = |datetime: DateTime| {
        clock
            .offset
            .to_timestamp(datetime)
            .map(|instant| Moment { instant, offset: clock.offset })
            .map_err(|_| astray())
    };
    let today = clock.offset.to_datetime(clock.instant).date();
    if let Ok(datetime) = DateTime::strptime("%Y-%m-%d %H:%M", text) {
        return at(datetime);
    }
    let time = Time::strptime("%H:%M", text).map_err(|_| astray())?;
    let here = at(today.to_datetime(time))?;
    if here.minutes_since(clock) <= AHEAD_MIN {
        return Ok(here);
    }
    at(today.yesterday().map_err(|_| astray())?.to_datetime(time))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn clock(text: &str) -> Moment {
        let datetime = DateTime::strptime("%Y-%m-%d %H:%M", text).unwrap();
        let offset = jiff::tz::offset(1);
        Moment { instant: offset.to_timestamp(datetime).unwrap(), offset }
    }

    #[test]
    fn a_time_alone_is_the_latest_one() {
        let now = clock("2026-03-09 00:20");
        assert_eq!(moment("00:10", now).unwrap().to_string(), "2026-03-09 00:10");
        assert_eq!(moment("23:50", now).unwrap().to_string(), "2026-03-08 23:50");
        assert_eq!(moment("2026-03-07 10:00", now).unwrap().to_string(), "2026-03-07 10:00");
        assert!(moment("25:00", now).is_err());
    }
}
