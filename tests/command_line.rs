//! The command line, whole: each snapshot holds the call, the exit status, the output and the errors together, and is to be
//! read as a tired clinician would.

#![allow(
    clippy::unwrap_used,
    clippy::panic,
    clippy::indexing_slicing,
    reason = "a test may stop at the first surprise"
)]

#[path = "command_line/answers.rs"]
mod answers;
#[path = "command_line/help.rs"]
mod help;
#[path = "command_line/json.rs"]
mod json;
#[path = "command_line/pipes.rs"]
mod pipes;
#[path = "command_line/program.rs"]
mod program;
#[path = "command_line/wrong.rs"]
mod wrong;
