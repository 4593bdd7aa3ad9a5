//! tidewright: from an arterial gas to the next ventilator settings.
//!
//! The layers, an arrow may only point down:
//!
//! | layer | what it holds |
//! | --- | --- |
//! | [`cli`], [`panel`] | the command line; the terminal panel |
//! | [`note`] | faces on paper: text, JSON |
//! | [`planning`] | baseline, forecast, limits, plan, levers, belief, course: what a clinician asks |
//! | [`case`] | the patient's record: types, TOML in, profiles |
//! | [`physiology`] | pure formulas, one file a topic |
//! | [`quantity`] | units: small types, the table of inputs, reading and showing |
//!
//! The engine (quantity, physiology, planning) knows no file, no screen, no clock and no dice.
//!
//! Decision support for trained clinicians: confirm with a repeat gas; local protocol and the responsible
//! clinician decide.

pub mod case;
pub mod cli;
pub mod note;
#[cfg(feature = "panel")]
pub mod panel;
pub mod physiology;
pub mod planning;
pub mod quantity;
