//! One breath shared out, now against try, to scale; and how much of it is still in when the next one begins.

use ratatui::layout::Rect;
use ratatui::style::Style;

use super::pen::{Pen, cells};
use crate::panel::scene::Scene;
use crate::planning::baseline::gas_exchange::SeriesEvidence;
use crate::planning::state::State;
use crate::quantity::show::number;

/// A share of the breath: its sign, its name, mL.
type Share = (char, &'static str, f64);

fn shares(state: &State) -> Vec<Share> {
    let airway = state.series_dead_space_ml - state.apparatus_dead_space_ml;
    let past = state.tidal_volume_ml - state.series_dead_space_ml;
    let mut shares = vec![('▓', "apparatus", state.apparatus_dead_space_ml), ('▒', "airway", airway)];
    match state.alveolar_dead_space_ml {
        Some(alveolar) => {
            shares.push(('░', "alveolar, no blood", alveolar));
            shares.push(('█', "useful", past - alveolar));
        }
        None => shares.push(('█', "past the airway, useful part unknown", past)),
    }
    shares
}

/// Draws the view.
pub fn draw(scene: &Scene<'_>, area: Rect, pen: &mut Pen<'_>) {
    let Ok(tried) = &scene.tried else { return };
    let both = [("now", &scene.now.state), ("try", &tried.outcome.state)];
    let most = both.iter().map(|(_, state)| state.tidal_volume_ml).fold(1.0, f64::max);
    let room = area.width.saturating_sub(18);
    let tall = area.height >= 10;
    let mut y = 0;
    for (name, state) in both {
        let style = if name == "try" { pen.theme.tried() } else { pen.theme.plain() };
        for row in 0..if tall { 2 } else { 1 } {
            if row == 0 {
                pen.text(area, 1, y, name, pen.theme.heading());
            }
            let mut x = 6;
            let mut done = 0.0;
            for (sign, _, ml) in shares(state) {
                // To scale from the left edge, so that rounding does not add up.
                let from = (done / most * f64::from(room)).round();
                done += ml;
                let to = (done / most * f64::from(room)).round();
                let bar = sign.to_string().repeat(cells(to - from));
                x = pen.text(area, x, y, &bar, style);
            }
            if row == 0 {
                pen.text(
                    area,
                    x + 1,
                    y,
                    &format!("{} mL", number(state.tidal_volume_ml, 0)),
                    pen.theme.plain(),
                );
            }
            y += 1;
        }
        if tall {
            y += 1;
        }
    }
    legend(scene, both.map(|(_, state)| state), area, y, pen);
}

fn legend(scene: &Scene<'_>, [now, tried]: [&State; 2], area: Rect, y: u16, pen: &mut Pen<'_>) {
    if area.height < 6 {
        let names: Vec<String> = shares(now).iter().map(|(sign, name, _)| format!("{sign} {name}")).collect();
        pen.text(area, 1, y, &names.join("  "), pen.theme.plain());
        let left = |state: &State| {
            state.trapped_volume_ml.map_or_else(|| "unknown".to_owned(), |ml| format!("{} mL", number(ml, 0)))
        };
        let least = if scene.forecaster.trapping_assumed() { "at least " } else { "" };
        let said =
            format!("Still in when the next breath begins: {least}now {}, try {}.", left(now), left(tried));
        pen.text(area, 1, y + 1, &said, pen.theme.plain());
        return;
    }
    let baseline = scene.forecaster.baseline();
    let by_rule = baseline.exchange.series_evidence == SeriesEvidence::Rule;
    let mut y = y;
    let mut x = 1;
    for ((sign, name, before), (_, _, after)) in shares(now).into_iter().zip(shares(tried)) {
        let assumed = if name == "airway" && by_rule { " (assumed)" } else { "" };
        let said = format!("{sign} {name}{assumed} {} to {} mL  ", number(before, 0), number(after, 0));
        let wide = u16::try_from(said.chars().count()).unwrap_or(u16::MAX);
        if x > 1 && x + wide > area.width {
            x = 1;
            y += 1;
        }
        x = pen.text(area, x, y, &said, pen.theme.plain());
    }
    y += 1;
    let said = trapped(scene, now, tried);
    let style = if now.trapped_volume_ml.is_none() { pen.theme.caution() } else { Style::new() };
    pen.wrapped(Rect { x: area.x + 1, width: area.width - 1, ..area }, y, &said, style);
}

/// How much of a breath has left when the next begins.
fn trapped(scene: &Scene<'_>, now: &State, tried: &State) -> String {
    let of = |state: &State| {
        let trapped = state.trapped_volume_ml?;
        let full = state.tidal_volume_ml + trapped;
        let least = if scene.forecaster.trapping_assumed() { "at least " } else { "" };
        Some(format!("{least}{} mL ({:.0} %)", number(trapped, 0), 100.0 * trapped / full))
    };
    match (of(now), of(tried)) {
        (Some(now), Some(tried)) => {
            format!("Still in the lung above its resting volume when the next breath begins: now {now}, try {tried} of the full lung.")
        }
        _ => "What is still in when the next breath begins is unknown: measure total PEEP with an expiratory hold, and peak \
              with plateau."
            .to_owned(),
    }
}
