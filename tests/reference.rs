//! The engine against outside witnesses: published values, and tables made by scipy, iapws and pint.
//!
//! The tables stand in `tests/reference/`; each row names its source. The Python scripts beside them make the computed
//! ones anew, and `.ci/run` compares.

#![allow(
    clippy::unwrap_used,
    clippy::panic,
    clippy::indexing_slicing,
    clippy::doc_markdown,
    clippy::cast_precision_loss,
    clippy::too_many_lines,
    clippy::format_push_string,
    clippy::float_cmp,
    reason = "a test may stop at the first surprise, and its tables are long"
)]
#[path = "reference/computed.rs"]
mod computed;
#[path = "reference/published.rs"]
mod published;
#[path = "reference/published_breaths.rs"]
mod published_breaths;
#[path = "reference/table.rs"]
mod table;
