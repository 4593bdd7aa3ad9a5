//! The gentlest pair: rate and volume both free, the least load on the lung that keeps the limits.

use std::cmp::Ordering;

use crate::case::profile::{Limit, LimitId};

use super::dialled::Dialled;
use super::forecast::Forecaster;
use super::limits::{self, Excess};
use super::solve::{settable_rates, settable_volumes, volume_step};
use super::state::State;
use super::target::Target;

/// What the gentlest pair spares.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Least {
    /// The load index.
    #[default]
    Load,
    /// Mechanical power.
    Power,
}

/// Windows around a typed target, mmHg, tried in turn.
const WINDOWS_MMHG: [f64; 3] = [0.5, 1.0, 2.0];
/// Loads closer than this are ties.
const TIE: f64 = 1e-9;

/// One settable pair.
struct Pair {
    dialled: Dialled,
    paco2_mmhg: f64,
    load: f64,
    steps_moved: f64,
    /// How far each limit that excludes is passed; not at all when kept or unknown.
    excess: Vec<Excess>,
}

/// Every settable pair, ready to be chosen from.
pub struct Pairs {
    settable: Vec<Pair>,
    /// The limits that exclude.
    limits: Vec<LimitId>,
    excess_now: Vec<Excess>,
    target: Target,
}

/// Why there is no gentle plan.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum NoGentle {
    /// The load (or power) is not known.
    LoadUnknown,
    /// No settable pair is allowed.
    NoneAllowed,
}

/// The pair chosen.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Chosen {
    /// Its settings.
    pub dialled: Dialled,
    /// Whether its PaCO2 is on target.
    pub on_target: bool,
    /// How far its PaCO2 is from the target, mmHg; 0 on target.
    pub miss_mmhg: f64,
}

/// A typed target was the user's own choice, so these do not exclude then.
const fn excludes(id: LimitId, typed: bool) -> bool {
    !(typed && matches!(id, LimitId::Ph | LimitId::Paco2 | LimitId::Paco2FallPerHour))
}

impl Pairs {
    /// Forecasts every settable pair around `base`.
    ///
    /// # Errors
    /// [`NoGentle::LoadUnknown`] when what is to be spared is not known.
    pub fn search(
        forecaster: &Forecaster<'_>,
        base: &Dialled,
        target: Target,
        least: Least,
        now: &State,
    ) -> Result<Self, NoGentle> {
        let profile = &forecaster.baseline().profile;
        let limits: Vec<&Limit> =
            profile.limits.iter().filter(|limit| excludes(limit.id, target.typed())).collect();
        let excesses = |state: &State| -> Vec<Excess> {
            let of = |limit: &&Limit| Some(limits::excess(limit, limits::value(state, limit.id)?));
            limits.iter().map(|limit| of(limit).unwrap_or_default()).collect()
        };
        let volume_step = volume_step(base, &profile.steps);
        let mut pairs = Vec::new();
        let mut delivered = false;
        for rate in settable_rates(&profile.steps) {
            for volume in settable_volumes(base, &profile.steps) {
                let dialled = base.with_rate(rate).with_volume(volume);
                let Some(state) = forecaster.state(&dialled) else { continue };
                delivered = true;
                let load = match least {
                    Least::Load => state.load_index,
                    Least::Power => state.mechanical_power_j_min,
                };
                let Some(load) = load else { continue };
                pairs.push(Pair {
                    dialled,
                    paco2_mmhg: state.paco2_mmhg,
                    load,
                    steps_moved: (rate - base.settings.rate_per_min).abs() / profile.steps.rate_per_min
                        + (volume - base.volume()).abs() / volume_step,
                    excess: excesses(&state),
                });
            }
        }
        if pairs.is_empty() && delivered {
            return Err(NoGentle::LoadUnknown);
        }
        let limits = limits.iter().map(|limit| limit.id).collect();
        Ok(Self { settable: pairs, limits, excess_now: excesses(now), target })
    }

    /// The limits that exclude.
    pub fn limits(&self) -> &[LimitId] {
        &self.limits
    }

    /// Chooses the pair, as if the limit `without` were not there.
    ///
    /// # Errors
    /// [`NoGentle::NoneAllowed`] when no pair is allowed.
    pub fn choose(&self, without: Option<LimitId>) -> Result<Chosen, NoGentle> {
        let counts: Vec<bool> = self.limits.iter().map(|id| Some(*id) != without).collect();
        let strict =
            |pair: &&Pair| pair.excess.iter().zip(&counts).all(|(excess, counts)| !counts || excess.none());
        let allowed = |pair: &&Pair| {
            pair.excess
                .iter()
                .zip(&self.excess_now)
                .zip(&counts)
                .all(|((excess, now), counts)| !counts || excess.no_worse_than(*now))
        };
        let best = self
            .gentlest(&self.settable.iter().filter(strict).collect::<Vec<_>>())
            .or_else(|| self.gentlest(&self.settable.iter().filter(allowed).collect::<Vec<_>>()));
        if let Some(pair) = best {
            return Ok(Chosen { dialled: pair.dialled, on_target: true, miss_mmhg: 0.0 });
        }
        let miss = |pair: &Pair| (pair.paco2_mmhg - self.target.paco2_mmhg).abs();
        self.settable
            .iter()
            .filter(allowed)
            .min_by(|a, b| {
                tied(miss(a), miss(b))
                    .then(tied(a.load, b.load))
                    .then(a.steps_moved.total_cmp(&b.steps_moved))
            })
            .map(|pair| Chosen { dialled: pair.dialled, on_target: false, miss_mmhg: miss(pair) })
            .ok_or(NoGentle::NoneAllowed)
    }

    /// The least load among the pairs on target, within the smallest window that holds any.
    fn gentlest<'a>(&self, among: &[&'a Pair]) -> Option<&'a Pair> {
        let target = self.target.paco2_mmhg;
        let least = |inside: &dyn Fn(&Pair) -> bool| {
            let inside: Vec<&'a Pair> = among.iter().copied().filter(|pair| inside(pair)).collect();
            let load = inside.iter().map(|pair| pair.load).fold(f64::INFINITY, f64::min);
            inside.into_iter().filter(|pair| pair.load <= load + TIE).min_by(|a, b| {
                let miss = |pair: &Pair| (pair.paco2_mmhg - target).abs();
                tied(a.steps_moved, b.steps_moved).then(miss(a).total_cmp(&miss(b)))
            })
        };
        if self.target.typed() {
            WINDOWS_MMHG
                .iter()
                .find_map(|window| least(&|pair: &Pair| (pair.paco2_mmhg - target).abs() <= window + TIE))
        } else {
            least(&|pair: &Pair| self.target.met_by(pair.paco2_mmhg))
        }
    }
}

fn tied(a: f64, b: f64) -> Ordering {
    if (a - b).abs() <= TIE { Ordering::Equal } else { a.total_cmp(&b) }
}
