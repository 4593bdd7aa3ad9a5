//! The terminal panel: now against try on one screen.
//!
//! | part | what it holds |
//! | --- | --- |
//! | [`state`] | the record, what is turned, what is typed; no results |
//! | [`mod@line`], [`key`] | the one table of lines, the one table of keys |
//! | [`action`], [`update`] | what is asked for, and what that changes |
//! | [`scene`] | what the state amounts to, computed anew each time |
//! | [`view`] | the screen |
//! | [`effect`], [`recovery`] | files and what is kept against a loss |
//! | [`terminal`], [`run`] | the terminal, and the loop |

pub mod action;
pub mod chart;
pub mod effect;
pub mod form;
pub mod help;
pub mod key;
pub mod line;
pub mod recovery;
pub mod run;
pub mod scene;
pub mod state;
pub mod terminal;
pub mod theme;
pub mod update;
pub mod view;

use std::io;

use crate::case::record::Record;
use crate::note::face::Face;
use state::{Origin, State};
use theme::{Depth, Ground, Theme};

/// What is opened.
#[derive(Debug, Clone)]
pub struct Source {
    /// The record.
    pub record: Record,
    /// Where it comes from.
    pub origin: Origin,
    /// The bytes of its file as they were read.
    pub bytes: Vec<u8>,
}

/// How it is shown.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Options {
    /// Units and letters.
    pub face: Face,
    /// Whether colours are used.
    pub colour: bool,
    /// Whether the mouse is listened to.
    pub mouse: bool,
}

/// Whether there is a terminal to open the panel on.
pub fn can_open() -> bool {
    terminal::there()
}

/// Opens the panel and runs it until it is left.
///
/// # Errors
/// When the terminal is lost or refuses.
pub fn open(source: Source, options: Options) -> io::Result<()> {
    let depth = if options.colour { terminal::depth() } else { Depth::None };
    let ground = if depth == Depth::None { Ground::Dark } else { terminal::ground() };
    let mut state = State::new(source.record, source.origin, run::clock());
    state.face = options.face;
    state.mouse = options.mouse;
    state.theme = Theme { depth, ground };
    run::run(state, &source.bytes)
}
