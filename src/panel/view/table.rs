//! The table: rate across, volume or inspiratory pressure down, the forecast PaCO2 in each cell.

use std::cell::RefCell;

use ratatui::layout::{Position, Rect};

use super::pen::{Pen, cells};
use crate::case::entry::Control;
use crate::case::profile::{Figures, LimitId};
use crate::panel::action::Action;
use crate::panel::scene::Scene;
use crate::panel::state::{Mode, State};
use crate::planning::baseline::Baseline;
use crate::planning::dialled::Dialled;
use crate::planning::figures;
use crate::planning::gentle::{Least, Pairs};
use crate::planning::limits::{self, Verdict};
use crate::planning::solve::{RATES_PER_MIN, volume_range, volume_step};
use crate::planning::target::Target;
use crate::quantity::show::number;
use crate::quantity::unit::Dimension;

/// Width of a cell.
const CELL: u16 = 6;
/// Room for the volumes.
const MARGIN: u16 = 7;

/// The letter of a limit.
const fn letter(id: LimitId) -> char {
    match id {
        LimitId::TidalVolumePerKg => 'v',
        LimitId::Plateau => 'p',
        LimitId::DrivingPressure => 'd',
        LimitId::Rate => 'r',
        LimitId::AutoPeep => 'a',
        LimitId::ExpiratoryTimeConstants => 'e',
        LimitId::MechanicalPower => 'w',
        LimitId::LoadIndex => 'l',
        LimitId::Ph => 'h',
        LimitId::Paco2 => 'c',
        LimitId::Paco2FallPerHour => 'f',
    }
}

/// Which rates and volumes stand where.
struct Grid {
    rates: Vec<f64>,
    volumes: Vec<f64>,
    base: Dialled,
}

fn around(middle: f64, step: f64, [low, high]: [f64; 2], count: usize) -> Vec<f64> {
    let whole = (middle / step).round();
    let count = count as f64;
    let least = (low / step).ceil();
    let most = (high / step).floor();
    let first = (whole - (count / 2.0).floor()).min(most - count + 1.0).max(least);
    let last = (first + count - 1.0).min(most);
    (0..cells(last - first + 1.0)).map(|n| (first + n as f64) * step).collect()
}

fn grid(state: &State, scene: &Scene<'_>, area: Rect) -> Grid {
    let base = scene.dialled();
    let steps = scene.steps();
    let (rate, volume) = match state.mode {
        Mode::Walk { rate_per_min, volume } => (rate_per_min, volume),
        _ => (base.settings.rate_per_min, base.volume()),
    };
    let columns = usize::from(area.width.saturating_sub(MARGIN + 1) / CELL);
    let rows = usize::from(area.height.saturating_sub(1 + legend_rows(area)));
    Grid {
        rates: around(rate, steps.rate_per_min, RATES_PER_MIN, columns),
        volumes: around(volume, volume_step(&base, &steps), volume_range(&base), rows),
        base,
    }
}

const fn legend_rows(area: Rect) -> u16 {
    if area.height >= 8 { 2 } else { 1 }
}

/// The pair a click at a place takes.
pub fn cell_at(state: &State, scene: &Scene<'_>, area: Rect, at: Position) -> Option<Action> {
    let grid = grid(state, scene, area);
    let column = usize::from((at.x - area.x).checked_sub(MARGIN + 1)? / CELL);
    let row = usize::from((at.y - area.y).checked_sub(1)?);
    Some(Action::Take { rate_per_min: *grid.rates.get(column)?, volume: *grid.volumes.get(row)? })
}

/// Where the cursor stands while the table is walked.
pub fn cursor(state: &State, scene: &Scene<'_>, area: Rect) -> Option<Position> {
    let Mode::Walk { rate_per_min, volume } = state.mode else { return None };
    let grid = grid(state, scene, area);
    let column = grid.rates.iter().position(|rate| same(*rate, rate_per_min))?;
    let row = grid.volumes.iter().position(|other| same(*other, volume))?;
    Some(Position {
        x: area.x + MARGIN + 1 + u16::try_from(column).ok()? * CELL + CELL - 1,
        y: area.y + 1 + u16::try_from(row).ok()?,
    })
}

fn same(one: f64, other: f64) -> bool {
    (one - other).abs() < 1e-6
}

/// All that the gentlest pair hangs on.
#[derive(PartialEq)]
struct Asked {
    baseline: Baseline,
    figures: Figures,
    base: Dialled,
    target: Target,
}

thread_local! {
    /// The last question and its answer: the search looks at thousands of pairs, and turning rate or volume does not
    /// change what it finds. The whole question is compared, so an answer is never stale.
    static ANSWERED: RefCell<Option<(Asked, Option<Dialled>)>> = const { RefCell::new(None) };
}

/// The gentlest pair for the goal, sought from the rate and volume of now.
fn gentlest(scene: &Scene<'_>, base: &Dialled) -> Option<Dialled> {
    let target = *scene.target.as_ref().ok()?;
    let now = &scene.now_dialled;
    let base = if base.settings.control() == now.settings.control() {
        base.with_rate(now.settings.rate_per_min).with_volume(now.volume())
    } else {
        *base
    };
    let baseline = scene.forecaster.baseline();
    let asked = Asked { baseline: baseline.clone(), figures: figures(scene.record), base, target };
    ANSWERED.with_borrow_mut(|answered| match answered {
        Some((same, answer)) if *same == asked => *answer,
        _ => {
            let pairs = Pairs::search(&scene.forecaster, &base, target, Least::Load, &scene.now.state);
            let answer = pairs.ok().and_then(|pairs| pairs.choose(None).ok()).map(|chosen| chosen.dialled);
            *answered = Some((asked, answer));
            answer
        }
    })
}

/// Draws the view.
pub fn draw(state: &State, scene: &Scene<'_>, area: Rect, pen: &mut Pen<'_>) {
    let grid = grid(state, scene, area);
    let theme = pen.theme;
    let volume_unit = if grid.base.settings.control() == Control::Pressure { "cmH2O" } else { "mL" };
    pen.text(area, 0, 0, &format!("{volume_unit}|/min"), theme.quiet());
    for (x, rate) in (MARGIN + 1..).step_by(usize::from(CELL)).zip(&grid.rates) {
        pen.right(area, x + CELL - 1, 0, &number(*rate, 1), theme.heading());
    }
    let gentle = gentlest(scene, &grid.base);
    let mut letters: Vec<LimitId> = Vec::new();
    for (y, volume) in (1..).zip(&grid.volumes) {
        pen.right(area, MARGIN - 1, y, &number(*volume, 1), theme.heading());
        for (x, rate) in (MARGIN + 1..).step_by(usize::from(CELL)).zip(&grid.rates) {
            let dialled = grid.base.with_rate(*rate).with_volume(*volume);
            let walked = matches!(state.mode, Mode::Walk { rate_per_min, volume: at } if same(rate_per_min, *rate) && same(at, *volume));
            let sign = sign(scene, &dialled, gentle.as_ref());
            let Some(outcome) = scene.forecaster.state(&dialled) else {
                pen.right(area, x + CELL - 1, y, &format!("{sign} –"), theme.quiet());
                continue;
            };
            let broken = broken(scene, &outcome);
            if let Some(id) = broken
                && !letters.contains(&id)
            {
                letters.push(id);
            }
            let on_goal = scene.target.as_ref().is_ok_and(|target| target.met_by(outcome.paco2_mmhg));
            let style = match (walked, broken, on_goal) {
                (true, ..) => theme.marked(),
                (_, Some(_), _) => theme.verdict(Verdict::Beyond),
                (_, None, true) => theme.goal(),
                (_, None, false) => theme.plain(),
            };
            let goal = if on_goal { "=" } else { " " };
            let shown = pen.face.value(outcome.paco2_mmhg.min(999.0), Dimension::GasPressure);
            let text = format!("{sign}{goal}{shown:>3}{}", broken.map_or(' ', letter));
            let wide = u16::try_from(text.chars().count()).unwrap_or(CELL);
            pen.text(area, x + CELL - wide.min(CELL), y, &text, style);
        }
    }
    legend(scene, &letters, gentle.as_ref(), area, pen);
}

fn broken(scene: &Scene<'_>, outcome: &crate::planning::state::State) -> Option<LimitId> {
    let profile = &scene.forecaster.baseline().profile;
    profile
        .limits
        .iter()
        .find(|limit| {
            limits::value(outcome, limit.id).is_some_and(|value| !limits::excess(limit, value).none())
        })
        .map(|limit| limit.id)
}

fn sign(scene: &Scene<'_>, dialled: &Dialled, gentle: Option<&Dialled>) -> char {
    let is = |other: &Dialled| {
        same(other.settings.rate_per_min, dialled.settings.rate_per_min)
            && same(other.volume(), dialled.volume())
    };
    if is(&scene.dialled()) {
        '●'
    } else if gentle.is_some_and(is) {
        '◆'
    } else if scene.now_dialled.settings.control() == dialled.settings.control() && is(&scene.now_dialled) {
        '○'
    } else {
        ' '
    }
}

fn legend(scene: &Scene<'_>, letters: &[LimitId], gentle: Option<&Dialled>, area: Rect, pen: &mut Pen<'_>) {
    let pair = |dialled: &Dialled| {
        format!("{} × {}", number(dialled.settings.rate_per_min, 1), number(dialled.volume(), 1))
    };
    let gentle =
        gentle.map_or_else(|| "no gentlest pair".to_owned(), |gentle| format!("◆ gentlest {}", pair(gentle)));
    let signs =
        format!("○ now {} · ● try · {gentle} · = on the goal · Enter walks", pair(&scene.now_dialled));
    let beyond: Vec<String> = letters.iter().map(|id| format!("{} {}", letter(*id), id.words())).collect();
    let beyond = if beyond.is_empty() {
        "no limit known to be broken here".to_owned()
    } else {
        format!("beyond: {}", beyond.join(", "))
    };
    let last = area.height - 1;
    if legend_rows(area) == 2 {
        pen.text(area, 1, last - 1, &signs, pen.theme.plain());
        pen.text(area, 1, last, &beyond, pen.theme.plain());
    } else {
        pen.text(area, 1, last, &format!("{beyond} · {signs}"), pen.theme.plain());
    }
}
