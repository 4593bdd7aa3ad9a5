//! Outcomes side by side: one column for now and one for each plan, a row for each thing a clinician weighs.

use super::face::Face;
use crate::case::profile::LimitId;
use crate::planning::answer::{Now, SettingsReport};
use crate::planning::limits::{LimitVerdict, Verdict, rests_on_trapping};
use crate::planning::outcome::Outcome;
use crate::quantity::show::number;
use crate::quantity::unit::Dimension;

/// Width of the row names.
const NAME: usize = 28;
/// Width of a column.
const COLUMN: usize = 13;

/// One column.
pub struct Column<'a> {
    /// Its head.
    pub title: String,
    /// What is dialled.
    pub settings: &'a SettingsReport,
    /// What that leads to.
    pub outcome: &'a Outcome,
    /// True where trapping rests on an assumed resistance.
    pub trapping_assumed: bool,
    /// True where CO2 output, and so useful and wasted ventilation, is only estimated.
    pub output_estimated: bool,
}

/// The head of the column for now: whether its PaCO2 was measured or is itself a forecast.
pub fn now_title(now: &Now) -> String {
    now.paco2_is.replace("measured", "now").replace("forecast", "now, forecast")
}

/// One row of the table.
pub fn row(name: &str, cells: impl Iterator<Item = String>) -> String {
    let mut line = format!("{name:<NAME$}");
    for cell in cells {
        line.push_str(&" ".repeat(COLUMN.saturating_sub(cell.chars().count())));
        line.push_str(&cell);
    }
    line.trim_end().to_owned()
}

/// The rows of the table, heads first.
pub fn table(columns: &[Column<'_>], face: Face) -> Vec<String> {
    let mut dial = Vec::new();
    dialled(columns, face, &mut dial);
    let starred = dial.iter().any(|row| row.contains('*'));
    let legend = if starred { "* to be changed" } else { "" };
    let mut rows = vec![row(legend, columns.iter().map(|column| column.title.clone()))];
    rows.append(&mut dial);
    gas(columns, face, &mut rows);
    breath(columns, face, &mut rows);
    limits(columns, face, &mut rows);
    rows
}

/// When a row of what is dialled is shown.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Row {
    /// Always.
    Always,
    /// Where a column differs from now.
    Changed,
    /// The same, without a star: the ventilator moves it by itself when flow or I:E is held.
    Follows,
}

/// What is dialled: rate and volume always, the rest where a column differs from now.
fn dialled(columns: &[Column<'_>], face: Face, rows: &mut Vec<String>) {
    let mut line = |name: &str, value: fn(&SettingsReport) -> Option<f64>, dimension, kind: Row| {
        let cells: Vec<String> = columns
            .iter()
            .map(|column| {
                value(column.settings).map_or_else(String::new, |value| face.value(value, dimension))
            })
            .collect();
        let now = cells.first().cloned().unwrap_or_default();
        let changed = cells.iter().any(|cell| *cell != now);
        if changed || (kind == Row::Always && !now.is_empty()) {
            let plain = |cell: &str| cell == now || cell.is_empty() || kind == Row::Follows;
            let marked = |cell: String| if plain(&cell) { cell } else { format!("*{cell}") };
            rows.push(row(name, cells.into_iter().map(marked)));
        }
    };
    line("set rate, breaths/min", |settings| Some(settings.rate_per_min), Dimension::Rate, Row::Always);
    line("set tidal volume, mL", |settings| settings.tidal_volume_ml, Dimension::Volume, Row::Always);
    line(
        "inspiratory pressure, cmH2O",
        |settings| settings.inspiratory_pressure_cmh2o,
        Dimension::AirwayPressure,
        Row::Always,
    );
    line("set PEEP, cmH2O", |settings| settings.peep_cmh2o, Dimension::AirwayPressure, Row::Changed);
    line("FiO2", |settings| settings.fio2, Dimension::Fraction, Row::Changed);
    line("inspiratory time, s", |settings| Some(settings.inspiratory_time_s), Dimension::Time, Row::Follows);
    line(
        "apparatus dead space, mL",
        |settings| Some(settings.apparatus_dead_space_ml),
        Dimension::Volume,
        Row::Changed,
    );
}

fn gas(columns: &[Column<'_>], face: Face, rows: &mut Vec<String>) {
    let unit = face.unit.word();
    rows.push(row(&format!("PaCO2, {unit}"), columns.iter().map(|c| face.paco2(c.outcome.state.paco2_mmhg))));
    let uncertain = |column: &&Column<'_>| column.outcome.interval.paco2_expected_mmhg.is_some();
    if columns.iter().any(|column| uncertain(&column)) {
        let cells = |value: &dyn Fn(&Column<'_>) -> String| -> Vec<String> {
            columns
                .iter()
                .map(|column| if uncertain(&column) { value(column) } else { String::new() })
                .collect()
        };
        let expected = cells(&|c| face.known_paco2(c.outcome.interval.paco2_expected_mmhg));
        rows.push(row("  expected, all gases heard", expected.into_iter()));
        let half = cells(&|c| {
            let interval = &c.outcome.interval;
            face.gas_range(interval.paco2_half_low_mmhg, interval.paco2_half_high_mmhg)
        });
        rows.push(row("  1 gas in 2 falls within", half.into_iter()));
        let wide = cells(&|c| {
            let interval = &c.outcome.interval;
            face.gas_range(interval.paco2_low_mmhg, interval.paco2_high_mmhg)
        });
        rows.push(row("  9 gases in 10 within", wide.into_iter()));
        let chance = cells(&|c| {
            c.outcome
                .interval
                .chance_on_target
                .map_or_else(|| "unknown".to_owned(), |chance| format!("{:.0} %", chance * 100.0))
        });
        rows.push(row("  chance to land on the goal", chance.into_iter()));
    }
    rows.push(row("pH", columns.iter().map(|c| face.known(c.outcome.state.ph, Dimension::Ph))));
    if columns.iter().any(|c| c.outcome.state.end_tidal_co2_mmhg.is_some()) {
        let cells =
            columns.iter().map(|c| face.known(c.outcome.state.end_tidal_co2_mmhg, Dimension::GasPressure));
        rows.push(row(&format!("end-tidal CO2, {unit}"), cells));
    }
}

fn breath(columns: &[Column<'_>], face: Face, rows: &mut Vec<String>) {
    let flow = |value: Option<f64>| face.known(value, Dimension::Flow);
    rows.push(row(
        "minute volume, L/min",
        columns.iter().map(|c| flow(Some(c.outcome.state.minute_ventilation_l_min))),
    ));
    let estimated = columns.iter().any(|column| column.output_estimated);
    let [useful, wasted] = if estimated {
        ["  useful, estimated", "  wasted, estimated (share)"]
    } else {
        ["  useful", "  wasted (share of a breath)"]
    };
    rows.push(row(useful, columns.iter().map(|c| flow(c.outcome.state.alveolar_ventilation_l_min))));
    rows.push(row(
        wasted,
        columns.iter().map(|c| {
            let state = &c.outcome.state;
            state.dead_space_loss_l_min.zip(state.dead_space_fraction).map_or_else(
                || "unknown".to_owned(),
                |(loss, share)| format!("{} ({:.0} %)", flow(Some(loss)), share * 100.0),
            )
        }),
    ));
}

/// The dimension a limit is shown in.
pub const fn dimension(id: LimitId) -> Dimension {
    match id {
        LimitId::TidalVolumePerKg => Dimension::VolumePerMass,
        LimitId::Plateau | LimitId::DrivingPressure | LimitId::AutoPeep => Dimension::AirwayPressure,
        LimitId::Rate => Dimension::Rate,
        LimitId::ExpiratoryTimeConstants => Dimension::Number,
        LimitId::LoadIndex => Dimension::Volume,
        LimitId::MechanicalPower => Dimension::Power,
        LimitId::Ph => Dimension::Ph,
        LimitId::Paco2 => Dimension::GasPressure,
        LimitId::Paco2FallPerHour => Dimension::PressurePerHour,
    }
}

/// The bounds of a limit in words: "≤30 cmH2O", "4–8 mL/kg", "≤35/min".
pub fn bounds(limit: &LimitVerdict, face: Face) -> String {
    let shown = |value: f64| face.value(value, dimension(limit.id));
    let unit = match (limit.id, face.unit.word()) {
        (LimitId::Paco2, word) => format!(" {word}"),
        (LimitId::Paco2FallPerHour, word) => format!(" {word}/h"),
        _ if limit.unit == "1" => String::new(),
        // "35 1/min" could be read as 351.
        _ if limit.unit.starts_with("1/") => limit.unit.trim_start_matches('1').to_owned(),
        _ => format!(" {}", limit.unit),
    };
    match (limit.min, limit.max) {
        (Some(min), Some(max)) => format!("{}{}{}{unit}", shown(min), face.dash(), shown(max)),
        (Some(min), None) => format!("{}{}{unit}", face.at_least(), shown(min)),
        (None, Some(max)) => format!("{}{}{unit}", face.at_most(), shown(max)),
        (None, None) => String::new(),
    }
}

/// A value with its verdict: "27 near", "≥1.9 unknown".
pub fn cell(limit: &LimitVerdict, trapping_assumed: bool, face: Face) -> String {
    let Some(value) = limit.value else { return Verdict::Unknown.word().to_owned() };
    let mark = match limit.id {
        LimitId::AutoPeep if trapping_assumed => face.at_least(),
        LimitId::ExpiratoryTimeConstants if trapping_assumed => face.at_most(),
        _ => "",
    };
    debug_assert!(mark.is_empty() || rests_on_trapping(limit.id));
    let mut shown = face.value(value, dimension(limit.id));
    // "8 beyond" would stand oddly beside a bound of 8: a digit more tells them apart.
    let bounds = [limit.min, limit.max].into_iter().flatten();
    let bounds: Vec<String> = bounds.map(|bound| face.value(bound, dimension(limit.id))).collect();
    if limit.verdict == Verdict::Beyond && bounds.contains(&shown) {
        let in_unit = match dimension(limit.id) {
            Dimension::GasPressure | Dimension::PressurePerHour => face.unit.from_mmhg(value),
            _ => value,
        };
        let finer = (1..4).map(|digits| number(in_unit, digits)).find(|text| !bounds.contains(text));
        shown = finer.unwrap_or(shown);
    }
    format!("{mark}{shown} {}", limit.verdict.word())
}

fn limits(columns: &[Column<'_>], face: Face, rows: &mut Vec<String>) {
    let Some(first) = columns.first() else { return };
    rows.push(String::new());
    rows.push("Limits".to_owned());
    for limit in &first.outcome.limits {
        let name = short_name(limit.id);
        let bounds = bounds(limit, face);
        let cells = columns.iter().map(|column| {
            let found = column.outcome.limits.iter().find(|other| other.id == limit.id);
            found.map_or_else(String::new, |limit| cell(limit, column.trapping_assumed, face))
        });
        rows.push(row(&format!("  {name} {bounds}"), cells));
    }
}

/// A limit's name, short enough for a row.
pub const fn short_name(id: LimitId) -> &'static str {
    match id {
        LimitId::TidalVolumePerKg => "volume per kg",
        LimitId::Plateau => "plateau",
        LimitId::DrivingPressure => "driving",
        LimitId::Rate => "total rate",
        LimitId::AutoPeep => "auto-PEEP",
        LimitId::ExpiratoryTimeConstants => "expiration/time const.",
        LimitId::MechanicalPower => "power",
        LimitId::LoadIndex => "load 4·driving+rate",
        LimitId::Ph => "pH",
        LimitId::Paco2 => "PaCO2",
        LimitId::Paco2FallPerHour => "PaCO2 fall",
    }
}
