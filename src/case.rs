//! The patient's record: what a person charts, read from TOML or flags, checked once, and the profile of limits.

pub mod entry;
pub mod fault;
pub mod moment;
pub mod profile;
pub mod record;
pub mod settings;
