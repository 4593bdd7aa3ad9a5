//! The screen: what stands where, and the parts that draw it. Nothing here changes the state.

mod ask;
mod breath;
mod cautions;
mod course;
mod curve;
mod follows;
mod foot;
mod form;
mod head;
mod help;
mod kept;
mod layout;
mod limits;
mod pen;
mod plot;
mod rail;
mod record;
mod settings;
mod table;
mod working;

use ratatui::Frame;
use ratatui::buffer::Buffer;
use ratatui::layout::{Position, Rect};

use super::action::Action;
use super::scene::Scene;
use super::state::{Mode, State, View};
use super::theme;
use crate::case::fault::Fault;
use crate::planning::baseline::Baseline;
use layout::{Layout, Needs};
use pen::Pen;

/// The smallest screen that shows everything essential.
pub const LEAST: (u16, u16) = (60, 18);

/// Draws the state.
pub fn draw(state: &State, frame: &mut Frame<'_>) {
    let area = frame.area();
    let cursor = paint(state, area, frame.buffer_mut());
    if let Some(cursor) = cursor.filter(|cursor| area.contains(*cursor)) {
        frame.set_cursor_position(cursor);
    }
}

/// Paints the state into a buffer; gives where the cursor stands.
pub fn paint(state: &State, area: Rect, buffer: &mut Buffer) -> Option<Position> {
    let mut pen = Pen { buffer, theme: state.theme, face: state.face };
    let cursor = if area.width < LEAST.0 || area.height < LEAST.1 {
        too_small(area, &mut pen);
        None
    } else {
        with_scene(state, |scene| screen(state, scene, area, &mut pen))
    };
    if state.face.ascii {
        to_ascii(area, buffer);
    }
    cursor
}

/// What a click or turn of the wheel at a place asks for.
pub fn touched(state: &State, area: Rect, at: Position, wheel: i32) -> Option<Action> {
    if area.width < LEAST.0 || area.height < LEAST.1 || !matches!(state.mode, Mode::Look | Mode::Walk { .. })
    {
        return None;
    }
    with_scene(state, |scene| {
        let layout = Layout::of(state, area, needs(state, scene));
        if let Some(view) = head::tab_at(&layout, state, at) {
            return (wheel == 0).then_some(Action::OpenView(view));
        }
        let scene = scene.ok()?;
        if let Some(line) = settings::line_at(&layout, state, scene, at) {
            return Some(if wheel == 0 { Action::MarkLine(line) } else { Action::TurnLine(line, wheel) });
        }
        let (_, place) = layout.views.iter().find(|(_, place)| place.contains(at))?;
        if wheel != 0 {
            return Some(Action::Scroll(isize::try_from(-wheel).unwrap_or(0)));
        }
        let table = layout.views.iter().find(|(view, _)| *view == View::Table)?;
        (table.1 == *place).then(|| table::cell_at(state, scene, *place, at)).flatten()
    })
}

fn with_scene<T>(state: &State, see: impl FnOnce(Result<&Scene<'_>, &[Fault]>) -> T) -> T {
    let record = state.record();
    match Baseline::read(&record) {
        Err(faults) => see(Err(&faults)),
        Ok(baseline) => match Scene::of(&record, &baseline, &state.turned) {
            Err(faults) => see(Err(&faults)),
            Ok(scene) => see(Ok(&scene)),
        },
    }
}

fn needs(state: &State, scene: Result<&Scene<'_>, &[Fault]>) -> Needs {
    scene.map_or(Needs { settings: 6, limits: 0 }, |scene| Needs {
        settings: settings::rows(state, scene).len(),
        limits: scene.now.limits.len(),
    })
}

fn too_small(area: Rect, pen: &mut Pen<'_>) {
    let (width, height) = LEAST;
    let said = format!("{width}×{height} cells are needed; these are {}×{}.", area.width, area.height);
    pen.text(area, 0, 0, &said, pen.theme.plain());
}

fn screen(
    state: &State,
    scene: Result<&Scene<'_>, &[Fault]>,
    area: Rect,
    pen: &mut Pen<'_>,
) -> Option<Position> {
    let layout = Layout::of(state, area, needs(state, scene));
    let cursor = above_foot(state, scene, &layout, pen);
    foot::draw(state, &layout, pen);
    cursor
}

fn above_foot(
    state: &State,
    scene: Result<&Scene<'_>, &[Fault]>,
    layout: &Layout,
    pen: &mut Pen<'_>,
) -> Option<Position> {
    let whole = layout.whole;
    match &state.mode {
        Mode::Help { query, chosen } => return Some(help::draw(query, *chosen, state, whole, pen)),
        Mode::Form(form) => return form::draw(form, state, whole, pen),
        Mode::Profiles { chosen } => return ask::profiles(*chosen, state, whole, pen),
        Mode::Chart { dialled } => return Some(ask::chart(*dialled, state, whole, pen)),
        Mode::Naming { name, entry } => return Some(ask::naming(name, entry, state, whole, pen)),
        Mode::Recover(kept) => return Some(ask::recover(kept, whole, pen)),
        Mode::Leave(form) => return Some(ask::leave(form, whole, pen)),
        Mode::Look | Mode::Typing(_) | Mode::Walk { .. } | Mode::Slots | Mode::Note => {}
    }
    head::draw(state, scene, layout, pen);
    match scene {
        Err(faults) => {
            ask::no_forecast(faults, layout.body, pen);
            for (view, place) in &layout.views {
                match view {
                    View::Record => record::draw(state, *place, pen),
                    _ => {
                        pen.text(
                            *place,
                            1,
                            0,
                            "Nothing to draw without a forecast; the record still reads.",
                            pen.theme.plain(),
                        );
                    }
                }
            }
            None
        }
        Ok(scene) => {
            let cursor = if layout.large {
                head::strip(state, scene, layout.body, pen);
                None
            } else {
                let cursor = settings::draw(state, scene, layout.settings, pen);
                follows::draw(scene, layout.follows, pen);
                limits::draw(scene, layout.limits, pen);
                layout.separators(pen);
                cursor
            };
            for (view, place) in &layout.views {
                view_in(*view, state, scene, *place, pen);
            }
            cautions::foot(scene, layout.cautions, pen);
            cursor.or_else(|| table_cursor(state, scene, layout))
        }
    }
}

fn table_cursor(state: &State, scene: &Scene<'_>, layout: &Layout) -> Option<Position> {
    let (_, place) = layout.views.iter().find(|(view, _)| *view == View::Table)?;
    table::cursor(state, scene, *place)
}

fn view_in(view: View, state: &State, scene: &Scene<'_>, place: Rect, pen: &mut Pen<'_>) {
    match view {
        View::Curve => curve::draw(state, scene, place, pen),
        View::Table => table::draw(state, scene, place, pen),
        View::Course => course::draw(scene, place, pen),
        View::Breath => breath::draw(scene, place, pen),
        View::Kept => kept::draw(state, scene, place, pen),
        View::Record => record::draw(state, place, pen),
        View::Working => working::draw(state, scene, place, pen),
        View::Cautions => cautions::draw(state, scene, place, pen),
    }
}

fn to_ascii(area: Rect, buffer: &mut Buffer) {
    for position in area.positions() {
        if let Some(cell) = buffer.cell_mut(position) {
            let plain = theme::ascii(cell.symbol()).to_owned();
            if plain != cell.symbol() {
                cell.set_symbol(&plain);
            }
        }
    }
}
