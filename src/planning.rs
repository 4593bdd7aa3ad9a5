//! What a clinician asks: where the patient stands, what settings lead to, which settings reach the target.
//!
//! The engine takes only a checked [`Record`] and gives values; it reads no file and no clock.

pub mod answer;
pub mod baseline;
pub mod belief;
pub mod caution;
pub mod charted;
pub mod course;
pub mod dialled;
pub mod forecast;
pub mod gentle;
pub mod levers;
pub mod limits;
pub mod outcome;
pub mod plan;
pub mod reckoning;
pub mod remarks;
pub mod review;
pub mod solve;
pub mod state;
pub mod target;
pub mod trial;
pub mod weaning;

use crate::case::profile::Figures;
use crate::case::record::{Record, Steadiness};

/// The steadiness figures a record is read with: as stated; a unit's own replace `usual` only.
pub fn figures(record: &Record) -> Figures {
    match (record.steadiness(), &record.profile().steadiness) {
        (Steadiness::Settled, _) => belief::SETTLED,
        (Steadiness::Usual, Some((own, _))) => *own,
        (Steadiness::Usual, None) => belief::USUAL,
    }
}
