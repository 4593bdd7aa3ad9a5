//! The panel, from a single key to a real terminal.
#![allow(
    clippy::unwrap_used,
    clippy::expect_used,
    clippy::panic,
    clippy::indexing_slicing,
    clippy::float_cmp,
    clippy::format_push_string,
    clippy::needless_pass_by_value,
    reason = "a test stops at the first surprise; values that are dialled are exact"
)]

mod docs;
mod hands;
mod random;
mod screens;
mod scripts;
#[cfg(unix)]
mod terminal;
