//! Which gas each plan is held against.

use crate::case::record::Occasion;

/// Plans and gases by their index among the occasions.
#[derive(Debug, Default, PartialEq, Eq)]
pub(super) struct Pairing {
    /// A plan and the first gas drawn after it.
    pub pairs: Vec<(usize, usize)>,
    /// The last plan, when no gas has come since.
    pub waiting: Option<usize>,
    /// How many plans another one replaced before any gas.
    pub replaced: usize,
}

impl Pairing {
    pub(super) fn of(occasions: &[Occasion]) -> Self {
        let all = || occasions.iter().enumerate();
        let plans: Vec<usize> =
            all().filter(|(_, it)| it.entry.plan.is_some()).map(|(index, _)| index).collect();
        let mut gases: Vec<usize> =
            all().filter(|(_, it)| it.entry.gas.paco2_mmhg.is_some()).map(|(index, _)| index).collect();
        let drawn = |index: &usize| occasions.get(*index).and_then(Occasion::drawn_at);
        gases.sort_by_key(drawn);
        let mut gas_of: Vec<Option<usize>> = vec![None; plans.len()];
        for gas in &gases {
            let drawn = drawn(gas);
            let charted = |plan: &usize| occasions.get(*plan).and_then(|it| it.at);
            // Plans stand in the order of time. A plan of the same minute as the gas came first when it was charted first.
            let before = plans.partition_point(|plan| (charted(plan), *plan) < (drawn, *gas));
            let slot = before.checked_sub(1).and_then(|index| gas_of.get_mut(index));
            if let Some(slot @ None) = slot {
                *slot = Some(*gas);
            }
        }
        let pairs: Vec<(usize, usize)> =
            plans.iter().zip(&gas_of).filter_map(|(plan, gas)| Some((*plan, (*gas)?))).collect();
        let waiting = plans.last().copied().filter(|_| gas_of.last() == Some(&None));
        let replaced = plans.len() - pairs.len() - usize::from(waiting.is_some());
        Self { pairs, waiting, replaced }
    }
}
