//! A forecast of one trial as plain text that fits 80 columns.

use super::columns::{Column, Moved, table};
use super::face::Face;
use super::plan_text::{cautions, finish};
use super::{SAFETY, course_line, patient_lines};
use crate::case::record::Record;
use crate::planning::baseline::gas_exchange::Co2Evidence;
use crate::planning::baseline::mechanics::TrappingEvidence;
use crate::planning::plan::Forecast;
use crate::planning::target::profile_band_mmhg;
use crate::quantity::unit::Dimension;

/// The forecast as text.
pub fn of(forecast: &Forecast, record: &Record, face: Face) -> String {
    let mut lines = vec![patient_lines::patient(record, forecast.baseline.predicted_weight_kg, face)];
    lines.extend(patient_lines::gas(record, face));
    // The chance in the table is of landing here.
    let band = profile_band_mmhg(record.profile().target, forecast.baseline.base_excess_mmol_l);
    if let Some([low, high]) = band {
        let band = face.gas_range(Some(low), Some(high));
        let name = &record.profile().name;
        lines.push(face.wrapped(
            &format!("Goal: the band of {name}, {band} {}.", face.unit.word()),
            "",
            "  ",
        ));
    }
    lines.push(String::new());
    let trapping_assumed = forecast.baseline.trapping_evidence == TrappingEvidence::Assumed;
    let output_estimated = forecast.baseline.co2_evidence == Co2Evidence::Estimated;
    let now = Column {
        title: forecast.now.paco2_is.replace("measured", "now").replace("forecast", "now (fcst)"),
        settings: &forecast.now.settings,
        outcome: &forecast.now.outcome,
        moved: Moved::Nothing,
        trapping_assumed,
        output_estimated,
    };
    let trial = Column {
        title: "try".to_owned(),
        settings: &forecast.settings,
        outcome: &forecast.trial,
        moved: Moved::Nothing,
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
    let of = |mmhg: Option<f64>| face.known(mmhg, Dimension::GasPressure);
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
