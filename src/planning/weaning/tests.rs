use super::*;
use crate::case::entry::TrialOutcome;
use crate::case::{file, presets, read};

fn record(text: &str) -> Record {
    read::case(text.as_bytes(), &|name| file::profile(name, None)).unwrap_or_else(|it| panic!("{it:?}")).0
}

fn ready() -> String {
    presets::case("ready-to-wean").unwrap().text.to_owned()
}

fn verdict(assessment: &Assessment, id: &str) -> Verdict {
    assessment.criteria.iter().find(|it| it.id == id).unwrap().verdict
}

#[test]
fn the_built_in_case_is_ready_by_every_criterion() {
    let assessment = assess(&record(&ready())).unwrap();
    assert_eq!((assessment.count(Verdict::Met), assessment.criteria.len()), (9, 9));
    let value = |id: &str| assessment.indices.iter().find(|it| it.id == id).unwrap().value.unwrap();
    // By hand: 23/0.350 = 65.714; static compliance 396/(16 − 6) = 39.6, so 39.6·96/65.714 = 57.850.
    assert!((value("rapid_shallow_breathing_index") - 65.714).abs() < 0.001);
    assert!((value("integrative_index") - 57.850).abs() < 0.001);
    // By hand: 1600 m is 760·(1 − 2.25577e-5·1600)^5.25588 = 626.43 mmHg; PAO2 = 0.35·(626.43 − 47) − 40·(0.35 + 0.65/0.8)
    // = 156.30; dynamic compliance 396/(23 − 6) = 23.294; 23.294·32·(82/156.30)/23 = 17.003.
    assert!((value("crop_index") - 17.003).abs() < 0.01, "{}", value("crop_index"));
    // By hand: predicted 45.5 + 0.91·(167 − 152.4) = 58.786 kg; 20·395·40/(58.786·3750) = 1.4334.
    assert!((value("ventilatory_ratio") - 1.4334).abs() < 0.0005);
}

#[test]
fn what_was_not_recorded_is_neither_met_nor_unmet() {
    let text = ready();
    let text = text.replace(
        "heart_rate = 92\nsystolic_pressure = 128\n\n[[entry]]\nat = 2026-03-27T09:40",
        "\n[[entry]]\nat = 2026-03-27T09:40",
    );
    let text = text.replace("vital_capacity = 860\n", "").replace("spontaneous_tidal_volume = 350\n", "");
    let assessment = assess(&record(&text)).unwrap();
    for id in ["heart_rate", "systolic_pressure", "vital_capacity_per_kg", "rapid_shallow_breathing_index"] {
        assert_eq!(verdict(&assessment, id), Verdict::NotRecorded, "{id}");
    }
    assert_eq!(verdict(&assessment, "rate"), Verdict::Met);
}

#[test]
fn bounds_are_strict_where_the_publication_is() {
    let with = |key: &str, value: &str| {
        let text = ready().replacen("[entry.weaning]\n", &format!("[entry.weaning]\n{key} = {value}\n"), 1);
        let line = text
            .lines()
            .rfind(|line| line.starts_with(&format!("{key} = ")) && !line.ends_with(&format!("= {value}")));
        let text = line.map_or_else(|| text.clone(), |line| text.replacen(&format!("{line}\n"), "", 1));
        assess(&record(&text)).unwrap()
    };
    // 105/min/L exactly is not below 105; 35/min is at most 35; −20 cmH2O is −20 or lower.
    let index = with("spontaneous_rate", "36.75");
    assert_eq!(verdict(&index, "rapid_shallow_breathing_index"), Verdict::NotMet);
    assert_eq!(verdict(&with("spontaneous_rate", "35"), "rate"), Verdict::Met);
    assert_eq!(verdict(&with("spontaneous_rate", "35.1"), "rate"), Verdict::NotMet);
    assert_eq!(verdict(&with("inspiratory_pressure_max", "-20"), "inspiratory_pressure_max"), Verdict::Met);
    assert_eq!(
        verdict(&with("inspiratory_pressure_max", "-19"), "inspiratory_pressure_max"),
        Verdict::NotMet
    );
}

#[test]
fn oxygenation_holds_by_either_way_and_is_open_when_one_fails_and_one_is_missing() {
    let low =
        ready().replacen("spo2 = 0.96\n\n[entry.gas]\nph = 7.41", "spo2 = 0.90\n\n[entry.gas]\nph = 7.41", 1);
    // PaO2/FiO2 = 82/0.35 = 234 still holds.
    assert_eq!(verdict(&assess(&record(&low)).unwrap(), "oxygenation"), Verdict::Met);
    let neither = low.replace("pao2 = 82", "pao2 = 50").replace("pao2 = 84\n", "");
    assert_eq!(verdict(&assess(&record(&neither)).unwrap(), "oxygenation"), Verdict::NotMet);
    let open = low.replace("pao2 = 82\n", "").replace("pao2 = 84\n", "");
    assert_eq!(verdict(&assess(&record(&open)).unwrap(), "oxygenation"), Verdict::NotRecorded);
}

fn row<'t>(trial: &'t TrialCourse, id: &str) -> &'t StopRow {
    trial.criteria.iter().find(|it| it.id == id).unwrap()
}

#[test]
fn the_trial_of_the_built_in_case_crosses_nothing() {
    let trials = trials(&record(&ready()));
    assert_eq!(trials.len(), 1);
    let trial = &trials[0];
    assert_eq!((trial.outcome, trial.crossed().count()), (Some(TrialOutcome::Passed), 0));
    assert_eq!(row(trial, "rate_rise").verdict, StopVerdict::NotCrossed);
    // No gas was drawn during it.
    assert_eq!(row(trial, "paco2").verdict, StopVerdict::NotRecorded);
}

const TRIAL: &str = "format = 1\n[[entry]]\nat = 2026-03-04T08:00:00Z\n[entry.gas]\npaco2 = 42\nph = 7.40\n\
    [[entry]]\nat = 2026-03-04T09:00:00Z\n[entry.trial]\nsupport = \"t-piece\"\nstarted_at = 2026-03-04T09:00:00Z\noutcome = \"running\"\n\
    [[entry.trial.observation]]\nminute = 0\nrate = 20\nheart_rate = 90\nsystolic_pressure = 120\n";

fn later(minute: u32, keys: &str) -> String {
    format!(
        "[[entry]]\nat = 2026-03-04T09:{minute}:00Z\n[entry.trial]\n[[entry.trial.observation]]\nminute = {minute}\n{keys}"
    )
}

#[test]
fn entries_without_a_start_belong_to_the_running_trial_and_later_ones_to_none() {
    let end = "[[entry]]\nat = 2026-03-04T09:40:00Z\n[entry.trial]\noutcome = \"failed\"\n";
    let text = format!("{TRIAL}{}{end}", later(10, "rate = 24\n"));
    let one = trials(&record(&text));
    assert_eq!((one.len(), one[0].entries.as_slice()), (1, [2, 3, 4].as_slice()));
    assert_eq!((one[0].outcome, one[0].observations.len()), (Some(TrialOutcome::Failed), 2));
    let two = trials(&record(&format!("{text}{}", later(50, "rate = 24\n"))));
    assert_eq!(two.len(), 2);
}

#[test]
fn rises_are_counted_from_the_start_and_named_with_their_minute() {
    let text = format!(
        "{TRIAL}{}{}",
        later(10, "rate = 30\nheart_rate = 108\nsystolic_pressure = 144\n"),
        later(20, "rate = 31\nheart_rate = 109\nsystolic_pressure = 145\ntidal_volume = 280\nspo2 = 0.89\n")
    );
    let trials = trials(&record(&text));
    let crossed: Vec<_> = trials[0].crossed().map(|(row, it)| (row.id, it.minute, it.from)).collect();
    // Exactly +50 % (30 of 20) and +20 % (108 of 90, 144 of 120) are not above; 31/0.28 = 110.7 is.
    assert_eq!(
        crossed,
        [
            ("rate_rise", Some(20.0), Some(20.0)),
            ("rapid_shallow_breathing_index", Some(20.0), None),
            ("saturation", Some(20.0), None),
            ("heart_rate_rise", Some(20.0), Some(90.0)),
            ("systolic_pressure_rise", Some(20.0), Some(120.0)),
        ]
    );
}

#[test]
fn a_rise_without_a_start_is_not_recorded() {
    let text = TRIAL.replace("minute = 0\nrate = 20\n", "minute = 5\nrate = 20\n");
    let trials = trials(&record(&text));
    assert_eq!(row(&trials[0], "rate_rise").verdict, StopVerdict::NotRecorded);
    assert_eq!(row(&trials[0], "rate").verdict, StopVerdict::NotCrossed);
}

#[test]
fn a_gas_during_the_trial_is_held_against_the_one_before() {
    let gas = "[[entry]]\nat = 2026-03-04T09:30:00Z\n[entry.gas]\npaco2 = 50.5\nph = 7.33\n";
    let text = format!("{TRIAL}{}{gas}", later(30, "rate = 24\n"));
    let trials = trials(&record(&text));
    let crossed: Vec<_> = trials[0].crossed().map(|(row, it)| (row.id, it.value)).collect();
    // 50.5 is above 50 and 8.5 above 42; 7.33 is not below 7.32 but 0.07 down from 7.40.
    assert_eq!(crossed, [("paco2", 50.5), ("paco2_rise", 50.5), ("ph_fall", 7.33)]);
}

#[test]
fn the_trend_holds_every_occasion_with_weaning_measures() {
    let trend = trend(&record(&ready()));
    assert_eq!(trend.len(), 1);
    assert_eq!((trend[0].rate_per_min, trend[0].paco2_mmhg), (Some(23.0), Some(40.0)));
}
