//! The gases of a record as CSV in the columns that `review` reads, one row a gas, corrections applied.

use super::document::no_formula;
use super::record_note::Told;
use crate::case::entry::{Airway, Sex};
use crate::case::moment::Moment;
use crate::case::record::Occasion;
use crate::case::settings::Settings;
use crate::planning::baseline::gas_exchange::predicted_weight_kg;
use crate::quantity::show;

/// The columns: those of `review` first.
pub const COLUMNS: [&str; 20] = [
    "stay",
    "at",
    "sex",
    "height_cm",
    "predicted_weight_kg",
    "airway",
    "rate_set",
    "vt_set",
    "rate_obs",
    "vt_obs",
    "apparatus_ml",
    "pco2",
    "ph",
    "entry",
    "control",
    "pao2",
    "fio2",
    "peep_cmh2o",
    "plateau_cmh2o",
    "end_tidal_co2",
];

/// The gases as CSV.
///
/// # Errors
/// Never when written to memory, as it is here.
pub fn of(told: &Told<'_>) -> Result<String, csv::Error> {
    let mut writer = csv::WriterBuilder::new().terminator(csv::Terminator::CRLF).from_writer(Vec::new());
    writer.write_record(COLUMNS)?;
    let mut gases: Vec<&Occasion> =
        told.record.occasions().iter().filter(|it| it.entry.gas.paco2_mmhg.is_some()).collect();
    gases.sort_by_key(|it| it.drawn_at());
    for occasion in gases.into_iter().filter(|it| told.shows(it.number, it.at)) {
        writer.write_record(row(told, occasion))?;
    }
    let bytes = writer.into_inner().map_err(|error| csv::Error::from(error.into_error()))?;
    Ok(String::from_utf8_lossy(&bytes).into_owned())
}

fn row(told: &Told<'_>, occasion: &Occasion) -> [String; COLUMNS.len()] {
    let patient = told.record.patient();
    let (entry, settings) = (&occasion.entry, occasion.in_force.mandatory());
    let number = |value: Option<f64>| value.map_or_else(String::new, |value| show::number(value, 3));
    [
        safe(told.record.label()),
        occasion.drawn_at().map_or_else(String::new, Moment::rfc3339),
        patient.sex.map_or("", |sex| if sex == Sex::Female { "female" } else { "male" }).to_owned(),
        number(patient.height_cm),
        number(predicted_weight_kg(patient)),
        patient
            .airway
            .map_or("", |airway| match airway {
                Airway::Native => "native",
                Airway::Tube => "tube",
                Airway::Tracheostomy => "tracheostomy",
            })
            .to_owned(),
        number(settings.map(|it| it.rate_per_min)),
        number(settings.and_then(Settings::tidal_volume_ml)),
        number(entry.measured.total_rate_per_min),
        number(entry.measured.exhaled_tidal_volume_ml),
        number(settings.map(|it| it.apparatus_dead_space_ml)),
        number(entry.gas.paco2_mmhg),
        number(entry.gas.ph),
        occasion.number.to_string(),
        control(occasion).to_owned(),
        number(entry.gas.pao2_mmhg),
        number(occasion.in_force.fio2()),
        number(occasion.in_force.peep_cmh2o()),
        number(entry.measured.plateau_cmh2o),
        number(entry.measured.end_tidal_co2_mmhg),
    ]
}

fn control(occasion: &Occasion) -> &'static str {
    use crate::case::entry::Control;
    use crate::case::settings::InForce;
    match &occasion.in_force {
        InForce::Mandatory(settings) if settings.control() == Control::Volume => "volume",
        InForce::Mandatory(_) => "pressure",
        InForce::Support { .. } => "support",
        InForce::Missing(_) => "",
    }
}

/// Typed text as a field that a spreadsheet shows and never computes; empty becomes a stay of its own.
pub fn safe(text: &str) -> String {
    let text = no_formula(text);
    if text.is_empty() { "no label".to_owned() } else { text }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_spreadsheet_computes_nothing_that_was_typed() {
        assert_eq!(safe("=1+1"), "'=1+1");
        assert_eq!(safe(" "), "no label");
        assert_eq!(safe("Bay 3"), "Bay 3");
        assert_eq!(safe("two\nlines"), "two lines");
    }
}
