//! The lines that say who the patient is, what the gas says, and where the numbers come from.

use super::document::{harmless, no_formula};
use super::face::{Face, TOGETHER};
use crate::case::entry::{Airway, Sex};
use crate::case::record::{Occasion, Record};
use crate::physiology::acid_base;
use crate::planning::answer::BaselineReport;
use crate::planning::baseline::gas_exchange::Co2Evidence;
use crate::planning::baseline::mechanics::TrappingEvidence;
use crate::quantity::unit::Dimension;

/// PaCO2 above this is hypoventilation for the CO2 made, mmHg: common practice.
const HYPOVENTILATION_ABOVE_MMHG: f64 = 45.0;
/// PaCO2 below this is hyperventilation for the CO2 made, mmHg: common practice.
const HYPERVENTILATION_BELOW_MMHG: f64 = 35.0;

/// Normal arterial pH: common practice.
const NORMAL_PH: [f64; 2] = [7.35, 7.45];

/// "Bed 3 · female 158 cm, 50.6 kg predicted, tube · lung-protective"
pub fn patient(record: &Record, predicted_weight_kg: Option<f64>, face: Face) -> String {
    let mut parts = Vec::new();
    if !record.label().is_empty() {
        parts.push(no_formula(record.label()));
    }
    parts.push(body(record, predicted_weight_kg, face));
    face.wrapped(&parts.join(face.dot()), "", "  ")
}

/// The same without the label: "female 158 cm, 50.6 kg predicted, tube · lung-protective"
pub fn body(record: &Record, predicted_weight_kg: Option<f64>, face: Face) -> String {
    let patient = record.patient();
    let mut body = Vec::new();
    let sex = patient.sex.map(|sex| match sex {
        Sex::Female => "female",
        Sex::Male => "male",
    });
    let height = patient.height_cm.map(|cm| format!("{} cm", face.value(cm, Dimension::Length)));
    let who: Vec<String> = sex.map(str::to_owned).into_iter().chain(height).collect();
    if !who.is_empty() {
        body.push(who.join(" "));
    }
    body.push(predicted_weight_kg.map_or_else(
        || "predicted weight unknown".to_owned(),
        |kg| format!("{} kg predicted", face.value(kg, Dimension::Mass)),
    ));
    body.push(
        match patient.airway {
            Some(Airway::Native) => "native airway",
            Some(Airway::Tube) => "tube",
            Some(Airway::Tracheostomy) => "tracheostomy",
            None => "tube (assumed)",
        }
        .to_owned(),
    );
    [body.join(", "), harmless(&record.profile().name)].join(face.dot())
}

/// The latest gas in one line, and what its PaCO2 means.
pub fn gas(record: &Record, face: Face) -> Vec<String> {
    let latest = record
        .occasions()
        .iter()
        .filter(|occasion| occasion.entry.gas.paco2_mmhg.is_some())
        .max_by_key(|occasion| occasion.drawn_at());
    let Some(occasion) = latest else { return Vec::new() };
    let gas = &occasion.entry.gas;
    let meaning = meaning(gas.ph, gas.paco2_mmhg.unwrap_or_default(), face);
    // A value stays with its unit and name when the line wraps.
    let parts: Vec<String> = gas_line(occasion, face)
        .split(face.dot())
        .map(|part| part.replace(' ', &TOGETHER.to_string()))
        .collect();
    vec![face.wrapped(&parts.join(face.dot()), "", "  "), face.wrapped(&meaning, "", "  ")]
}

/// A gas in one line: "gas 2026-03-09 08:10 · pH 7.23 · PaCO2 60 mmHg · HCO3 24.3 mmol/L · PaO2/FiO2 100 mmHg"
pub fn gas_line(occasion: &Occasion, face: Face) -> String {
    let gas = &occasion.entry.gas;
    let mut parts = Vec::new();
    let drawn = occasion.drawn_at().map(|at| format!("gas {at}"));
    parts.push(drawn.unwrap_or_else(|| "gas".to_owned()));
    parts.push(
        gas.ph.map_or_else(|| "pH unknown".to_owned(), |ph| format!("pH {}", face.value(ph, Dimension::Ph))),
    );
    let paco2 = gas.paco2_mmhg.unwrap_or_default();
    parts.push(format!("PaCO2 {}", face.gas(paco2)));
    let bicarbonate = gas.ph.map(|ph| acid_base::bicarbonate(ph, paco2)).or(gas.bicarbonate_mmol_l);
    if let Some(bicarbonate) = bicarbonate {
        parts.push(format!("HCO3 {} mmol/L", face.value(bicarbonate, Dimension::Concentration)));
    }
    if let Some((pao2, fio2)) = gas.pao2_mmhg.zip(occasion.in_force.fio2()) {
        parts.push(format!("PaO2/FiO2 {}", face.gas(pao2 / fio2)));
    }
    parts.join(face.dot())
}

/// What a PaCO2 and its pH mean, by PaCO2 and never by how fast the patient breathes.
pub fn meaning(ph: Option<f64>, paco2: f64, face: Face) -> String {
    let bound = |mmhg: f64| face.gas(mmhg);
    if paco2 > HYPOVENTILATION_ABOVE_MMHG {
        format!(
            "Hypoventilation for the CO2 made: PaCO2 above {}, however fast the breathing.",
            bound(HYPOVENTILATION_ABOVE_MMHG)
        )
    } else if paco2 < HYPERVENTILATION_BELOW_MMHG {
        format!("Hyperventilation for the CO2 made: PaCO2 below {}.", bound(HYPERVENTILATION_BELOW_MMHG))
    } else {
        let band = format!(
            "{}{}{}",
            face.value(HYPERVENTILATION_BELOW_MMHG, Dimension::GasPressure),
            face.dash(),
            bound(HYPOVENTILATION_ABOVE_MMHG)
        );
        let [low, high] = NORMAL_PH;
        match ph {
            Some(ph) if !(low..=high).contains(&ph) => format!(
                "PaCO2 within {band}, yet pH {}: look at the bicarbonate, and at what this patient is used to.",
                face.value(ph, Dimension::Ph)
            ),
            _ => format!("PaCO2 within {band}: ventilation fits the CO2 made."),
        }
    }
}

/// Where the numbers come from, one line each.
pub fn origins(baseline: &BaselineReport, face: Face) -> Vec<String> {
    let mut lines = Vec::new();
    let estimated = baseline.co2_evidence == Co2Evidence::Estimated;
    let how = match baseline.co2_evidence {
        Co2Evidence::DeadSpace => "from the measured dead space",
        Co2Evidence::Co2Production => "measured",
        Co2Evidence::EndTidal => "from end-tidal CO2, airway dead space by rule",
        Co2Evidence::Estimated if baseline.co2_production_ml_min.is_some() => "estimated",
        Co2Evidence::Estimated => "no weight to estimate it from",
    };
    let output = with_unit(baseline.co2_production_ml_min, Dimension::GasOutput, "mL/min", face);
    lines.push(format!("CO2 output {output} ({how})"));
    let share = baseline.dead_space_fraction.map_or_else(
        || "VD/VT unknown".to_owned(),
        |fraction| {
            let mark = if estimated { " (estimated)" } else { "" };
            format!("VD/VT {}{mark}", face.value(fraction, Dimension::Fraction))
        },
    );
    let series = face.value(baseline.series_dead_space_ml, Dimension::Volume);
    let fraction = baseline.alveolar_dead_space_fraction.map_or_else(
        || "alveolar part unknown".to_owned(),
        |f| format!("{:.0} % of the rest alveolar", f * 100.0),
    );
    lines.push(format!("{share}: {series} mL airway and apparatus, {fraction}"));
    let compliance = with_unit(baseline.compliance_ml_cmh2o, Dimension::Compliance, "mL/cmH2O", face);
    lines.push(format!("Respiratory-system compliance {compliance}"));
    lines.push(resistance(baseline, face));
    if let Some(ratio) = baseline.ventilatory_ratio {
        lines.push(format!("Ventilatory ratio {} (about 1 in health)", face.value(ratio, Dimension::Number)));
    }
    if let Some(difference) = baseline.alveolar_arterial_po2_mmhg {
        lines.push(format!(
            "Alveolar{}arterial PO2 difference {}; PaO2 is not forecast",
            face.dash(),
            face.gas(difference)
        ));
    }
    lines
}

/// "25 mL/cmH2O", or "unknown" without a unit after it.
fn with_unit(value: Option<f64>, dimension: Dimension, unit: &str, face: Face) -> String {
    value.map_or_else(|| "unknown".to_owned(), |value| format!("{} {unit}", face.value(value, dimension)))
}

/// "Resistance 13 cmH2O·s/L in, 26 out (trapping measured)"
fn resistance(baseline: &BaselineReport, face: Face) -> String {
    let [inspiratory, expiratory] =
        [baseline.inspiratory_resistance_cmh2o_s_l, baseline.expiratory_resistance_cmh2o_s_l];
    if inspiratory.is_none() && expiratory.is_none() {
        return "Resistance unknown".to_owned();
    }
    let unit = if face.ascii { "cmH2O.s/L" } else { "cmH2O·s/L" };
    let inspiratory = with_unit(inspiratory, Dimension::Resistance, unit, face);
    let expiratory = face.known(expiratory, Dimension::Resistance);
    let trapping = match baseline.trapping_evidence {
        TrappingEvidence::Measured => " (trapping measured)",
        TrappingEvidence::Given => " (given)",
        TrappingEvidence::Assumed => " (assumed equal)",
        TrappingEvidence::Unknown => "",
    };
    format!("Resistance {inspiratory} in, {expiratory} out{trapping}")
}
