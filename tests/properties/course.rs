//! The course: from PaCO2 now to the forecast, never back and never past.

use proptest::prelude::*;
use tidewright::physiology::stores;
use tidewright::planning::forecast::Held;
use tidewright::planning::plan::forecast;
use tidewright::planning::trial::Trial;

use crate::bed::{Reach, bed, cases};

proptest! {
    #![proptest_config(cases(300))]

    #[test]
    fn a_course_goes_one_way_and_ends_at_the_forecast(bed in bed(Reach::Bedside), rate in 8.0_f64..32.0) {
        let trial = Trial { rate_per_min: Some(rate), ..Trial::default() };
        let Some(answer) = bed.record().and_then(|record| forecast(&record, &trial, Held::Split).ok()) else {
            return Err(TestCaseError::reject("refused"));
        };
        let Some(course) = &answer.course else { return Err(TestCaseError::reject("no course")) };
        let (start, end) = (answer.now.outcome.state.paco2_mmhg, answer.trial.state.paco2_mmhg);
        prop_assert!((course.points[0].paco2_mmhg - start).abs() < 1e-9);
        for pair in course.points.windows(2) {
            let left = |point: usize| (pair[point].paco2_mmhg - end).abs();
            let same_side = (pair[1].paco2_mmhg - end) * (start - end) >= -1e-9;
            prop_assert!(left(1) <= left(0) + 1e-9 && same_side, "{:?} toward {}", pair, end);
        }
        // Where next to nothing passes the dead space the stores fill for weeks.
        prop_assert!((course.curve.paco2_mmhg(1e9) / end - 1.0).abs() < 1e-9);
        let after = course.curve.paco2_mmhg(course.settled_minutes + 1e-6);
        let near = 2.0_f64.max(0.05 * end).max(0.2 * (start - end).abs());
        prop_assert!((after - end).abs() <= near + 1e-6, "{} at {} min", after, course.settled_minutes);
        let next = course.next_gas_minutes;
        prop_assert!((10.0..=60.0).contains(&next) && next % 5.0 == 0.0);
        prop_assert!(next >= course.settled_minutes.min(60.0) - 1e-9);
        // pH follows PaCO2 the other way.
        let points = course.points.windows(2).filter_map(|pair| Some((pair[0], pair[0].ph?, pair[1], pair[1].ph?)));
        for (one, ph_one, two, ph_two) in points {
            prop_assert!((two.paco2_mmhg - one.paco2_mmhg) * (ph_two - ph_one) <= 1e-12);
        }
    }

    /// A rise of PaCO2 takes longer than a fall of the same ratio (seen in patients: Taskar 1995).
    #[test]
    fn a_rise_is_slower_than_a_fall(weight in 35.0_f64..100.0, per_kg in 2.0_f64..5.0, low in 25.0_f64..60.0, ratio in 1.3_f64..2.5) {
        let half = |start: f64, end: f64| {
            let course = stores::Course::new(weight, per_kg * weight, start, end);
            let minute = (1..6000).map(|tenth| f64::from(tenth) / 10.0);
            minute.take_while(|minute| (course.paco2_mmhg(*minute) - end).abs() > 0.5 * (start - end).abs()).count()
        };
        let high = low * ratio;
        prop_assert!(half(low, high) >= half(high, low));
    }
}
