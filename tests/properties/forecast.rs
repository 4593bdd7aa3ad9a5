//! Directions and identities of a forecast.

use proptest::prelude::*;
use tidewright::case::entry::Control;
use tidewright::case::record::Record;
use tidewright::planning::forecast::Held;
use tidewright::planning::plan::{Forecast, forecast};
use tidewright::planning::trial::{Co2Trial, Trial};
use tidewright::quantity::input::Key;

use crate::bed::{Reach, bed, cases};

const READINGS: [Held; 3] = [Held::Split, Held::Volume, Held::Fraction];

fn of(record: &Record, trial: &Trial, held: Held) -> Option<Forecast> {
    forecast(record, trial, held).ok()
}

fn paco2(record: &Record, trial: &Trial, held: Held) -> Option<f64> {
    of(record, trial, held).map(|answer| answer.trial.state.paco2_mmhg)
}

/// Compares two trials under each reading of held dead space where both can be dialled; true when any could.
fn never_higher(record: &Record, more: &Trial, less: &Trial, text: &str) -> Result<bool, TestCaseError> {
    let mut compared = false;
    for held in READINGS {
        let (Some(more), Some(less)) = (paco2(record, more, held), paco2(record, less, held)) else {
            continue;
        };
        prop_assert!(
            more <= less * (1.0 + 1e-12),
            "{} with more, {} with less, {:?}\n{}",
            more,
            less,
            held,
            text
        );
        compared = true;
    }
    Ok(compared)
}

proptest! {
    #![proptest_config(cases(300))]

    /// The volume is delivered whatever the rate, so every further breath clears CO2.
    #[test]
    fn a_faster_rate_in_volume_control_never_raises_paco2(
        bed in bed(Reach::Bedside), rate in 6.0_f64..40.0, more in 0.5_f64..10.0,
    ) {
        prop_assume!(bed.in_volume_control());
        let Some(record) = bed.record() else { return Err(TestCaseError::reject("refused")) };
        let slow = Trial { rate_per_min: Some(rate), ..Trial::default() };
        let fast = Trial { rate_per_min: Some(rate + more), ..Trial::default() };
        prop_assume!(never_higher(&record, &fast, &slow, &bed.text())?);
    }

    #[test]
    fn a_larger_volume_never_raises_paco2(bed in bed(Reach::Bedside), volume in 200.0_f64..800.0, more in 5.0_f64..200.0) {
        let Some(record) = bed.record() else { return Err(TestCaseError::reject("refused")) };
        let (small, large) = if bed.in_volume_control() {
            let of = |ml| Trial { tidal_volume_ml: Some(ml), ..Trial::default() };
            (of(volume), of(volume + more))
        } else {
            // 200…800 mL as 4…30 cmH2O, and up to 8 more.
            let of = |cmh2o| Trial { inspiratory_pressure_cmh2o: Some(cmh2o), ..Trial::default() };
            let pressure = 4.0 + (volume - 200.0) / 600.0 * 26.0;
            (of(pressure), of(pressure + more / 25.0))
        };
        prop_assume!(never_higher(&record, &large, &small, &bed.text())?);
    }

    /// More apparatus is more dead space, in every reading; more CO2 made is more CO2 in the blood, in proportion.
    #[test]
    fn apparatus_and_co2_output_never_lower_paco2(
        bed in bed(Reach::Bedside), apparatus in 0.0_f64..80.0, more in 1.0_f64..40.0, factor in 1.01_f64..2.0,
    ) {
        let Some(record) = bed.record() else { return Err(TestCaseError::reject("refused")) };
        let of = |ml| Trial { apparatus_dead_space_ml: Some(ml), ..Trial::default() };
        let any = never_higher(&record, &of(apparatus), &of(apparatus + more), &bed.text())?;
        let hot = Trial { co2: Some(Co2Trial::Times(factor)), ..Trial::default() };
        for held in READINGS {
            let (Some(hot), Some(now)) = (paco2(&record, &hot, held), paco2(&record, &Trial::default(), held)) else { continue };
            prop_assert!((hot / now - factor).abs() < 1e-12 * factor);
        }
        prop_assume!(any);
    }

    /// Nothing changed is nothing forecast: the gas stands, to the last digit.
    #[test]
    fn unchanged_settings_give_the_measured_paco2(bed in bed(Reach::Bedside)) {
        let Some(record) = bed.record() else { return Err(TestCaseError::reject("refused")) };
        let measured = bed.of(Key::Paco2).unwrap();
        let mut any = false;
        for held in READINGS {
            let Some(answer) = of(&record, &Trial::default(), held) else { continue };
            prop_assert_eq!(answer.now.paco2_is, "measured");
            prop_assert_eq!(answer.now.outcome.state.paco2_mmhg, measured);
            let found = answer.trial.state.paco2_mmhg;
            prop_assert!(found == measured, "{} for {}\n{}", found, measured, bed.text());
            any = true;
        }
        prop_assume!(any);
    }

    /// A switch of control keeps the breath: the same volume, the same alveolar pressures, the same CO2. In the linear lung
    /// of one compartment what is trapped hangs on volume and time alone.
    #[test]
    fn pressure_and_volume_control_of_equal_breaths_agree(bed in bed(Reach::Bedside)) {
        let Some(record) = bed.record() else { return Err(TestCaseError::reject("refused")) };
        let other = if bed.in_volume_control() { Control::Pressure } else { Control::Volume };
        let switched = Trial { control: Some(other), ..Trial::default() };
        let (Some(kept), Some(switched)) = (
            of(&record, &Trial::default(), Held::Split),
            of(&record, &switched, Held::Split),
        ) else {
            return Err(TestCaseError::reject("not to be dialled"));
        };
        prop_assert!(kept.settings.control != switched.settings.control);
        let (kept, switched) = (kept.trial.state, switched.trial.state);
        prop_assert!((kept.tidal_volume_ml / switched.tidal_volume_ml - 1.0).abs() < 1e-9, "{}", bed.text());
        prop_assert!((kept.paco2_mmhg / switched.paco2_mmhg - 1.0).abs() < 1e-9, "{}", bed.text());
        // Where trapping is unknown under the one control (no inspiratory resistance), pressures count none.
        let known = kept.auto_peep_cmh2o.is_some() && switched.auto_peep_cmh2o.is_some();
        // Ti, and so Te, stays: a pause is part of Ti.
        prop_assert!((kept.expiratory_time_s - switched.expiratory_time_s).abs() < 1e-9, "{}", bed.text());
        if known {
            for (name, one, two) in [
                ("auto-PEEP", kept.auto_peep_cmh2o, switched.auto_peep_cmh2o),
                ("trapped volume", kept.trapped_volume_ml, switched.trapped_volume_ml),
                ("driving pressure", kept.driving_pressure_cmh2o, switched.driving_pressure_cmh2o),
                ("plateau", kept.plateau_cmh2o, switched.plateau_cmh2o),
            ] {
                if let (Some(one), Some(two)) = (one, two) {
                    prop_assert!((one - two).abs() < 1e-6, "{} {} {}\n{}", name, one, two, bed.text());
                }
            }
        }
    }

    /// The same input gives the same bits.
    #[test]
    fn asked_twice_answered_alike(bed in bed(Reach::Bedside), rate in 8.0_f64..30.0) {
        let Some(record) = bed.record() else { return Err(TestCaseError::reject("refused")) };
        let trial = Trial { rate_per_min: Some(rate), ..Trial::default() };
        let Ok(first) = forecast(&record, &trial, Held::Split) else { return Err(TestCaseError::reject("refused")) };
        let again = forecast(&bed.record().unwrap(), &trial, Held::Split).unwrap();
        // Debugging text shows every number to the last digit, and every caution.
        prop_assert_eq!(format!("{first:?}"), format!("{again:?}"));
    }
}
