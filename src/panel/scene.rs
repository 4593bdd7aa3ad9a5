//! What the state amounts to: now, try and all that follows, computed anew for every drawing and every key.

use crate::case::fault::Fault;
use crate::case::profile::Steps;
use crate::case::record::Record;
use crate::planning::answer::{Now, SettingsReport};
use crate::planning::baseline::Baseline;
use crate::planning::caution::{Caution, Cautions};
use crate::planning::course::Course;
use crate::planning::dialled::Dialled;
use crate::planning::figures;
use crate::planning::forecast::{Forecaster, Held, HeldReadings};
use crate::planning::outcome::Outcome;
use crate::planning::remarks;
use crate::planning::target::Target;

use super::state::Turned;

/// What a trial leads to.
#[derive(Debug, Clone)]
pub struct Tried {
    /// What is dialled.
    pub dialled: Dialled,
    /// What it leads to.
    pub outcome: Outcome,
    /// PaCO2 under each reading of dead space.
    pub readings: HeldReadings,
    /// The next hour.
    pub course: Option<Course>,
}

/// Now and try for one record.
#[derive(Debug)]
pub struct Scene<'a> {
    /// The record.
    pub record: &'a Record,
    /// Answers what settings lead to.
    pub forecaster: Forecaster<'a>,
    /// The settings in force.
    pub now_dialled: Dialled,
    /// What they lead to.
    pub now: Outcome,
    /// The goal, or why there is none.
    pub target: Result<Target, Fault>,
    /// What the trial leads to, or why it cannot be dialled.
    pub tried: Result<Tried, Fault>,
}

/// Settings that the engine takes but that move no gas past the dead space.
fn nothing_past_dead_space(forecaster: &Forecaster<'_>, dialled: &Dialled) -> Fault {
    let tidal = forecaster.volume(dialled).unwrap_or(0.0);
    let series = forecaster.series_under(&dialled.settings);
    Fault::new(
        [crate::case::fault::Place::top("trial", "tidal_volume")],
        format!("a breath of {tidal:.0} mL does not get past {series:.0} mL of airway and apparatus"),
        "Raise the tidal volume (or inspiratory pressure), or take apparatus away.",
    )
}

impl<'a> Scene<'a> {
    /// Computes the scene of `record`, whose baseline is `baseline`.
    ///
    /// # Errors
    /// Settings in force that cannot be forecast.
    pub fn of(record: &'a Record, baseline: &'a Baseline, turned: &Turned) -> Result<Self, Vec<Fault>> {
        let forecaster =
            Forecaster::new(baseline, figures(record), Held::Split).map_err(|fault| vec![fault])?;
        let target = Target::find(turned.goal, baseline, forecaster.now_paco2_mmhg());
        let band = target.as_ref().ok().map(|target| target.band_mmhg);
        let now_dialled = forecaster.now();
        let now = forecaster
            .outcome_now(band)
            .ok_or_else(|| vec![nothing_past_dead_space(&forecaster, &now_dialled)])?;
        let tried = tried(&forecaster, turned, band);
        Ok(Self { record, forecaster, now_dialled, now, target, tried })
    }

    /// The band that counts as on the goal, mmHg.
    pub fn band_mmhg(&self) -> Option<[f64; 2]> {
        self.target.as_ref().ok().map(|target| target.band_mmhg)
    }

    /// The ventilator's steps.
    pub fn steps(&self) -> Steps {
        self.forecaster.baseline().profile.steps
    }

    /// What the trial dials; the settings in force where it cannot be dialled.
    pub fn dialled(&self) -> Dialled {
        self.tried.as_ref().map_or(self.now_dialled, |tried| tried.dialled)
    }

    /// True when the trial dials what is in force.
    pub fn untouched(&self) -> bool {
        self.tried.as_ref().is_ok_and(|tried| tried.dialled == self.now_dialled)
    }

    /// The outcome now as the engine reports it.
    pub fn report_now(&self) -> Now {
        Now {
            outcome: self.now.clone(),
            paco2_is: if self.forecaster.baseline().now_is_measured { "measured" } else { "forecast" },
            settings: SettingsReport::of(&self.now_dialled),
        }
    }

    /// Every caution that holds for what is shown, each with what to do.
    pub fn cautions(&self) -> Vec<Caution> {
        let mut cautions = Cautions::default();
        if let Ok(tried) = &self.tried {
            remarks::of_trial(&self.forecaster, &tried.dialled, &mut cautions);
            if !self.untouched() || !self.forecaster.baseline().now_is_measured {
                remarks::of_readings("this trial", &tried.readings, &mut cautions);
            }
            remarks::of_expectation(&tried.outcome, &mut cautions);
        }
        cautions.join(self.forecaster.baseline().cautions.clone());
        remarks::of_patient(&self.forecaster, self.record, &self.report_now(), &mut cautions);
        if let Ok(tried) = &self.tried {
            remarks::of_course(&self.forecaster, tried.course.as_ref(), &mut cautions);
        }
        cautions.into_vec()
    }
}

/// What a trial leads to; the measured PaCO2 stands where nothing was turned.
fn tried(forecaster: &Forecaster<'_>, turned: &Turned, band: Option<[f64; 2]>) -> Result<Tried, Fault> {
    let dialled = turned.trial.apply(forecaster)?;
    let outcome =
        forecaster.outcome(&dialled, band).ok_or_else(|| nothing_past_dead_space(forecaster, &dialled))?;
    Ok(Tried {
        readings: forecaster.held_readings(&dialled),
        course: forecaster.course(&dialled),
        outcome,
        dialled,
    })
}
