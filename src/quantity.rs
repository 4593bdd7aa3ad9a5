//! Units: small types that carry them, the table of inputs, reading and showing quantities.
//!
//! Nothing here knows a patient, a file or a screen; only the standard library is used.

pub mod input;
pub mod parse;
pub mod show;
pub mod typed;
pub mod unit;
