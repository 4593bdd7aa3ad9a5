//! The limits: every value now and as tried, its verdict, and how far it is from its bound. All bounds stand on one line.

use ratatui::layout::Rect;

use super::pen::{Pen, cells};
use super::rail::{self, Rail};
use crate::case::profile::LimitId;
use crate::note::columns::{bounds, dimension};
use crate::note::face::Face;
use crate::panel::scene::Scene;
use crate::panel::theme::mark;
use crate::planning::limits::{LimitVerdict, Verdict};

/// The narrowest rail that shows anything.
const LEAST_RAIL: u16 = 7;
/// The verdict with its mark.
const VERDICT: u16 = 9;

/// Columns: where now ends, where try ends, where the rail begins and how wide it is.
fn columns(width: u16) -> (u16, u16, u16, u16) {
    let (now, tried) = match width {
        0..36 => (13, 18),
        36..46 => (23, 29),
        _ => (26, 33),
    };
    let start = tried + 1;
    let room = width.saturating_sub(start + 1 + VERDICT);
    (now, tried, start, if room >= LEAST_RAIL { room.min(40) } else { 0 })
}

/// Draws the limits.
pub fn draw(scene: &Scene<'_>, area: Rect, pen: &mut Pen<'_>) {
    if area.height == 0 {
        return;
    }
    let (now_end, try_end, start, width) = columns(area.width);
    pen.rule(area, 0, "Limits");
    pen.right(area, now_end, 0, " now", pen.theme.heading());
    pen.right(area, try_end, 0, " try", pen.theme.heading());
    if width > 0 {
        let bound = start + u16::try_from(cells(f64::from(width - 1) * rail::BOUND)).unwrap_or(0);
        pen.text(area, bound.saturating_sub(6), 0, " bound ", pen.theme.heading());
    }
    let tried = scene.tried.as_ref().ok().map(|tried| tried.outcome.limits.as_slice()).unwrap_or_default();
    let mut pairs: Vec<(&LimitVerdict, Option<&LimitVerdict>)> =
        scene.now.limits.iter().map(|now| (now, tried.iter().find(|limit| limit.id == now.id))).collect();
    let room = usize::from(area.height - 1);
    let left_out = pairs.len().saturating_sub(room);
    if left_out > 0 {
        // Too few rows: the worst first, and the rest counted in the last.
        pairs.sort_by_key(|(now, tried)| worst(tried.unwrap_or(now).verdict));
        let rest = pairs.split_off(room.saturating_sub(1));
        let words: Vec<String> = rest
            .iter()
            .map(|(now, tried)| format!("{} {}", short(now.id), tried.unwrap_or(now).verdict.word()))
            .collect();
        pen.text(area, 0, area.height - 1, &words.join(", "), pen.theme.plain());
    }
    for (y, (now, tried)) in (1..).zip(pairs) {
        one(scene, now, tried, area, y, pen);
    }
}

const fn worst(verdict: Verdict) -> u8 {
    match verdict {
        Verdict::Beyond => 0,
        Verdict::Unknown => 1,
        Verdict::Near => 2,
        Verdict::Within => 3,
    }
}

/// A limit's name, short.
pub const fn short(id: LimitId) -> &'static str {
    match id {
        LimitId::TidalVolumePerKg => "volume",
        LimitId::Plateau => "plateau",
        LimitId::DrivingPressure => "driving",
        LimitId::Rate => "rate",
        LimitId::AutoPeep => "auto-PEEP",
        LimitId::ExpiratoryTimeConstants => "exp. time",
        LimitId::MechanicalPower => "power",
        LimitId::LoadIndex => "load",
        LimitId::Ph => "pH",
        LimitId::Paco2 => "PaCO2",
        LimitId::Paco2FallPerHour => "fall",
    }
}

/// The bounds with their unit, as short as they can be.
fn bound_words(limit: &LimitVerdict, face: Face) -> String {
    let words = bounds(limit, face).replace(" 1/min", "/min");
    if limit.id == LimitId::ExpiratoryTimeConstants { format!("{words} τ") } else { words }
}

/// A value with "at least" where it is.
fn value(limit: &LimitVerdict, scene: &Scene<'_>, face: Face) -> String {
    let Some(value) = limit.value else { return "–".to_owned() };
    let mark = match limit.id {
        LimitId::AutoPeep if scene.forecaster.trapping_assumed() => face.at_least(),
        LimitId::ExpiratoryTimeConstants if scene.forecaster.trapping_assumed() => face.at_most(),
        _ => "",
    };
    format!("{mark}{}", face.value(value, dimension(limit.id)))
}

fn one(
    scene: &Scene<'_>,
    now: &LimitVerdict,
    tried: Option<&LimitVerdict>,
    area: Rect,
    y: u16,
    pen: &mut Pen<'_>,
) {
    let (theme, face) = (pen.theme, pen.face);
    let (now_end, try_end, start, width) = columns(area.width);
    let names = Rect { width: now_end.saturating_sub(if area.width < 36 { 4 } else { 5 }), ..area };
    let name = if area.width >= 46 && now.id == LimitId::Rate { "total rate" } else { short(now.id) };
    let x = pen.text(names, 0, y, name, theme.plain());
    if area.width >= 36 {
        pen.text(names, x + 1, y, &bound_words(now, face), theme.quiet());
    }
    pen.right(area, now_end, y, &value(now, scene, face), theme.plain());
    let shown = tried.unwrap_or(now);
    let style = theme.verdict(shown.verdict);
    if let Some(tried) = tried {
        pen.right(area, try_end, y, &value(tried, scene, face), style);
    }
    if width > 0 {
        pen.text(area, start, y, &drawing(now, shown, width), style);
    }
    let narrow = area.width < 36;
    let verdict_x = area.width.saturating_sub(if narrow { VERDICT - 1 } else { VERDICT });
    let x = pen.text(area, verdict_x, y, mark(shown.verdict), style);
    pen.text(area, if narrow { x } else { x + 1 }, y, shown.verdict.word(), style);
}

fn drawing(now: &LimitVerdict, tried: &LimitVerdict, width: u16) -> String {
    let ph = now.id == LimitId::Ph;
    let Some(value) = tried.value else { return Rail::new(width, '┄').text() };
    let mut rail = Rail::new(width, '─');
    rail.fill(rail::BOUND, 1.0, ' ');
    rail.put(rail::BOUND, '│');
    if let Some(value) = now.value {
        rail.put(rail::place(value, now.min, now.max, ph), '○');
    }
    rail.put(rail::place(value, tried.min, tried.max, ph), '●');
    rail.text()
}
