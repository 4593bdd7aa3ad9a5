//! The command line: what it says when something is wrong.

pub mod checked;
pub mod complaint;
