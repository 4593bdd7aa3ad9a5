//! Opening the panel on a case.

use std::path::{Path, PathBuf};

use clap::ArgMatches;

use super::answer::{DEMONSTRATION, face};
use super::source::{bytes, read_as, sentence};
use super::{Colours, Said, Status};
use crate::case::presets;
use crate::panel::state::Origin;
use crate::panel::{self, Options, Source};

/// Whether the panel is asked for and there is a terminal to open it on. Standard input as CASE leaves no keys to read.
pub fn can_open(matches: &ArgMatches) -> bool {
    let case = matches.get_one::<String>("case").map(String::as_str);
    !matches.get_flag("json") && case != Some("-") && panel::can_open()
}

/// Opens the panel until it is left.
///
/// # Errors
/// What is wrong with the case, or with the terminal, ready to be said.
pub fn open(matches: &ArgMatches, colours: Colours) -> Result<Said, Said> {
    let name = matches.get_one::<String>("case").map_or(DEMONSTRATION, String::as_str);
    let bytes = bytes(name)?;
    let record = read_as(name, &bytes, None, None, colours.err)?.record;
    let origin = match presets::case(name) {
        Some(preset) if !Path::new(name).exists() => {
            Origin::Text { name: preset.name.to_owned(), text: preset.text.to_owned() }
        }
        _ => Origin::File(PathBuf::from(name)),
    };
    let options = Options { face: face(matches), colour: colours.out, mouse: !matches.get_flag("no_mouse") };
    panel::open(Source { record, origin, bytes }, options)
        .map(|()| Said::answer(String::new(), Status::Done))
        .map_err(|error| sentence(&format!("the terminal is lost: {error}"), Status::Unreadable))
}
