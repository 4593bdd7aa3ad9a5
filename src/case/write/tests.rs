use super::*;
use crate::case::entry::SettingsChange;
use crate::case::read;
use jiff::tz::Offset;

fn at(text: &str, minutes: i32) -> Moment {
    Moment { instant: text.parse().unwrap(), offset: Offset::from_seconds(minutes * 60).unwrap() }
}

/// Reads text back as entry 2 of a record.
fn read_back(text: &str) -> Entry {
    read::fragment(text.as_bytes(), 2).unwrap_or_else(|problems| panic!("{text}\n{problems:?}")).0
}

/// Every key of an entry.
fn full() -> Entry {
    let mut entry = Entry {
        at: Some(at("2026-03-04T07:10:00Z", 60)),
        by: Some("RT \"night\" \\ 2".to_owned()),
        text: Some("line one\nline two\t\"quoted\" = [not a table]\n[[entry]]".to_owned()),
        amends: Some(1),
        ..Entry::default()
    };
    for (step, slot) in (0..).zip(&ENTRY) {
        let input = slot.key.input();
        // Anywhere in the range, with digits that no rounding would keep.
        let share = f64::from(step % 7) / 7.0 + 0.05;
        *(slot.open)(&mut entry) = Some(input.min + (input.max - input.min) * share.min(1.0));
    }
    entry.settings.control = Some(Control::Volume);
    entry.settings.flow_pattern = Some(FlowPattern::Decelerating);
    entry.gas.drawn_at = Some(at("2026-03-04T07:05:30.5Z", -210));
    entry.trial = Some(BreathingTrial {
        support: Some(TrialSupport::Pressure(5.5)),
        started_at: Some(at("2026-03-04T09:00:00Z", 0)),
        outcome: Some(TrialOutcome::Stopped),
        observations: vec![
            Observation { minute: 0.0, rate_per_min: Some(24.0), ..Observation::default() },
            Observation { minute: 2.5, spo2: Some(0.95), ..Observation::default() },
        ],
    });
    entry.plan = Some(ChartedPlan {
        target_paco2_mmhg: Some(50.0),
        aim: Some(Aim::Gentle),
        rate_per_min: Some(28.0),
        tidal_volume_ml: Some(330.0),
        half_interval_mmhg: Some([44.7, 53.4]),
        wide_interval_mmhg: Some([36.8, 64.9]),
        settle_minutes: Some(5.1),
        ..ChartedPlan::default()
    });
    entry
}

#[test]
fn an_entry_with_every_key_reads_back_to_the_last_bit() {
    let entry = full();
    assert_eq!(read_back(&super::entry(&entry)), entry);
}

#[test]
fn an_empty_entry_is_a_header() {
    assert_eq!(super::entry(&Entry::default()), "[[entry]]\n");
}

#[test]
fn a_plain_entry_reads_like_one_that_a_person_typed() {
    let mut entry = Entry { at: Some(at("2026-03-04T07:10:00Z", 60)), ..Entry::default() };
    entry.by = Some("RT".to_owned());
    entry.settings =
        SettingsChange { ratio: Some(2.0), rate_per_min: Some(22.0), ..SettingsChange::default() };
    entry.settings.control = Some(Control::Volume);
    entry.gas.ph = Some(7.3);
    entry.text = Some("turned prone".to_owned());
    let expected = "[[entry]]\nat = 2026-03-04T08:10:00+01:00\nby = \"RT\"\n\n[entry.settings]\ncontrol = \"volume\"\n\
                    rate = 22\nratio = \"1:2\"\n\n[entry.gas]\nph = 7.3\n\n[entry.note]\ntext = \"turned prone\"\n";
    assert_eq!(super::entry(&entry), expected);
}

#[test]
fn ratios_read_back_whichever_way_round_they_are() {
    for expiration in [0.2, 1.0 / 3.0, 0.5, 0.7, 1.0, 1.5, 2.0, 2.0 / 0.7, 10.0] {
        let mut entry = Entry::default();
        entry.settings.ratio = Some(expiration);
        let back = read_back(&super::entry(&entry)).settings.ratio;
        assert_eq!(back.map(f64::to_bits), Some(expiration.to_bits()), "{}", super::entry(&entry));
    }
    assert_eq!(number(0.5, Dimension::Ratio), "\"2:1\"");
}

#[test]
fn offsets_keep_their_sign_and_the_instant() {
    assert_eq!(moment(at("2026-03-04T07:10:00Z", -30)), "2026-03-04T06:40:00-00:30");
    assert_eq!(moment(at("2026-03-04T07:10:00Z", 345)), "2026-03-04T12:55:00+05:45");
    assert_eq!(moment(at("2026-03-04T07:10:00.25Z", 0)), "2026-03-04T07:10:00.25+00:00");
}

#[test]
fn no_text_can_leave_its_quotation_marks() {
    assert_eq!(quoted("a\"\\\n\r\t\u{1b}[2J\u{7f}"), r#""a\"\\\n\r\t\u001B[2J\u007F""#);
}
