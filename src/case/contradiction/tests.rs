//! One entry under volume or pressure control, one thing changed, the fault.

use crate::case::entry::{Control, Entry, Patient};
use crate::case::fault::Fault;
use crate::case::moment::Moment;
use crate::case::profile::{Band, Profile, Steps};
use crate::case::record::{Draft, Record, Steadiness};
use jiff::{Timestamp, tz::Offset};

fn check(entry: Entry) -> Vec<Fault> {
    let profile = Profile {
        name: "none".to_owned(),
        summary: String::new(),
        target: Band::Paco2([35.0, 45.0]),
        limits: Vec::new(),
        steps: Steps::default(),
        steadiness: None,
    };
    let draft = Draft {
        label: None,
        profile,
        steadiness: Steadiness::Usual,
        patient: Patient::default(),
        entries: vec![entry],
    };
    Record::check(draft).err().unwrap_or_default()
}

fn volume() -> Entry {
    let mut entry = Entry::default();
    entry.settings.control = Some(Control::Volume);
    entry.settings.rate_per_min = Some(20.0);
    entry.settings.tidal_volume_ml = Some(400.0);
    entry.settings.peep_cmh2o = Some(8.0);
    entry.gas.paco2_mmhg = Some(60.0);
    entry
}

fn pressure() -> Entry {
    let mut entry = volume();
    entry.settings.control = Some(Control::Pressure);
    entry.settings.tidal_volume_ml = None;
    entry.settings.inspiratory_pressure_cmh2o = Some(14.0);
    entry
}

fn says(mut entry: Entry, change: impl Fn(&mut Entry)) -> String {
    change(&mut entry);
    match check(entry).as_slice() {
        [] => String::new(),
        [only] => only.message.clone(),
        more => panic!("{} faults, not one: {more:?}", more.len()),
    }
}

#[test]
fn rates() {
    assert_eq!(says(volume(), |it| it.measured.total_rate_per_min = Some(19.0)), "");
    assert_eq!(
        says(volume(), |it| it.measured.total_rate_per_min = Some(18.9)),
        "the total rate, 18.9/min, is below the set rate, 20/min"
    );
    // Support has no set rate in force.
    assert_eq!(
        says(pressure(), |it| {
            it.settings.control = Some(Control::Support);
            it.measured.total_rate_per_min = Some(12.0);
        }),
        ""
    );
}

#[test]
fn pressures() {
    assert_eq!(
        says(volume(), |it| it.measured.plateau_cmh2o = Some(8.0)),
        "the plateau, 8 cmH2O, is not above the set PEEP, 8 cmH2O"
    );
    assert_eq!(says(volume(), |it| it.measured.plateau_cmh2o = Some(8.5)), "");
    assert_eq!(
        says(volume(), |it| {
            it.measured.plateau_cmh2o = Some(20.0);
            it.measured.auto_peep_cmh2o = Some(12.0);
        }),
        "the plateau, 20 cmH2O, is not above the total PEEP, 20 cmH2O"
    );
    assert_eq!(
        says(volume(), |it| {
            it.measured.plateau_cmh2o = Some(25.0);
            it.measured.peak_cmh2o = Some(24.0);
        }),
        "the peak, 24 cmH2O, is below the plateau, 25 cmH2O"
    );
    assert_eq!(says(volume(), |it| it.measured.total_peep_cmh2o = Some(7.5)), "");
    assert_eq!(
        says(volume(), |it| it.measured.total_peep_cmh2o = Some(7.0)),
        "the total PEEP, 7 cmH2O, is below the set PEEP, 8 cmH2O"
    );
    assert_eq!(
        says(volume(), |it| {
            it.measured.total_peep_cmh2o = Some(12.0);
            it.measured.auto_peep_cmh2o = Some(2.5);
        }),
        "set PEEP 8 cmH2O plus auto-PEEP 2.5 cmH2O make 10.5 cmH2O, but the total PEEP is given as 12 cmH2O"
    );
    assert_eq!(says(pressure(), |it| it.measured.plateau_cmh2o = Some(23.0)), "");
    assert_eq!(
        says(pressure(), |it| it.measured.plateau_cmh2o = Some(23.5)),
        "the plateau, 23.5 cmH2O, is above what pressure control can reach: PEEP 8 cmH2O plus 14 cmH2O make 22 cmH2O"
    );
}

#[test]
fn gases() {
    // 1.15·60 = 69.
    assert_eq!(says(volume(), |it| it.measured.end_tidal_co2_mmhg = Some(69.0)), "");
    assert_eq!(
        says(volume(), |it| it.measured.end_tidal_co2_mmhg = Some(70.0)),
        "the end-tidal PCO2, 70 mmHg, is more than 15 % above the PaCO2, 60 mmHg"
    );
    // At 40 °C: 60·10^(0.019·3) = 68.4, and 1.15 of that 78.7.
    assert_eq!(
        says(volume(), |it| {
            it.measured.end_tidal_co2_mmhg = Some(78.0);
            it.measured.temperature_c = Some(40.0);
        }),
        ""
    );
    assert_eq!(
        says(volume(), |it| {
            it.measured.end_tidal_co2_mmhg = Some(79.0);
            it.measured.temperature_c = Some(40.0);
        }),
        "the end-tidal PCO2, 79 mmHg, is more than 15 % above the PaCO2, 60 mmHg (68 mmHg at 40 °C)"
    );
    assert_eq!(
        says(volume(), |it| it.measured.mixed_expired_co2_mmhg = Some(60.0)),
        "the mixed expired PCO2, 60 mmHg, is not below the PaCO2, 60 mmHg: there would be no dead space at all"
    );
}

#[test]
fn times_and_volumes() {
    // 20/min is 3 s a breath.
    assert_eq!(says(volume(), |it| it.settings.inspiratory_time_s = Some(2.8)), "");
    assert_eq!(
        says(volume(), |it| it.settings.inspiratory_time_s = Some(2.95)),
        "an inspiratory time of 2.95 s at 20/min, 3 s a breath, leaves 0.05 s to breathe out"
    );
    // 1:2 of 3 s is 1 s; at a total of 60/min nothing is left.
    assert_eq!(
        says(volume(), |it| it.measured.total_rate_per_min = Some(60.0)),
        "an inspiratory time of 1 s (I:E 1:2 taken, since nothing times inspiration) at 60/min, 1 s a breath, leaves no time to breathe out"
    );
    assert_eq!(
        says(volume(), |it| {
            it.settings.inspiratory_time_s = Some(0.9);
            it.settings.pause_s = Some(0.9);
        }),
        "a pause of 0.9 s leaves no time for flow within an inspiratory time of 0.9 s"
    );
    assert_eq!(says(volume(), |it| it.settings.apparatus_dead_space_ml = Some(300.0)), "");
    assert_eq!(
        says(volume(), |it| {
            it.settings.apparatus_dead_space_ml = Some(300.0);
            it.measured.exhaled_tidal_volume_ml = Some(300.0);
        }),
        "the apparatus dead space, 300 mL, is not below the exhaled tidal volume, 300 mL: no fresh gas would pass it"
    );
}

#[test]
fn a_gas_drawn_after_the_day_of_its_entry() {
    let hour =
        |hour: i64| Moment { instant: Timestamp::from_second(hour * 3600).unwrap(), offset: Offset::UTC };
    assert_eq!(
        says(volume(), |it| {
            it.at = Some(hour(0));
            it.gas.drawn_at = Some(hour(24));
        }),
        ""
    );
    assert_eq!(
        says(volume(), |it| {
            it.at = Some(hour(0));
            it.gas.drawn_at = Some(hour(30));
        }),
        "the gas is said to be drawn 30 h after the entry that carries it"
    );
}

#[test]
fn what_follows_from_an_implausible_value_is_not_a_second_fault() {
    assert_eq!(
        says(volume(), |it| {
            it.settings.rate_per_min = Some(220.0);
            it.measured.total_rate_per_min = Some(22.0);
        }),
        "set rate of 220/min is above what is plausible, 4 to 60/min"
    );
}
