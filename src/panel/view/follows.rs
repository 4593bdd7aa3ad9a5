//! What follows from the settings: PaCO2 with how sure it is, pH, and what becomes of the air moved.

use ratatui::layout::Rect;

use super::layout::FOLLOWS;
use super::pen::Pen;
use super::rail::Rail;
use crate::panel::scene::{Scene, Tried};
use crate::planning::baseline::gas_exchange::Co2Evidence;
use crate::planning::outcome::Outcome;
use crate::planning::state::State;
use crate::quantity::unit::Dimension;

/// Columns: where now ends and where try ends.
const fn columns(width: u16) -> (u16, u16) {
    match width {
        0..36 => (20, 26),
        36..46 => (24, 31),
        _ => (26, 34),
    }
}

/// Draws what follows.
pub fn draw(scene: &Scene<'_>, area: Rect, pen: &mut Pen<'_>) {
    let (now_end, try_end) = columns(area.width);
    pen.rule(area, 0, "Leads to");
    let now = if scene.forecaster.baseline().now_is_measured { " now" } else { " now (forecast)" };
    pen.right(area, now_end, 0, now, pen.theme.heading());
    pen.right(area, try_end, 0, " try", pen.theme.heading());
    let tried = match &scene.tried {
        Ok(tried) => tried,
        Err(fault) => {
            pen.wrapped(
                Rect { y: area.y + 1, height: area.height.saturating_sub(1), ..area },
                0,
                &format!("Cannot be dialled: {}.", fault.message),
                pen.theme.caution(),
            );
            return;
        }
    };
    let full = area.height >= FOLLOWS[0];
    let mut y = 1;
    paco2(scene, tried, area, y, pen);
    y += 1;
    if full {
        let width = area.width.saturating_sub(2).min(60);
        pen.text(area, 2, y, &drawing(scene, tried, width.saturating_sub(2)), pen.theme.tried());
        y += 1;
    }
    for line in [interval(&tried.outcome, area.width, pen), chance(scene, tried, area.width, pen)] {
        pen.text(area, 2, y, &line, pen.theme.plain());
        y += 1;
    }
    pair("pH", "", [scene.now.state.ph, tried.outcome.state.ph], Dimension::Ph, area, y, pen);
    y += 1;
    air(scene, tried, area, y, full, pen);
}

fn pair(
    name: &str,
    unit: &str,
    [now, tried]: [Option<f64>; 2],
    dimension: Dimension,
    area: Rect,
    y: u16,
    pen: &mut Pen<'_>,
) {
    let (now_end, try_end) = columns(area.width);
    let x = pen.text(area, 0, y, name, pen.theme.plain());
    pen.text(area, x + 1, y, unit, pen.theme.quiet());
    let shown = |value: Option<f64>| pen.face.known(value, dimension);
    let (now, tried) = (shown(now), shown(tried));
    pen.right(area, now_end, y, &now, pen.theme.plain());
    pen.right(area, try_end, y, &tried, pen.theme.tried());
}

fn paco2(scene: &Scene<'_>, tried: &Tried, area: Rect, y: u16, pen: &mut Pen<'_>) {
    let (now, then) = (scene.now.state.paco2_mmhg, tried.outcome.state.paco2_mmhg);
    let unit = pen.face.unit.word();
    pair("PaCO2", unit, [Some(now), Some(then)], Dimension::GasPressure, area, y, pen);
    let (_, try_end) = columns(area.width);
    let shown = |mmhg: f64| pen.face.unit.from_mmhg(mmhg);
    let digits = pen.face.unit.digits();
    let change = shown(then) - shown(now);
    let by = crate::quantity::show::number(change.abs(), digits);
    let narrow = area.width < 46;
    let words = match (by.as_str(), change > 0.0) {
        ("0", _) if narrow => String::new(),
        (by, true) if narrow => format!("+{by}"),
        (by, false) if narrow => format!("-{by}"),
        ("0", _) => "as now".to_owned(),
        (by, true) => format!("{by} higher"),
        (by, false) => format!("{by} lower"),
    };
    pen.text(area, try_end + 2, y, &words, pen.theme.plain());
}

/// How sure, in words that cannot be taken for a limit.
fn interval(outcome: &Outcome, width: u16, pen: &Pen<'_>) -> String {
    let interval = &outcome.interval;
    if interval.paco2_expected_mmhg.is_none() {
        return "how sure is unknown: repeat the gas early".to_owned();
    }
    let range = |low, high| pen.face.gas_range(low, high);
    let half = range(interval.paco2_half_low_mmhg, interval.paco2_half_high_mmhg);
    let wide = range(interval.paco2_low_mmhg, interval.paco2_high_mmhg);
    match width {
        0..28 => format!("9 gases in 10 in {wide}"),
        28..36 => format!("1 in 2 {half}, 9 in 10 {wide}"),
        36..48 => format!("1 gas in 2 in {half}, 9 in 10 in {wide}"),
        _ => format!("1 gas in 2 falls in {half}, 9 in 10 in {wide}"),
    }
}

fn chance(scene: &Scene<'_>, tried: &Tried, width: u16, pen: &Pen<'_>) -> String {
    let Some([low, high]) = scene.band_mmhg() else {
        return if width < 46 {
            "goal unknown: chart the pH"
        } else {
            "goal unknown: chart the pH, or type a PaCO2"
        }
        .to_owned();
    };
    let band = pen.face.gas_range(Some(low), Some(high));
    match tried.outcome.interval.chance_on_target {
        Some(chance) => {
            let chance = format!("{:.0} in 100", chance * 100.0);
            match width {
                0..36 => format!("goal {band}: {chance}"),
                36..48 => format!("goal {band}: {chance} land in it"),
                _ => format!("goal {band}: {chance} such gases land in it"),
            }
        }
        None => format!("goal {band}"),
    }
}

/// PaCO2 on one rail: the goal in brackets, where gases fall as lines, now and try as signs.
fn drawing(scene: &Scene<'_>, tried: &Tried, width: u16) -> String {
    let (now, then) = (scene.now.state.paco2_mmhg, tried.outcome.state.paco2_mmhg);
    let interval = &tried.outcome.interval;
    let ends = [Some(now), Some(then), interval.paco2_low_mmhg, interval.paco2_high_mmhg];
    let band = scene.band_mmhg();
    let known = ends.into_iter().flatten().chain(band.into_iter().flatten()).map(|mmhg| mmhg.min(200.0));
    let (low, high) =
        known.fold((f64::INFINITY, 0.0_f64), |(low, high), mmhg| (low.min(mmhg), high.max(mmhg)));
    let (low, high) = (low - 2.0, high + 2.0);
    let place = |mmhg: f64| (mmhg - low) / (high - low);
    let mut rail = Rail::new(width, '·');
    if let (Some(from), to) = (interval.paco2_low_mmhg, interval.paco2_high_mmhg) {
        rail.fill(place(from), to.map_or(1.0, place), '─');
    }
    if let (Some(from), to) = (interval.paco2_half_low_mmhg, interval.paco2_half_high_mmhg) {
        rail.fill(place(from), to.map_or(1.0, place), '━');
    }
    if let Some([from, to]) = band {
        rail.put(place(from), '[');
        rail.put(place(to), ']');
    }
    rail.put(place(now), '○');
    rail.put(place(then), '●');
    rail.text()
}

fn air(scene: &Scene<'_>, tried: &Tried, area: Rect, y: u16, full: bool, pen: &mut Pen<'_>) {
    let (now, then) = (&scene.now.state, &tried.outcome.state);
    let (now_end, try_end) = columns(area.width);
    let minute = |state: &State| Some(state.minute_ventilation_l_min);
    let moved = if now_end < 24 { "air moved" } else { "minute volume" };
    pair(moved, "L/min", [minute(now), minute(then)], Dimension::Flow, area, y, pen);
    let estimated = scene.forecaster.baseline().exchange.co2_evidence == Co2Evidence::Estimated;
    let names = match (estimated, now_end < 24) {
        (false, _) => ["  useful", "  wasted"],
        (true, true) => ["  useful est.", "  wasted est."],
        (true, false) => ["  useful estimated", "  wasted estimated"],
    };
    // Where the word leaves no room for it, the unit is the one of the line above.
    let unit = if estimated { "" } else { "L/min" };
    let [useful, wasted] = names;
    let of = |value: fn(&State) -> Option<f64>| [value(now), value(then)];
    pair(useful, unit, of(|state| state.alveolar_ventilation_l_min), Dimension::Flow, area, y + 1, pen);
    let room = area.width.saturating_sub(try_end + 2);
    let share = then.dead_space_fraction;
    if !full {
        if let (Some(share), true) = (share, room >= 5) {
            pen.text(area, try_end + 2, y + 1, &format!("{:.0} %", (1.0 - share) * 100.0), pen.theme.plain());
        }
        return;
    }
    pair(wasted, unit, of(|state| state.dead_space_loss_l_min), Dimension::Flow, area, y + 2, pen);
    if let (Some(share), true) = (share, room >= 8) {
        let width = room.min(30);
        let mut rail = Rail::new(width, '░');
        rail.fill(0.0, 1.0 - share, '█');
        pen.text(area, try_end + 2, y + 1, &rail.text(), pen.theme.tried());
        pen.text(area, try_end + 2, y + 2, &format!("{:.0} % of a breath", share * 100.0), pen.theme.plain());
    }
}
