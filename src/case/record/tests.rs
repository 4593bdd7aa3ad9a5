//! Before, what is charted, after.

use jiff::{Timestamp, tz::Offset};

use super::*;
use crate::case::entry::{Control, FlowPattern, SettingsChange};
use crate::case::profile::{Band, Steps};
use crate::case::settings::{Inflation, Settings, Timing};

fn profile() -> Profile {
    let target = Band::Paco2([35.0, 45.0]);
    Profile {
        name: "none".to_owned(),
        summary: String::new(),
        target,
        limits: Vec::new(),
        steps: Steps::default(),
        steadiness: None,
    }
}

fn draft(entries: Vec<Entry>) -> Draft {
    Draft {
        label: None,
        profile: profile(),
        steadiness: Steadiness::Usual,
        patient: Patient::default(),
        entries,
    }
}

fn minute(minute: i64) -> Moment {
    Moment { instant: Timestamp::from_second(minute * 60).unwrap(), offset: Offset::UTC }
}

fn volume() -> SettingsChange {
    SettingsChange {
        control: Some(Control::Volume),
        rate_per_min: Some(20.0),
        tidal_volume_ml: Some(450.0),
        peep_cmh2o: Some(8.0),
        ..SettingsChange::default()
    }
}

fn entry(at: i64, settings: SettingsChange) -> Entry {
    Entry { at: Some(minute(at)), settings, ..Entry::default() }
}

fn in_force(record: &Record, index: usize) -> &Settings {
    record.occasions()[index].in_force.mandatory().unwrap()
}

fn faults(entries: Vec<Entry>) -> Vec<String> {
    Record::check(draft(entries)).unwrap_err().into_iter().map(|fault| fault.message).collect()
}

#[test]
fn defaults_are_assumed_and_say_so() {
    let record = Record::check(draft(vec![entry(0, volume())])).unwrap();
    let settings = in_force(&record, 0);
    assert_eq!((settings.timing, settings.timing_assumed), (Timing::Ratio(2.0), true));
    assert!(settings.apparatus_assumed && settings.apparatus_dead_space_ml.abs() < f64::EPSILON);
}

#[test]
fn an_entry_inherits_what_it_does_not_repeat_and_a_timing_key_replaces_the_held_one() {
    let first = SettingsChange { flow_l_min: Some(60.0), apparatus_dead_space_ml: Some(30.0), ..volume() };
    let second = SettingsChange { rate_per_min: Some(24.0), ..SettingsChange::default() };
    let third = SettingsChange { ratio: Some(3.0), ..SettingsChange::default() };
    let record = Record::check(draft(vec![entry(0, first), entry(1, second), entry(2, third)])).unwrap();
    assert_eq!(in_force(&record, 1).timing, Timing::Flow(60.0));
    assert_eq!(Some(in_force(&record, 1).rate_per_min), Some(24.0));
    assert_eq!(in_force(&record, 2).timing, Timing::Ratio(3.0));
    assert_eq!(Some(in_force(&record, 2).apparatus_dead_space_ml), Some(30.0));
    assert!(!in_force(&record, 2).apparatus_assumed);
}

#[test]
fn under_pressure_control_a_held_flow_becomes_its_inspiratory_time() {
    // By hand: 450 mL at 60 L/min is 0.45 s, and 0.2 s of pause: 0.65 s.
    let first = SettingsChange {
        flow_l_min: Some(60.0),
        pause_s: Some(0.2),
        flow_pattern: Some(FlowPattern::Decelerating),
        ..volume()
    };
    let second = SettingsChange {
        control: Some(Control::Pressure),
        inspiratory_pressure_cmh2o: Some(14.0),
        ..SettingsChange::default()
    };
    let back = SettingsChange { control: Some(Control::Volume), ..SettingsChange::default() };
    let record = Record::check(draft(vec![entry(0, first), entry(1, second), entry(2, back)])).unwrap();
    let Timing::InspiratoryTime(seconds) = in_force(&record, 1).timing else { panic!("not a time") };
    assert!((seconds - 0.65).abs() < 1e-12);
    assert_eq!(in_force(&record, 1).inflation, Inflation::Pressure { inspiratory_pressure_cmh2o: 14.0 });
    // Pause and pattern ended with the switch; the volume is the last one set.
    assert_eq!(
        in_force(&record, 2).inflation,
        Inflation::Volume { tidal_volume_ml: 450.0, pause_s: 0.0, flow_pattern: FlowPattern::Constant }
    );
}

#[test]
fn entries_are_put_in_order_of_time_before_anything_is_inherited() {
    let late = SettingsChange { rate_per_min: Some(28.0), ..SettingsChange::default() };
    let record = Record::check(draft(vec![entry(60, late), entry(0, volume())])).unwrap();
    let order: Vec<_> = record.occasions().iter().map(|occasion| occasion.number).collect();
    assert_eq!(order, [2, 1]);
    assert_eq!(Some(in_force(&record, 1).rate_per_min), Some(28.0));
}

#[test]
fn an_amending_entry_is_no_occasion_and_leaves_the_time_of_what_it_amends() {
    let mut amending = entry(90, SettingsChange { rate_per_min: Some(26.0), ..SettingsChange::default() });
    amending.amends = Some(1);
    let record = Record::check(draft(vec![entry(0, volume()), amending])).unwrap();
    assert_eq!(record.occasions().len(), 1);
    assert_eq!(record.entries().len(), 2);
    assert_eq!(record.occasions()[0].at, Some(minute(0)));
    assert_eq!(Some(in_force(&record, 0).rate_per_min), Some(26.0));
}

#[test]
fn control_is_inferred_or_missing() {
    let inferred = SettingsChange { control: None, ..volume() };
    let record = Record::check(draft(vec![entry(0, inferred)])).unwrap();
    assert_eq!(in_force(&record, 0).control(), Control::Volume);
    let bare = SettingsChange { rate_per_min: Some(20.0), ..SettingsChange::default() };
    let record = Record::check(draft(vec![entry(0, bare)])).unwrap();
    assert_eq!(record.occasions()[0].in_force, crate::case::settings::InForce::Missing("control"));
}

#[test]
fn what_the_control_in_force_does_not_have_is_refused() {
    let wrong = SettingsChange {
        control: Some(Control::Pressure),
        inspiratory_pressure_cmh2o: Some(14.0),
        flow_l_min: Some(50.0),
        pause_s: Some(0.2),
        flow_pattern: Some(FlowPattern::Constant),
        ..volume()
    };
    // `volume()` is spread after, so the control named above is the one that stands.
    assert_eq!(
        faults(vec![entry(0, wrong)]),
        [
            "tidal_volume is set, but the control in force is pressure",
            "flow is set, but the control in force is pressure",
            "pause is set, but the control in force is pressure",
            "flow_pattern is set, but the control in force is pressure",
        ]
    );
    let wrong = SettingsChange { inspiratory_pressure_cmh2o: Some(14.0), ..volume() };
    assert_eq!(
        faults(vec![entry(0, wrong)]),
        ["inspiratory_pressure is set, but the control in force is volume"]
    );
}

#[test]
fn an_airway_pressure_needs_a_peep_in_force() {
    let mut first = entry(0, SettingsChange { peep_cmh2o: None, ..volume() });
    assert!(Record::check(draft(vec![first.clone()])).is_ok());
    first.measured.plateau_cmh2o = Some(25.0);
    assert_eq!(faults(vec![first]), ["plateau is charted, and no PEEP is in force"]);
}

#[test]
fn two_entries_need_times_and_one_does_not() {
    let bare = Entry { settings: volume(), ..Entry::default() };
    assert!(Record::check(draft(vec![bare.clone()])).is_ok());
    assert_eq!(
        faults(vec![entry(0, volume()), bare]),
        ["entry 2 has no time, and a record of 2 entries needs one in each"]
    );
}

#[test]
fn two_timing_keys_and_two_ways_to_the_barometer_are_refused() {
    let both = SettingsChange { flow_l_min: Some(50.0), ratio: Some(2.0), ..volume() };
    let mut draft = draft(vec![entry(0, both)]);
    draft.patient.altitude_m = Some(1600.0);
    draft.patient.barometric_pressure_mmhg = Some(630.0);
    let said: Vec<_> = Record::check(draft).unwrap_err().into_iter().map(|fault| fault.message).collect();
    assert_eq!(
        said,
        [
            "barometric_pressure and altitude are both given, and one follows from the other",
            "flow and ratio are given together, and each of them fixes how long inspiration lasts",
        ]
    );
}
