//! Values that cannot be true together. Only what is impossible is refused here; what is odd is a caution of planning.

mod breathing;
mod gases;
mod pressures;

use super::amend::Corrected;
use super::fault::Fault;
use super::inherit::Carried;
use super::settings::InForce;

/// Every contradiction within one entry, corrections applied, and between it and the settings in force.
pub(super) fn contradictions(held: &Corrected, carried: &Carried, in_force: &InForce) -> Vec<Fault> {
    let mut faults = breathing::contradictions(held, carried, in_force);
    faults.extend(pressures::contradictions(held, carried));
    faults.extend(gases::contradictions(held));
    faults
}

#[cfg(test)]
mod tests;
