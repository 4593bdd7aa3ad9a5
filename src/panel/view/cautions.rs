//! Cautions: what is beyond its limit and what a reader must know, each with what to do.

use ratatui::layout::Rect;
use ratatui::style::Style;

use super::pen::{Pen, lines};
use crate::case::profile::LimitId;
use crate::note::columns::{bounds, dimension};
use crate::note::face::Face;
use crate::panel::scene::Scene;
use crate::panel::state::State;
use crate::planning::limits::{LimitVerdict, Verdict};

/// Every caution as a sentence, what is beyond first.
fn sentences(scene: &Scene<'_>, face: Face) -> Vec<String> {
    let tried = scene.tried.as_ref().ok().map(|tried| tried.outcome.limits.as_slice()).unwrap_or_default();
    let beyond = tried.iter().filter(|limit| limit.verdict == Verdict::Beyond);
    let mut sentences: Vec<String> = beyond.map(|limit| of_limit(limit, face)).collect();
    sentences.extend(scene.cautions().into_iter().map(|caution| caution.text));
    sentences
}

fn of_limit(limit: &LimitVerdict, face: Face) -> String {
    let value =
        limit.value.map_or_else(|| "unknown".to_owned(), |value| face.value(value, dimension(limit.id)));
    let words = limit.id.words();
    let over = limit.max.zip(limit.value).is_some_and(|(max, value)| value > max);
    let bounds = bounds(limit, face).replace(" 1/min", "/min");
    format!("{words} {value} is beyond {bounds}: {}.", remedy(limit.id, over))
}

/// What brings a value back inside, common practice.
const fn remedy(id: LimitId, over: bool) -> &'static str {
    match (id, over) {
        (LimitId::TidalVolumePerKg, true) | (LimitId::DrivingPressure, _) => {
            "lower the tidal volume or the inspiratory pressure"
        }
        (LimitId::TidalVolumePerKg, false) => "raise the tidal volume or the inspiratory pressure",
        (LimitId::Plateau, _) => "lower tidal volume, inspiratory pressure, PEEP or trapping",
        (LimitId::Rate, true) => "lower the rate",
        (LimitId::Rate, false) => "raise the rate",
        (LimitId::AutoPeep | LimitId::ExpiratoryTimeConstants, _) => {
            "lower the rate or shorten inspiration, so that the lung has time to empty"
        }
        (LimitId::MechanicalPower | LimitId::LoadIndex, _) => "lower the rate, the volume or the pressure",
        (LimitId::Ph, false) => "clear more CO2, or treat what is metabolic",
        (LimitId::Ph, true) | (LimitId::Paco2, false) => "clear less CO2",
        (LimitId::Paco2, true) => "clear more CO2",
        (LimitId::Paco2FallPerHour, _) => "change in smaller steps",
    }
}

/// The foot of the screen: as many as fit, the rest counted.
pub fn foot(scene: &Scene<'_>, area: Rect, pen: &mut Pen<'_>) {
    let sentences = sentences(scene, pen.face);
    let mut y = 0;
    for (index, sentence) in sentences.iter().enumerate() {
        let wrapped = lines(sentence, area.width.saturating_sub(4));
        let height = u16::try_from(wrapped.len()).unwrap_or(u16::MAX);
        let left = sentences.len() - index;
        if y > 0 && y + height + u16::from(left > 1) > area.height {
            let last = area.height - 1;
            let y = y.min(last);
            pen.text(area, 1, y, &format!("+ {left} more: press !"), pen.theme.caution());
            return;
        }
        one(&wrapped, area, y, pen);
        y = y.saturating_add(height);
        if y >= area.height {
            if left > 1 || y > area.height {
                let more =
                    if left > 1 { format!(" + {} more: ! ", left - 1) } else { " more: ! ".to_owned() };
                pen.right(area, area.width, area.height - 1, &more, pen.theme.key());
            }
            return;
        }
    }
}

fn one(wrapped: &[String], area: Rect, y: u16, pen: &mut Pen<'_>) -> u16 {
    pen.text(area, 1, y, "!", pen.theme.caution());
    let mut y = y;
    for line in wrapped {
        pen.text(area, 3, y, line, Style::new());
        y = y.saturating_add(1);
    }
    y
}

/// The view: all of them in full.
pub fn draw(state: &State, scene: &Scene<'_>, area: Rect, pen: &mut Pen<'_>) {
    let sentences = sentences(scene, pen.face);
    if sentences.is_empty() {
        pen.text(area, 1, 0, "No caution. Confirm with a repeat gas all the same.", pen.theme.plain());
    }
    let wrapped: Vec<(bool, String)> = sentences
        .iter()
        .flat_map(|sentence| {
            lines(sentence, area.width.saturating_sub(4))
                .into_iter()
                .enumerate()
                .map(|(at, line)| (at == 0, line))
        })
        .collect();
    let most = wrapped.len().saturating_sub(usize::from(area.height));
    let from = state.scroll.min(most);
    for (y, (first, line)) in (0..area.height).zip(wrapped.iter().skip(from)) {
        if *first {
            pen.text(area, 1, y, "!", pen.theme.caution());
        }
        pen.text(area, 3, y, line, pen.theme.plain());
    }
    if most > from {
        pen.right(area, area.width, area.height.saturating_sub(1), " PageDown: more ", pen.theme.key());
    }
}
