//! Plans: what they promise is what a forecast of their settings gives.

use proptest::prelude::*;
use tidewright::case::entry::Aim;
use tidewright::planning::forecast::Held;
use tidewright::planning::plan::{Plan, PlanLine, Request, forecast, plan};
use tidewright::planning::target::Asked;
use tidewright::planning::trial::Trial;
use tidewright::quantity::input::Key;

use crate::bed::{Bed, Reach, bed, cases};

fn planned(bed: &Bed, asked: Asked, aims: &[Aim]) -> Option<Plan> {
    plan(&bed.record()?, &Request { asked, aims: aims.to_vec(), ..Request::default() }).ok()
}

/// The trial that dials what a plan says.
fn dials(line: &PlanLine) -> Trial {
    Trial {
        rate_per_min: Some(line.settings.rate_per_min),
        tidal_volume_ml: line.settings.tidal_volume_ml,
        inspiratory_pressure_cmh2o: line.settings.inspiratory_pressure_cmh2o,
        ..Trial::default()
    }
}

/// The trial with the exact answer of a plan in place of what it dials.
fn dials_exactly(line: &PlanLine, exact: f64) -> Trial {
    let mut trial = dials(line);
    match (line.aim, &mut trial) {
        ("rate", trial) => trial.rate_per_min = Some(exact),
        (_, Trial { tidal_volume_ml: Some(volume), .. }) => *volume = exact,
        (_, trial) => trial.inspiratory_pressure_cmh2o = Some(exact),
    }
    trial
}

fn whole_multiple(value: f64, step: f64) -> bool {
    (value / step - (value / step).round()).abs() < 1e-9
}

proptest! {
    #![proptest_config(cases(80))]

    /// To the last digit: outcome, limits and course. Only the chance differs, since `forecast` names the profile's band.
    #[test]
    fn a_forecast_of_the_planned_settings_is_the_plan(bed in bed(Reach::Bedside), target in 30.0_f64..75.0) {
        let record = bed.record();
        let Some(answer) = planned(&bed, Asked::Paco2(target), &[Aim::Rate, Aim::Volume, Aim::Gentle]) else {
            return Err(TestCaseError::reject("refused"));
        };
        for (place, line) in answer.plans.iter().enumerate() {
            let again = forecast(record.as_ref().unwrap(), &dials(line), Held::Split).unwrap();
            let (mut one, mut two) = (line.forecast.clone(), again.trial);
            one.interval.chance_on_target = None;
            two.interval.chance_on_target = None;
            prop_assert_eq!(one, two, "{}", bed.text());
            prop_assert_eq!(line.settings, again.settings);
            if place == 0 {
                prop_assert_eq!(&answer.course, &again.course);
            }
        }
        prop_assume!(!answer.plans.is_empty());
    }

    /// Dialling the unrounded answer lands on the target itself.
    #[test]
    fn the_exact_answer_is_exact(bed in bed(Reach::Bedside), target in 30.0_f64..75.0) {
        let Some(answer) = planned(&bed, Asked::Paco2(target), &[Aim::Rate, Aim::Volume]) else {
            return Err(TestCaseError::reject("refused"));
        };
        let record = bed.record().unwrap();
        let mut any = false;
        for line in &answer.plans {
            let Some(exact) = line.exact else { continue };
            let Ok(found) = forecast(&record, &dials_exactly(line, exact), Held::Split) else { continue };
            let paco2 = found.trial.state.paco2_mmhg;
            prop_assert!((paco2 - target).abs() < 1e-6, "{} {}: {}\n{}", line.aim, exact, paco2, bed.text());
            any = true;
        }
        prop_assume!(any);
    }

    /// Plans are dialled in whole steps, the value not moved stays, and no neighbouring step comes nearer.
    #[test]
    fn plans_are_settable_and_nearest(bed in bed(Reach::Bedside), target in 30.0_f64..75.0) {
        let Some(answer) = planned(&bed, Asked::Paco2(target), &[Aim::Rate, Aim::Volume]) else {
            return Err(TestCaseError::reject("refused"));
        };
        let record = bed.record().unwrap();
        let mut any = false;
        for line in &answer.plans {
            let miss = |trial: &Trial| {
                let found = forecast(&record, trial, Held::Split).ok()?;
                Some((found.trial.state.paco2_mmhg - target).abs())
            };
            let here = (line.forecast.state.paco2_mmhg - target).abs();
            let (moved, step, kept, was, [low, high]) = match (line.aim, line.settings.tidal_volume_ml) {
                ("rate", volume) => {
                    let volume = volume.or(line.settings.inspiratory_pressure_cmh2o);
                    let was = bed.of(Key::TidalVolume).or(bed.of(Key::InspiratoryPressure));
                    (line.settings.rate_per_min, 1.0, volume, was, [4.0, 60.0])
                }
                (_, Some(volume)) => (volume, 10.0, Some(line.settings.rate_per_min), bed.of(Key::Rate), [50.0, 1500.0]),
                (_, None) => {
                    let pressure = line.settings.inspiratory_pressure_cmh2o.unwrap();
                    (pressure, 1.0, Some(line.settings.rate_per_min), bed.of(Key::Rate), [1.0, 60.0])
                }
            };
            prop_assert!(whole_multiple(moved, step) && moved >= low && moved <= high, "{} {}", line.aim, moved);
            prop_assert_eq!(kept, was);
            for neighbour in [moved - step, moved + step] {
                if neighbour < low || neighbour > high {
                    continue;
                }
                if let Some(there) = miss(&dials_exactly(line, neighbour)) {
                    prop_assert!(there >= here - 1e-9, "{}: {} misses by {}, {} by {}\n{}", line.aim, moved, here, neighbour, there, bed.text());
                }
            }
            any = true;
        }
        prop_assume!(any);
    }

    /// A goal typed as pH, and as the PaCO2 that it stands for, are one goal.
    #[test]
    fn a_ph_and_its_paco2_give_the_same_plan(bed in bed(Reach::Bedside), ph in 7.2_f64..7.5) {
        let aims = [Aim::Rate, Aim::Volume, Aim::Gentle];
        let Some(by_ph) = planned(&bed, Asked::Ph(ph), &aims) else { return Err(TestCaseError::reject("refused")) };
        let by_paco2 = planned(&bed, Asked::Paco2(by_ph.target.paco2_mmhg), &aims).unwrap();
        prop_assert!((by_ph.target.ph.unwrap() - ph).abs() < 1e-9);
        let [mut one, mut two] = [by_ph, by_paco2].map(|plan| serde_json::to_value(&plan).unwrap());
        prop_assert_eq!(one["target"]["asked"].take(), "ph");
        prop_assert_eq!(two["target"]["asked"].take(), "paco2");
        // The pH is turned into PaCO2 and back: the last digit may differ.
        for target in [&mut one["target"], &mut two["target"]] {
            target["ph"].take();
        }
        prop_assert_eq!(one, two, "{}", bed.text());
    }

    /// A gentle plan keeps every limit that is kept now, but those the user's goal overrides.
    #[test]
    fn the_gentlest_pair_breaks_no_limit_kept_now(bed in bed(Reach::Bedside), target in 30.0_f64..75.0) {
        let Some(answer) = planned(&bed, Asked::Paco2(target), &[Aim::Gentle]) else {
            return Err(TestCaseError::reject("refused"));
        };
        let Some(line) = answer.plans.first() else { return Err(TestCaseError::reject("no gentle plan")) };
        let [now, then] = [&answer.now.outcome, &line.forecast].map(|outcome| serde_json::to_value(outcome).unwrap());
        for (was, is) in now["limits"].as_array().unwrap().iter().zip(then["limits"].as_array().unwrap()) {
            let id = is["id"].as_str().unwrap();
            let overridden = ["ph", "paco2", "paco2_fall_per_hour"].contains(&id);
            prop_assert!(overridden || is["verdict"] != "beyond" || was["verdict"] == "beyond", "{}: {}", id, bed.text());
            prop_assert!(is["verdict"] != "within" || !is["value"].is_null(), "unknown is never within: {}", id);
        }
    }
}
