//! The panel, from a single key to a real terminal.

mod docs;
mod hands;
mod random;
mod screens;
mod scripts;
#[cfg(unix)]
mod terminal;
