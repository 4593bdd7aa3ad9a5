//! Turning, typing, undoing: what moves the trial.

use tui_input::Input;

use super::super::line::{self, LineId, Read};
use super::super::scene::Scene;
use super::super::state::{Mode, State, Turned};
use super::on_scene;
use crate::case::entry::Control;
use crate::case::settings::Timing;
use crate::planning::solve::{RATES_PER_MIN, volume_range, volume_step};
use crate::planning::target::Asked;
use crate::planning::trial::Trial;
use crate::quantity::input::Typed;
use crate::quantity::show::{PressureUnit, number};

/// Steps in a big step.
pub const BIG: i32 = 5;
/// Undo reaches this far back.
const DEEPEST: usize = 500;
/// Closer than this, a value is the one of now: rounding.
const SAME: f64 = 1e-9;

/// Takes `turned` as the new trial, `what` being what was done.
pub fn commit(state: &mut State, what: String, turned: Turned) {
    if turned == state.turned {
        return;
    }
    let before = std::mem::replace(&mut state.turned, turned);
    state.undo.push((what, before));
    if state.undo.len() > DEEPEST {
        state.undo.remove(0);
    }
    state.redo.clear();
}

/// Undoes one thing.
pub fn undo(state: &mut State) {
    let Some((what, before)) = state.undo.pop() else {
        state.message = Some("Nothing to undo.".to_owned());
        return;
    };
    let after = std::mem::replace(&mut state.turned, before);
    state.redo.push((what.clone(), after));
    state.message = Some(format!("Undone: {what}."));
}

/// Does again what was undone.
pub fn redo(state: &mut State) {
    let Some((what, after)) = state.redo.pop() else {
        state.message = Some("Nothing to redo.".to_owned());
        return;
    };
    let before = std::mem::replace(&mut state.turned, after);
    state.undo.push((what.clone(), before));
    state.message = Some(format!("Done again: {what}."));
}

/// Everything back to now; goal and profile stay.
pub fn back_to_now(state: &mut State) {
    let turned = Turned { trial: Trial::default(), ..state.turned.clone() };
    commit(state, "back to now".to_owned(), turned);
    state.message = Some("Everything is back to now; u brings the trial back.".to_owned());
}

/// The marked line back to now.
pub fn back_line(state: &mut State) {
    let mut turned = state.turned.clone();
    let name = state.marked.row().name;
    if state.marked == LineId::Goal {
        turned.goal = Asked::Profile;
    } else {
        line::reset(state.marked, &mut turned.trial);
    }
    settle(state, format!("{name} back to now"), turned);
}

/// Keeps the trial in an empty slot, brings it back from a full one.
pub fn slot(state: &mut State, slot: usize) {
    state.mode = Mode::Look;
    let number = slot + 1;
    match state.slots.get(slot).cloned() {
        Some(None) => {
            if let Some(empty) = state.slots.get_mut(slot) {
                *empty = Some(state.turned.clone());
            }
            state.message =
                Some(format!("This trial is kept in {number}; the view kept shows it beside now and try."));
        }
        Some(Some(kept)) if kept == state.turned => {
            if let Some(full) = state.slots.get_mut(slot) {
                *full = None;
            }
            state.message = Some(format!("Slot {number} held this very trial and is empty again."));
        }
        Some(Some(kept)) => {
            settle(state, format!("trial {number} brought back"), kept);
            state
                .message
                .get_or_insert_with(|| format!("Trial {number} is back; u returns to the one before."));
        }
        None => {}
    }
}

/// Turns a line by steps, each to the next whole multiple of the ventilator's step.
pub fn turn(state: &mut State, line: LineId, steps: i32) {
    let unit = state.face.unit;
    let turned = state.turned.clone();
    match on_scene(state, |scene| turned_by(scene, line, steps, turned, unit)) {
        Ok((what, turned)) => commit(state, what, turned),
        Err(said) => state.message = Some(said),
    }
}

fn turned_by(
    scene: &Scene<'_>,
    line: LineId,
    steps: i32,
    mut turned: Turned,
    unit: PressureUnit,
) -> Result<(String, Turned), String> {
    let dialled = scene.dialled();
    match line {
        LineId::Control => switch(scene, &mut turned.trial),
        LineId::Goal => turned.goal = goal_by(scene, turned.goal, steps, unit)?,
        _ => {
            let name = line.name(dialled.settings.timing);
            let Some(value) = line::value(line, &dialled, &scene.forecaster) else {
                return Err(format!("{name} is not known: type a value to ask what if."));
            };
            let key = line.key(dialled.settings.timing);
            let Some(input) = key.map(crate::quantity::input::Key::input) else {
                return Ok((String::new(), turned));
            };
            let own = scene.steps();
            let step = match line {
                LineId::Rate => own.rate_per_min,
                LineId::TidalVolume => own.tidal_volume_ml,
                LineId::InspiratoryPressure => own.inspiratory_pressure_cmh2o,
                _ => input.step,
            };
            let next = stepped(value, step, steps);
            let next = input
                .accept(next, Typed::Plain)
                .map_err(|_| format!("{name} goes from {}.", input.plausible().range()))?;
            put(scene, line, &mut turned.trial, next);
        }
    }
    let what = described(scene, line, &turned)?;
    Ok((what, turned))
}

/// The next whole multiple of `step` above or below, then as many steps on.
fn stepped(value: f64, step: f64, steps: i32) -> f64 {
    let whole = value / step;
    let from = if steps > 0 { (whole + SAME).floor() } else { (whole - SAME).ceil() };
    // Decimal steps (0.05) are shown to two digits; rounding keeps 0.85000000000000009 out of a file.
    ((from + f64::from(steps)) * step * 1e6).round() / 1e6
}

fn put(scene: &Scene<'_>, line: LineId, trial: &mut Trial, value: f64) {
    let now = line::value(line, &scene.now_dialled, &scene.forecaster);
    let same_control = scene.dialled().settings.control() == scene.now_dialled.settings.control();
    let timing = scene.dialled().settings.timing;
    let same_timing =
        std::mem::discriminant(&timing) == std::mem::discriminant(&scene.now_dialled.settings.timing);
    if same_control && same_timing && now.is_some_and(|now| (now - value).abs() <= SAME) {
        line::reset(line, trial);
    } else {
        line::put(line, trial, value, timing);
    }
}

/// To the other control; what belongs to the old one alone is let go.
fn switch(scene: &Scene<'_>, trial: &mut Trial) {
    let other = match scene.dialled().settings.control() {
        Control::Volume => Control::Pressure,
        Control::Pressure | Control::Support => Control::Volume,
    };
    trial.tidal_volume_ml = None;
    trial.inspiratory_pressure_cmh2o = None;
    trial.pause_s = None;
    if matches!(trial.timing, Some(Timing::Flow(_))) {
        trial.timing = None;
    }
    trial.control = (other != scene.now_dialled.settings.control()).then_some(other);
}

fn goal_by(scene: &Scene<'_>, goal: Asked, steps: i32, unit: PressureUnit) -> Result<Asked, String> {
    let (low, high) =
        (crate::planning::target::TARGET_RANGE_MMHG[0], crate::planning::target::TARGET_RANGE_MMHG[1]);
    let paco2 = |mmhg: f64| {
        let shown = unit.from_mmhg(mmhg);
        let step = if unit == PressureUnit::KPa { 0.1 } else { 1.0 };
        let next = unit.to_mmhg(stepped(shown, step, steps));
        if (low..=high).contains(&next) {
            Ok(Asked::Paco2(next))
        } else {
            Err("A goal lies between a PaCO2 of 10 and 150 mmHg (1.3 and 20 kPa).".to_owned())
        }
    };
    match goal {
        Asked::Paco2(mmhg) => paco2(mmhg),
        Asked::Ph(ph) => Ok(Asked::Ph(stepped(ph, 0.01, steps))),
        Asked::Profile => {
            paco2(scene.target.as_ref().map_or(scene.now.state.paco2_mmhg, |target| target.paco2_mmhg))
        }
    }
}

/// What was done in words, once it is known that it can be dialled.
fn described(scene: &Scene<'_>, line: LineId, turned: &Turned) -> Result<String, String> {
    let again = Scene::of(scene.record, scene.forecaster.baseline(), turned)
        .map_err(|faults| faults.first().map_or_else(String::new, |fault| fault.message.clone()))?;
    if let Err(fault) = &again.target {
        return Err(format!("{}. {}", fault.message, fault.help));
    }
    let tried = again
        .tried
        .as_ref()
        .map_err(|fault| format!("Cannot be dialled: {}. {}", fault.message, plain(&fault.help)))?;
    let timing = tried.dialled.settings.timing;
    let name = line.name(timing);
    Ok(match line {
        LineId::Goal => match turned.goal {
            Asked::Paco2(mmhg) => format!("goal PaCO2 {mmhg:.0} mmHg"),
            Asked::Ph(ph) => format!("goal pH {ph:.2}"),
            Asked::Profile => "goal of the profile".to_owned(),
        },
        LineId::Control => format!(
            "{name} {}",
            if tried.dialled.settings.control() == Control::Pressure { "pressure" } else { "volume" }
        ),
        _ => match (line.key(timing), line::value(line, &tried.dialled, &again.forecaster)) {
            (Some(key), Some(value)) => format!("{name} {}", key.input().shown(value)),
            _ => format!("{name} {}", number(tried.dialled.co2_factor, 2)),
        },
    })
}

/// A help that names flags of the command line, for a person at the panel.
fn plain(help: &str) -> String {
    help.split(", for example with --")
        .next()
        .unwrap_or(help)
        .replace("--", "")
        .trim_end_matches('.')
        .to_owned()
        + "."
}

/// Takes `turned` when it can be dialled, else says why not.
pub fn settle(state: &mut State, what: String, turned: Turned) {
    let possible = on_scene(state, |scene| described(scene, LineId::Rate, &turned));
    match possible {
        Ok(_) => commit(state, what, turned),
        Err(said) => state.message = Some(said),
    }
}

/// Takes what was typed into the marked line. What cannot be read stays in the field.
pub fn typed(state: &mut State, input: Input) {
    let text = input.value().trim().to_owned();
    if text.is_empty() {
        return;
    }
    let (marked, unit, turned) = (state.marked, state.face.unit, state.turned.clone());
    let outcome = on_scene(state, |scene| {
        let timing = scene.dialled().settings.timing;
        let mut turned = turned;
        match line::read(marked, &text, turned.trial, timing, unit).map_err(|slip| slip.sentence())? {
            Read::Trial(trial) => turned.trial = trial,
            Read::Goal(goal) => turned.goal = goal,
        }
        Ok((described(scene, marked, &turned)?, turned))
    });
    match outcome {
        Ok((what, turned)) => commit(state, what, turned),
        Err(said) => {
            state.message = Some(said);
            state.mode = Mode::Typing(input);
        }
    }
}

/// Begins to walk the table, at what is tried.
pub fn enter_table(state: &mut State) {
    match on_scene(state, |scene| {
        let dialled = scene.dialled();
        Ok((dialled.settings.rate_per_min, dialled.volume()))
    }) {
        Ok((rate_per_min, volume)) => state.mode = Mode::Walk { rate_per_min, volume },
        Err(said) => state.message = Some(said),
    }
}

/// Walks to a neighbouring cell: rate across, volume down.
pub fn walk_table(state: &mut State, across: isize, down: isize) {
    let Mode::Walk { rate_per_min, volume } = state.mode else { return };
    let Ok((rate, volume)) = on_scene(state, |scene| {
        let (steps, dialled) = (scene.steps(), scene.dialled());
        let within = |value: f64, [low, high]: [f64; 2], was: f64| {
            if (low..=high).contains(&value) { value } else { was }
        };
        let to = |value: f64, step: f64, by: isize| {
            if by == 0 { value } else { stepped(value, step, i32::try_from(by).unwrap_or(0)) }
        };
        let rate = within(to(rate_per_min, steps.rate_per_min, across), RATES_PER_MIN, rate_per_min);
        let next = to(volume, volume_step(&dialled, &steps), down);
        Ok((rate, within(next, volume_range(&dialled), volume)))
    }) else {
        return;
    };
    state.mode = Mode::Walk { rate_per_min: rate, volume };
}

/// Dials a pair of the table.
pub fn take(state: &mut State, rate_per_min: f64, volume: f64) {
    let turned = state.turned.clone();
    let outcome = on_scene(state, |scene| {
        let mut turned = turned;
        let line = match scene.dialled().settings.control() {
            Control::Pressure => LineId::InspiratoryPressure,
            Control::Volume | Control::Support => LineId::TidalVolume,
        };
        put(scene, LineId::Rate, &mut turned.trial, rate_per_min);
        put(scene, line, &mut turned.trial, volume);
        let rate = described(scene, LineId::Rate, &turned)?;
        let volume = described(scene, line, &turned)?;
        Ok((format!("{rate}, {volume}"), turned))
    });
    match outcome {
        Ok((what, turned)) => {
            state.message = Some(format!("Dialled: {what}."));
            commit(state, what, turned);
        }
        Err(said) => state.message = Some(said),
    }
}
