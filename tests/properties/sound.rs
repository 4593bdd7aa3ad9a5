//! Everything accepted gives finite numbers, and none that cannot be.

use proptest::prelude::*;
use proptest::test_runner::TestRunner;
use serde_json::Value;
use tidewright::case::entry::Aim;
use tidewright::planning::plan::{Request, forecast, plan};
use tidewright::planning::target::Asked;
use tidewright::planning::trial::Trial;
use tidewright::quantity::input::Key;

use crate::bed::{Bed, Reach, bed, cases};

/// Numbers of an outcome that cannot be negative.
const NOT_NEGATIVE: [&str; 27] = [
    "rate_per_min",
    "tidal_volume_ml",
    "tidal_volume_ml_kg",
    "inspiratory_time_s",
    "expiratory_time_s",
    "minute_ventilation_l_min",
    "alveolar_ventilation_l_min",
    "apparatus_dead_space_ml",
    "series_dead_space_ml",
    "alveolar_dead_space_ml",
    "dead_space_fraction",
    "dead_space_loss_l_min",
    "paco2_mmhg",
    "paco2_expected_mmhg",
    "paco2_low_mmhg",
    "bicarbonate_mmol_l",
    "end_tidal_co2_mmhg",
    "auto_peep_cmh2o",
    "total_peep_cmh2o",
    "plateau_cmh2o",
    "peak_cmh2o",
    "driving_pressure_cmh2o",
    "mean_airway_pressure_cmh2o",
    "trapped_volume_ml",
    "expiratory_time_constants",
    "mechanical_power_j_min",
    "load_index",
];

/// JSON writes what is not finite as null, so the debugging text is looked through for it.
fn finite(shown: &str) -> bool {
    !shown.split(|letter: char| !letter.is_ascii_alphanumeric()).any(|word| word == "NaN" || word == "inf")
}

#[test]
fn the_search_for_what_is_not_finite_finds_it() {
    assert!(finite(&format!("{:?}", [Some(1.5), None])));
    assert!(!finite(&format!("{:?}", Some(f64::NAN))) && !finite(&format!("{:?}", -f64::INFINITY)));
}

fn sound(outcome: &Value, bed: &Bed) -> Result<(), TestCaseError> {
    let of = |name: &str| outcome[name].as_f64();
    for name in NOT_NEGATIVE {
        prop_assert!(outcome.get(name).is_some(), "{} is missing", name);
        prop_assert!(of(name).is_none_or(|value| value >= -1e-9), "{} = {:?}", name, of(name));
    }
    for name in ["rate_per_min", "tidal_volume_ml", "expiratory_time_s", "paco2_mmhg"] {
        prop_assert!(of(name).is_some_and(|value| value > 0.0), "{}", name);
    }
    prop_assert!(of("ph").is_none_or(|ph| (4.0..11.0).contains(&ph)), "pH {:?}", of("ph"));
    prop_assert!(of("chance_on_target").is_none_or(|chance| (0.0..=1.0).contains(&chance)));
    prop_assert!(of("dead_space_fraction").is_none_or(|fraction| fraction < 1.0));
    // Useful and wasted ventilation are the whole of it.
    if let (Some(useful), Some(wasted), Some(all)) =
        (of("alveolar_ventilation_l_min"), of("dead_space_loss_l_min"), of("minute_ventilation_l_min"))
    {
        prop_assert!((useful + wasted - all).abs() < 1e-9 * all, "{} + {} of {}", useful, wasted, all);
    }
    // Plateau is what total PEEP and the breath make of it; the peak lies above, the mean between.
    if let (Some(plateau), Some(total), Some(driving)) =
        (of("plateau_cmh2o"), of("total_peep_cmh2o"), of("driving_pressure_cmh2o"))
    {
        prop_assert!((plateau - total - driving).abs() < 1e-6, "{} {} {}", plateau, total, driving);
    }
    if let (Some(peak), Some(plateau), Some(mean)) =
        (of("peak_cmh2o"), of("plateau_cmh2o"), of("mean_airway_pressure_cmh2o"))
    {
        // In pressure control the airway stands at the peak all through inspiration, and alveoli may only near it. A plateau
        // read up to 1 cmH2O above is taken as it is, and a resistance too small to be read (a below 0.02) is taken as one
        // that leaves 2 % to fill, so a few per cent of slack. What is typed outright may contradict the volume
        // measured, of which a caution speaks.
        let typed = [Key::Compliance, Key::Resistance, Key::ExpiratoryResistance];
        let held_above = bed
            .of(Key::Plateau)
            .zip(bed.of(Key::InspiratoryPressure))
            .is_some_and(|(plateau, pressure)| plateau > bed.of(Key::Peep).unwrap_or(0.0) + pressure);
        let contradicted =
            !bed.in_volume_control() && (held_above || typed.iter().any(|key| bed.of(*key).is_some()));
        let slack = if bed.in_volume_control() { 1e-6 } else { 1.0 + 0.05 * peak };
        prop_assert!(
            contradicted || (peak >= plateau - slack && mean <= peak + 1e-9),
            "peak {}, plateau {}, mean {}\n{}",
            peak,
            plateau,
            mean,
            bed.text()
        );
    }
    Ok(())
}

fn answers_are_sound(bed: &Bed, asked: Asked, aims: &[Aim]) -> Result<bool, TestCaseError> {
    let Some(record) = bed.record() else { return Ok(false) };
    let request = Request { asked, aims: aims.to_vec(), ..Request::default() };
    // Refusals are tested elsewhere: here, whatever is answered must be sound.
    let Ok(answer) = plan(&record, &request) else { return Ok(false) };
    prop_assert!(finite(&format!("{answer:?}")), "{}\n{:?}", bed.text(), answer);
    let json = serde_json::to_value(&answer).unwrap();
    sound(&json["now"], bed)?;
    for line in json["plans"].as_array().unwrap() {
        sound(&line["forecast"], bed)?;
    }
    let trial = Trial { rate_per_min: Some(20.0), ..Trial::default() };
    if let Ok(answer) = forecast(&record, &trial, tidewright::planning::forecast::Held::Split) {
        prop_assert!(finite(&format!("{answer:?}")), "{}\n{:?}", bed.text(), answer);
        sound(&serde_json::to_value(&answer).unwrap()["trial"], bed)?;
    }
    Ok(true)
}

/// Over the whole ranges of the table of inputs; most draws contradict themselves, and the rest must be sound.
#[test]
fn whatever_is_accepted_gives_finite_numbers() {
    let accepted = std::cell::Cell::new(0);
    let mut runner = TestRunner::new(cases(3000));
    let outcome = runner.run(&(bed(Reach::Whole), 10.0_f64..150.0), |(bed, target)| {
        let answered = answers_are_sound(&bed, Asked::Paco2(target), &[Aim::Rate, Aim::Volume])?;
        accepted.set(accepted.get() + u32::from(answered));
        Ok(())
    });
    outcome.unwrap_or_else(|error| panic!("{error}"));
    assert!(accepted.get() > 300, "only {} of 3000 were accepted", accepted.get());
}

/// Where patients mostly are, with the gentlest pair.
#[test]
fn bedside_plans_are_finite_and_possible() {
    let accepted = std::cell::Cell::new(0);
    let mut runner = TestRunner::new(cases(150));
    let outcome = runner.run(&bed(Reach::Bedside), |bed| {
        let all = [Aim::Rate, Aim::Volume, Aim::Gentle];
        let answered = answers_are_sound(&bed, Asked::Profile, &all)?;
        accepted.set(accepted.get() + u32::from(answered));
        Ok(())
    });
    outcome.unwrap_or_else(|error| panic!("{error}"));
    assert!(accepted.get() > 45, "only {} of 150 were accepted", accepted.get());
}
