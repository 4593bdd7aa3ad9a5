//! Two lines for a handover: where the patient stands, and what is awaited.

use super::document::harmless;
use super::face::{Face, ascii};
use super::reckoning_lines;
use super::record_note::{Told, settings};
use crate::planning::course::next_gas_minutes;
use crate::planning::weaning::Verdict;
use crate::quantity::unit::Dimension;

/// The two lines.
pub fn of(told: &Told<'_>, face: Face) -> String {
    let text = format!("{}\n{}\n", standing(told, face), awaited(told, face));
    if face.ascii { ascii(&text) } else { text }
}

fn standing(told: &Told<'_>, face: Face) -> String {
    let label = harmless(told.record.label());
    let label = if label.is_empty() { "No label".to_owned() } else { label };
    let set = told.last().map_or_else(|| "nothing charted".to_owned(), |it| settings(&it.in_force, face));
    let gas = told.gas().map_or_else(
        || "no gas charted".to_owned(),
        |it| {
            let gas = &it.entry.gas;
            let at = it.drawn_at().map_or_else(String::new, |at| format!(" of {at}"));
            let ph = gas.ph.map_or_else(
                || "pH unknown".to_owned(),
                |ph| format!("pH {}", face.value(ph, Dimension::Ph)),
            );
            format!("gas{at}: {ph}, PaCO2 {}", face.gas(gas.paco2_mmhg.unwrap_or_default()))
        },
    );
    format!("Handover of {label}: {set}; {gas}.")
}

fn awaited(told: &Told<'_>, face: Face) -> String {
    let mut parts = vec![next(told, face)];
    match &told.now {
        Err(_) => parts.push("no forecast can be made (the full note says why)".to_owned()),
        Ok(now) => {
            let with = |verdict: &str| -> Vec<&str> {
                let limits = now.now.outcome.limits.iter().filter(|it| it.verdict.word() == verdict);
                limits.map(|it| it.id.words()).collect()
            };
            for verdict in ["beyond", "unknown"] {
                if !with(verdict).is_empty() {
                    let name = if verdict == "beyond" { "BEYOND its limit" } else { "unknown" };
                    parts.push(format!("{name}: {}", with(verdict).join(", ")));
                }
            }
        }
    }
    if let Some(assessment) = &told.weaning {
        parts.push(format!(
            "weaning {} of {} criteria met, {} not recorded",
            assessment.count(Verdict::Met),
            assessment.criteria.len(),
            assessment.count(Verdict::NotRecorded)
        ));
    }
    if let Some(trial) = told.trials.last() {
        let outcome = trial.outcome.map_or("no end recorded", super::entry_items::outcome_word);
        let crossed = trial.crossed().count();
        let crossed = if crossed > 0 { format!(", {crossed} stop criteria crossed") } else { String::new() };
        parts.push(format!("last breathing trial {outcome}{crossed}"));
    }
    format!("{}.", parts.join("; "))
}

/// The plan that waits for its gas, or how the last one did.
fn next(told: &Told<'_>, face: Face) -> String {
    let reckoned = &told.reckoned;
    if let Some(waiting) = &reckoned.waiting {
        let plan = &waiting.plan;
        let expected = plan.expected_paco2_mmhg.or(plan.forecast_paco2_mmhg);
        let range = plan.wide_interval_mmhg.map_or_else(String::new, |[low, high]| {
            format!(" ({} in 9 of 10)", face.gas_range(Some(low), Some(high)))
        });
        let forecast =
            expected.map_or_else(String::new, |mmhg| format!(" FORECAST PaCO2 {}{range}", face.gas(mmhg)));
        let due = match (waiting.dialled, waiting.dialled_at, plan.settle_minutes) {
            (false, _, _) => ", not dialled yet".to_owned(),
            (true, Some(at), Some(settle)) => {
                format!(", next gas due {}", at.later_by_minutes(next_gas_minutes(settle)).clock())
            }
            _ => ", next gas time unknown".to_owned(),
        };
        return format!("Plan of entry {}:{forecast}{due}", waiting.plan_entry);
    }
    reckoning_lines::tally(&reckoned.tally)
        .map_or_else(|| "No plan charted".to_owned(), |line| line.trim_end_matches('.').to_owned())
}
