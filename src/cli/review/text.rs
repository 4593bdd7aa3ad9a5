//! The summary of a review in plain text.

use super::Review;
use crate::note::face::Face;
use crate::planning::review::{Figures, Fitted};

/// Below this many forecasts after a change the fitted `change` is the default.
const FEWEST_CHANGED: u64 = 20;
/// Width of the longest bar.
const BAR: f64 = 40.0;

/// The summary as text that fits 80 columns.
pub fn of(review: &Review, within_hours: f64, face: Face) -> String {
    let mut lines = vec![format!(
        "{} gases of {} stays; {} forecast (each within {within_hours} h of the gas before).",
        review.rows, review.stays, review.figures.forecasts
    )];
    if review.skipped > 0 {
        lines.push(format!("{} bad rows were left out:", review.skipped));
        lines.extend(
            review
                .bad_rows
                .iter()
                .take(10)
                .map(|bad| face.wrapped(&format!("line {}: {}", bad.line, bad.message), "  ", "    ")),
        );
        if review.skipped > 10 {
            lines.push("  … the rest stands in --json".replace('…', if face.ascii { "..." } else { "…" }));
        }
    }
    if review.figures.forecasts == 0 {
        lines.push(
            "No gas follows another closely enough, so nothing could be forecast and scored.".to_owned(),
        );
        return finish(&lines);
    }
    lines.push(String::new());
    lines.push(format!("{:<44}{:>14}{:>18}", "", "all forecasts", "after a change"));
    let pair = |name: &str, of: &dyn Fn(&Figures) -> String| {
        format!("{name:<44}{:>14}{:>18}", of(&review.figures), of(&review.after_change))
    };
    let percent =
        |share: Option<f64>| share.map_or("none".to_owned(), |share| format!("{:.0} %", share * 100.0));
    let error = |ln: Option<f64>| ln.map_or("none".to_owned(), |ln| format!("{ln:.3}"));
    lines.push(pair("forecasts", &|figures| figures.forecasts.to_string()));
    lines.push(pair("inside 9 in 10 (honest: 85 to 95 %)", &|figures| percent(figures.wide_coverage)));
    lines.push(pair("inside 1 in 2 (honest: 42 to 60 %)", &|figures| percent(figures.half_coverage)));
    lines.push("mean error, as |ln(measured/forecast)|; 0.1 is about 10 %".to_owned());
    lines.push(pair("  the expectation", &|figures| error(figures.mean_absolute_log_error)));
    lines.push(pair("  plain arithmetic", &|figures| error(figures.arithmetic_mean_absolute_log_error)));
    lines.push(pair("  \"the same again\"", &|figures| error(figures.carried_over_mean_absolute_log_error)));
    lines.push(String::new());
    lines.push("Where gases fell in their forecast, by tenths (even when honest)".to_owned());
    lines.extend(calibration(&review.deciles, face));
    lines.push(String::new());
    match &review.fitted {
        Some(fitted) => lines.extend(steadiness(fitted, review)),
        None => {
            lines.push("Fewer than 30 forecasts: too few to fit steadiness figures of your own.".to_owned());
        }
    }
    lines.push(String::new());
    lines.push(face.wrapped(
        "A past record shows how forecasts did on gases that were drawn and acted on then. It does not make the next \
         forecast surer than its interval says.",
        "",
        "",
    ));
    lines.push(face.wrapped(crate::note::SAFETY, "", ""));
    finish(&lines)
}

fn finish(lines: &[String]) -> String {
    let mut text = lines.join("\n");
    text.push('\n');
    text
}

fn calibration(deciles: &[u64; 10], face: Face) -> Vec<String> {
    let most = deciles.iter().copied().max().unwrap_or(1).max(1);
    let block = if face.ascii { "#" } else { "▆" };
    deciles
        .iter()
        .zip(0_u32..)
        .map(|(count, tenth)| {
            let wide = (*count as f64 / most as f64 * BAR).round();
            let bar: String = std::iter::successors(Some(1.0), |n| Some(n + 1.0))
                .take_while(|n| *n <= wide)
                .map(|_: f64| block)
                .collect();
            let dash = face.dash();
            format!("  {:>3}{dash}{:<3} % {bar} {count}", tenth * 10, tenth * 10 + 10)
        })
        .collect()
}

fn steadiness(fitted: &Fitted, review: &Review) -> Vec<String> {
    let kept = if review.after_change.forecasts < FEWEST_CHANGED {
        "  # too few forecasts after a change: the default"
    } else {
        ""
    };
    vec![
        "Figures that fit these gases; paste them into a profile to use them:".to_owned(),
        String::new(),
        "[steadiness]".to_owned(),
        format!("gas = {:.3}", fitted.gas),
        format!("wander_per_hour = {:.3}", fitted.wander_per_hour),
        format!("change = {:.2}{kept}", fitted.change),
        format!("source = \"our own {} gases\"", review.rows - review.skipped),
        String::new(),
        format!(
            "With figures fitted to other stays (five folds), {:.0} % fell inside 9 in 10",
            fitted.cross_validated_wide_coverage * 100.0
        ),
        format!("and {:.0} % inside 1 in 2.", fitted.cross_validated_half_coverage * 100.0),
    ]
}
