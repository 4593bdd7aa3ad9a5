//! The outcome of settings: the state they lead to, how sure its PaCO2 is, and how each limit fares.

use serde::Serialize;

use super::belief::Interval;
use super::limits::LimitVerdict;
use super::state::State;

/// A state, how sure its PaCO2 is, and its limits.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Outcome {
    /// What the settings lead to.
    #[serde(flatten)]
    pub state: State,
    /// How sure the PaCO2 is.
    #[serde(flatten)]
    pub interval: Interval,
    /// Each limit of the profile with its verdict.
    pub limits: Vec<LimitVerdict>,
}

impl Outcome {
    /// Whether all limits are kept: `None` when none is beyond and something is unknown.
    pub fn within_limits(&self) -> Option<bool> {
        super::limits::all_within(&self.limits)
    }
}
