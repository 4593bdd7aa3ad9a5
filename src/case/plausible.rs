//! Every number of a draft against the table of inputs.

use super::entry::{BreathingTrial, ChartedPlan, TrialSupport};
use super::fault::{Fault, Place};
use super::record::Draft;
use super::slots::{ENTRY, OBSERVATION, PATIENT, PLAN, Slot};
use crate::quantity::input::{Key, Typed};

/// Every number outside its plausible range.
pub(super) fn implausible(draft: &Draft) -> Vec<Fault> {
    let mut faults = Vec::new();
    check_all(&PATIENT, &draft.patient, None, &mut faults);
    for (number, entry) in (1..).zip(&draft.entries) {
        let number = Some(number);
        check_all(&ENTRY, entry, number, &mut faults);
        if let Some(trial) = &entry.trial {
            check_trial(trial, number, &mut faults);
        }
        if let Some(plan) = &entry.plan {
            check_plan(plan, number, &mut faults);
        }
    }
    faults
}

fn check_all<T>(slots: &[Slot<T>], whole: &T, entry: Option<usize>, faults: &mut Vec<Fault>) {
    for slot in slots {
        if let Some(value) = (slot.get)(whole) {
            check(slot.key, value, entry, faults);
        }
    }
}

fn check(key: Key, value: f64, entry: Option<usize>, faults: &mut Vec<Fault>) {
    let input = key.input();
    if let Err(out) = input.accept(value, Typed::Plain) {
        let place = Place { entry, table: input.table, key: input.name };
        faults.push(Fault::new([place], out.message, out.help));
    }
}

fn check_trial(trial: &BreathingTrial, entry: Option<usize>, faults: &mut Vec<Fault>) {
    if let Some(TrialSupport::Pressure(value)) = trial.support {
        check(Key::TrialSupport, value, entry, faults);
    }
    for observation in &trial.observations {
        check(Key::ObservedMinute, observation.minute, entry, faults);
        check_all(&OBSERVATION, observation, entry, faults);
    }
}

fn check_plan(plan: &ChartedPlan, entry: Option<usize>, faults: &mut Vec<Fault>) {
    check_all(&PLAN, plan, entry, faults);
    for (key, interval) in
        [(Key::HalfInterval, plan.half_interval_mmhg), (Key::WideInterval, plan.wide_interval_mmhg)]
    {
        let Some([low, high]) = interval else { continue };
        check(key, low, entry, faults);
        check(key, high, entry, faults);
        if low > high {
            let place = Place { entry, table: "plan", key: key.name() };
            faults.push(Fault::new(
                [place],
                format!("{} runs from {low} down to {high}", key.input().words),
                format!("write the lower end first: {} = {}", key.name(), key.input().example),
            ));
        }
    }
}
