//! Who the patient is, the names of the views, and the strip above a large view.

use ratatui::layout::{Position, Rect};
use unicode_width::UnicodeWidthStr;

use super::layout::Layout;
use super::pen::Pen;
use crate::case::entry::Sex;
use crate::case::fault::Fault;
use crate::panel::scene::Scene;
use crate::panel::state::{State, View};
use crate::planning::limits::Verdict;
use crate::quantity::unit::Dimension;

/// Draws the head and the names of the views.
pub fn draw(state: &State, scene: Result<&Scene<'_>, &[Fault]>, layout: &Layout, pen: &mut Pen<'_>) {
    let gas = gas(state);
    let end = layout.head.width.saturating_sub(u16::try_from(gas.width()).unwrap_or(0) + 1);
    let left = Rect { width: end.saturating_sub(2), ..layout.head };
    pen.text(left, 1, 0, &patient(state, scene.ok()), pen.theme.heading());
    pen.text(layout.head, end, 0, &gas, pen.theme.plain());
    tabs(state, layout, pen);
}

fn patient(state: &State, scene: Option<&Scene<'_>>) -> String {
    let record = state.record();
    let patient = record.patient();
    let mut parts = Vec::new();
    if !record.label().is_empty() {
        parts.push(record.label().to_owned());
    }
    let sex = patient.sex.map(|sex| match sex {
        Sex::Female => "female",
        Sex::Male => "male",
    });
    let height = patient.height_cm.map(|cm| format!("{} cm", state.face.value(cm, Dimension::Length)));
    let who: Vec<String> = sex.map(str::to_owned).into_iter().chain(height).collect();
    if !who.is_empty() {
        parts.push(who.join(" "));
    }
    if let Some(scene) = scene {
        parts.push(scene.forecaster.baseline().predicted_weight_kg.map_or_else(
            || "predicted weight unknown".to_owned(),
            |kg| format!("{} kg predicted", state.face.value(kg, Dimension::Mass)),
        ));
    }
    let chosen = if state.turned.profile.is_some() { " (chosen here)" } else { "" };
    parts.push(format!("{}{chosen}", record.profile().name));
    if state.read_only.is_some() {
        parts.push("READ ONLY".to_owned());
    }
    parts.join(" · ")
}

/// When the latest gas was drawn.
fn gas(state: &State) -> String {
    let latest = state
        .charted
        .occasions()
        .iter()
        .filter(|occasion| occasion.entry.gas.paco2_mmhg.is_some())
        .max_by_key(|occasion| occasion.drawn_at());
    match latest {
        None => "no gas charted".to_owned(),
        Some(occasion) => {
            occasion.drawn_at().map_or_else(|| "gas without a time".to_owned(), |at| format!("gas {at}"))
        }
    }
}

/// Each view's name with where it begins and ends.
fn places(layout: &Layout) -> Vec<(View, u16, u16)> {
    let mut x = 2;
    View::ALL
        .into_iter()
        .map(|view| {
            let start = x;
            x += u16::try_from(view.name().len()).unwrap_or(0) + 2;
            (view, start, x)
        })
        .filter(|(_, start, _)| *start < layout.tabs.width)
        .collect()
}

/// The view whose name is at a place.
pub fn tab_at(layout: &Layout, _: &State, at: Position) -> Option<View> {
    if !layout.tabs.contains(at) {
        return None;
    }
    let x = at.x - layout.tabs.x;
    places(layout).into_iter().find(|(_, start, end)| (*start..*end).contains(&x)).map(|(view, ..)| view)
}

fn tabs(state: &State, layout: &Layout, pen: &mut Pen<'_>) {
    let place = layout.tabs;
    let rule = "─".repeat(usize::from(place.width));
    pen.text(place, 0, 0, &rule, pen.theme.quiet());
    for (view, start, _) in places(layout) {
        if view == state.view {
            pen.text(place, start, 0, &format!("[{}]", view.name()), pen.theme.marked());
        } else {
            pen.text(place, start, 0, &format!(" {} ", view.name()), pen.theme.plain());
        }
    }
    if let Some((second, beside)) = layout.views.get(1) {
        pen.text(place, beside.x - place.x, 0, &format!(" {} ", second.name()), pen.theme.heading());
    }
}

/// Three rows above a large view: nothing essential is lost while it is open.
pub fn strip(state: &State, scene: &Scene<'_>, area: Rect, pen: &mut Pen<'_>) {
    let (theme, face) = (pen.theme, state.face);
    let Ok(tried) = &scene.tried else { return };
    let (now, outcome) = (&scene.now.state, &tried.outcome);
    let gas = |mmhg: f64| face.value(mmhg, Dimension::GasPressure);
    let x = pen.text(
        area,
        1,
        0,
        &format!(
            "PaCO2 now {} try {} {}",
            gas(now.paco2_mmhg),
            gas(outcome.state.paco2_mmhg),
            face.unit.word()
        ),
        theme.tried(),
    );
    let interval = &outcome.interval;
    let within = face.gas_range(interval.paco2_low_mmhg, interval.paco2_high_mmhg);
    let ph = |ph: Option<f64>| face.known(ph, Dimension::Ph);
    pen.text(
        area,
        x,
        0,
        &format!(", 9 gases in 10 in {within} · pH now {} try {}", ph(now.ph), ph(outcome.state.ph)),
        theme.plain(),
    );
    let names = |verdict: Verdict| -> Vec<&str> {
        outcome.limits.iter().filter(|limit| limit.verdict == verdict).map(|limit| limit.id.words()).collect()
    };
    let mut x = 1;
    for verdict in [Verdict::Beyond, Verdict::Unknown, Verdict::Near, Verdict::Within] {
        let names = names(verdict);
        if !names.is_empty() {
            let said = format!("{}: {}  ", verdict.word(), names.join(", "));
            x = pen.text(area, x, 1, &said, theme.verdict(verdict));
        }
    }
    let marked = state.marked.name(tried.dialled.settings.timing);
    pen.text(area, 1, 2, &format!("arrows turn {marked} · v brings the settings back"), theme.quiet());
}
