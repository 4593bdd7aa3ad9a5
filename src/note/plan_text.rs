//! A plan as plain text that fits 80 columns and reads at a glance.

use super::columns::{Column, now_title, table};
use super::face::{Face, ascii};
use super::{SAFETY, course_line, patient_lines, reckoning_lines};
use crate::case::record::Record;
use crate::planning::baseline::gas_exchange::Co2Evidence;
use crate::planning::baseline::mechanics::TrappingEvidence;
use crate::planning::caution::Caution;
use crate::planning::levers::Lever;
use crate::planning::plan::{Plan, PlanLine};
use crate::planning::reckoning::reckon;
use crate::planning::target::Target;
use crate::quantity::show::{joined, number};
use crate::quantity::unit::Dimension;

/// The plan as text.
pub fn of(plan: &Plan, record: &Record, face: Face) -> String {
    let mut lines = Vec::new();
    lines.push(patient_lines::patient(record, plan.baseline.predicted_weight_kg, face));
    lines.extend(patient_lines::gas(record, face));
    lines.push(goal(plan, record, face));
    if plan.now.paco2_is == "forecast" {
        lines.push("Settings changed since the latest gas: PaCO2 now is forecast, not measured.".to_owned());
    }
    let last = reckoning_lines::last(&reckon(record), face);
    if !last.is_empty() {
        lines.push(String::new());
        lines.push("Last forecast".to_owned());
        lines.extend(last.iter().map(|line| face.wrapped(line, "  ", "    ")));
    }
    lines.push(String::new());
    lines.extend(table(&columns(plan), face));
    lines.push(String::new());
    lines.extend(plan.plans.iter().map(|line| verdict(line, plan, face)));
    if let Some(summit) = plan.summit {
        lines.push(format!(
            "A faster rate clears more only up to {:.0}/min, where PaCO2 would be {}.",
            summit.rate_per_min,
            face.gas(summit.paco2_mmhg)
        ));
    }
    if let (Some(course), Some(first)) = (&plan.course, plan.plans.first()) {
        lines.push(String::new());
        lines.push(format!("The next hour, {}", name_of(first.aim)));
        lines.push(format!("  {}", course_line::drawing(course, face)));
        lines.extend(course_line::words(course, face).into_iter().map(|line| format!("  {line}")));
    }
    lines.push(String::new());
    lines.push(format!("What one step buys from now, and costs (PaCO2 in {})", face.unit.word()));
    lines.extend(plan.levers.iter().map(|it| lever(it, face)));
    lines.push(String::new());
    lines.push("Where the numbers come from".to_owned());
    lines.extend(patient_lines::origins(&plan.baseline, face).iter().map(|line| format!("  {line}")));
    lines.extend(cautions(&plan.cautions, face));
    lines.push(String::new());
    lines.push(face.wrapped(SAFETY, "", ""));
    finish(&lines, face)
}

/// Joins the lines, in ASCII where asked.
pub(super) fn finish(lines: &[String], face: Face) -> String {
    let mut text = lines.join("\n");
    text.push('\n');
    if face.ascii { ascii(&text) } else { text }
}

/// The cautions, each wrapped.
pub(super) fn cautions(cautions: &[Caution], face: Face) -> Vec<String> {
    if cautions.is_empty() {
        return Vec::new();
    }
    let mut lines = vec![String::new(), "Cautions".to_owned()];
    lines.extend(cautions.iter().map(|caution| face.wrapped(caution.text_in(face.unit), "  ! ", "    ")));
    lines
}

fn goal(plan: &Plan, record: &Record, face: Face) -> String {
    let target = &plan.target;
    let paco2 = face.gas(target.paco2_mmhg);
    let ph = target.ph.map_or_else(String::new, |ph| format!(" (pH {})", face.value(ph, Dimension::Ph)));
    match target.asked {
        "profile" => {
            let [low, high] = target.band_mmhg;
            let there =
                if target.met_by(plan.now.outcome.state.paco2_mmhg) { "already inside: " } else { "" };
            let goal = format!(
                "Goal PaCO2 {paco2}{ph}, {there}the band of {} is {} {}.",
                record.profile().name,
                face.gas_range(Some(low), Some(high)),
                face.unit.word()
            );
            face.wrapped(&goal, "", "  ")
        }
        "ph" => {
            let ph = face.known(target.ph, Dimension::Ph);
            format!("Goal pH {ph}, which is a PaCO2 of {paco2}; {}", counts_as_on_it(target, face))
        }
        _ => format!("Goal PaCO2 {paco2}{ph}; {}", counts_as_on_it(target, face)),
    }
}

/// "48–52 mmHg counts as on it."
fn counts_as_on_it(target: &Target, face: Face) -> String {
    let [low, high] = target.band_mmhg;
    format!("{} {} counts as on it.", face.gas_range(Some(low), Some(high)), face.unit.word())
}

fn columns(plan: &Plan) -> Vec<Column<'_>> {
    let trapping_assumed = plan.baseline.trapping_evidence == TrappingEvidence::Assumed;
    let output_estimated =
        plan.baseline.co2_evidence == Co2Evidence::Estimated && plan.baseline.co2_production_ml_min.is_some();
    let now = Column {
        title: now_title(&plan.now),
        settings: &plan.now.settings,
        outcome: &plan.now.outcome,
        trapping_assumed,
        output_estimated,
    };
    let plans = plan.plans.iter().map(|line| Column {
        title: name_of(line.aim).to_owned(),
        settings: &line.settings,
        outcome: &line.forecast,
        trapping_assumed,
        output_estimated,
    });
    std::iter::once(now).chain(plans).collect()
}

const fn name_of(aim: &str) -> &'static str {
    match aim.as_bytes() {
        b"rate" => "by rate",
        b"volume" => "by volume",
        _ => "gentlest",
    }
}

/// One sentence on a plan: on the goal or not, what it breaks, what blocks.
fn verdict(line: &PlanLine, plan: &Plan, face: Face) -> String {
    let limits = match line.within_limits {
        Some(true) => "every limit kept".to_owned(),
        Some(false) => {
            let beyond = line.forecast.limits.iter().filter(|limit| limit.verdict.word() == "beyond");
            let names: Vec<&str> = beyond.map(|limit| limit.id.words()).collect();
            let limits = if names.len() > 1 { "its limits" } else { "its limit" };
            format!("BEYOND {limits}: {}", names.join(", "))
        }
        None => {
            let unknown = line.forecast.limits.iter().filter(|limit| limit.verdict.word() == "unknown");
            let names: Vec<&str> = unknown.map(|limit| limit.id.words()).collect();
            format!("no limit known to be beyond, but unknown: {}", names.join(", "))
        }
    };
    let goal = match (line.on_target, line.aim) {
        (true, _) if plan.target.met_by(line.forecast.state.paco2_mmhg) => "forecast on the goal",
        (true, _) => "as near the goal as the dial allows",
        (false, "gentle") => "NOT on the goal, the nearest that goes no further beyond a limit than now",
        (false, _) => "NOT on the goal, the nearest that can be dialled",
    };
    let chance = line.forecast.interval.chance_on_target;
    let chance = chance.map_or_else(String::new, |chance| format!(", chance {:.0} %", chance * 100.0));
    let blocked = if !line.on_target && line.exact.is_none() && line.aim != "gentle" {
        // Not a limit: past the summit, below the patient's own rate, or no time to breathe out.
        format!(" No {} reaches it.", if line.aim == "rate" { "set rate" } else { "set volume or pressure" })
    } else if line.blocked_by.is_empty() {
        String::new()
    } else {
        let names: Vec<&str> = line.blocked_by.iter().map(|id| id.words()).collect();
        format!(" Blocked by {}.", names.join(", "))
    };
    face.wrapped(
        &format!("{}{}: {goal}{chance}; {limits}.{blocked}", capital(name_of(line.aim)), exact(line, plan)),
        "",
        "  ",
    )
}

/// "(exactly 26.2)". Past the summit two rates give one PaCO2, and the exact one is the slower of them.
fn exact(line: &PlanLine, plan: &Plan) -> String {
    let Some(exact) = line.exact else { return String::new() };
    let shown = number(exact, usize::from(exact < 100.0));
    let summit = plan.summit.map(|summit| summit.rate_per_min);
    if line.aim == "rate" && summit.is_some_and(|summit| line.settings.rate_per_min > summit) {
        return format!(" (a rate of {shown} reaches it too, with a longer expiration)");
    }
    format!(" (exactly {shown})")
}

fn capital(text: &str) -> String {
    let mut letters = text.chars();
    letters.next().map_or_else(String::new, |first| first.to_uppercase().chain(letters).collect())
}

/// A change with its sign, zeros at the end left out; "0" when it rounds to nothing.
fn signed(value: f64, digits: usize) -> String {
    let shown = number(value, digits);
    if shown.starts_with('-') || shown == "0" { shown } else { format!("+{shown}") }
}

fn lever(lever: &Lever, face: Face) -> String {
    let name = match lever.id {
        "rate" => "rate",
        "tidal_volume" => "tidal volume",
        "inspiratory_pressure" => "inspiratory pressure",
        "apparatus_dead_space" => "apparatus dead space",
        _ => "CO2 output",
    };
    let step = format!("{name} {}", joined(&signed(lever.step, 1), lever.unit));
    let Some(paco2) = lever.paco2_change_mmhg else {
        return format!("  {step:<30} cannot be dialled from here");
    };
    // A tenth of a mmHg tells the levers apart; the forecast itself is not that sharp.
    let tenth = face.unit.from_mmhg(paco2);
    let digits = face.unit.digits() + 1;
    // A change that rounds to nothing is left out.
    let told = |name: &str, change: Option<f64>, digits: usize| {
        let text = signed(change?, digits);
        (text != "0").then(|| format!("{name} {text}"))
    };
    let buys = [
        told("PaCO2", Some(tenth), digits)
            .map_or_else(|| Some("PaCO2 unchanged".to_owned()), Some)
            .map(|buys| format!("  {step:<30} {buys}")),
        told("pH", lever.ph_change, 2),
        told("driving", lever.driving_pressure_change_cmh2o, 1),
        told("power", lever.mechanical_power_change_j_min, 1),
    ];
    buys.into_iter().flatten().collect::<Vec<_>>().join(", ")
}
