//! What must hold for every accepted input: random cases drawn from the table of inputs.

#![allow(
    clippy::cast_possible_truncation,
    clippy::cast_sign_loss,
    clippy::format_push_string,
    clippy::unwrap_used,
    clippy::panic,
    clippy::indexing_slicing,
    clippy::float_cmp,
    reason = "a test may stop at the first surprise; equality to the last digit is what some of them are about"
)]

#[path = "properties/bed.rs"]
mod bed;
#[path = "properties/belief.rs"]
mod belief;
#[path = "properties/course.rs"]
mod course;
#[path = "properties/forecast.rs"]
mod forecast;
#[path = "properties/plan.rs"]
mod plan;
#[path = "properties/sound.rs"]
mod sound;
#[path = "properties/spelling.rs"]
mod spelling;
