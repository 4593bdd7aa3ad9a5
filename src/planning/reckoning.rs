//! Reckoning: the forecast of a charted plan held against the gas that followed it.
//!
//! A plan is scored once, by the first gas drawn after it and before the next plan. It counts when the ventilator really
//! stood as planned and the change had had its time.

mod causes;
mod match_up;

use serde::Serialize;

use super::baseline::gas_exchange::airway_by_rule_ml;
use crate::case::entry::{ChartedPlan, Control};
use crate::case::moment::Moment;
use crate::case::record::{Occasion, Record};
use crate::case::settings::{InForce, Settings};

pub use causes::{Cause, causes};
use match_up::Pairing;

/// Where a gas came to lie.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum Landing {
    /// Inside the half interval, as 1 gas in 2 should.
    Half,
    /// Outside the half interval, inside the wide one, as 9 gases in 10 should.
    Wide,
    /// Above the wide interval.
    Above,
    /// Below the wide interval.
    Below,
}

/// A setting that was not as planned when the gas was drawn.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Difference {
    /// The key in the case file.
    pub key: &'static str,
    /// As planned; `None` for a control that has none.
    pub planned: Option<f64>,
    /// As it was; `None` where it is not set.
    pub was: Option<f64>,
}

/// One plan and its gas.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Reckoning {
    /// The entry of the plan, from 1.
    pub plan_entry: usize,
    /// The entry of the gas, from 1.
    pub gas_entry: usize,
    /// When the gas was drawn.
    #[serde(skip)]
    pub drawn_at: Option<Moment>,
    /// PaCO2 measured, mmHg.
    pub measured_mmhg: f64,
    /// PaCO2 expected, mmHg; the plain forecast where no expectation was charted.
    pub expected_mmhg: Option<f64>,
    /// The half interval, mmHg.
    pub half_mmhg: Option<[f64; 2]>,
    /// The wide interval, mmHg.
    pub wide_mmhg: Option<[f64; 2]>,
    /// Where the gas came to lie; `None` when no interval was charted.
    pub landing: Option<Landing>,
    /// Minutes from dialling to the gas; `None` when the entry of the gas carries the change, or it was not dialled.
    pub minutes: Option<f64>,
    /// Minutes it takes to settle, as forecast.
    pub settle_minutes: Option<f64>,
    /// False when the gas was drawn before the change had settled.
    pub settled: bool,
    /// The settings that were not as planned.
    pub differences: Vec<Difference>,
    /// Outside the wide interval: CO2 made per perfused lung, over what the forecast took it for.
    pub co2_ratio: Option<f64>,
    /// What the record itself says that bears on it.
    pub signs: Vec<String>,
}

impl Reckoning {
    /// Whether it counts for or against the forecast: dialled as planned, settled, intervals charted.
    pub fn counts(&self) -> bool {
        self.settled && self.differences.is_empty() && self.landing.is_some()
    }
}

/// A plan that has no gas yet.
#[derive(Debug, Clone, PartialEq)]
pub struct Waiting {
    /// The entry of the plan, from 1.
    pub plan_entry: usize,
    /// The plan.
    pub plan: ChartedPlan,
    /// When it was dialled; `None` when it has not been, or no time stands there.
    pub dialled_at: Option<Moment>,
    /// Whether the settings in force are those of the plan.
    pub dialled: bool,
}

/// How this patient's forecasts have done. Of those that count, half should lie in the half interval and nine in ten in
/// the wide one.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq, Serialize)]
pub struct Tally {
    /// Plans that were held against a gas and count.
    pub counted: usize,
    /// Of these, inside the half interval.
    pub in_half: usize,
    /// Of these, inside the wide interval.
    pub in_wide: usize,
    /// Gases drawn before the change had settled: not counted.
    pub early: usize,
    /// Gases drawn under other settings than planned: not counted.
    pub otherwise_set: usize,
    /// Plans that another one replaced before any gas: not counted.
    pub replaced: usize,
}

/// Every plan of a record held against what came.
#[derive(Debug, Clone, PartialEq)]
pub struct Reckoned {
    /// Oldest first.
    pub reckonings: Vec<Reckoning>,
    /// The last plan, when no gas has come yet.
    pub waiting: Option<Waiting>,
    /// How they have done.
    pub tally: Tally,
}

/// Holds every charted plan against its gas.
pub fn reckon(record: &Record) -> Reckoned {
    let occasions = record.occasions();
    let pairing = Pairing::of(occasions);
    let reckonings: Vec<Reckoning> =
        pairing.pairs.iter().filter_map(|&(plan, gas)| one(record, plan, gas)).collect();
    let mut tally = Tally { replaced: pairing.replaced, ..Tally::default() };
    for reckoning in &reckonings {
        tally.add(reckoning);
    }
    let waiting = pairing.waiting.and_then(|plan| waiting(occasions, plan));
    Reckoned { reckonings, waiting, tally }
}

impl Tally {
    fn add(&mut self, reckoning: &Reckoning) {
        if !reckoning.differences.is_empty() {
            self.otherwise_set += 1;
        } else if !reckoning.settled {
            self.early += 1;
        } else if let Some(landing) = reckoning.landing {
            self.counted += 1;
            self.in_half += usize::from(landing == Landing::Half);
            self.in_wide += usize::from(matches!(landing, Landing::Half | Landing::Wide));
        }
    }
}

fn waiting(occasions: &[Occasion], plan: usize) -> Option<Waiting> {
    let occasion = occasions.get(plan)?;
    let charted = occasion.entry.plan.clone()?;
    let last = occasions.len().checked_sub(1)?;
    let dialled = differences(&charted, occasion, occasions.get(last)?).is_empty();
    let since = dialled.then(|| dialled_since(occasions, plan, last)).flatten();
    let dialled_at = since.and_then(|index| occasions.get(index)).and_then(|occasion| occasion.at);
    Some(Waiting { plan_entry: occasion.number, plan: charted, dialled_at, dialled })
}

/// The first occasion of the unbroken run, from the plan to `until`, under which the ventilator stood as planned.
fn dialled_since(occasions: &[Occasion], plan: usize, until: usize) -> Option<usize> {
    let charting = occasions.get(plan)?;
    let charted = charting.entry.plan.as_ref()?;
    let run = occasions.get(plan..=until)?.iter().enumerate().rev();
    let mut first = None;
    for (offset, occasion) in run {
        if !differences(charted, charting, occasion).is_empty() {
            break;
        }
        first = Some(plan + offset);
    }
    first
}

/// The settings at `occasion` that are not as planned at `charting`; what a plan does not name is to stay as it was.
fn differences(plan: &ChartedPlan, charting: &Occasion, occasion: &Occasion) -> Vec<Difference> {
    let Some(was) = occasion.in_force.mandatory() else {
        return vec![Difference { key: "control", planned: None, was: None }];
    };
    let mut found = Vec::new();
    let mut compare = |key: &'static str, planned: Option<f64>, was: Option<f64>| {
        let same = planned.zip(was).is_none_or(|(planned, was)| (planned - was).abs() < 1e-9);
        if planned.is_some() && (was.is_none() || !same) {
            found.push(Difference { key, planned, was });
        }
    };
    compare("rate", plan.rate_per_min, Some(was.rate_per_min));
    compare("tidal_volume", plan.tidal_volume_ml, was.tidal_volume_ml());
    compare("inspiratory_pressure", plan.inspiratory_pressure_cmh2o, was.inspiratory_pressure_cmh2o());
    if let InForce::Mandatory(then) = &charting.in_force {
        compare(
            "apparatus_dead_space",
            Some(then.apparatus_dead_space_ml),
            Some(was.apparatus_dead_space_ml),
        );
        // Under pressure control the inspiratory time moves the volume too.
        if was.control() == Control::Pressure && then.control() == Control::Pressure {
            let held = |settings: &Settings| Settings { rate_per_min: was.rate_per_min, ..*settings };
            compare(
                "inspiratory_time",
                Some(held(then).inspiratory_time_s()),
                Some(was.inspiratory_time_s()),
            );
        }
    }
    found
}

fn one(record: &Record, plan: usize, gas: usize) -> Option<Reckoning> {
    let occasions = record.occasions();
    let (charting, came) = (occasions.get(plan)?, occasions.get(gas)?);
    let charted = charting.entry.plan.as_ref()?;
    let measured_mmhg = came.entry.gas.paco2_mmhg?;
    let mut differences = differences(charted, charting, came);
    let since = dialled_since(occasions, plan, gas);
    let dialled_at = since.and_then(|index| occasions.get(index)).and_then(|it| it.at);
    // The entry that carries both the change and the gas counts as settled, as everywhere in the engine.
    let carried_together = since == Some(gas);
    let minutes = dialled_at
        .zip(came.drawn_at())
        .filter(|_| !carried_together)
        .map(|(dialled, drawn)| drawn.minutes_since(dialled));
    if minutes.is_some_and(|minutes| minutes < 0.0) {
        differences.push(Difference { key: "not_dialled_yet", planned: None, was: None });
    }
    let settled = minutes.zip(charted.settle_minutes).is_none_or(|(minutes, settle)| minutes >= settle);
    let expected_mmhg = charted.expected_paco2_mmhg.or(charted.forecast_paco2_mmhg);
    let landing = landing(measured_mmhg, charted);
    let mut reckoning = Reckoning {
        plan_entry: charting.number,
        gas_entry: came.number,
        drawn_at: came.drawn_at(),
        measured_mmhg,
        expected_mmhg,
        half_mmhg: charted.half_interval_mmhg,
        wide_mmhg: charted.wide_interval_mmhg,
        landing,
        minutes,
        settle_minutes: charted.settle_minutes,
        settled,
        differences,
        co2_ratio: None,
        signs: Vec::new(),
    };
    let outside = matches!(landing, Some(Landing::Above | Landing::Below));
    if outside && reckoning.counts() {
        let moved = ventilation_ratio(record, plan, gas).unwrap_or(1.0);
        reckoning.co2_ratio = expected_mmhg.map(|expected| measured_mmhg * moved / expected);
        reckoning.signs = causes::signs(occasions, plan, gas);
    }
    Some(reckoning)
}

/// Where a gas lies; an end of an interval belongs to it.
fn landing(measured_mmhg: f64, plan: &ChartedPlan) -> Option<Landing> {
    let [low, high] = plan.wide_interval_mmhg?;
    let inside = |[low, high]: [f64; 2]| (low..=high).contains(&measured_mmhg);
    Some(if measured_mmhg > high {
        Landing::Above
    } else if measured_mmhg < low {
        Landing::Below
    } else if plan.half_interval_mmhg.is_some_and(inside) {
        Landing::Half
    } else {
        Landing::Wide
    })
}

/// What was breathed past the airway when the gas was drawn, over what the plan took for granted:
/// `rate·(VT − VDs)` by total rate and exhaled volume where they were read. `VDs` by rule, as it nearly cancels.
/// `None` under pressure control, whose planned volume is not on file, and where a breath does not pass the airway.
fn ventilation_ratio(record: &Record, plan: usize, gas: usize) -> Option<f64> {
    let occasions = record.occasions();
    let (charting, came) = (occasions.get(plan)?, occasions.get(gas)?);
    let charted = charting.entry.plan.as_ref()?;
    let settings = came.in_force.mandatory()?;
    let (set_rate, set_volume) = (charted.rate_per_min?, charted.tidal_volume_ml?);
    let series_ml = airway_by_rule_ml(record.patient()) + settings.apparatus_dead_space_ml;
    let before = occasions.get(..=plan)?;
    let planned_rate = set_rate.max(own_rate(before).unwrap_or(0.0));
    let planned_volume = set_volume * volume_per_set(before).unwrap_or(1.0);
    let rate = came.entry.measured.total_rate_per_min.unwrap_or(planned_rate).max(settings.rate_per_min);
    let volume = came.entry.measured.exhaled_tidal_volume_ml.unwrap_or(planned_volume);
    let (passed, planned) = (rate * (volume - series_ml), planned_rate * (planned_volume - series_ml));
    (passed > 0.0 && planned > 0.0).then(|| passed / planned)
}

/// The patient's own rate before a plan: the latest total rate, where it is above the rate set with it.
fn own_rate(occasions: &[Occasion]) -> Option<f64> {
    let read = |occasion: &Occasion| {
        let settings = occasion.in_force.mandatory()?;
        Some((occasion.entry.measured.total_rate_per_min?, settings.rate_per_min))
    };
    let (total, set) = occasions.iter().rev().find_map(read)?;
    (total > set).then_some(total)
}

/// Exhaled over set volume, by the latest reading under volume control.
fn volume_per_set(occasions: &[Occasion]) -> Option<f64> {
    occasions.iter().rev().find_map(|occasion| {
        let set = occasion.in_force.mandatory()?.tidal_volume_ml()?;
        Some(occasion.entry.measured.exhaled_tidal_volume_ml? / set)
    })
}

#[cfg(test)]
mod tests;
