//! Limits and their verdicts. Unknown is never within.

use serde::Serialize;

use super::state::State;
use crate::case::profile::{Limit, LimitId};

/// Closer to its bound than this share of the bound, a value is near it: common practice.
const NEAR_SHARE: f64 = 0.10;
/// The same for pH, in pH: common practice.
const NEAR_PH: f64 = 0.02;
/// A value must pass its bound by more than this to be beyond: rounding.
pub const BEYOND_BY_MORE_THAN: f64 = 1e-9;

/// How a value stands to its bounds.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum Verdict {
    /// Inside, with a margin.
    Within,
    /// Inside, with less than 10 % of the bound to go (pH: 0.02).
    Near,
    /// Outside.
    Beyond,
    /// Not known.
    Unknown,
}

impl Verdict {
    /// The word shown beside the value.
    pub const fn word(self) -> &'static str {
        match self {
            Self::Within => "within",
            Self::Near => "near",
            Self::Beyond => "beyond",
            Self::Unknown => "unknown",
        }
    }
}

/// One limit of the profile as an outcome fares.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct LimitVerdict {
    /// Which limit.
    #[serde(serialize_with = "as_key")]
    pub id: LimitId,
    /// The value, where it is known.
    pub value: Option<f64>,
    /// Lower bound.
    pub min: Option<f64>,
    /// Upper bound.
    pub max: Option<f64>,
    /// The unit of value and bounds.
    pub unit: &'static str,
    /// How it stands.
    pub verdict: Verdict,
}

#[expect(clippy::trivially_copy_pass_by_ref, reason = "the signature serde asks for")]
fn as_key<S: serde::Serializer>(id: &LimitId, to: S) -> Result<S::Ok, S::Error> {
    to.serialize_str(id.key())
}

/// The value of a limit in a state.
pub fn value(state: &State, id: LimitId) -> Option<f64> {
    match id {
        LimitId::TidalVolumePerKg => state.tidal_volume_ml_kg,
        LimitId::Plateau => state.plateau_cmh2o,
        LimitId::DrivingPressure => state.driving_pressure_cmh2o,
        LimitId::Rate => Some(state.rate_per_min),
        LimitId::AutoPeep => state.auto_peep_cmh2o,
        LimitId::ExpiratoryTimeConstants => state.expiratory_time_constants,
        LimitId::MechanicalPower => state.mechanical_power_j_min,
        LimitId::LoadIndex => state.load_index,
        LimitId::Ph => state.ph,
        LimitId::Paco2 => Some(state.paco2_mmhg),
        LimitId::Paco2FallPerHour => state.paco2_fall_per_hour_mmhg,
    }
}

/// How far a value lies outside each bound, 0 where it is inside.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub struct Excess {
    /// Above the upper bound.
    pub over: f64,
    /// Below the lower bound.
    pub under: f64,
}

impl Excess {
    /// True when neither bound is passed.
    pub fn none(self) -> bool {
        self.over <= 0.0 && self.under <= 0.0
    }

    /// True when neither bound is passed further than in `now`, nor one that is kept there.
    pub fn no_worse_than(self, now: Self) -> bool {
        let side = |here: f64, now: f64| here <= 0.0 || (now > 0.0 && here <= now + BEYOND_BY_MORE_THAN);
        side(self.over, now.over) && side(self.under, now.under)
    }
}

/// How far a value lies outside its bounds.
pub fn excess(limit: &Limit, value: f64) -> Excess {
    let beyond = |by: f64| if by > BEYOND_BY_MORE_THAN { by } else { 0.0 };
    Excess {
        over: limit.max.map_or(0.0, |max| beyond(value - max)),
        under: limit.min.map_or(0.0, |min| beyond(min - value)),
    }
}

/// The verdict on a value; `at_least` marks one that is only a lower bound of the harm, which can be beyond but not within.
pub fn verdict(limit: &Limit, value: Option<f64>, at_least: bool) -> Verdict {
    let Some(value) = value else { return Verdict::Unknown };
    if !excess(limit, value).none() {
        return Verdict::Beyond;
    }
    if at_least {
        return Verdict::Unknown;
    }
    let near = |bound: f64, margin: f64| {
        let width = if limit.id == LimitId::Ph { NEAR_PH } else { NEAR_SHARE * bound.abs() };
        margin < width || margin <= 0.0
    };
    let close = limit.max.is_some_and(|max| near(max, max - value))
        || limit.min.is_some_and(|min| near(min, value - min));
    if close { Verdict::Near } else { Verdict::Within }
}

/// Trapping that rests on an assumed resistance reads too low, so these can be beyond but never within.
pub const fn rests_on_trapping(id: LimitId) -> bool {
    matches!(id, LimitId::AutoPeep | LimitId::ExpiratoryTimeConstants)
}

/// Every limit of a profile as `state` fares.
pub fn verdicts(limits: &[Limit], state: &State, trapping_assumed: bool) -> Vec<LimitVerdict> {
    limits
        .iter()
        .map(|limit| {
            let value = value(state, limit.id);
            let at_least = trapping_assumed && rests_on_trapping(limit.id);
            LimitVerdict {
                id: limit.id,
                value,
                min: limit.min,
                max: limit.max,
                unit: limit.id.unit(),
                verdict: verdict(limit, value, at_least),
            }
        })
        .collect()
}

/// False when one is beyond, `None` when none is beyond but something is unknown, else true.
pub fn all_within(limits: &[LimitVerdict]) -> Option<bool> {
    if limits.iter().any(|limit| limit.verdict == Verdict::Beyond) {
        return Some(false);
    }
    if limits.iter().any(|limit| limit.verdict == Verdict::Unknown) { None } else { Some(true) }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn limit(id: LimitId, min: Option<f64>, max: Option<f64>) -> Limit {
        Limit { id, min, max, source: String::new() }
    }

    #[test]
    fn verdicts_at_and_around_the_bound() {
        let plateau = limit(LimitId::Plateau, None, Some(30.0));
        let said = |value: f64| verdict(&plateau, Some(value), false);
        assert_eq!(said(26.9), Verdict::Within);
        assert_eq!(said(27.0), Verdict::Within); // margin 3.0 is not below 10 % of 30
        assert_eq!(said(27.1), Verdict::Near);
        assert_eq!(said(30.0), Verdict::Near); // on its bound
        assert_eq!(said(30.0 + 1e-10), Verdict::Near);
        assert_eq!(said(30.1), Verdict::Beyond);
        let ph = limit(LimitId::Ph, Some(7.20), Some(7.45));
        assert_eq!(verdict(&ph, Some(7.21), false), Verdict::Near);
        assert_eq!(verdict(&ph, Some(7.30), false), Verdict::Within);
        assert_eq!(verdict(&ph, Some(7.46), false), Verdict::Beyond);
    }

    #[test]
    fn unknown_is_never_within() {
        let auto = limit(LimitId::AutoPeep, None, Some(5.0));
        assert_eq!(verdict(&auto, None, false), Verdict::Unknown);
        assert_eq!(verdict(&auto, Some(1.0), true), Verdict::Unknown);
        assert_eq!(verdict(&auto, Some(6.0), true), Verdict::Beyond);
    }
}
