//! Charting: what is written, and what follows once it is.

use tui_input::Input;

use super::effect::Effect;
use super::form::Form;
use super::line::{LINES, is_moved};
use super::scene::Scene;
use super::state::{Mode, Origin, State};
use super::update::{on_scene, suggested_name};
use crate::case::entry::{Aim, ChartedPlan, Control, Entry, SettingsChange};
use crate::case::record::Record;
use crate::case::settings::Timing;
use crate::planning::answer::SettingsReport;
use crate::planning::charted::charted;
use crate::planning::trial::Trial;

/// Asks whether to chart the trial, or says why it cannot be.
pub fn ask(state: &mut State) {
    match entry(state, false) {
        Ok(_) => state.mode = Mode::Chart { dialled: false },
        Err(why) => state.message = Some(why),
    }
}

/// The entry that charts the trial as a plan; with `dialled` its settings count as dialled from now.
///
/// # Errors
/// A sentence: nothing turned, a what-if, a record that is only read.
pub fn entry(state: &State, dialled: bool) -> Result<Entry, String> {
    if let Some(why) = &state.read_only {
        return Err(format!("Nothing can be charted: {why}."));
    }
    let trial = &state.turned.trial;
    let what_if = LINES.iter().find(|row| row.id.is_what_if() && is_moved(row.id, trial));
    if let Some(row) = what_if {
        return Err(format!(
            "This trial asks what {}: that is no plan. Mark that line and press Backspace, then chart.",
            row.name
        ));
    }
    on_scene(state, |scene| {
        if scene.untouched() {
            return Err(
                "Nothing is turned, so there is no plan to chart. e enters a gas or what was dialled."
                    .to_owned(),
            );
        }
        let plan = plan(scene, trial)?;
        let settings = if dialled { changed(scene) } else { SettingsChange::default() };
        Ok(Entry { at: Some(state.clock), settings, plan: Some(plan), ..Entry::default() })
    })
}

fn plan(scene: &Scene<'_>, trial: &Trial) -> Result<ChartedPlan, String> {
    let tried = scene.tried.as_ref().map_err(|fault| fault.message.clone())?;
    let volume = trial.tidal_volume_ml.is_some() || trial.inspiratory_pressure_cmh2o.is_some();
    let aim = match (trial.rate_per_min.is_some(), volume) {
        (true, true) => Some(Aim::Gentle),
        (true, false) => Some(Aim::Rate),
        (false, true) => Some(Aim::Volume),
        (false, false) => None,
    };
    Ok(charted(
        &SettingsReport::of(&tried.dialled),
        &tried.outcome,
        scene.target.as_ref().ok().map(|target| target.paco2_mmhg),
        aim,
        tried.course.as_ref().map(|course| course.settled_minutes),
    ))
}

/// Finer than a hundredth nothing is written.
fn hundredths(value: f64) -> f64 {
    (value * 100.0).round() / 100.0
}

/// The settings that differ from those in force.
fn changed(scene: &Scene<'_>) -> SettingsChange {
    let (now, tried) = (scene.now_dialled.settings, scene.dialled().settings);
    let differs =
        |one: Option<f64>, other: Option<f64>| if one == other { None } else { one.map(hundredths) };
    let mut change = SettingsChange {
        rate_per_min: differs(Some(tried.rate_per_min), Some(now.rate_per_min)),
        tidal_volume_ml: differs(tried.tidal_volume_ml(), now.tidal_volume_ml()),
        inspiratory_pressure_cmh2o: differs(
            tried.inspiratory_pressure_cmh2o(),
            now.inspiratory_pressure_cmh2o(),
        ),
        peep_cmh2o: differs(tried.peep_cmh2o, now.peep_cmh2o),
        fio2: differs(tried.fio2, now.fio2),
        apparatus_dead_space_ml: differs(
            Some(tried.apparatus_dead_space_ml),
            Some(now.apparatus_dead_space_ml),
        ),
        ..SettingsChange::default()
    };
    if tried.control() != now.control() {
        change.control = Some(tried.control());
    }
    if tried.control() == Control::Volume {
        change.pause_s = differs(Some(tried.pause_s()), Some(now.pause_s()));
    }
    if tried.timing != now.timing {
        match tried.timing {
            Timing::InspiratoryTime(seconds) => change.inspiratory_time_s = Some(seconds),
            Timing::Flow(flow) => change.flow_l_min = Some(flow),
            Timing::Ratio(ratio) => change.ratio = Some(ratio),
        }
    }
    change
}

/// Charts the trial, once it was seen.
pub fn accept(state: &mut State, dialled: bool) -> Option<Effect> {
    match entry(state, dialled) {
        Ok(entry) => {
            state.mode = Mode::Chart { dialled };
            send(state, entry)
        }
        Err(why) => {
            state.message = Some(why);
            None
        }
    }
}

/// Charts the form, or walks to its next field.
pub fn form(state: &mut State, mut form: Box<Form>) -> Option<Effect> {
    if !form.at_end() {
        let slip = form.field().and_then(|field| form.slip_of(field, state.clock, state.face.unit));
        match slip {
            Some(slip) => state.message = Some(slip.sentence()),
            None => form.step(1),
        }
        state.mode = Mode::Form(form);
        return None;
    }
    let made = form.entry(&state.charted, state.clock, state.face.unit);
    let Some((entry, _)) = made else {
        let slips = form.slips.iter().map(|(_, slip)| slip).chain(&form.whole);
        state.message = slips.map(super::line::Slip::sentence).next();
        state.mode = Mode::Form(form);
        return None;
    };
    if let Origin::Text { .. } = state.origin {
        state.aside = Some(form);
    } else {
        state.mode = Mode::Form(form);
    }
    send(state, entry)
}

fn send(state: &mut State, entry: Entry) -> Option<Effect> {
    match &state.origin {
        Origin::File(_) => Some(Effect::Append(Box::new(entry))),
        Origin::Text { .. } => {
            state.mode = Mode::Naming { name: Input::new(suggested_name(state)), entry: Box::new(entry) };
            None
        }
    }
}

/// Begins a new file of the name typed.
pub fn named(state: &mut State, name: Input, entry: Box<Entry>) -> Option<Effect> {
    let path = std::path::PathBuf::from(name.value().trim());
    if path.as_os_str().is_empty() {
        state.message = Some("Type a file name, for example bed-3.toml.".to_owned());
        state.mode = Mode::Naming { name, entry };
        return None;
    }
    let text = match &state.origin {
        Origin::Text { text, .. } => text.clone(),
        Origin::File(_) => String::new(),
    };
    let effect = Effect::Create { path, text, entry: entry.clone() };
    state.mode = Mode::Naming { name, entry };
    Some(effect)
}

/// Once charted: the record as it is now; what was tried is done with.
pub fn done(state: &mut State, record: Record, path: std::path::PathBuf, meanwhile: usize) {
    let number = record.entries().len();
    let others = match meanwhile {
        0 => String::new(),
        1 => " Someone else had added an entry meanwhile: look at the record.".to_owned(),
        more => format!(" Someone else had added {more} entries meanwhile: look at the record."),
    };
    state.message = Some(format!("Charted as entry {number} in {}.{others}", path.display()));
    state.charted = record;
    state.origin = Origin::File(path);
    state.turned.trial = Trial::default();
    state.undo.clear();
    state.redo.clear();
    state.aside = None;
    state.mode = Mode::Look;
}
