//! As written, as read.

use super::*;
use crate::case::entry::{Aim, Airway, Control, FlowPattern, Sex, TrialOutcome, TrialSupport};
use crate::case::file;
use crate::case::settings::{InForce, Timing};
use crate::case::slots::entry_value;
use crate::quantity::input::{INPUTS, Key};

fn built_in(name: &str) -> Result<Profile, String> {
    file::profile(name, None)
}

fn record(text: &str) -> Record {
    match case(text.as_bytes(), &built_in) {
        Ok((record, _)) => record,
        Err(problems) => panic!("{problems:#?}"),
    }
}

fn said(text: &str) -> Vec<String> {
    case(text.as_bytes(), &built_in)
        .map_or_else(|all| all.into_iter().map(|one| one.message).collect(), |_| Vec::new())
}

/// Every key there is; one of the three timings, and no contradiction.
const EVERY_KEY: &str = r#"
format = 1
label = "Bay 3"
profile = "obstructed"
steadiness = "settled"

[patient]
sex = "female"
height = "5 ft 4 in"
weight = "180 lb"
age = 61
airway = "tracheostomy"
predicted_weight = "54 kg"
barometric_pressure = "100 kPa"

[[entry]]
at = 2026-03-04T08:10:00+01:00
by = "RT"

[entry.settings]
control = "volume"
rate = 22
tidal_volume = "0.38 L"
peep = "12 mbar"
fio2 = "60 %"
flow = "50 L/min"
pause = "0.2 s"
flow_pattern = "decelerating"
apparatus_dead_space = 45

[entry.measured]
total_rate = 22
exhaled_tidal_volume = 372
minute_ventilation = 8.2
plateau = 27
peak = 38
total_peep = 14
auto_peep = 2
mean_airway_pressure = 16
compliance = 25
resistance = 14
expiratory_resistance = 18
circuit_compliance = 1.5
end_tidal_co2 = 38
mixed_expired_co2 = 21
dead_space_fraction = 0.62
co2_production = 190
temperature = "100.4 °F"
spo2 = 0.93

[entry.gas]
drawn_at = 2026-03-04T08:05:00+01:00
ph = 7.24
paco2 = "8,4 kPa"
pao2 = 71
bicarbonate = 26.1

[entry.weaning]
spontaneous_rate = 24
spontaneous_tidal_volume = 310
inspiratory_pressure_max = -28
vital_capacity = 720
occlusion_pressure = 2.9
spo2_fraction_on = 0.4
heart_rate = 102
systolic_pressure = 138

[entry.trial]
support = "t-piece"
started_at = 2026-03-04T09:00:00+01:00
outcome = "passed"
[[entry.trial.observation]]
minute = 10
rate = 24
tidal_volume = 340
heart_rate = 102
systolic_pressure = 138
spo2 = 0.95
[[entry.trial.observation]]
minute = 30
rate = 26

[entry.plan]
target_paco2 = 50
aim = "rate"
rate = 28
tidal_volume = 380
forecast_paco2 = 51.2
expected_paco2 = 50.8
half_interval = [46.8, 55.2]
wide_interval = [38.0, "66.9 mmHg"]
settle_minutes = 30

[entry.note]
text = """two
lines"""
"#;

#[test]
fn every_key_of_the_contract_is_read_and_kept() {
    let record = record(EVERY_KEY);
    assert_eq!((record.label(), record.profile().name.as_str()), ("Bay 3", "obstructed"));
    assert_eq!(record.steadiness(), Steadiness::Settled);
    let patient = record.patient();
    assert_eq!((patient.sex, patient.airway), (Some(Sex::Female), Some(Airway::Tracheostomy)));
    let [entry] = record.entries() else { panic!("one entry") };
    assert_eq!(entry.by.as_deref(), Some("RT"));
    assert_eq!(entry.settings.control, Some(Control::Volume));
    assert_eq!(entry.settings.flow_pattern, Some(FlowPattern::Decelerating));
    for input in
        INPUTS.iter().filter(|input| ["settings", "measured", "gas", "weaning"].contains(&input.table))
    {
        let other_timing = [Key::InspiratoryTime, Key::Ratio, Key::InspiratoryPressure].contains(&input.key);
        assert_eq!(entry_value(entry, input.key).is_none(), other_timing, "{}", input.name);
    }
    // 8.4 kPa by the definition of the torr; 12 mbar by that of the centimetre of water.
    assert!((entry.gas.paco2_mmhg.unwrap() - 63.005).abs() < 0.001);
    assert!((entry.settings.peep_cmh2o.unwrap() - 12.2366).abs() < 0.0001);
    assert_eq!(entry.settings.tidal_volume_ml, Some(380.0));
    assert_eq!(entry.gas.drawn_at.unwrap().minutes_since(entry.at.unwrap()).round().to_string(), "-5");
    let trial = entry.trial.as_ref().unwrap();
    assert_eq!((trial.support, trial.outcome), (Some(TrialSupport::TPiece), Some(TrialOutcome::Passed)));
    assert_eq!(trial.observations.len(), 2);
    assert_eq!(trial.observations[0].tidal_volume_ml, Some(340.0));
    let plan = entry.plan.as_ref().unwrap();
    assert_eq!((plan.aim, plan.wide_interval_mmhg), (Some(Aim::Rate), Some([38.0, 66.9])));
    assert_eq!(entry.text.as_deref(), Some("two\nlines"));
    let InForce::Mandatory(settings) = record.occasions()[0].in_force else { panic!("not complete") };
    assert_eq!(settings.timing, Timing::Flow(50.0));
    assert_eq!(record.occasions()[0].drawn_at(), entry.gas.drawn_at);
}

#[test]
fn a_time_keeps_the_offset_it_was_written_with() {
    let record = record("format = 1\n[[entry]]\nat = 2026-03-04 08:10:00-05:30\n");
    let at = record.occasions()[0].at.unwrap();
    assert_eq!(at.offset.seconds(), -(5 * 3600 + 1800));
    assert_eq!(at.instant.to_string(), "2026-03-04T13:40:00Z");
}

#[test]
fn amends_may_stand_under_the_entry_or_under_its_note() {
    let text = |amends: &str| {
        format!(
            "format = 1\n[[entry]]\nat = 2026-03-04T08:10:00Z\n[entry.gas]\npaco2 = 63\n\
             [[entry]]\nat = 2026-03-04T09:10:00Z\n{amends}\n"
        )
    };
    for amends in ["amends = 1\n[entry.gas]\npaco2 = 65", "[entry.gas]\npaco2 = 65\n[entry.note]\namends = 1"]
    {
        let record = record(&text(amends));
        assert_eq!(record.occasions().len(), 1);
        assert_eq!(record.occasions()[0].entry.gas.paco2_mmhg, Some(65.0));
    }
    assert_eq!(
        said(&text("amends = 1\n[entry.note]\namends = 2")),
        ["this entry amends entry 2 here and entry 1 elsewhere"]
    );
}

#[test]
fn what_follows_only_from_an_unreadable_value_is_not_said() {
    // PEEP is there, only not understood: no word of a missing PEEP, none of a plateau below it.
    assert_eq!(
        said("format = 1\n[[entry]]\n[entry.settings]\npeep = \"ten\"\n[entry.measured]\nplateau = 27\n"),
        ["set PEEP: \"ten\" is not a number"]
    );
    // The second rate could not be read, so the total rate is not held against the first.
    assert_eq!(
        said(
            "format = 1\n[[entry]]\nat = 2026-03-04T08:10:00Z\n[entry.settings]\ncontrol = \"volume\"\nrate = 30\n\
             [[entry]]\nat = 2026-03-04T09:10:00Z\n[entry.settings]\nrate = \"2O\"\n[entry.measured]\ntotal_rate = 20\n"
        ),
        ["set rate: \"O\" is not a unit of rate"]
    );
}

#[test]
fn one_entry_is_read_with_or_without_its_header() {
    let (entry, spans) = fragment(b"[gas]\npaco2 = 52\n", 3).unwrap();
    assert_eq!(entry.gas.paco2_mmhg, Some(52.0));
    assert_eq!(spans.of(Place::in_entry(3, "gas", "paco2")), Some(14..16));
    let (entry, _) = fragment(b"[[entry]]\nby = \"RT\"\n[entry.gas]\npaco2 = 52\n", 3).unwrap();
    assert_eq!((entry.by.as_deref(), entry.gas.paco2_mmhg), (Some("RT"), Some(52.0)));
    let two = fragment(b"[[entry]]\n[[entry]]\n", 3).unwrap_err();
    assert_eq!(two[0].message, "this must be one entry");
    assert_eq!(fragment(b"", 3).unwrap_err()[0].message, "there is nothing to chart");
}

#[test]
fn several_entries_are_read_and_nothing_beside_them() {
    let (entries, spans) =
        fragments(b"[[entry]]\n[entry.gas]\npaco2 = 52\n[[entry]]\nby = \"RT\"\n", 3).unwrap();
    assert_eq!((entries.len(), entries[1].by.as_deref()), (2, Some("RT")));
    assert_eq!(spans.of(Place::in_entry(3, "gas", "paco2")), Some(30..32));
    assert!(spans.of(Place::in_entry(4, "", "by")).is_some());
    let beside = fragments(b"label = \"Bay 4\"\n[[entry]]\nby = \"RT\"\n", 3).unwrap_err();
    assert_eq!(beside[0].message, "label stands beside [[entry]], and only entries can be added to a file");
    assert_eq!(fragments(b"entry = []\n", 3).unwrap_err()[0].message, "there is nothing to chart");
}

#[test]
fn a_profile_is_told_from_a_case_by_its_keys() {
    for preset in &crate::case::presets::PROFILES {
        assert_eq!(kind(preset.text.as_bytes()), Kind::Profile, "{}", preset.name);
    }
    for preset in &crate::case::presets::CASES {
        assert_eq!(kind(preset.text.as_bytes()), Kind::Case, "{}", preset.name);
    }
}

#[test]
fn a_profile_keeps_limits_in_the_order_they_are_shown_and_its_own_steadiness() {
    let text = "format = 1\nname = \"ours\"\n[target]\npaco2 = [\"5 kPa\", 45]\n[limits.rate]\nmax = 30\n\
                [limits.plateau]\nmax = \"3 kPa\"\n[steps]\nrate = 2\n\
                [steadiness]\ngas = 0.1\nwander_per_hour = 0.02\nchange = 0.5\nsource = \"ours\"\n";
    let profile = profile(text.as_bytes()).unwrap();
    let order: Vec<_> = profile.limits.iter().map(|limit| limit.id.key()).collect();
    assert_eq!(order, ["plateau", "rate"]);
    // 3 kPa by the definition of the conventional centimetre of water: 3000/98.0665.
    assert!((profile.limits[0].max.unwrap() - 30.5915).abs() < 0.0001);
    assert_eq!(Some(profile.steps.rate_per_min), Some(2.0));
    assert_eq!(
        profile.steadiness.map(|(figures, source)| (Some(figures.gas), source)),
        Some((Some(0.1), "ours".to_owned()))
    );
}
