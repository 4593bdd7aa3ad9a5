//! The rows of a review: which column holds what, and each value against the table of inputs.

use csv::StringRecord;
use jiff::Timestamp;
use jiff::civil::DateTime;

use crate::case::entry::{Airway, Patient, Sex};
use crate::case::slots::patient_slot;
use crate::planning::baseline::gas_exchange::airway_by_rule_ml;
use crate::planning::review::PastGas;
use crate::quantity::input::{Key, Typed};
use crate::quantity::show::PressureUnit;

/// One row, checked.
pub struct Row {
    /// The stay it belongs to.
    pub stay: String,
    /// Who the patient is.
    pub patient: Patient,
    /// The gas.
    pub gas: PastGas,
}

/// Where each column stands.
pub struct Columns {
    stay: usize,
    hours: Option<usize>,
    at: Option<usize>,
    rate_set: usize,
    vt_set: usize,
    pco2: Option<usize>,
    pco2_kpa: Option<usize>,
    sex: Option<usize>,
    height: Option<usize>,
    predicted_weight: Option<usize>,
    airway: Option<usize>,
    rate_obs: Option<usize>,
    vt_obs: Option<usize>,
    apparatus: Option<usize>,
    ph: Option<usize>,
}

/// A stay's name as a CSV field, harmless to a spreadsheet.
pub fn quoted(text: &str) -> String {
    let plain =
        text.chars().all(|letter| letter.is_alphanumeric() || matches!(letter, '-' | '_' | '.' | ' '));
    let safe = if text.starts_with(['=', '+', '-', '@']) { format!("'{text}") } else { text.to_owned() };
    if plain {
        safe
    } else {
        format!("\"{}\"", safe.replace('"', "\"\"").replace(['\n', '\r', '\t', '\u{1b}'], " "))
    }
}

impl Columns {
    /// Finds the columns in a header.
    ///
    /// # Errors
    /// A sentence that names what is missing.
    pub fn find(header: &StringRecord) -> Result<Self, String> {
        let place = |name: &str| header.iter().position(|column| column.eq_ignore_ascii_case(name));
        let mut missing = Vec::new();
        let mut needed = |names: &[&str]| {
            let found = names.iter().find_map(|name| place(name));
            if found.is_none() {
                missing.push(names.join(" or "));
            }
            found.unwrap_or_default()
        };
        let columns = Self {
            stay: needed(&["stay"]),
            rate_set: needed(&["rate_set"]),
            vt_set: needed(&["vt_set"]),
            hours: place("hours"),
            at: place("at"),
            pco2: place("pco2"),
            pco2_kpa: place("pco2_kpa"),
            sex: place("sex"),
            height: place("height_cm"),
            predicted_weight: place("predicted_weight_kg"),
            airway: place("airway"),
            rate_obs: place("rate_obs"),
            vt_obs: place("vt_obs"),
            apparatus: place("apparatus_ml"),
            ph: place("ph"),
        };
        let _ = needed(&["hours", "at"]);
        let _ = needed(&["pco2", "pco2_kpa"]);
        if missing.is_empty() {
            return Ok(columns);
        }
        let there: Vec<&str> = header.iter().collect();
        Err(format!(
            "the header lacks {}; it names: {}",
            missing.join(", "),
            there.join(", ").chars().take(200).collect::<String>()
        ))
    }

    /// Reads a row.
    ///
    /// # Errors
    /// What is wrong with it.
    pub fn row(&self, record: &StringRecord, columns: usize) -> Result<Row, String> {
        if record.len() != columns {
            return Err(format!("it has {} fields, the header {columns}", record.len()));
        }
        let text = |at: Option<usize>| {
            at.and_then(|at| record.get(at))
                .filter(|text| !matches!(*text, "" | "NA" | "nan" | "NaN" | "null"))
        };
        let number = |at: Option<usize>, name: &str| -> Result<Option<f64>, String> {
            let Some(text) = text(at) else { return Ok(None) };
            match text.parse::<f64>() {
                Ok(value) if value.is_finite() => Ok(Some(value)),
                _ => Err(format!("{name} \"{}\" is not a number", text.chars().take(40).collect::<String>())),
            }
        };
        let checked = |at: Option<usize>, name: &str, key: Key| -> Result<Option<f64>, String> {
            number(at, name)?.map(|value| plausible(key, value)).transpose()
        };
        let needed = |value: Option<f64>, name: &str| value.ok_or_else(|| format!("{name} is empty"));
        let stay = text(Some(self.stay)).ok_or("stay is empty")?.to_owned();
        let hours = match number(self.hours, "hours")? {
            Some(hours) => hours,
            None => hours_of(text(self.at).ok_or("neither hours nor at is given")?)?,
        };
        let rate_set = needed(checked(Some(self.rate_set), "rate_set", Key::Rate)?, "rate_set")?;
        let vt_set = needed(checked(Some(self.vt_set), "vt_set", Key::TidalVolume)?, "vt_set")?;
        let paco2 = match number(self.pco2, "pco2")? {
            Some(mmhg) => mmhg,
            None => PressureUnit::KPa.to_mmhg(needed(number(self.pco2_kpa, "pco2_kpa")?, "pco2")?),
        };
        let mut patient = Patient {
            sex: text(self.sex).map(sex).transpose()?,
            airway: text(self.airway).map(airway).transpose()?,
            ..Patient::default()
        };
        for (at, name, key) in [
            (self.height, "height_cm", Key::Height),
            (self.predicted_weight, "predicted_weight_kg", Key::PredictedWeight),
        ] {
            if let Some(slot) = patient_slot(&mut patient, key) {
                *slot = checked(at, name, key)?;
            }
        }
        let gas = PastGas {
            hours,
            rate_set_per_min: rate_set,
            volume_set_ml: vt_set,
            paco2_mmhg: plausible(Key::Paco2, paco2)?,
            rate_observed_per_min: checked(self.rate_obs, "rate_obs", Key::TotalRate)?,
            volume_observed_ml: checked(self.vt_obs, "vt_obs", Key::ExhaledTidalVolume)?,
            apparatus_ml: checked(self.apparatus, "apparatus_ml", Key::ApparatusDeadSpace)?.unwrap_or(0.0),
            ph: checked(self.ph, "ph", Key::Ph)?,
        };
        let dead = airway_by_rule_ml(&patient) + gas.apparatus_ml;
        let breath = gas.volume_observed_ml.unwrap_or(vt_set).min(vt_set);
        if breath <= dead {
            return Err(format!(
                "a breath of {breath:.0} mL does not exceed the airway and apparatus dead space of {dead:.0} mL"
            ));
        }
        Ok(Row { stay, patient, gas })
    }
}

fn plausible(key: Key, value: f64) -> Result<f64, String> {
    key.input().accept(value, Typed::Plain).map_err(|out| out.message)
}

fn sex(word: &str) -> Result<Sex, String> {
    match word.to_ascii_lowercase().as_str() {
        "female" | "f" => Ok(Sex::Female),
        "male" | "m" => Ok(Sex::Male),
        other => Err(format!("sex \"{other}\" is neither female nor male")),
    }
}

fn airway(word: &str) -> Result<Airway, String> {
    match word.to_ascii_lowercase().as_str() {
        "native" => Ok(Airway::Native),
        "tube" => Ok(Airway::Tube),
        "tracheostomy" => Ok(Airway::Tracheostomy),
        other => Err(format!("airway \"{other}\" is none of native, tube, tracheostomy")),
    }
}

/// Hours since 1970 of a time with or without its offset from UTC.
fn hours_of(text: &str) -> Result<f64, String> {
    let milliseconds = match text.parse::<Timestamp>() {
        Ok(instant) => Some(instant.as_millisecond()),
        Err(_) => text
            .parse::<DateTime>()
            .ok()
            .and_then(|civil| civil.to_zoned(jiff::tz::TimeZone::UTC).ok())
            .map(|zoned| zoned.timestamp().as_millisecond()),
    };
    // Milliseconds since 1970 are far below 2^52.
    milliseconds.map(|milliseconds| milliseconds as f64 / 3_600_000.0).ok_or_else(|| {
        format!(
            "at \"{}\" is not a time such as 2026-03-04T08:10:00+01:00",
            text.chars().take(40).collect::<String>()
        )
    })
}
