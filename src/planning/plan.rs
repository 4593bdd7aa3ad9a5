//! The plan: settings that reach the target by rate, by volume, and by the gentlest pair; and the forecast of one trial.

use serde::Serialize;

use super::answer::{BaselineReport, Now, SettingsReport};
use super::baseline::Baseline;
use super::caution::{Caution, Cautions};
use super::course::Course;
use super::dialled::Dialled;
use super::forecast::{Forecaster, Held, HeldReadings};
use super::gentle::{Least, Pairs};
use super::levers::{Lever, levers};
use super::limits::Verdict;
use super::outcome::Outcome;
use super::remarks;
use super::solve::{
    RATES_PER_MIN, Summit, exact_rate, exact_volume, settable_rates, settable_volumes, summit_of,
    volume_range,
};
use super::state::State;
use super::target::{Asked, Target};
use super::trial::Trial;
use crate::case::entry::Aim;
use crate::case::fault::{Fault, Place};
use crate::case::profile::LimitId;
use crate::case::record::Record;

/// Rounding allowed when two distances are compared, mmHg.
const TIE_MMHG: f64 = 1e-9;

/// What a plan is asked for.
#[derive(Debug, Clone, PartialEq)]
pub struct Request {
    /// The target.
    pub asked: Asked,
    /// The aims, in any order.
    pub aims: Vec<Aim>,
    /// What the gentlest pair spares.
    pub least: Least,
    /// How dead space is held.
    pub held: Held,
    /// Changes applied before the fit.
    pub trial: Trial,
}

impl Default for Request {
    fn default() -> Self {
        Self {
            asked: Asked::Profile,
            aims: vec![Aim::Rate, Aim::Volume, Aim::Gentle],
            least: Least::Load,
            held: Held::Split,
            trial: Trial::default(),
        }
    }
}

/// One way to the target.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct PlanLine {
    /// `rate`, `volume` or `gentle`.
    pub aim: &'static str,
    /// The unrounded rate, volume or inspiratory pressure; `None` for gentle or when there is none.
    pub exact: Option<f64>,
    /// What to dial.
    pub settings: SettingsReport,
    /// What it leads to.
    pub forecast: Outcome,
    /// Whether that is on target.
    pub on_target: bool,
    /// Whether all limits are kept; `None` when none is beyond and something is unknown.
    pub within_limits: Option<bool>,
    /// When off target: the limits that stand in the way.
    #[serde(serialize_with = "as_keys")]
    pub blocked_by: Vec<LimitId>,
    /// The PaCO2 under each reading of dead space.
    #[serde(skip)]
    pub readings: HeldReadings,
    /// The settings in full.
    #[serde(skip)]
    pub dialled: Dialled,
}

fn as_keys<S: serde::Serializer>(ids: &[LimitId], to: S) -> Result<S::Ok, S::Error> {
    to.collect_seq(ids.iter().map(|id| id.key()))
}

/// The answer to `plan`.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Plan {
    /// Version of this shape.
    pub format: u32,
    /// The record's label.
    pub label: String,
    /// The patient at the gas.
    pub baseline: BaselineReport,
    /// The settings in force.
    pub now: Now,
    /// The target.
    pub target: Target,
    /// The ways to it, in the order rate, volume, gentle.
    pub plans: Vec<PlanLine>,
    /// The summit of alveolar ventilation, in pressure control.
    pub summit: Option<Summit>,
    /// What each lever buys and costs.
    pub levers: Vec<Lever>,
    /// The course of the first plan.
    pub course: Option<Course>,
    /// What a reader must know.
    pub cautions: Vec<Caution>,
}

/// The answer to `forecast`.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Forecast {
    /// Version of this shape.
    pub format: u32,
    /// The record's label.
    pub label: String,
    /// The patient at the gas.
    pub baseline: BaselineReport,
    /// The settings in force.
    pub now: Now,
    /// What the trial leads to.
    pub trial: Outcome,
    /// What is dialled.
    pub settings: SettingsReport,
    /// The PaCO2 under each reading of dead space.
    pub held: HeldReadings,
    /// The course of the trial.
    pub course: Option<Course>,
    /// What a reader must know.
    pub cautions: Vec<Caution>,
}

fn nothing_settable() -> Vec<Fault> {
    vec![Fault::new(
        [Place::top("trial", "rate")],
        "these settings leave no breath beyond the dead space, or no time to breathe out",
        "Raise the tidal volume (or inspiratory pressure), or lower the rate.",
    )]
}

fn report_now(forecaster: &Forecaster<'_>, band: Option<[f64; 2]>) -> Result<Now, Vec<Fault>> {
    Ok(Now {
        outcome: forecaster.outcome_now(band).ok_or_else(nothing_settable)?,
        paco2_is: if forecaster.baseline().now_is_measured { "measured" } else { "forecast" },
        settings: SettingsReport::of(&forecaster.now()),
    })
}

/// Plans for a record.
///
/// # Errors
/// What keeps a plan from being made: no gas, support, missing settings, evidence or a trial that cannot be, a pH target
/// without a pH.
pub fn plan(record: &Record, request: &Request) -> Result<Plan, Vec<Fault>> {
    let baseline = Baseline::read(record)?;
    let forecaster =
        Forecaster::new(&baseline, super::figures(record), request.held).map_err(|fault| vec![fault])?;
    let base = request.trial.apply(&forecaster).map_err(|fault| vec![fault])?;
    let target =
        Target::find(request.asked, &baseline, forecaster.now_paco2_mmhg()).map_err(|fault| vec![fault])?;
    let now = report_now(&forecaster, Some(target.band_mmhg))?;
    let mut cautions = baseline.cautions.clone();
    let solver =
        Solver { forecaster: &forecaster, base, target, now: &now.outcome.state, least: request.least };
    let asked = |aim| request.aims.contains(&aim);
    let mut plans = Vec::new();
    plans.extend(asked(Aim::Rate).then(|| solver.by_rate()).flatten());
    plans.extend(asked(Aim::Volume).then(|| solver.by_volume()).flatten());
    if asked(Aim::Gentle) {
        plans.extend(solver.gentlest(&mut cautions));
    }
    let summit = summit_of(&forecaster, &base);
    let course = plans.first().and_then(|first| forecaster.course(&first.dialled));
    remarks::of_patient(&forecaster, record, &now, &mut cautions);
    remarks::of_choices(request.held, record.steadiness(), &mut cautions);
    remarks::of_trial(&forecaster, &base, &mut cautions);
    if let Some(first) = plans.first() {
        remarks::of_course(&forecaster, course.as_ref(), &mut cautions);
        remarks::of_expectation(&first.forecast, &mut cautions);
    }
    for line in &plans {
        remarks::of_readings(line.aim, &line.readings, &mut cautions);
    }
    remarks::of_summit(summit, &target, &now, &mut cautions);
    Ok(Plan {
        format: 1,
        label: record.label().to_owned(),
        baseline: BaselineReport::of(&forecaster),
        now,
        target,
        plans,
        summit,
        levers: levers(&forecaster),
        course,
        cautions: cautions.into_vec(),
    })
}

/// Forecasts one trial for a record.
///
/// # Errors
/// As [`plan`], and settings that cannot be dialled.
pub fn forecast(record: &Record, trial: &Trial, held: Held) -> Result<Forecast, Vec<Fault>> {
    let baseline = Baseline::read(record)?;
    let forecaster = Forecaster::new(&baseline, super::figures(record), held).map_err(|fault| vec![fault])?;
    let dialled = trial.apply(&forecaster).map_err(|fault| vec![fault])?;
    let band = forecaster.profile_band_mmhg();
    let outcome = forecaster.outcome(&dialled, band).ok_or_else(nothing_settable)?;
    let now = report_now(&forecaster, band)?;
    let course = forecaster.course(&dialled);
    let readings = forecaster.held_readings(&dialled);
    let mut cautions = baseline.cautions.clone();
    remarks::of_patient(&forecaster, record, &now, &mut cautions);
    remarks::of_choices(held, record.steadiness(), &mut cautions);
    remarks::of_trial(&forecaster, &dialled, &mut cautions);
    remarks::of_course(&forecaster, course.as_ref(), &mut cautions);
    remarks::of_expectation(&outcome, &mut cautions);
    remarks::of_readings("trial", &readings, &mut cautions);
    Ok(Forecast {
        format: 1,
        label: record.label().to_owned(),
        baseline: BaselineReport::of(&forecaster),
        now,
        trial: outcome,
        settings: SettingsReport::of(&dialled),
        held: readings,
        course,
        cautions: cautions.into_vec(),
    })
}

/// Finds the ways to a target from base settings.
struct Solver<'a> {
    forecaster: &'a Forecaster<'a>,
    base: Dialled,
    target: Target,
    now: &'a State,
    least: Least,
}

impl Solver<'_> {
    fn by_rate(&self) -> Option<PlanLine> {
        let exact = exact_rate(self.forecaster, &self.base, self.target.paco2_mmhg);
        let steps = &self.forecaster.baseline().profile.steps;
        let tries = settable_rates(steps).map(|rate| (self.base.with_rate(rate), rate));
        let (dialled, _) = self.nearest(tries, self.base.settings.rate_per_min)?;
        let reachable =
            exact.is_some_and(|exact| self.settable(exact, RATES_PER_MIN, &self.base.with_rate(exact)));
        self.line("rate", exact, dialled, reachable)
    }

    fn by_volume(&self) -> Option<PlanLine> {
        let exact = exact_volume(self.forecaster, &self.base, self.target.paco2_mmhg);
        let steps = &self.forecaster.baseline().profile.steps;
        let tries = settable_volumes(&self.base, steps).map(|volume| (self.base.with_volume(volume), volume));
        let (dialled, _) = self.nearest(tries, self.base.volume())?;
        let reachable = exact.is_some_and(|exact| {
            self.settable(exact, volume_range(&self.base), &self.base.with_volume(exact))
        });
        self.line("volume", exact, dialled, reachable)
    }

    fn settable(&self, value: f64, [low, high]: [f64; 2], dialled: &Dialled) -> bool {
        (low..=high).contains(&value) && self.forecaster.state(dialled).is_some()
    }

    /// The settable value whose PaCO2 is nearest the target; of equals the smaller change.
    fn nearest(&self, tries: impl Iterator<Item = (Dialled, f64)>, from: f64) -> Option<(Dialled, f64)> {
        let mut best: Option<(Dialled, f64, f64)> = None;
        for (dialled, value) in tries {
            if self.forecaster.state(&dialled).is_none() {
                continue;
            }
            let Some(paco2) = self.forecaster.paco2_mmhg(&dialled) else { continue };
            let (miss, moved) = ((paco2 - self.target.paco2_mmhg).abs(), (value - from).abs());
            let better = best.is_none_or(|(_, had_miss, had_moved)| {
                miss < had_miss - TIE_MMHG || ((miss - had_miss).abs() <= TIE_MMHG && moved < had_moved)
            });
            if better {
                best = Some((dialled, miss, moved));
            }
        }
        best.map(|(dialled, miss, _)| (dialled, miss))
    }

    fn line(
        &self,
        aim: &'static str,
        exact: Option<f64>,
        dialled: Dialled,
        reachable: bool,
    ) -> Option<PlanLine> {
        let outcome = self.forecaster.outcome(&dialled, Some(self.target.band_mmhg))?;
        let on_target = reachable || self.target.met_by(outcome.state.paco2_mmhg);
        let blocked_by = if on_target { Vec::new() } else { self.beyond_at_exact() };
        Some(self.finish(aim, exact, dialled, outcome, on_target, blocked_by))
    }

    fn finish(
        &self,
        aim: &'static str,
        exact: Option<f64>,
        dialled: Dialled,
        forecast: Outcome,
        on_target: bool,
        blocked_by: Vec<LimitId>,
    ) -> PlanLine {
        PlanLine {
            aim,
            exact,
            settings: SettingsReport::of(&dialled),
            on_target,
            within_limits: forecast.within_limits(),
            forecast,
            blocked_by,
            readings: self.forecaster.held_readings(&dialled),
            dialled,
        }
    }

    /// The limits beyond at the exact answer of the rate, else of the volume.
    fn beyond_at_exact(&self) -> Vec<LimitId> {
        let target = self.target.paco2_mmhg;
        let rate = exact_rate(self.forecaster, &self.base, target).map(|rate| self.base.with_rate(rate));
        let volume =
            || exact_volume(self.forecaster, &self.base, target).map(|volume| self.base.with_volume(volume));
        let at = |dialled: Option<Dialled>| self.forecaster.outcome(&dialled?, None);
        let Some(outcome) = at(rate).or_else(|| at(volume())) else { return Vec::new() };
        let beyond = outcome.limits.iter().filter(|limit| limit.verdict == Verdict::Beyond);
        beyond.map(|limit| limit.id).collect()
    }

    fn gentlest(&self, cautions: &mut Cautions) -> Option<PlanLine> {
        let found = Pairs::search(self.forecaster, &self.base, self.target, self.least, self.now)
            .and_then(|pairs| Ok((pairs.choose(None)?, pairs)));
        let (chosen, pairs) = match found {
            Ok(found) => found,
            Err(why) => {
                remarks::of_no_gentle(why, self.least, cautions);
                return None;
            }
        };
        let outcome = self.forecaster.outcome(&chosen.dialled, Some(self.target.band_mmhg))?;
        let mut blocked_by = Vec::new();
        if !chosen.on_target {
            let nearer = |id: &LimitId| {
                pairs.choose(Some(*id)).is_ok_and(|other| other.miss_mmhg < chosen.miss_mmhg - TIE_MMHG)
            };
            blocked_by = pairs.limits().iter().copied().filter(nearer).collect();
            if blocked_by.is_empty() {
                blocked_by = self.beyond_at_exact();
            }
        }
        Some(self.finish("gentle", None, chosen.dialled, outcome, chosen.on_target, blocked_by))
    }
}

impl Plan {
    /// Whether any plan is on target.
    pub fn on_target(&self) -> bool {
        self.plans.iter().any(|line| line.on_target)
    }
}
