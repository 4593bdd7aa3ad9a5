//! Two curves: PaCO2 against useful ventilation, and PaCO2 as the marked line is turned; and why, in one sentence.

use ratatui::layout::Rect;

use super::pen::{Pen, lines};
use super::plot::Plot;
use crate::case::entry::Control;
use crate::panel::line::{self, LineId};
use crate::panel::scene::{Scene, Tried};
use crate::panel::state::State;
use crate::planning::dialled::Dialled;
use crate::planning::solve::{Summit, summit_of};
use crate::quantity::show::number;
use crate::quantity::unit::Dimension;

/// The highest PaCO2 drawn, mmHg: beyond it no number helps.
const HIGHEST_MMHG: f64 = 160.0;

/// Draws the view.
pub fn draw(state: &State, scene: &Scene<'_>, area: Rect, pen: &mut Pen<'_>) {
    let Ok(tried) = &scene.tried else { return };
    let line = turned_line(state, tried);
    let said =
        lines(&sentence(scene, state, tried, line, area.height < 6, pen), area.width.saturating_sub(2));
    let rows = u16::try_from(said.len()).unwrap_or(1).min(area.height.saturating_sub(3).max(1));
    let above = Rect { height: area.height.saturating_sub(rows), ..area };
    let half = area.width / 2;
    hyperbola(scene, tried, Rect { width: half.saturating_sub(1), ..above }, pen);
    as_turned(scene, state, tried, line, Rect { x: above.x + half, width: area.width - half, ..above }, pen);
    for (y, sentence) in (above.height..area.height).zip(said) {
        pen.text(area, 1, y, &sentence, pen.theme.heading());
    }
}

/// The line whose turning is drawn: the marked one, or the rate where the marked one is no number.
fn turned_line(state: &State, tried: &Tried) -> LineId {
    let shown = state.marked.shown_in(tried.dialled.settings.control());
    if !shown || matches!(state.marked, LineId::Control | LineId::Goal) { LineId::Rate } else { state.marked }
}

/// The range of PaCO2 drawn.
fn range(scene: &Scene<'_>, tried: &Tried) -> [f64; 2] {
    let interval = &tried.outcome.interval;
    let mut all = vec![scene.now.state.paco2_mmhg, tried.outcome.state.paco2_mmhg];
    all.extend(interval.paco2_low_mmhg);
    all.extend(interval.paco2_high_mmhg);
    all.extend(scene.band_mmhg().into_iter().flatten());
    let (low, high) =
        all.into_iter().fold((f64::INFINITY, 0.0_f64), |(low, high), p| (low.min(p), high.max(p)));
    [(low - 4.0).max(0.0), (high + 4.0).min(HIGHEST_MMHG).max(low + 10.0)]
}

/// Useful ventilation, or ventilation past the airway where the alveolar part is unknown, L/min.
fn ventilation(scene: &Scene<'_>, dialled: &Dialled) -> Option<(f64, f64)> {
    let state = scene.forecaster.state(dialled)?;
    let past = (state.tidal_volume_ml - state.series_dead_space_ml) * state.rate_per_min / 1000.0;
    Some((state.alveolar_ventilation_l_min.unwrap_or(past), state.paco2_mmhg))
}

fn hyperbola(scene: &Scene<'_>, tried: &Tried, area: Rect, pen: &mut Pen<'_>) {
    let (Some((now, now_mmhg)), Some((then, then_mmhg))) =
        (ventilation(scene, &scene.now_dialled), ventilation(scene, &tried.dialled))
    else {
        return;
    };
    let known = tried.outcome.state.alveolar_ventilation_l_min.is_some();
    let title = if known { "PaCO2 against useful L/min" } else { "PaCO2 against L/min past the airway" };
    pen.text(area, 1, 0, title, pen.theme.quiet());
    let area = Rect { y: area.y + 1, height: area.height.saturating_sub(1), ..area };
    let x = [now.min(then) * 0.6, now.max(then) * 1.5];
    let y = range(scene, tried);
    let mut plot = Plot::new(area, x, y);
    if let Some(band) = scene.band_mmhg() {
        plot.shade(band);
    }
    for product in [now * now_mmhg, then * then_mmhg] {
        let points: Vec<_> =
            (0..plot.columns()).map(|column| plot.x_at(column)).map(|x| (x, Some(product / x))).collect();
        plot.curve(points.into_iter());
    }
    let interval = &tried.outcome.interval;
    if let Some(low) = interval.paco2_low_mmhg {
        plot.upright(then, low, interval.paco2_high_mmhg.unwrap_or(HIGHEST_MMHG), '┆');
    }
    plot.sign(now, scene.now.state.paco2_mmhg, '○');
    plot.sign(then, then_mmhg, '●');
    let gas = |mmhg: f64| pen.face.value(mmhg, Dimension::GasPressure);
    let flow = |value: f64| pen.face.value(value, Dimension::Flow);
    let ends = [gas(y[0]), gas(y[1]), flow(x[0]), format!("{} L/min", flow(x[1]))];
    plot.draw(area, ends.each_ref().map(String::as_str), pen);
}

/// PaCO2 with a line turned to `value`, all else as tried.
fn paco2_at(scene: &Scene<'_>, state: &State, tried: &Tried, line: LineId, value: f64) -> Option<f64> {
    let mut trial = state.turned.trial;
    line::put(line, &mut trial, value, tried.dialled.settings.timing);
    let dialled = trial.apply(&scene.forecaster).ok()?;
    if !scene.forecaster.breathes(&dialled) {
        return None;
    }
    scene.forecaster.paco2_mmhg(&dialled)
}

fn as_turned(scene: &Scene<'_>, state: &State, tried: &Tried, line: LineId, area: Rect, pen: &mut Pen<'_>) {
    let timing = tried.dialled.settings.timing;
    let name = line.name(timing);
    let Some((then, key)) = line::value(line, &tried.dialled, &scene.forecaster).zip(line.key(timing)) else {
        pen.text(area, 1, 0, &format!("{name} is unknown"), pen.theme.quiet());
        return;
    };
    let input = key.input();
    pen.text(area, 1, 0, &format!("PaCO2 as {name} is turned"), pen.theme.quiet());
    let area = Rect { y: area.y + 1, height: area.height.saturating_sub(1), ..area };
    let now =
        line::value(line, &scene.now_dialled, &scene.forecaster).filter(|_| same_kind(scene, tried, line));
    let low = now.map_or(then, |now| now.min(then)) * 0.4;
    let high = now.map_or(then, |now| now.max(then)) * 1.4;
    let x = [low.max(input.min), high.min(input.max).max(low + input.step)];
    let y = range(scene, tried);
    let mut plot = Plot::new(area, x, y);
    if let Some(band) = scene.band_mmhg() {
        plot.shade(band);
    }
    let points: Vec<_> = (0..plot.columns())
        .map(|column| plot.x_at(column))
        .map(|x| (x, paco2_at(scene, state, tried, line, x)))
        .collect();
    plot.curve(points.into_iter());
    if let (LineId::Rate, Some(summit)) = (line, summit(scene, tried)) {
        plot.sign(summit.rate_per_min, summit.paco2_mmhg, '▲');
    }
    if let Some(now) = now {
        plot.sign(now, scene.now.state.paco2_mmhg, '○');
    }
    plot.sign(then, tried.outcome.state.paco2_mmhg, '●');
    let gas = |mmhg: f64| pen.face.value(mmhg, Dimension::GasPressure);
    let end = |value: f64| pen.face.value(value, input.dimension);
    let unit = input.unit();
    let right = crate::quantity::show::joined(&end(x[1]), unit);
    let ends = [gas(y[0]), gas(y[1]), end(x[0]), right];
    plot.draw(area, ends.each_ref().map(String::as_str), pen);
}

/// Whether a line means the same now and as tried.
fn same_kind(scene: &Scene<'_>, tried: &Tried, line: LineId) -> bool {
    line != LineId::Timing
        || std::mem::discriminant(&scene.now_dialled.settings.timing)
            == std::mem::discriminant(&tried.dialled.settings.timing)
}

fn summit(scene: &Scene<'_>, tried: &Tried) -> Option<Summit> {
    summit_of(&scene.forecaster, &tried.dialled)
}

/// Why PaCO2 goes where it goes, in one sentence.
fn sentence(
    scene: &Scene<'_>,
    state: &State,
    tried: &Tried,
    line: LineId,
    short: bool,
    pen: &Pen<'_>,
) -> String {
    let then = &tried.outcome.state;
    let gas = |mmhg: f64| pen.face.gas(mmhg);
    if tried.dialled.settings.control() == Control::Pressure
        && let Some(summit) = summit(scene, tried)
        && then.rate_per_min > summit.rate_per_min + 0.5
        && line == LineId::Rate
    {
        if short {
            return format!(
                "Past the summit (▲ {}/min): a faster rate raises PaCO2, a slower one lowers it.",
                number(summit.rate_per_min, 0)
            );
        }
        let trapped = then.auto_peep_cmh2o.map_or_else(String::new, |auto| {
            format!(", {} cmH2O stay trapped", pen.face.value(auto, Dimension::AirwayPressure))
        });
        return format!(
            "Past the summit (▲ {}/min, PaCO2 {}): in {} s in and {} s out a breath moves only {} mL{trapped}; a faster rate \
             raises PaCO2, a slower one lowers it.",
            number(summit.rate_per_min, 0),
            gas(summit.paco2_mmhg),
            number(then.inspiratory_time_s, 1),
            number(then.expiratory_time_s, 1),
            number(then.tidal_volume_ml, 0),
        );
    }
    if let Some(share) = share_sentence(scene, tried, short) {
        return share;
    }
    step_sentence(scene, state, tried, line, short, pen).unwrap_or_else(|| {
        format!("{} does not move the forecast PaCO2.", capital(line.name(tried.dialled.settings.timing)))
    })
}

fn capital(name: &str) -> String {
    let mut letters = name.chars();
    letters.next().map_or_else(String::new, |first| first.to_uppercase().chain(letters).collect())
}

/// Where minute volume stays and the share of it that is useful moves: that is the reason.
fn share_sentence(scene: &Scene<'_>, tried: &Tried, short: bool) -> Option<String> {
    let (now, then) = (&scene.now.state, &tried.outcome.state);
    let moved = then.minute_ventilation_l_min / now.minute_ventilation_l_min;
    let (before, after) = (1.0 - now.dead_space_fraction?, 1.0 - then.dead_space_fraction?);
    let (slower, larger) = (then.rate_per_min < now.rate_per_min, then.tidal_volume_ml > now.tidal_volume_ml);
    if (moved - 1.0).abs() > 0.04 || (after - before).abs() < 0.015 || slower != larger {
        return None;
    }
    if short {
        let how = if slower { "Fewer, larger breaths" } else { "More, smaller breaths" };
        let driving = then
            .driving_pressure_cmh2o
            .zip(now.driving_pressure_cmh2o)
            .map_or_else(String::new, |(then, now)| {
                format!("; driving {} to {} cmH2O", number(now, 0), number(then, 0))
            });
        return Some(format!("{how}: {:.0} % useful, not {:.0} %{driving}.", after * 100.0, before * 100.0));
    }
    let how = if slower { "fewer, larger breaths pay" } else { "more, smaller breaths pay" };
    let driving = then.driving_pressure_cmh2o.zip(now.driving_pressure_cmh2o).map_or_else(
        || "what that costs the lung is unknown: measure a plateau".to_owned(),
        |(then, now)| format!("driving pressure goes from {} to {} cmH2O", number(now, 0), number(then, 0)),
    );
    Some(format!(
        "About the same minute volume: {how} for their dead space {} often, so {:.0} % of it is useful instead of {:.0} %; {driving}.",
        if slower { "less" } else { "more" },
        after * 100.0,
        before * 100.0
    ))
}

/// What one step of a line buys from here, and what it bought from now; `None` where it buys nothing.
fn step_sentence(
    scene: &Scene<'_>,
    state: &State,
    tried: &Tried,
    line: LineId,
    short: bool,
    pen: &Pen<'_>,
) -> Option<String> {
    let timing = tried.dialled.settings.timing;
    let input = line.key(timing)?.input();
    let steps = scene.steps();
    let step = match line {
        LineId::Rate => steps.rate_per_min,
        LineId::TidalVolume => steps.tidal_volume_ml,
        LineId::InspiratoryPressure => steps.inspiratory_pressure_cmh2o,
        _ => input.step,
    };
    let unit = pen.face.unit;
    let value = line::value(line, &tried.dialled, &scene.forecaster)?;
    let own = scene.forecaster.baseline().mechanics.trigger_rate_per_min;
    if let (LineId::Rate, Some(own)) = (line, own.filter(|own| *own > value)) {
        let own = number(own, 0);
        return Some(format!(
            "The patient breathes {own}/min in all: a set rate below that does not move PaCO2."
        ));
    }
    let Some(more) = paco2_at(scene, state, tried, line, value + step) else {
        return Some(format!("One step more of {} cannot be dialled.", line.name(timing)));
    };
    let here = unit.from_mmhg(more - tried.outcome.state.paco2_mmhg);
    if here.abs() < 1e-6 {
        return None;
    }
    let there =
        from_now(scene, line, step).map(|change| unit.from_mmhg(change)).filter(|_| !scene.untouched());
    let signed = |value: f64| format!("{value:+.*}", unit.digits() + 1);
    let amount = if input.dimension == Dimension::Ratio {
        "expiration longer by a tenth of inspiration".to_owned()
    } else {
        crate::quantity::show::joined(&format!("+{}", number(step, 2)), input.unit())
    };
    if short {
        let then = there.map_or_else(String::new, |there| format!(", {} from now", signed(there)));
        return Some(format!("{amount} moves PaCO2 by {} {} here{then}.", signed(here), unit.word()));
    }
    let then = there.map_or_else(String::new, |there| format!("; from now it is {}", signed(there)));
    let flat = if there.is_some_and(|there| here.abs() < there.abs() * 0.85) {
        " The curve flattens: the same step buys less."
    } else {
        ""
    };
    Some(format!(
        "One step more of {} ({amount}) moves PaCO2 by {} {} from here{then}.{flat}",
        line.name(timing),
        signed(here),
        unit.word()
    ))
}

/// What one step of rate or volume buys from now, mmHg.
fn from_now(scene: &Scene<'_>, line: LineId, step: f64) -> Option<f64> {
    let now = &scene.now_dialled;
    let more = match line {
        LineId::Rate => now.with_rate(now.settings.rate_per_min + step),
        LineId::TidalVolume | LineId::InspiratoryPressure if line.shown_in(now.settings.control()) => {
            now.with_volume(now.volume() + step)
        }
        _ => return None,
    };
    Some(scene.forecaster.paco2_mmhg(&more)? - scene.forecaster.paco2_mmhg(now)?)
}
