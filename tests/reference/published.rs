//! Against published values: every row of `published_*.toml`, by the formula it names.

use std::path::Path;

use tidewright::case::profile::{Band, LimitId, Profile};
use tidewright::case::{file, read};
use tidewright::physiology::carbon_dioxide::{
    ANALYSER_TEMPERATURE, WATER_VAPOUR_37_MMHG, at_body_temperature, btps_per_stpd, output, pressure,
    ventilation_factor,
};
use tidewright::physiology::{acid_base, body, dead_space, energy, oxygen, stores};
use tidewright::planning::baseline::Baseline;
use tidewright::planning::belief::USUAL;
use tidewright::planning::forecast::{Forecaster, Held};
use tidewright::planning::trial::Trial;
use tidewright::quantity::typed::{BtpsFlow, GasPressure, StpdFlow, Temperature, Volume};
use toml::Table;

use crate::published_breaths::breath;
use crate::table::{number, read as read_table, rows};

const FILES: [&str; 11] = [
    "published_acid_base.toml",
    "published_breaths.toml",
    "published_carbon_dioxide.toml",
    "published_dead_space.toml",
    "published_energy.toml",
    "published_gas_volumes.toml",
    "published_limits.toml",
    "published_oxygen.toml",
    "published_pressure_control.toml",
    "published_time.toml",
    "published_weaning.toml",
];

/// Formulas of weaning, compared where the weaning module is tested.
const WEANING: [&str; 6] = [
    "rapid_shallow_breathing_index",
    "crop_index",
    "integrative_index",
    "index_bound",
    "readiness_bound",
    "trial_stop_bound",
];

/// Published rows by formulas compared here, and those of [`WEANING`]: counted in the tables, so that a row more or less is
/// looked at.
const ROWS_HERE: usize = 193;
/// See [`ROWS_HERE`].
const ROWS_OF_WEANING: usize = 32;

#[test]
fn every_published_row_is_reproduced() {
    let (mut compared, mut of_weaning, mut wrong) = (0, 0, Vec::new());
    for name in FILES {
        for row in rows(&read_table(name), "row") {
            let formula = row["formula"].as_str().unwrap();
            if WEANING.contains(&formula) {
                of_weaning += 1;
                continue;
            }
            let found = compute(formula, row["inputs"].as_table().unwrap_or(&Table::new()));
            let (expected, tolerance) = (number(&row, "expected"), number(&row, "tolerance"));
            let allowed = match row["tolerance_kind"].as_str() {
                Some("relative") => tolerance * expected.abs(),
                Some("absolute") => tolerance,
                other => panic!("tolerance_kind {other:?}"),
            };
            compared += 1;
            // The last digit of a printed value is itself rounded.
            if (found - expected).abs() > allowed + 1e-9 {
                wrong.push(format!(
                    "{} {formula}: found {found}, published {expected} ± {allowed}",
                    row["id"]
                ));
            }
        }
    }
    assert!(wrong.is_empty(), "{} of {compared} rows:\n{}", wrong.len(), wrong.join("\n"));
    assert_eq!((compared, of_weaning), (ROWS_HERE, ROWS_OF_WEANING));
}

/// A new table beside the others is not overlooked.
#[test]
fn every_published_table_is_read() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/reference");
    let names =
        std::fs::read_dir(folder).unwrap().map(|file| file.unwrap().file_name().into_string().unwrap());
    let mut tables: Vec<String> = names
        .filter(|name| {
            name.starts_with("published_") && Path::new(name).extension().is_some_and(|it| it == "toml")
        })
        .filter(|name| name != "published_left_out.toml")
        .collect();
    tables.sort();
    assert_eq!(tables, FILES);
}

/// Every id of the list of outside checks stands in one place: in a table, or among those left out with a reason.
#[test]
fn no_row_is_left_out_without_a_reason() {
    let left_out = rows(&read_table("published_left_out.toml"), "row");
    assert!(left_out.iter().all(|row| row["reason"].as_str().is_some_and(|reason| reason.len() > 10)));
    let ids: Vec<String> = left_out.iter().map(|row| row["id"].as_str().unwrap().to_owned()).collect();
    for name in FILES {
        for row in rows(&read_table(name), "row") {
            let id = row["id"].as_str().unwrap();
            assert!(!ids.iter().any(|left| left == id), "{id} is both used and left out");
            assert!(row["source"].as_str().is_some_and(|source| !source.is_empty()), "{id} has no source");
            assert!(["seen", "algebra", "memory"].contains(&row["seen"].as_str().unwrap()), "{id}");
        }
    }
}

fn mmhg(value: f64) -> GasPressure {
    GasPressure::from_mmhg(value)
}

fn celsius(value: f64) -> Temperature {
    Temperature::from_celsius(value)
}

fn female(row: &Table) -> bool {
    row["sex"].as_str().unwrap() == "female"
}

fn compute(formula: &str, row: &Table) -> f64 {
    let n = |key: &str| number(row, key);
    match formula {
        // The engine takes water vapour at 37 °C only; at other temperatures it is the witness that meets the published value.
        "water_vapour_pressure_mmhg" => vapour_mmhg(n("temperature_c")),
        "water_vapour_pressure_kpa" => vapour_mmhg(n("temperature_c")) * 101.325 / 760.0,
        "atps_to_btps" => {
            let (barometric, ambient) = (n("barometric_pressure_mmhg"), n("temperature_c"));
            to_btps(barometric)
                / btps_per_stpd(mmhg(barometric), mmhg(vapour_mmhg(ambient)), celsius(ambient))
        }
        "atpd_to_btps" => {
            let (barometric, ambient) = (n("barometric_pressure_mmhg"), n("temperature_c"));
            to_btps(barometric) / btps_per_stpd(mmhg(barometric), mmhg(0.0), celsius(ambient))
        }
        "atps_to_stpd_volume" => {
            let vapour = mmhg(n("water_vapour_mmhg"));
            n("volume_l")
                / btps_per_stpd(mmhg(n("barometric_pressure_mmhg")), vapour, celsius(n("temperature_c")))
        }
        "k_of_temperature" => ventilation_factor(celsius(n("temperature_c"))).mmhg(),
        "k_rise_per_degree" => {
            let t = n("temperature_c");
            ventilation_factor(celsius(t + 1.0)).mmhg() - ventilation_factor(celsius(t)).mmhg()
        }
        "k_through_stpd_factor" => {
            let barometric = n("barometric_pressure_mmhg");
            let factor = btps_per_stpd(mmhg(barometric), mmhg(WATER_VAPOUR_37_MMHG), ANALYSER_TEMPERATURE);
            (barometric - WATER_VAPOUR_37_MMHG) * factor
        }
        "paco2_from_output" => {
            let useful = n("minute_ventilation_l_min") * 1000.0 * (1.0 - n("dead_space_fraction"));
            let made = StpdFlow::from_ml_per_min(n("co2_production_ml_min"));
            pressure(made, BtpsFlow::from_ml_per_min(useful), ANALYSER_TEMPERATURE).mmhg()
        }
        "paco2_by_ratio" => after_change(
            Held::Split,
            n("paco2_mmhg"),
            [400.0, n("rate_per_min")],
            [400.0, n("new_rate_per_min")],
            100.0,
            0.5,
        ),
        "pco2_temperature_factor" => at_body_temperature(mmhg(1.0), celsius(n("temperature_c"))).mmhg(),
        "btps_to_stpd" => {
            1.0 / btps_per_stpd(
                mmhg(n("barometric_pressure_mmhg")),
                mmhg(n("water_vapour_mmhg")),
                ANALYSER_TEMPERATURE,
            )
        }
        "alveolar_po2" => {
            oxygen::alveolar_po2_mmhg(n("fio2"), n("barometric_pressure_mmhg"), n("paco2_mmhg"))
        }
        "alveolar_po2_less_short_form" => {
            let (fio2, barometric, paco2) = (n("fio2"), n("barometric_pressure_mmhg"), n("paco2_mmhg"));
            oxygen::alveolar_po2_mmhg(fio2, barometric, paco2)
                - (fio2 * (barometric - WATER_VAPOUR_37_MMHG) - paco2 / 0.8)
        }
        "inspired_po2" => oxygen::alveolar_po2_mmhg(n("fio2"), n("barometric_pressure_mmhg"), 0.0),
        "barometric_pressure_of_altitude" => oxygen::barometric_at_altitude_mmhg(n("altitude_m")),
        "hco3" => acid_base::bicarbonate(n("ph"), n("paco2_mmhg")),
        "sbe" => acid_base::base_excess(n("ph"), n("paco2_mmhg")),
        "ph_at_constant_sbe" => new_ph(row),
        "hco3_at_constant_sbe" => acid_base::bicarbonate(new_ph(row), n("new_paco2_mmhg")),
        "enghoff_fraction" => dead_space::enghoff(mmhg(n("mixed_expired_pco2_mmhg")), mmhg(n("paco2_mmhg"))),
        "airway_dead_space_by_rule" => dead_space::airway_by_rule(Some(n("predicted_weight_kg")), true).ml(),
        "dead_space_fraction_from_output" => {
            let made = StpdFlow::from_ml_per_min(n("co2_production_ml_min"));
            let needed = tidewright::physiology::carbon_dioxide::alveolar_ventilation(
                made,
                mmhg(n("paco2_mmhg")),
                ANALYSER_TEMPERATURE,
            );
            1.0 - needed.ml_per_min() / (n("minute_ventilation_l_min") * 1000.0)
        }
        "dead_space_added_by_apparatus" => {
            let (before, after) =
                (Volume::from_ml(n("tidal_volume_ml")), Volume::from_ml(n("new_tidal_volume_ml")));
            let series = Volume::from_ml(n("series_dead_space_ml"));
            let whole = before * n("dead_space_fraction");
            let f = dead_space::alveolar_fraction(whole, series, before);
            let with = series + Volume::from_ml(n("apparatus_added_ml"));
            (dead_space::physiological(with, f, after) - dead_space::physiological(series, f, after)).ml()
        }
        "paco2_after_change" => {
            let held = match row["held"].as_str().unwrap() {
                "volume" => Held::Volume,
                "fraction" => Held::Fraction,
                _ => Held::Split,
            };
            let before = [n("tidal_volume_ml"), n("rate_per_min")];
            let after = [n("new_tidal_volume_ml"), n("new_rate_per_min")];
            after_change(
                held,
                n("paco2_mmhg"),
                before,
                after,
                n("series_dead_space_ml"),
                n("dead_space_fraction"),
            )
        }
        "weir_energy" => energy::weir_kcal_per_day(
            StpdFlow::from_ml_per_min(n("oxygen_uptake_ml_min")),
            StpdFlow::from_ml_per_min(n("co2_production_ml_min")),
        ),
        "energy_per_co2" => weir(1.0, n("respiratory_quotient")),
        "energy_from_co2" => weir(n("co2_production_ml_min"), n("respiratory_quotient")),
        "mifflin_energy" => {
            energy::resting_kcal_per_day(female(row), n("weight_kg"), n("height_cm"), n("age_years"))
        }
        "predicted_weight" => body::predicted_weight_kg(female(row), n("height_cm")).unwrap(),
        "ventilatory_ratio" => {
            body::ventilatory_ratio(n("minute_ventilation_ml_min"), n("paco2_mmhg"), n("predicted_weight_kg"))
        }
        "co2_output_at_ventilatory_ratio" => {
            // VE·PaCO2 of one kg at that ratio; what of it meets blood carries the CO2 away.
            let moved = n("ventilatory_ratio") / body::ventilatory_ratio(1.0, 37.5, 1.0);
            let useful = BtpsFlow::from_ml_per_min(moved * (1.0 - n("dead_space_fraction")));
            output(useful, mmhg(37.5), ANALYSER_TEMPERATURE).ml_per_min()
        }
        "profile_limit" => profile_limit(row),
        "profile_target" => profile_target(row),
        "whole_body_store" => stores::FAST_ML_MMHG_KG + stores::SLOW_ML_MMHG_KG,
        "immediate_store" => stores::FAST_ML_MMHG_KG,
        "half_time" => half_time(row),
        "apnoea_rise" => apnoea_rise(row),
        _ => breath(formula, row),
    }
}

/// Water vapour at saturation by IAPWS-IF97, from the table that `gas_constants.py` makes.
fn vapour_mmhg(celsius: f64) -> f64 {
    let table = rows(&read_table("gas_constants.toml"), "constant");
    let row = table.iter().find(|row| (number(row, "temperature_c") - celsius).abs() < 1e-9);
    number(row.unwrap_or_else(|| panic!("no vapour at {celsius} °C")), "expected_water_vapour_if97_mmhg")
}

/// Volumes BTPS in one volume STPD, body at 37 °C.
fn to_btps(barometric_mmhg: f64) -> f64 {
    btps_per_stpd(mmhg(barometric_mmhg), mmhg(WATER_VAPOUR_37_MMHG), ANALYSER_TEMPERATURE)
}

fn new_ph(row: &Table) -> f64 {
    let excess = acid_base::base_excess(number(row, "ph"), number(row, "paco2_mmhg"));
    acid_base::ph_at(excess, number(row, "new_paco2_mmhg"))
}

/// Energy by Weir, with oxygen uptake from the respiratory quotient.
fn weir(co2_ml_min: f64, quotient: f64) -> f64 {
    let made = StpdFlow::from_ml_per_min(co2_ml_min);
    energy::weir_kcal_per_day(made / quotient, made)
}

/// The forecast of a change, through a whole case. The apparatus takes up what the rule does not say of the series part.
fn after_change(
    held: Held,
    paco2: f64,
    before: [f64; 2],
    after: [f64; 2],
    series: f64,
    fraction: f64,
) -> f64 {
    let case = format!(
        "format = 1\n[patient]\npredicted_weight = 40\n[[entry]]\n[entry.settings]\ncontrol = \"volume\"\nrate = {:?}\ntidal_volume = {:?}\npeep = 5\n\
         apparatus_dead_space = {:?}\n[entry.measured]\ndead_space_fraction = {fraction:?}\n[entry.gas]\npaco2 = {paco2:?}\n",
        before[1],
        before[0],
        series - 44.0, // 1.1 mL/kg of 40 kg stand in the airway
    );
    let (record, _) = read::case(case.as_bytes(), &|name| file::profile(name, None)).unwrap();
    let baseline = Baseline::read(&record).unwrap();
    let forecaster = Forecaster::new(&baseline, USUAL, held).unwrap();
    let trial = Trial { tidal_volume_ml: Some(after[0]), rate_per_min: Some(after[1]), ..Trial::default() };
    forecaster.paco2_mmhg(&trial.apply(&forecaster).unwrap()).unwrap()
}

fn profile_of(row: &Table) -> Profile {
    file::profile(row["profile"].as_str().unwrap(), None).unwrap()
}

fn profile_limit(row: &Table) -> f64 {
    let profile = profile_of(row);
    let id = LimitId::ALL.into_iter().find(|id| id.key() == row["limit"].as_str().unwrap()).unwrap();
    let limit = profile.limits.iter().find(|limit| limit.id == id).unwrap();
    if row["bound"].as_str() == Some("min") { limit.min.unwrap() } else { limit.max.unwrap() }
}

fn profile_target(row: &Table) -> f64 {
    let [low, high] = match (profile_of(row).target, row["target"].as_str().unwrap()) {
        (Band::Ph(band), "ph") | (Band::Paco2(band), "paco2") => band,
        other => panic!("{other:?}"),
    };
    if row["edge"].as_str() == Some("low") { low } else { high }
}

fn half_time(row: &Table) -> f64 {
    let (start, end) = (number(row, "paco2_mmhg"), number(row, "new_paco2_mmhg"));
    let course = stores::Course::new(
        number(row, "predicted_weight_kg"),
        number(row, "co2_production_ml_min"),
        start,
        end,
    );
    let half = f64::midpoint(start, end);
    tidewright::physiology::root::crossing(|t| course.paco2_mmhg(t) - half, 0.0, 300.0).unwrap()
}

/// Apnoea as a course toward a PaCO2 so far off that clearance is nil.
fn apnoea_rise(row: &Table) -> f64 {
    let start = number(row, "paco2_mmhg");
    let course = stores::Course::new(
        number(row, "predicted_weight_kg"),
        number(row, "co2_production_ml_min"),
        start,
        1e7,
    );
    let (from, to) = (number(row, "from_minute"), number(row, "to_minute"));
    (course.paco2_mmhg(to) - course.paco2_mmhg(from)) / (to - from)
}
