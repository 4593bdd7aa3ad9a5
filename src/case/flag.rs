//! Values given as flags of the command line: the same table, the same grammar, errors that speak of flags.

use super::fault::{Fault, Place};
use super::read::text_to_number;
use crate::quantity::input::Key;

/// Reads the value of `key` as it was typed after its flag; `entry` is the entry that it will stand in, `None` for the
/// patient.
///
/// # Errors
/// When it is no quantity of this kind, or implausible.
///
/// ```
/// use tidewright::{case::flag, quantity::input::Key};
/// assert_eq!(flag::number(Key::TidalVolume, Some(1), "0.38 L"), Ok(380.0));
/// let fault = flag::number(Key::Paco2, Some(1), "5.3").unwrap_err();
/// assert_eq!(fault.help, "5.3 kPa would be plausible (39.8 mmHg): if that was meant, write --paco2 \"5.3 kPa\"");
/// ```
pub fn number(key: Key, entry: Option<usize>, text: &str) -> Result<f64, Fault> {
    let input = key.input();
    let plausible = input.plausible().flag();
    text_to_number(&plausible, text).and_then(|(value, typed)| plausible.accept(value, typed)).map_err(
        |out| Fault::new([Place { entry, table: input.table, key: input.name }], out.message, out.help),
    )
}
