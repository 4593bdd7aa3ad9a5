//! What was typed or turned and not charted, kept so that a kill loses nothing: one file a case, in the state folder, for
//! its owner's eyes only.

use std::fs;
use std::io::{self, Write};
use std::path::{Path, PathBuf};

use etcetera::BaseStrategy;
use serde::{Deserialize, Serialize};

use super::form::Form;
use super::line::{LINES, LineId, Read, is_moved, read};
use super::state::{Origin, State, Turned};
use crate::case::entry::Control;
use crate::case::settings::Timing;
use crate::planning::target::Asked;
use crate::planning::trial::Co2Trial;
use crate::quantity::show::PressureUnit;

/// What is kept.
#[derive(Debug, Clone, PartialEq, Default, Serialize, Deserialize)]
pub struct Kept {
    /// The case, as it was named.
    pub case: String,
    /// How many entries it had: what was turned holds for these.
    pub entries: usize,
    /// Fields of the form, each with the text typed.
    pub form: Vec<(String, String)>,
    /// Lines turned, each as it would be typed.
    pub lines: Vec<(String, String)>,
}

impl Kept {
    /// What there is to keep.
    pub fn of(state: &State) -> Self {
        let form = state.unsaved_form().map(|form| {
            let typed = form.fields.iter().filter(|field| !field.input.value().trim().is_empty());
            typed.map(|field| (field.id.name().to_owned(), field.input.value().to_owned())).collect()
        });
        Self {
            case: state.origin.name(),
            entries: state.charted.entries().len(),
            form: form.unwrap_or_default(),
            lines: lines(&state.turned),
        }
    }

    /// Whether nothing was typed or turned.
    pub const fn is_empty(&self) -> bool {
        self.form.is_empty() && self.lines.is_empty()
    }

    /// The form with what was typed in it.
    pub fn to_form(&self) -> Option<Form> {
        if self.form.is_empty() {
            return None;
        }
        let mut form = Form::default();
        for (name, text) in &self.form {
            form.put(name, text);
        }
        Some(form)
    }

    /// What was turned; lines that no longer read are left out.
    pub fn to_turned(&self) -> Turned {
        let mut turned = Turned::default();
        for (name, text) in &self.lines {
            let Some(row) = LINES.iter().find(|row| row.name == name) else { continue };
            if row.id == LineId::Control {
                turned.trial.control =
                    Some(if text == "pressure" { Control::Pressure } else { Control::Volume });
                continue;
            }
            match read(row.id, text, turned.trial, Timing::InspiratoryTime(1.0), PressureUnit::MmHg) {
                Ok(Read::Trial(trial)) => turned.trial = trial,
                Ok(Read::Goal(goal)) => turned.goal = goal,
                Err(_) => {}
            }
        }
        turned
    }
}

/// What was turned, each line as it would be typed.
fn lines(turned: &Turned) -> Vec<(String, String)> {
    let trial = &turned.trial;
    let mut lines = Vec::new();
    for row in LINES.iter().filter(|row| is_moved(row.id, trial)) {
        let number = |value: Option<f64>| value.map(|value| value.to_string());
        let text = match row.id {
            LineId::Control => trial.control.map(|control| match control {
                Control::Pressure => "pressure".to_owned(),
                Control::Volume | Control::Support => "volume".to_owned(),
            }),
            LineId::Rate => number(trial.rate_per_min),
            LineId::TidalVolume => number(trial.tidal_volume_ml),
            LineId::InspiratoryPressure => number(trial.inspiratory_pressure_cmh2o),
            LineId::Peep => number(trial.peep_cmh2o),
            LineId::Fio2 => number(trial.fio2),
            LineId::Timing => trial.timing.map(|timing| match timing {
                Timing::InspiratoryTime(value) => format!("{value} s"),
                Timing::Flow(value) => format!("{value} L/min"),
                Timing::Ratio(value) => format!("1:{value}"),
            }),
            LineId::Pause => number(trial.pause_s),
            LineId::Apparatus => number(trial.apparatus_dead_space_ml),
            LineId::Co2Output => trial.co2.map(|co2| match co2 {
                Co2Trial::Output(output) => output.to_string(),
                Co2Trial::Times(factor) => format!("x{factor}"),
            }),
            LineId::Compliance => number(trial.compliance_ml_cmh2o),
            LineId::Resistance => number(trial.resistance_cmh2o_s_l),
            LineId::Goal => None,
        };
        lines.extend(text.map(|text| (row.name.to_owned(), text)));
    }
    let goal = match turned.goal {
        Asked::Paco2(mmhg) => Some(format!("{mmhg} mmHg")),
        Asked::Ph(ph) => Some(format!("pH {ph}")),
        Asked::Profile => None,
    };
    lines.extend(goal.map(|goal| (LineId::Goal.row().name.to_owned(), goal)));
    lines
}

/// The file that keeps what belongs to a case; `None` where there is no home folder.
pub fn place(origin: &Origin) -> Option<PathBuf> {
    let folder = etcetera::choose_base_strategy().ok()?.state_dir()?.join("tidewright");
    let name = match origin {
        Origin::File(path) => fs::canonicalize(path).unwrap_or_else(|_| path.clone()).display().to_string(),
        Origin::Text { name, .. } => format!("built-in {name}"),
    };
    Some(folder.join(format!("{:016x}.json", hash(&name))))
}

/// FNV-1a, 64 bit: only names a file.
fn hash(text: &str) -> u64 {
    text.bytes().fold(0xcbf2_9ce4_8422_2325, |hash, byte| {
        (hash ^ u64::from(byte)).wrapping_mul(0x0000_0100_0000_01b3)
    })
}

/// Reads what was kept; nothing when there is nothing, or when it cannot be read.
pub fn load(place: &Path) -> Option<Kept> {
    let kept: Kept = serde_json::from_slice(&fs::read(place).ok()?).ok()?;
    (!kept.is_empty()).then_some(kept)
}

/// Keeps `kept`, whole or not at all; takes the file away when there is nothing to keep.
///
/// # Errors
/// When the state folder cannot be written.
pub fn keep(place: &Path, kept: &Kept) -> io::Result<()> {
    if kept.is_empty() {
        return forget(place);
    }
    let folder = place.parent().unwrap_or_else(|| Path::new("."));
    create_private(folder)?;
    // A temporary file of this kind is made readable by its owner only.
    let mut file = tempfile::NamedTempFile::new_in(folder)?;
    file.write_all(&serde_json::to_vec(kept).map_err(io::Error::other)?)?;
    file.persist(place).map_err(|error| error.error)?;
    Ok(())
}

#[cfg(unix)]
fn create_private(folder: &Path) -> io::Result<()> {
    use std::os::unix::fs::DirBuilderExt;
    fs::DirBuilder::new().recursive(true).mode(0o700).create(folder)
}

#[cfg(not(unix))]
fn create_private(folder: &Path) -> io::Result<()> {
    fs::create_dir_all(folder)
}

/// Forgets what was kept.
///
/// # Errors
/// When the file is there and cannot be taken away.
pub fn forget(place: &Path) -> io::Result<()> {
    match fs::remove_file(place) {
        Err(error) if error.kind() != io::ErrorKind::NotFound => Err(error),
        _ => Ok(()),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::planning::trial::Trial;

    #[test]
    fn what_was_turned_comes_back_as_it_was() {
        let turned = Turned {
            trial: Trial {
                rate_per_min: Some(28.0),
                timing: Some(Timing::Ratio(2.5)),
                co2: Some(Co2Trial::Times(0.9)),
                apparatus_dead_space_ml: Some(0.0),
                ..Trial::default()
            },
            goal: Asked::Ph(7.32),
            profile: None,
        };
        let kept = Kept { lines: lines(&turned), ..Kept::default() };
        assert_eq!(kept.to_turned(), turned);
    }

    #[test]
    fn what_is_kept_is_for_its_owner_only_and_goes_when_nothing_is_left() {
        let folder = tempfile::tempdir().unwrap();
        let place = folder.path().join("state/tidewright/a.json");
        let kept = Kept { form: vec![("paco2".to_owned(), "52".to_owned())], ..Kept::default() };
        keep(&place, &kept).unwrap();
        assert_eq!(load(&place), Some(kept));
        #[cfg(unix)]
        {
            use std::os::unix::fs::PermissionsExt;
            assert_eq!(fs::metadata(&place).unwrap().permissions().mode() & 0o777, 0o600);
        }
        keep(&place, &Kept::default()).unwrap();
        assert!(!place.exists());
    }
}
