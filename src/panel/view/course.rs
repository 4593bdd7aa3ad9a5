//! The next hour: PaCO2 on its way, how sure, when it has settled and when to draw.

use ratatui::layout::Rect;

use super::pen::{Pen, lines};
use super::plot::Plot;
use crate::note::course_line;
use crate::panel::scene::Scene;
use crate::quantity::unit::Dimension;

/// Draws the view.
pub fn draw(scene: &Scene<'_>, area: Rect, pen: &mut Pen<'_>) {
    let Ok(tried) = &scene.tried else { return };
    let Some(course) = &tried.course else {
        let said = "When PaCO2 will have settled is unknown without sex and height (or a predicted weight) and CO2 output. \
                    Repeat the gas after 30 min, and again after 60.";
        pen.wrapped(area, 0, said, pen.theme.plain());
        return;
    };
    let small = area.height < 6;
    let words: Vec<String> = course_line::words(course, pen.face)
        .iter()
        // On a small screen only when to draw the gas is said.
        .skip(usize::from(small))
        .flat_map(|line| lines(line, area.width.saturating_sub(2)))
        .collect();
    let below = u16::try_from(words.len()).unwrap_or(2).min(area.height.saturating_sub(3).max(1));
    let above = Rect { height: area.height.saturating_sub(below), ..area };
    let interval = &tried.outcome.interval;
    let to = |mmhg: Option<f64>| mmhg.and_then(|mmhg| scene.forecaster.curve(&tried.dialled, mmhg));
    let (low, high) = (to(interval.paco2_low_mmhg), to(interval.paco2_high_mmhg));
    let curve = &course.curve;
    let now = scene.now.state.paco2_mmhg;
    let mut ends = vec![now, curve.paco2_mmhg(60.0)];
    ends.extend(low.map(|low| low.paco2_mmhg(60.0)));
    ends.extend(high.map(|high| high.paco2_mmhg(60.0)));
    ends.extend(scene.band_mmhg().into_iter().flatten());
    let (least, most) =
        ends.into_iter().fold((f64::INFINITY, 0.0_f64), |(low, high), p| (low.min(p), high.max(p)));
    let y = [(least - 3.0).max(0.0), (most + 3.0).min(170.0).max(least + 10.0)];
    let title = u16::from(!small);
    if !small {
        pen.text(
            above,
            1,
            0,
            "PaCO2 over the next hour; between the outer lines 9 gases in 10",
            pen.theme.quiet(),
        );
    }
    let place = Rect { y: above.y + title, height: above.height.saturating_sub(title), ..above };
    let mut plot = Plot::new(place, [0.0, 60.0], y);
    if let Some(band) = scene.band_mmhg() {
        plot.shade(band);
    }
    for course in [Some(*curve), low, high].into_iter().flatten() {
        let points: Vec<_> = (0..plot.columns())
            .map(|column| plot.x_at(column))
            .map(|minutes| (minutes, Some(course.paco2_mmhg(minutes))))
            .collect();
        plot.curve(points.into_iter());
    }
    if course.settled_minutes > 0.0 {
        plot.sign(course.settled_minutes, curve.paco2_mmhg(course.settled_minutes), '●');
    }
    plot.sign(0.0, now, '○');
    plot.upright(course.next_gas_minutes, y[0], y[1], '┆');
    let gas = |mmhg: f64| pen.face.value(mmhg, Dimension::GasPressure);
    let ends = [gas(y[0]), gas(y[1])];
    plot.draw(place, [&ends[0], &ends[1], "0", "60 min"], pen);
    for (y, line) in (above.height..area.height).zip(words) {
        pen.text(area, 1, y, &line, pen.theme.heading());
    }
}
