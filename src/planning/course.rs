//! The course: PaCO2 over the next hour, when it has settled, and when the next gas is useful.

use serde::Serialize;

use crate::physiology::acid_base;
use crate::physiology::stores;

/// The minutes a course is reported at.
pub const MINUTES: [f64; 6] = [0.0, 5.0, 10.0, 20.0, 30.0, 60.0];
/// A gas sooner than this tells little, minutes: common practice.
const EARLIEST_GAS_MIN: f64 = 10.0;
/// Nobody should wait longer than this for a gas after a change, minutes: common practice.
const LATEST_GAS_MIN: f64 = 60.0;
/// Times to draw are given in steps of this, minutes.
const GAS_STEP_MIN: f64 = 5.0;

/// When to draw the next gas after a change that takes `settled_minutes` to settle, minutes.
pub fn next_gas_minutes(settled_minutes: f64) -> f64 {
    let next = (settled_minutes / GAS_STEP_MIN).ceil() * GAS_STEP_MIN;
    next.clamp(EARLIEST_GAS_MIN, LATEST_GAS_MIN)
}

/// PaCO2 and pH at a minute.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct CoursePoint {
    /// Minutes from the change.
    pub minutes: f64,
    /// PaCO2, mmHg.
    pub paco2_mmhg: f64,
    /// pH, base excess kept.
    pub ph: Option<f64>,
}

/// The course of a trial.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Course {
    /// PaCO2 and pH at 0, 5, 10, 20, 30 and 60 min.
    pub points: Vec<CoursePoint>,
    /// The minute after which PaCO2 stays near its final value; 0 when it is there already.
    pub settled_minutes: f64,
    /// When to draw the next gas, minutes.
    pub next_gas_minutes: f64,
    /// The curve itself.
    #[serde(skip)]
    pub curve: stores::Course,
}

impl Course {
    /// Reports `curve` for a patient with this base excess.
    pub fn report(curve: stores::Course, base_excess_mmol_l: Option<f64>) -> Self {
        let settled_minutes = curve.settled_minutes();
        let points = MINUTES
            .iter()
            .map(|&minutes| {
                let paco2_mmhg = curve.paco2_mmhg(minutes);
                let ph = base_excess_mmol_l.map(|excess| acid_base::ph_at(excess, paco2_mmhg));
                CoursePoint { minutes, paco2_mmhg, ph }
            })
            .collect();
        Self { points, settled_minutes, next_gas_minutes: next_gas_minutes(settled_minutes), curve }
    }

    /// True when PaCO2 has not settled within the hour.
    pub fn settles_late(&self) -> bool {
        self.settled_minutes > LATEST_GAS_MIN
    }
}
