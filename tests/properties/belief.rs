//! How sure a forecast is: order, mass, and what narrows or widens it.

use proptest::prelude::*;
use tidewright::case::profile::Figures;
use tidewright::case::record::Record;
use tidewright::planning::baseline::Baseline;
use tidewright::planning::belief::{Interval, USUAL};
use tidewright::planning::dialled::Dialled;
use tidewright::planning::forecast::{Forecaster, Held};
use tidewright::planning::trial::Trial;
use tidewright::quantity::input::Key;

use crate::bed::{Bed, Reach, bed, cases, plain, record};

/// Runs `body` on the forecaster of a record and what a trial dials; `None` when either is refused.
fn asked<T>(
    record: &Record,
    figures: Figures,
    trial: &Trial,
    body: impl Fn(&Forecaster<'_>, &Dialled) -> T,
) -> Option<T> {
    let baseline = Baseline::read(record).ok()?;
    let forecaster = Forecaster::new(&baseline, figures, Held::Split).ok()?;
    let dialled = trial.apply(&forecaster).ok()?;
    forecaster.state(&dialled)?;
    Some(body(&forecaster, &dialled))
}

fn interval(record: &Record, figures: Figures, trial: &Trial) -> Option<Interval> {
    asked(record, figures, trial, |forecaster, dialled| forecaster.interval(dialled, None))?
}

/// ln of the upper over the lower end, of the wide and of the half interval.
fn widths(found: &Interval) -> Option<[f64; 2]> {
    let wide = found.paco2_high_mmhg? / found.paco2_low_mmhg?;
    let half = found.paco2_half_high_mmhg? / found.paco2_half_low_mmhg?;
    Some([wide.ln(), half.ln()])
}

/// The bedside's gas repeated: entries an hour apart, alike in everything.
fn repeated(bed: &Bed, hours: usize) -> Option<Record> {
    let mut text = bed.text();
    let entry = text.find("[[entry]]").unwrap();
    text.truncate(entry);
    for hour in 0..hours {
        text.push_str(&format!("[[entry]]\nat = 2026-03-02T{:02}:15:00Z\n", 6 + hour));
        bed.entry(&mut text, &plain);
    }
    record(&text)
}

/// Several gases under several settings of one patient.
fn followed(beds: &[Bed]) -> Option<Record> {
    let mut text = "format = 1\n[patient]\nsex = \"female\"\nheight = 168\nairway = \"tube\"\n".to_owned();
    for (hour, bed) in beds.iter().enumerate() {
        text.push_str(&format!("[[entry]]\nat = 2026-03-02T{:02}:15:00Z\n", 6 + 2 * hour));
        bed.entry(&mut text, &plain);
    }
    record(&text)
}

fn at_rate(rate_per_min: f64) -> Trial {
    Trial { rate_per_min: Some(rate_per_min), ..Trial::default() }
}

/// A patient with one gas or a few, followed over hours.
fn patients() -> impl Strategy<Value = Record> {
    proptest::collection::vec(bed(Reach::Bedside), 1..4).prop_filter_map("refused", |beds| followed(&beds))
}

proptest! {
    #![proptest_config(cases(200))]

    #[test]
    fn intervals_lie_within_one_another(record in patients(), rate in 8.0_f64..32.0) {
        let Some(found) = interval(&record, USUAL, &at_rate(rate)) else {
            return Err(TestCaseError::reject("refused"));
        };
        // What lies at infinity is null, from the top down.
        let ends = [
            found.paco2_low_mmhg,
            found.paco2_half_low_mmhg,
            found.paco2_expected_mmhg,
            found.paco2_half_high_mmhg,
            found.paco2_high_mmhg,
        ];
        for pair in ends.windows(2) {
            prop_assert!(pair[0].unwrap_or(f64::INFINITY) <= pair[1].unwrap_or(f64::INFINITY), "{:?}", found);
        }
        prop_assert!(ends[0].is_some_and(|low| low > 0.0));
    }

    /// The chance to land in the wide interval is 90 %, in the half interval 50 %, from the lowest end to the middle 45 %;
    /// and it is the integral of the density, here by Simpson's rule.
    #[test]
    fn a_chance_is_the_mass_of_its_interval(record in patients(), rate in 8.0_f64..32.0, low in 20.0_f64..60.0, span in 1.0_f64..30.0) {
        let checked = asked(&record, USUAL, &at_rate(rate), |forecaster, dialled| {
            let chance = |low: f64, high: f64| {
                forecaster.interval(dialled, Some([low, high])).unwrap().chance_on_target.unwrap()
            };
            let found = forecaster.interval(dialled, None).unwrap();
            let (Some(lowest), Some(half_low), Some(middle), Some(half_high), Some(highest)) = (
                found.paco2_low_mmhg,
                found.paco2_half_low_mmhg,
                found.paco2_expected_mmhg,
                found.paco2_half_high_mmhg,
                found.paco2_high_mmhg,
            ) else {
                return Ok(());
            };
            for (from, to, mass) in
                [(lowest, highest, 0.90), (half_low, half_high, 0.50), (lowest, middle, 0.45), (half_high, highest, 0.20)]
            {
                // Quantiles are bracketed to 1e-9 in ln PaCO2, where the density stays below 100.
                prop_assert!((chance(from, to) - mass).abs() < 1e-7, "{} of {}", chance(from, to), mass);
            }
            let (named, mixture) = (chance(low, low + span), forecaster.mixture(dialled).unwrap());
            prop_assert!((0.0..=1.0).contains(&named));
            let (from, to, steps) = (low.ln(), (low + span).ln(), 400);
            let step = (to - from) / f64::from(steps);
            let sum: f64 = (0..=steps)
                .map(|i| {
                    let weight = if i == 0 || i == steps { 1.0 } else if i % 2 == 1 { 4.0 } else { 2.0 };
                    weight * mixture.density(from + f64::from(i) * step)
                })
                .sum();
            prop_assert!((named - sum * step / 3.0).abs() < 1e-6, "{} by distribution, {} by density", named, sum * step / 3.0);
            Ok(())
        });
        checked.unwrap_or_else(|| Err(TestCaseError::reject("refused")))?;
    }

    /// With one gas each kind of noise only ever widens.
    #[test]
    fn more_noise_never_narrows(
        bed in bed(Reach::Bedside), rate in 8.0_f64..32.0,
        figures in (0.02_f64..0.3, 0.0_f64..0.2, 0.0_f64..1.0), more in 0.001_f64..0.3, which in 0_usize..3,
    ) {
        let Some(record) = bed.record() else { return Err(TestCaseError::reject("refused")) };
        let calm = Figures { gas: figures.0, wander_per_hour: figures.1, change: figures.2 };
        let mut noisy = calm;
        *[&mut noisy.gas, &mut noisy.wander_per_hour, &mut noisy.change][which] += more;
        let trial = at_rate(rate);
        let (Some(calm), Some(noisy)) = (interval(&record, calm, &trial), interval(&record, noisy, &trial)) else {
            return Err(TestCaseError::reject("refused"));
        };
        let (Some(calm), Some(noisy)) = (widths(&calm), widths(&noisy)) else {
            return Err(TestCaseError::reject("mass at infinity"));
        };
        for (calm, noisy) in calm.into_iter().zip(noisy) {
            prop_assert!(noisy >= calm - 1e-9, "{} with less noise, {} with more\n{}", calm, noisy, bed.text());
        }
    }

    /// The same gas under the same settings, drawn again, and again.
    #[test]
    fn a_second_gas_that_agrees_narrows(bed in bed(Reach::Bedside), rate in 8.0_f64..32.0) {
        let (Some(once), Some(twice), Some(thrice)) = (repeated(&bed, 1), repeated(&bed, 2), repeated(&bed, 3)) else {
            return Err(TestCaseError::reject("refused"));
        };
        let trial = at_rate(rate);
        let found = [once, twice, thrice].map(|record| widths(&interval(&record, USUAL, &trial)?));
        let [Some(once), Some(twice), Some(thrice)] = found else { return Err(TestCaseError::reject("refused")) };
        for i in 0..2 {
            prop_assert!(twice[i] < once[i] && thrice[i] < twice[i], "{:?} {:?} {:?}\n{}", once, twice, thrice, bed.text());
        }
    }

    /// Where every gas is the same, the expectation is that gas, shifted as plain arithmetic shifts it.
    #[test]
    fn agreeing_gases_move_the_middle_nowhere(bed in bed(Reach::Bedside)) {
        let Some(record) = repeated(&bed, 2) else { return Err(TestCaseError::reject("refused")) };
        let Some(found) = interval(&record, USUAL, &Trial::default()) else {
            return Err(TestCaseError::reject("refused"));
        };
        let measured = bed.of(Key::Paco2).unwrap();
        let middle = found.paco2_expected_mmhg.unwrap();
        prop_assert!((middle / measured - 1.0).abs() < 1e-9, "{} for {}\n{}", middle, measured, bed.text());
    }
}
