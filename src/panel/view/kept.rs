//! The kept trials beside now and try.

use ratatui::layout::Rect;

use super::limits::short;
use super::pen::Pen;
use crate::case::entry::Control;
use crate::note::columns::dimension;
use crate::panel::scene::{Scene, Tried};
use crate::panel::state::State;
use crate::panel::theme::mark;
use crate::planning::dialled::Dialled;
use crate::planning::outcome::Outcome;
use crate::quantity::show::number;
use crate::quantity::unit::Dimension;

/// Room for the names.
const NAME: u16 = 18;
/// Width of a column.
const COLUMN: u16 = 13;

/// One row: its name, and what it says of a column.
type Row = (String, Box<dyn Fn(&Dialled, &Outcome) -> String>);
/// One column: its head, what is dialled, what that leads to.
type Column = (String, Option<(Dialled, Outcome)>);

fn columns(state: &State, scene: &Scene<'_>) -> Vec<Column> {
    let tried = scene.tried.as_ref().ok().map(|Tried { dialled, outcome, .. }| (*dialled, outcome.clone()));
    let mut columns =
        vec![("now".to_owned(), Some((scene.now_dialled, scene.now.clone()))), ("try".to_owned(), tried)];
    for (number, slot) in (1..).zip(&state.slots) {
        let Some(kept) = slot else { continue };
        let dialled = kept.trial.apply(&scene.forecaster).ok();
        let outcome = dialled
            .and_then(|dialled| Some((dialled, scene.forecaster.outcome(&dialled, scene.band_mmhg())?)));
        columns.push((format!("{number}"), outcome));
    }
    columns
}

/// Draws the view.
pub fn draw(state: &State, scene: &Scene<'_>, area: Rect, pen: &mut Pen<'_>) {
    let columns = columns(state, scene);
    let face = pen.face;
    let unit = face.unit.word();
    let mut rows: Vec<Row> = vec![
        ("rate × volume".to_owned(), Box::new(|dialled, _| dialled_words(dialled))),
        (
            format!("PaCO2 {unit}"),
            Box::new(move |_, outcome| face.value(outcome.state.paco2_mmhg, Dimension::GasPressure)),
        ),
        (
            "9 gases in 10 in".to_owned(),
            Box::new(move |_, outcome| {
                let interval = &outcome.interval;
                if interval.paco2_expected_mmhg.is_none() {
                    return "measured".to_owned();
                }
                face.gas_range(interval.paco2_low_mmhg, interval.paco2_high_mmhg)
            }),
        ),
        (
            "in 100 on the goal".to_owned(),
            Box::new(|_, outcome| {
                outcome
                    .interval
                    .chance_on_target
                    .map_or_else(|| "–".to_owned(), |chance| format!("{:.0}", chance * 100.0))
            }),
        ),
        ("pH".to_owned(), Box::new(move |_, outcome| face.known(outcome.state.ph, Dimension::Ph))),
    ];
    for limit in &scene.now.limits {
        let id = limit.id;
        rows.push((
            short(id).to_owned(),
            Box::new(move |_, outcome| {
                let Some(limit) = outcome.limits.iter().find(|limit| limit.id == id) else {
                    return String::new();
                };
                let shown =
                    limit.value.map_or_else(|| "–".to_owned(), |value| face.value(value, dimension(id)));
                format!("{shown} {}{}", mark(limit.verdict).trim(), limit.verdict.word())
            }),
        ));
    }
    for (column, (title, _)) in (1..).zip(&columns) {
        pen.right(area, NAME + column * COLUMN, 0, title, pen.theme.heading());
    }
    if columns.len() == 2 {
        let said = "No trial is kept yet: s, then 1, 2 or 3, keeps what is tried.";
        let beside = Rect {
            x: area.x + NAME + 2 * COLUMN + 3,
            width: area.width.saturating_sub(NAME + 2 * COLUMN + 3),
            ..area
        };
        pen.wrapped(beside, 0, said, pen.theme.plain());
    }
    for (y, (name, cell)) in (1..area.height).zip(&rows) {
        pen.text(area, 1, y, name, pen.theme.plain());
        for (column, (title, outcome)) in (1..).zip(&columns) {
            let shown = outcome
                .as_ref()
                .map_or_else(|| "no longer fits".to_owned(), |(dialled, outcome)| cell(dialled, outcome));
            let style = if title == "try" { pen.theme.tried() } else { pen.theme.plain() };
            pen.right(area, NAME + column * COLUMN, y, &shown, style);
        }
    }
}

fn dialled_words(dialled: &Dialled) -> String {
    let rate = number(dialled.settings.rate_per_min, 1);
    let volume = number(dialled.volume(), 1);
    match dialled.settings.control() {
        Control::Pressure => format!("{rate}, {volume} cmH2O"),
        Control::Volume | Control::Support => format!("{rate}, {volume} mL"),
    }
}
