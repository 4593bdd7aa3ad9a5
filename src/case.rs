//! The patient's record: what a person charts, read from TOML or flags, checked once, and the profile of limits.

mod amend;
pub mod append;
mod contradiction;
pub mod entry;
pub mod fault;
pub mod file;
pub mod flag;
mod inherit;
pub mod moment;
mod plausible;
pub mod presets;
pub mod problem;
pub mod profile;
pub mod read;
pub mod record;
pub mod settings;
pub mod slots;
pub mod struck;
pub mod write;
