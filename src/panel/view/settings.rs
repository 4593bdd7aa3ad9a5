//! The settings: each line now and as tried, the marked one with its arrows.

use ratatui::layout::{Position, Rect};

use super::layout::Layout;
use super::pen::Pen;
use crate::case::entry::Control;
use crate::case::settings::Timing;
use crate::panel::line::{self, Held, LineId};
use crate::panel::scene::Scene;
use crate::panel::state::{Mode, State};
use crate::planning::baseline::gas_exchange::Co2Evidence;
use crate::planning::dialled::Dialled;
use crate::planning::target::Asked;
use crate::quantity::show::{number, ratio};
use crate::quantity::unit::Dimension;

/// One row.
pub enum Row {
    /// A line that can be turned.
    Line(LineId),
    /// Tidal volume per kg.
    PerKg,
    /// The inspiratory time that follows from flow or I:E.
    Inspiration,
}

/// The rows there are.
pub fn rows(_: &State, scene: &Scene<'_>) -> Vec<Row> {
    let dialled = scene.dialled();
    let mut rows = Vec::new();
    for id in line::shown(&dialled) {
        rows.push(Row::Line(id));
        match id {
            LineId::TidalVolume | LineId::InspiratoryPressure => rows.push(Row::PerKg),
            LineId::Timing if !matches!(dialled.settings.timing, Timing::InspiratoryTime(_)) => {
                rows.push(Row::Inspiration);
            }
            _ => {}
        }
    }
    rows
}

/// The first row shown, so that the marked one is.
fn first(rows: &[Row], state: &State, height: u16) -> usize {
    let height = usize::from(height.saturating_sub(1));
    let marked = rows.iter().position(|row| matches!(row, Row::Line(id) if *id == state.marked)).unwrap_or(0);
    if rows.len() <= height {
        0
    } else {
        marked.saturating_sub(height.saturating_sub(2)).min(rows.len() - height)
    }
}

/// The line at a place.
pub fn line_at(layout: &Layout, state: &State, scene: &Scene<'_>, at: Position) -> Option<LineId> {
    if layout.large || !layout.settings.contains(at) {
        return None;
    }
    let rows = rows(state, scene);
    let from = first(&rows, state, layout.settings.height);
    let row = usize::from(at.y - layout.settings.y).checked_sub(1)?;
    match rows.get(from + row)? {
        Row::Line(id) => Some(*id),
        Row::PerKg | Row::Inspiration => None,
    }
}

/// Columns: where now ends and where try ends.
const fn columns(width: u16) -> (u16, u16) {
    match width {
        0..36 => (22, 31),
        36..40 => (28, 37),
        40..45 => (31, 40),
        _ => (34, 44),
    }
}

/// Draws the settings; gives where the cursor stands.
pub fn draw(state: &State, scene: &Scene<'_>, area: Rect, pen: &mut Pen<'_>) -> Option<Position> {
    let (now_end, try_end) = columns(area.width);
    pen.rule(area, 0, "Settings");
    pen.right(area, now_end, 0, " now", pen.theme.heading());
    pen.right(area, try_end, 0, " try ", pen.theme.heading());
    let rows = rows(state, scene);
    let from = first(&rows, state, area.height);
    let mut cursor = None;
    for (y, row) in (1..area.height).zip(rows.iter().skip(from)) {
        match row {
            Row::Line(LineId::Goal) => goal(state, scene, area, y, pen),
            Row::Line(id) => one(*id, state, scene, area, y, pen),
            Row::PerKg => derived("  per kg", "mL/kg", per_kg(scene), area, y, pen),
            Row::Inspiration => derived("  inspiration", "s", inspiration(scene), area, y, pen),
        }
        if matches!(row, Row::Line(id) if *id == state.marked) {
            cursor = Some(Position { x: area.x + try_end.saturating_sub(1), y: area.y + y });
            if let Mode::Typing(input) = &state.mode {
                let typed = format!(" {} ", input.value());
                let wide = u16::try_from(typed.chars().count().max(8)).unwrap_or(8).min(area.width - 2);
                let start = (try_end + 1).min(area.width).saturating_sub(wide);
                let blank = " ".repeat(usize::from(wide));
                pen.text(area, start, y, &blank, pen.theme.marked());
                pen.text(area, start, y, &typed, pen.theme.marked());
                let at = u16::try_from(input.visual_cursor()).unwrap_or(0);
                cursor = Some(Position { x: area.x + start + 1 + at, y: area.y + y });
            }
        }
    }
    cursor
}

type Pair = (Option<String>, Option<String>);

fn per_kg(scene: &Scene<'_>) -> Pair {
    let shown = |value: Option<f64>| value.map(|value| number(value, 1));
    (
        shown(scene.now.state.tidal_volume_ml_kg),
        shown(scene.tried.as_ref().ok().and_then(|tried| tried.outcome.state.tidal_volume_ml_kg)),
    )
}

fn inspiration(scene: &Scene<'_>) -> Pair {
    let shown = |seconds: f64| Some(number(seconds, 2));
    (
        shown(scene.now.state.inspiratory_time_s),
        scene.tried.as_ref().ok().and_then(|tried| shown(tried.outcome.state.inspiratory_time_s)),
    )
}

fn derived(name: &str, unit: &str, (now, tried): Pair, area: Rect, y: u16, pen: &mut Pen<'_>) {
    let (now_end, try_end) = columns(area.width);
    let quiet = pen.theme.quiet();
    let x = pen.text(area, 1, y, name, quiet);
    pen.text(area, x + 1, y, unit, quiet);
    let unknown = || "unknown".to_owned();
    pen.right(area, now_end, y, &now.unwrap_or_else(unknown), quiet);
    pen.right(area, try_end - 1, y, &tried.unwrap_or_else(unknown), quiet);
}

/// A line's value in words.
fn shown(id: LineId, dialled: &Dialled, scene: &Scene<'_>, pen: &Pen<'_>) -> String {
    match line::held(id, dialled, &scene.forecaster) {
        Held::Control(Control::Pressure) => "pressure".to_owned(),
        Held::Control(Control::Volume | Control::Support) => "volume".to_owned(),
        Held::Factor(factor) => format!("x{}", number(factor, 2)),
        Held::Unknown => "unknown".to_owned(),
        Held::Number(value) => {
            match id.key(dialled.settings.timing).map(crate::quantity::input::Key::input) {
                Some(input) if input.dimension == Dimension::Ratio => ratio(value),
                // A pressure matched to a volume is rarely whole, and what is shown is what is forecast.
                Some(input)
                    if input.dimension == Dimension::AirwayPressure
                        && (value - value.round()).abs() > 0.05 =>
                {
                    number(value, 1)
                }
                Some(input) => pen.face.value(value, input.dimension),
                None => String::new(),
            }
        }
    }
}

/// A line's name and unit in at most `room` columns, with the word for what is estimated or assumed.
fn name(id: LineId, scene: &Scene<'_>, timing: Timing, room: u16) -> (String, &'static str) {
    let baseline = scene.forecaster.baseline();
    let word = match id {
        LineId::Co2Output if baseline.exchange.co2_evidence == Co2Evidence::Estimated => "estimated",
        LineId::Apparatus if scene.dialled().settings.apparatus_assumed => "assumed",
        LineId::Timing if scene.dialled().settings.timing_assumed => "assumed",
        _ => "",
    };
    let unit = unit(id, timing);
    let fits = |name: &str, word: &str| {
        let parts = [name, word, unit].into_iter().filter(|part| !part.is_empty());
        parts.map(|part| part.chars().count() + 1).sum::<usize>() <= usize::from(room) + 1
    };
    let full = id.name(timing);
    let cut = match word {
        "estimated" => "est.",
        "assumed" => "ass.",
        other => other,
    };
    let names = [full, full.trim_start_matches("if "), short(full), shortest(full)];
    let tries = names.iter().flat_map(|name| [(*name, word), (*name, cut)]);
    let (name, word) =
        tries.into_iter().find(|(name, word)| fits(name, word)).unwrap_or((shortest(full), cut));
    (if word.is_empty() { name.to_owned() } else { format!("{name} {word}") }, unit)
}

/// A name for narrow screens.
fn short(name: &str) -> &str {
    match name {
        "inspiratory pressure" => "insp. pressure",
        "inspiratory time" => "insp. time",
        "inspiratory flow" => "insp. flow",
        "if CO2 output" => "CO2 out",
        "tidal volume" => "volume",
        other => other,
    }
}

/// A name for the narrowest: the field's symbols.
fn shortest(name: &str) -> &str {
    match name {
        "inspiratory pressure" => "pressure",
        "inspiratory flow" => "flow",
        "if CO2 output" => "CO2",
        "if compliance" => "C",
        "if resistance" => "R",
        other => short(other),
    }
}

fn unit(id: LineId, timing: Timing) -> &'static str {
    id.key(timing).map_or("", |key| match key.input().unit() {
        "1/min" => "/min",
        other => other,
    })
}

fn one(id: LineId, state: &State, scene: &Scene<'_>, area: Rect, y: u16, pen: &mut Pen<'_>) {
    let (now_end, try_end) = columns(area.width);
    let theme = pen.theme;
    let dialled = scene.dialled();
    let timing = dialled.settings.timing;
    let marked = id == state.marked;
    let changed = line::is_moved(id, &state.turned.trial);
    if marked {
        pen.text(area, 0, y, "▸", theme.tried());
    }
    let names = Rect { width: now_end.saturating_sub(7), ..area };
    let (name, unit) = name(id, scene, timing, names.width.saturating_sub(2));
    let x = pen.text(names, 1, y, &name, if marked { theme.heading() } else { theme.plain() });
    pen.text(names, x + 1, y, unit, theme.quiet());
    let now = match (id, timing, scene.now_dialled.settings.timing) {
        // What times inspiration changed: the old one stands with its own unit.
        (LineId::Timing, new, old) if std::mem::discriminant(&new) != std::mem::discriminant(&old) => {
            let shown = shown(id, &scene.now_dialled, scene, pen);
            let unit = self::unit(id, old);
            if unit.is_empty() { shown } else { format!("{shown} {unit}") }
        }
        (LineId::TidalVolume, ..) if scene.now_dialled.settings.tidal_volume_ml().is_none() => {
            effective(scene)
        }
        (LineId::InspiratoryPressure, ..)
            if scene.now_dialled.settings.inspiratory_pressure_cmh2o().is_none() =>
        {
            "none".to_owned()
        }
        _ => shown(id, &scene.now_dialled, scene, pen),
    };
    // The longest word with its arrows needs some of the column of now.
    let now_end = if id == LineId::Control { now_end - if marked { 4 } else { 1 } } else { now_end };
    pen.right(area, now_end, y, &now, theme.plain());
    let tried = shown(id, &dialled, scene, pen);
    let star = if changed { "*" } else { "" };
    let style = match (marked, changed) {
        (true, _) => theme.marked(),
        (false, true) => theme.tried(),
        (false, false) => theme.plain(),
    };
    if marked {
        pen.right(area, try_end + 1, y, &format!("‹ {star}{tried} ›"), style);
    } else {
        pen.right(area, try_end - 1, y, &format!("{star}{tried}"), style);
    }
}

/// The volume that pressure control gives now.
fn effective(scene: &Scene<'_>) -> String {
    number(scene.now.state.tidal_volume_ml, 0)
}

fn goal(state: &State, scene: &Scene<'_>, area: Rect, y: u16, pen: &mut Pen<'_>) {
    let (theme, face) = (pen.theme, pen.face);
    let marked = state.marked == LineId::Goal;
    if marked {
        pen.text(area, 0, y, "▸", theme.tried());
    }
    let x = pen.text(area, 1, y, "goal ", if marked { theme.heading() } else { theme.plain() });
    let said = match (&scene.target, state.turned.goal) {
        (Err(_), _) => "unknown: chart the pH of the gas".to_owned(),
        (Ok(target), Asked::Paco2(_)) => format!("*PaCO2 {}", face.gas(target.paco2_mmhg)),
        (Ok(target), Asked::Ph(ph)) => {
            format!("*pH {} (PaCO2 {})", face.value(ph, Dimension::Ph), face.gas(target.paco2_mmhg))
        }
        (Ok(target), Asked::Profile) => {
            let [low, high] = target.band_mmhg;
            format!("PaCO2 {} {}, profile", face.gas_range(Some(low), Some(high)), face.unit.word())
        }
    };
    let style = if marked { theme.marked() } else { theme.goal() };
    let said = if marked { format!("‹ {said} ›") } else { said };
    let end = area.width;
    let start = end.saturating_sub(u16::try_from(said.chars().count()).unwrap_or(end)).max(x);
    pen.text(area, start, y, &said, style);
}
