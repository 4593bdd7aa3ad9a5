//! Fitting the marked line to the goal, and the gentlest pair.

use super::super::line::LineId;
use super::super::state::State;
use super::dial::commit;
use super::on_scene;
use crate::case::entry::{Aim, Control};
use crate::case::settings::Timing;
use crate::planning::plan::{PlanLine, Request, plan};
use crate::quantity::input::Key;
use crate::quantity::unit::Dimension;

/// Fits the marked line to the goal.
pub fn fit(state: &mut State) {
    match state.marked {
        LineId::Rate => planned(state, Aim::Rate),
        LineId::TidalVolume | LineId::InspiratoryPressure => planned(state, Aim::Volume),
        LineId::Timing => fit_time(state),
        LineId::Control
        | LineId::Peep
        | LineId::Fio2
        | LineId::Pause
        | LineId::Apparatus
        | LineId::Co2Output
        | LineId::Compliance
        | LineId::Resistance
        | LineId::Goal => {
            state.message = Some(
                "f fits rate, tidal volume, inspiratory pressure and inspiratory time: mark one of them first.".to_owned(),
            );
        }
    }
}

/// Dials the gentlest pair that meets the goal within limits.
pub fn gentlest(state: &mut State) {
    planned(state, Aim::Gentle);
}

fn planned(state: &mut State, aim: Aim) {
    let request = Request {
        asked: state.turned.goal,
        aims: vec![aim],
        trial: state.turned.trial,
        ..Request::default()
    };
    let record = state.record();
    let made = match plan(&record, &request) {
        Ok(made) => made,
        Err(faults) => {
            let said = faults.first().map(|fault| format!("{}. {}", fault.message, fault.help));
            drop(record);
            state.message = said;
            return;
        }
    };
    drop(record);
    let Some(line) = made.plans.first() else {
        let why = made.cautions.iter().find(|caution| caution.id == "no_gentle_plan");
        state.message =
            Some(why.map_or_else(|| "No settable value can be forecast.".to_owned(), |why| why.text.clone()));
        return;
    };
    let mut turned = state.turned.clone();
    let settings = &line.dialled.settings;
    let volume_moved = (line.dialled.volume() - volume_under_trial(state)).abs() > 0.0;
    if matches!(aim, Aim::Rate | Aim::Gentle) {
        turned.trial.rate_per_min = Some(settings.rate_per_min);
    }
    if matches!(aim, Aim::Volume | Aim::Gentle) && volume_moved {
        turned.trial.tidal_volume_ml = settings.tidal_volume_ml();
        turned.trial.inspiratory_pressure_cmh2o = settings.inspiratory_pressure_cmh2o();
    }
    let what = described(line, aim, state);
    commit(state, what.clone(), turned);
    state.message = Some(format!("{what}: {}", verdict(line, state)));
}

fn volume_under_trial(state: &State) -> f64 {
    on_scene(state, |scene| Ok(scene.dialled().volume())).unwrap_or(f64::NAN)
}

fn described(line: &PlanLine, aim: Aim, state: &State) -> String {
    let settings = &line.dialled.settings;
    let rate = format!("rate {}/min", state.face.value(settings.rate_per_min, Dimension::Rate));
    let volume = match settings.control() {
        Control::Pressure => format!(
            "inspiratory pressure {} cmH2O",
            state.face.value(line.dialled.volume(), Dimension::AirwayPressure)
        ),
        Control::Volume | Control::Support => {
            format!("tidal volume {} mL", state.face.value(line.dialled.volume(), Dimension::Volume))
        }
    };
    match aim {
        Aim::Rate => rate,
        Aim::Volume => volume,
        Aim::Gentle => format!("{rate}, {volume}"),
    }
}

fn verdict(line: &PlanLine, state: &State) -> String {
    let paco2 = state.face.gas(line.forecast.state.paco2_mmhg);
    let exact = line.exact.map_or_else(String::new, |exact| {
        let digits = usize::from(exact < 100.0);
        format!(" (exactly {})", crate::quantity::show::number(exact, digits))
    });
    let words = |ids: &[crate::case::profile::LimitId]| {
        ids.iter().map(|id| id.words()).collect::<Vec<_>>().join(", ")
    };
    if !line.on_target {
        let blocked = if line.blocked_by.is_empty() {
            "no value reaches the goal".to_owned()
        } else {
            format!("the goal is kept out of reach by {}", words(&line.blocked_by))
        };
        return format!("PaCO2 {paco2} is the nearest that can be dialled; {blocked}.");
    }
    let beyond: Vec<_> = line
        .forecast
        .limits
        .iter()
        .filter(|limit| limit.verdict.word() == "beyond")
        .map(|limit| limit.id)
        .collect();
    let kept = match line.within_limits {
        Some(true) => "every limit kept".to_owned(),
        Some(false) => format!("beyond its limit: {}", words(&beyond)),
        None => "no limit known to be broken, some unknown".to_owned(),
    };
    format!("PaCO2 {paco2}{exact}; {kept}.")
}

/// The inspiratory time (or I:E) whose PaCO2 is nearest the goal; only where the breath hangs on it.
fn fit_time(state: &mut State) {
    let turned = state.turned.clone();
    let outcome = on_scene(state, |scene| {
        let dialled = scene.dialled();
        if dialled.settings.control() != Control::Pressure {
            return Err(
                "In volume control inspiratory time does not move PaCO2: fit the rate or the volume."
                    .to_owned(),
            );
        }
        let target = scene.target.as_ref().map_err(|fault| fault.message.clone())?;
        let ratio = matches!(dialled.settings.timing, Timing::Ratio(_));
        let input = if ratio { Key::Ratio } else { Key::InspiratoryTime }.input();
        let values =
            (0_u32..).map(|n| input.min + f64::from(n) * input.step).take_while(|value| *value <= input.max);
        let tries = values.filter_map(|value| {
            let timing = if ratio { Timing::Ratio(value) } else { Timing::InspiratoryTime(value) };
            let mut tried = dialled;
            tried.settings.timing = timing;
            let state = scene.forecaster.state(&tried)?;
            Some((timing, (state.paco2_mmhg - target.paco2_mmhg).abs(), state.paco2_mmhg))
        });
        let best = tries.min_by(|one, other| one.1.total_cmp(&other.1));
        best.map(|(timing, _, paco2)| (timing, paco2))
            .ok_or_else(|| "No inspiratory time can be dialled.".to_owned())
    });
    match outcome {
        Ok((timing, paco2)) => {
            let mut turned = turned;
            turned.trial.timing = Some(timing);
            let shown = match timing {
                Timing::Ratio(ratio) => format!("I:E {}", crate::quantity::show::ratio(ratio)),
                Timing::InspiratoryTime(seconds) | Timing::Flow(seconds) => {
                    format!("inspiratory time {} s", state.face.value(seconds, Dimension::Time))
                }
            };
            state.message =
                Some(format!("{shown}: PaCO2 {}, the nearest to the goal.", state.face.gas(paco2)));
            commit(state, shown, turned);
        }
        Err(said) => state.message = Some(said),
    }
}
