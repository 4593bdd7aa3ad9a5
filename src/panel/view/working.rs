//! Every formula with this patient's numbers in it, its source, and where each number came from.

use ratatui::layout::Rect;

use super::pen::{Pen, lines};
use crate::note::face::Face;
use crate::note::patient_lines::origins;
use crate::panel::scene::{Scene, Tried};
use crate::panel::state::State;
use crate::physiology::{carbon_dioxide, dead_space};
use crate::planning::answer::BaselineReport;
use crate::planning::baseline::gas_exchange::{Co2Evidence, SeriesEvidence};
use crate::planning::baseline::mechanics::TrappingEvidence;
use crate::quantity::show::number;
use crate::quantity::unit::Dimension;

/// A heading, a formula with its numbers, or where it is from.
enum Line {
    Heading(&'static str),
    Formula(String),
    Source(String),
}

/// Draws the view.
pub fn draw(state: &State, scene: &Scene<'_>, area: Rect, pen: &mut Pen<'_>) {
    let Ok(tried) = &scene.tried else { return };
    let mut all = Vec::new();
    for line in working(scene, tried, pen.face) {
        match line {
            Line::Heading(text) => all.push((1, pen.theme.heading(), text.to_owned())),
            Line::Formula(text) => {
                all.extend(
                    lines(&text, area.width.saturating_sub(4))
                        .into_iter()
                        .map(|line| (3, pen.theme.plain(), line)),
                );
            }
            Line::Source(text) => {
                all.extend(
                    lines(&text, area.width.saturating_sub(6))
                        .into_iter()
                        .map(|line| (5, pen.theme.quiet(), line)),
                );
            }
        }
    }
    let most = all.len().saturating_sub(usize::from(area.height));
    let from = state.scroll.min(most);
    for (y, (x, style, line)) in (0..area.height).zip(all.iter().skip(from)) {
        pen.text(area, *x, y, line, *style);
    }
    if most > from {
        pen.right(area, area.width, area.height.saturating_sub(1), " PageDown: more ", pen.theme.key());
    }
}

fn working(scene: &Scene<'_>, tried: &Tried, face: Face) -> Vec<Line> {
    let mut all = Vec::new();
    gas(scene, tried, face, &mut all);
    dead(scene, face, &mut all);
    blood(scene, tried, face, &mut all);
    lung(scene, tried, face, &mut all);
    sure(scene, tried, face, &mut all);
    all.push(Line::Heading("Where the numbers come from"));
    let report = BaselineReport::of(&scene.forecaster);
    all.extend(origins(&report, face).into_iter().map(Line::Formula));
    all
}

fn gas(scene: &Scene<'_>, tried: &Tried, face: Face, all: &mut Vec<Line>) {
    let baseline = scene.forecaster.baseline();
    let (gas, then) = (&baseline.gas, &tried.outcome.state);
    let now_series = scene.forecaster.series_ml();
    let factor = tried.dialled.co2_factor;
    all.push(Line::Heading("PaCO2"));
    let co2 = if (factor - 1.0).abs() > 0.0 { format!(" × {}", number(factor, 2)) } else { String::new() };
    all.push(Line::Formula(format!(
        "PaCO2 try = PaCO2 gas × rate × (VT − VDs) / (rate' × (VT' − VDs')) = {} × {} × ({} − {}) / ({} × ({} − {})){co2} = {}",
        face.value(gas.paco2_mmhg, Dimension::GasPressure),
        number(gas.rate_per_min, 1),
        number(gas.tidal_volume_ml, 0),
        number(now_series, 0),
        number(then.rate_per_min, 1),
        number(then.tidal_volume_ml, 0),
        number(then.series_dead_space_ml, 0),
        face.gas(then.paco2_mmhg),
    )));
    all.push(Line::Source(format!(
        "Alveolar ventilation equation; CO2 output and alveolar fraction cancel. Gas, rate and volume measured (entry {}).",
        gas.number
    )));
    if let (Some(output), Some(useful)) =
        (scene.forecaster.co2_output_ml_min(), then.alveolar_ventilation_l_min)
    {
        let k = carbon_dioxide::ventilation_factor(gas.temperature).mmhg();
        all.push(Line::Formula(format!(
            "V'A = K × V'CO2 / PCO2 at body temperature; K = 760 × (273.15 + {}) / 273.15 = {} mmHg, V'CO2 {} mL/min, V'A try {} L/min",
            number(gas.temperature.celsius(), 1),
            number(k, 0),
            number(output * factor, 0),
            number(useful, 1),
        )));
        let evidence = match baseline.exchange.co2_evidence {
            Co2Evidence::DeadSpace => "CO2 output follows from the measured dead space.",
            Co2Evidence::Co2Production => "CO2 output measured.",
            Co2Evidence::EndTidal => "CO2 output from end-tidal CO2, with the airway by rule (assumed).",
            Co2Evidence::Estimated => "CO2 output ESTIMATED; the forecast PaCO2 does not hang on it.",
        };
        all.push(Line::Source(evidence.to_owned()));
    }
}

fn dead(scene: &Scene<'_>, face: Face, all: &mut Vec<Line>) {
    let forecaster = &scene.forecaster;
    let baseline = forecaster.baseline();
    let (gas, series) = (&baseline.gas, forecaster.series_ml());
    all.push(Line::Heading("Dead space"));
    let Some(fraction) = forecaster.alveolar_fraction() else {
        all.push(Line::Formula(
            "The alveolar part is unknown: give sex and height, end-tidal CO2 or VD/VT.".to_owned(),
        ));
        return;
    };
    let whole = series + fraction * (gas.tidal_volume_ml - series);
    all.push(Line::Formula(format!(
        "VD = VDs + f × (VT − VDs) = {} + {} × ({} − {}) = {} mL; VD/VT = {}",
        number(series, 0),
        number(fraction, 2),
        number(gas.tidal_volume_ml, 0),
        number(series, 0),
        number(whole, 0),
        face.value(whole / gas.tidal_volume_ml, Dimension::Fraction),
    )));
    let source = match baseline.exchange.series_evidence {
        SeriesEvidence::Measured => "VDs measured: from VD/VT and end-tidal CO2 together.".to_owned(),
        SeriesEvidence::CutToWhole => "VDs cut to the measured whole.".to_owned(),
        SeriesEvidence::Rule => format!(
            "VDs ASSUMED: airway {} mL by rule ({} mL/kg predicted weight behind a tube, {} without: Radford 1955, Nunn from memory) \
             and {} mL of apparatus.",
            number(baseline.airway_by_rule_ml, 0),
            number(dead_space::TUBE_AIRWAY_ML_PER_KG, 1),
            number(dead_space::NATIVE_AIRWAY_ML_PER_KG, 1),
            number(gas.apparatus_ml, 0)
        ),
    };
    all.push(Line::Source(source));
    let readings = scene.tried.as_ref().map(|tried| tried.readings);
    if let Ok(readings) = readings {
        let of = |mmhg: Option<f64>| face.known(mmhg, Dimension::GasPressure);
        all.push(Line::Formula(format!(
            "PaCO2 try by how dead space is held: {} split, {} all a volume, {} all a fraction ({})",
            of(readings.split),
            of(readings.volume),
            of(readings.fraction),
            face.unit.word()
        )));
    }
}

fn blood(scene: &Scene<'_>, tried: &Tried, face: Face, all: &mut Vec<Line>) {
    let baseline = scene.forecaster.baseline();
    all.push(Line::Heading("pH"));
    let (Some(ph), Some(bicarbonate), Some(excess)) =
        (baseline.ph, baseline.bicarbonate_mmol_l, baseline.base_excess_mmol_l)
    else {
        all.push(Line::Formula("Unknown: chart the pH of the gas.".to_owned()));
        return;
    };
    all.push(Line::Formula(format!(
        "HCO3 = 0.0307 × {} × 10^({} − 6.1) = {} mmol/L; base excess = HCO3 − 24.8 + 16.2 × (pH − 7.40) = {} mmol/L, kept: pH try {}",
        number(baseline.gas.paco2_mmhg, 0),
        face.value(ph, Dimension::Ph),
        number(bicarbonate, 1),
        number(excess, 1),
        face.known(tried.outcome.state.ph, Dimension::Ph),
    )));
    all.push(Line::Source(
        "Henderson–Hasselbalch; base excess by Siggaard-Andersen. PaCO2 here in mmHg.".to_owned(),
    ));
}

fn lung(scene: &Scene<'_>, tried: &Tried, face: Face, all: &mut Vec<Line>) {
    all.push(Line::Heading("Pressures"));
    let state = &tried.outcome.state;
    let Some(lung) = tried.dialled.lung else {
        all.push(Line::Formula("Unknown: measure a plateau with an inspiratory hold.".to_owned()));
        return;
    };
    let pressure = |value: Option<f64>| face.known(value, Dimension::AirwayPressure);
    all.push(Line::Formula(format!(
        "driving pressure = VT / C = {} / {} = {} cmH2O; plateau = total PEEP + driving = {} + {} = {} cmH2O",
        number(state.tidal_volume_ml, 0),
        number(lung.compliance_ml_cmh2o, 1),
        pressure(state.driving_pressure_cmh2o),
        pressure(state.total_peep_cmh2o),
        pressure(state.driving_pressure_cmh2o),
        pressure(state.plateau_cmh2o),
    )));
    all.push(Line::Source("One linear compartment.".to_owned()));
    let evidence = match scene.forecaster.baseline().mechanics.trapping_evidence() {
        TrappingEvidence::Measured => "Expiratory resistance from the measured auto-PEEP.",
        TrappingEvidence::Given => "Expiratory resistance as given.",
        TrappingEvidence::Assumed => {
            "Expiratory resistance ASSUMED equal to the inspiratory one: trapping is at least this."
        }
        TrappingEvidence::Unknown => "Trapping unknown: measure total PEEP with an expiratory hold.",
    };
    if let (Some(constant), Some(ratio)) =
        (lung.expiratory_time_constant_s(), state.expiratory_time_constants)
    {
        all.push(Line::Formula(format!(
            "expiration {} s / time constant {} s = {}; auto-PEEP {} cmH2O, {} mL trapped",
            number(state.expiratory_time_s, 2),
            number(constant, 2),
            number(ratio, 1),
            pressure(state.auto_peep_cmh2o),
            face.known(state.trapped_volume_ml, Dimension::Volume),
        )));
    }
    all.push(Line::Source(evidence.to_owned()));
    all.push(Line::Formula(format!(
        "mechanical power = 0.098 × rate × work of a breath = {} J/min; load index = 4 × driving pressure + rate = {}",
        face.known(state.mechanical_power_j_min, Dimension::Power),
        face.known(state.load_index, Dimension::Volume),
    )));
    all.push(Line::Source("Gattinoni 2016; Costa 2021.".to_owned()));
}

fn sure(scene: &Scene<'_>, tried: &Tried, face: Face, all: &mut Vec<Line>) {
    let figures = crate::planning::figures(scene.record);
    let interval = &tried.outcome.interval;
    all.push(Line::Heading("How sure"));
    all.push(Line::Formula(format!(
        "{} gases heard: expected {}; 1 gas in 2 in {}, 9 in 10 in {} {}",
        scene.forecaster.baseline().gases.len(),
        face.known(interval.paco2_expected_mmhg, Dimension::GasPressure),
        face.gas_range(interval.paco2_half_low_mmhg, interval.paco2_half_high_mmhg),
        face.gas_range(interval.paco2_low_mmhg, interval.paco2_high_mmhg),
        face.unit.word(),
    )));
    all.push(Line::Source(format!(
        "Spread of ln PaCO2: {} a gas, {} an hour, {} for each ln change of ventilation; usual figures from 205 consecutive gases of 50 \
         patients in open data.",
        figures.gas, figures.wander_per_hour, figures.change
    )));
}
