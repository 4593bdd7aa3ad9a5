//! A forecast of one trial as plain text that fits 80 columns.

use super::columns::{Column, now_title, table};
use super::face::Face;
use super::plan_text::{cautions, finish};
use super::{SAFETY, course_line, patient_lines};
use crate::case::record::Record;
use crate::planning::baseline::gas_exchange::Co2Evidence;
use crate::planning::baseline::mechanics::TrappingEvidence;
use crate::planning::plan::Forecast;
use crate::planning::target::profile_band_mmhg;

/// The forecast as text.
pub fn of(forecast: &Forecast, record: &Record, face: Face) -> String {
    let mut lines = vec![patient_lines::patient(record, forecast.baseline.predicted_weight_kg, face)];
    lines.extend(patient_lines::gas(record, face));
    lines.extend(goal(forecast, record, face));
    lines.push(String::new());
    let trapping_assumed = forecast.baseline.trapping_evidence == TrappingEvidence::Assumed;
    let output_estimated = forecast.baseline.co2_evidence == Co2Evidence::Estimated
        && forecast.baseline.co2_production_ml_min.is_some();
    let now = Column {
        title: now_title(&forecast.now),
        settings: &forecast.now.settings,
        outcome: &forecast.now.outcome,
        trapping_assumed,
        output_estimated,
    };
    let trial = Column {
        title: "try".to_owned(),
        settings: &forecast.settings,
        outcome: &forecast.trial,
        trapping_assumed,
        output_estimated,
    };
    lines.extend(table(&[now, trial], face));
    if let Some(course) = &forecast.course {
        lines.push(String::new());
        lines.push("The next hour".to_owned());
        lines.push(format!("  {}", course_line::drawing(course, face)));
        lines.extend(course_line::words(course, face).into_iter().map(|line| format!("  {line}")));
    }
    lines.push(String::new());
    let held = &forecast.held;
    let of = |mmhg: Option<f64>| face.known_paco2(mmhg);
    lines.push(face.wrapped(
        &format!(
            "PaCO2 by how dead space is held: {} split (airway a volume, alveolar part a fraction), {} all a volume, {} \
             all a fraction; {}.",
            of(held.split),
            of(held.volume),
            of(held.fraction),
            face.unit.word()
        ),
        "",
        "  ",
    ));
    lines.push(String::new());
    lines.push("Where the numbers come from".to_owned());
    lines.extend(patient_lines::origins(&forecast.baseline, face).iter().map(|line| format!("  {line}")));
    lines.extend(cautions(&forecast.cautions, face));
    lines.push(String::new());
    lines.push(face.wrapped(SAFETY, "", ""));
    finish(&lines, face)
}

/// What the chance is a chance of: a forecast is asked for no goal of its own.
fn goal(forecast: &Forecast, record: &Record, face: Face) -> Option<String> {
    let profile = record.profile();
    let [low, high] = profile_band_mmhg(profile.target, forecast.baseline.base_excess_mmol_l)?;
    let band = face.gas_range(Some(low), Some(high));
    Some(face.wrapped(
        &format!("Goal PaCO2: the band of {}, {band} {}.", profile.name, face.unit.word()),
        "",
        "  ",
    ))
}
