//! Against tables computed outside: integrated breaths, inverted lungs, courses, constants, units.

use tidewright::case::read;
use tidewright::physiology::breath::pressure_control::PressureBreath;
use tidewright::physiology::breath::volume_control::VolumeBreath;
use tidewright::physiology::breath::{Breath, Lung, Phases};
use tidewright::physiology::{acid_base, carbon_dioxide, stores};
use tidewright::planning::plan::{Request, plan};
use tidewright::planning::target::Asked;
use tidewright::quantity::parse;
use tidewright::quantity::typed::{GasPressure, Temperature};
use tidewright::quantity::unit::Dimension;
use toml::Table;

use crate::table::{Worst, maybe, number, read as read_table, rows};

/// The tables carry ten digits.
const TEN_DIGITS: f64 = 1e-6;

fn lung(row: &Table) -> Lung {
    Lung {
        compliance_ml_cmh2o: number(row, "compliance_ml_cmh2o"),
        inspiratory_resistance: Some(number(row, "inspiratory_resistance_cmh2o_s_l")),
        expiratory_resistance: Some(number(row, "expiratory_resistance_cmh2o_s_l")),
    }
}

fn phases(row: &Table) -> Phases {
    let pause = maybe(row, "pause_s").unwrap_or(0.0);
    Phases::at_rate(number(row, "inspiratory_time_s"), pause, number(row, "rate_per_min")).unwrap()
}

fn compare_breath(row: &Table, breath: &Breath, worst: &mut Worst) {
    let rate = number(row, "rate_per_min");
    // Near-zero trapping is an integration's rounding: a floor of 0.01 mL or cmH2O in the denominator.
    for (name, found, floor) in [
        ("expected_trapped_volume_ml", breath.trapped_ml, 0.01),
        ("expected_auto_peep_cmh2o", breath.auto_peep_cmh2o, 0.01),
        ("expected_plateau_cmh2o", breath.plateau_cmh2o, 0.01),
        ("expected_peak_cmh2o", breath.peak_cmh2o, 0.01),
        ("expected_mean_airway_pressure_cmh2o", breath.mean_cmh2o, 0.01),
        ("expected_work_per_breath_cmh2o_l", breath.work_cmh2o_ml.map(|work| work / 1000.0), 0.01),
        ("expected_mechanical_power_j_min", breath.power_j_min(rate), 0.01),
    ] {
        worst.compare(found.unwrap(), number(row, name), floor, format!("{name} {row:?}"));
    }
}

/// scipy `solve_ivp` to the periodic steady state (tests/reference/breaths.py), closed forms not used.
#[test]
fn volume_control_breaths_as_integrated() {
    let mut worst = Worst::allowed(TEN_DIGITS);
    for row in rows(&read_table("breaths.toml"), "volume_control") {
        let volume = number(&row, "tidal_volume_ml");
        let breath = VolumeBreath {
            tidal_volume_ml: volume,
            set_tidal_volume_ml: volume,
            peep_cmh2o: Some(number(&row, "peep_cmh2o")),
            constant_flow: true,
            phases: phases(&row),
        };
        compare_breath(&row, &breath.breathe(&lung(&row)), &mut worst);
    }
    worst.judge(200 * 7);
}

/// The same for pressure control.
#[test]
fn pressure_control_breaths_as_integrated() {
    let mut worst = Worst::allowed(TEN_DIGITS);
    for row in rows(&read_table("breaths.toml"), "pressure_control") {
        let breath = PressureBreath {
            inspiratory_pressure_cmh2o: number(&row, "inspiratory_pressure_cmh2o"),
            peep_cmh2o: Some(number(&row, "peep_cmh2o")),
            scale: 1.0,
            phases: phases(&row),
        };
        let lung = lung(&row);
        let expected = number(&row, "expected_tidal_volume_ml");
        worst.compare(breath.tidal_volume_ml(&lung), expected, 0.01, format!("tidal volume {row:?}"));
        compare_breath(&row, &breath.breathe(&lung), &mut worst);
    }
    worst.judge(200 * 8);
}

/// scipy `brentq` on the same readings (tests/reference/lungs.py), here through a whole case and its plan.
#[test]
fn lungs_as_inverted() {
    let table = read_table("lungs.toml");
    let mut worst = Worst::allowed(TEN_DIGITS);
    for kind in [
        "volume_control_total_peep",
        "volume_control_given",
        "volume_control_assumed",
        "pressure_control_total_peep",
        "pressure_control_given",
        "pressure_control_hold_only",
        "pressure_control_resistance_only",
    ] {
        for row in rows(&table, kind) {
            let found = baseline_of(&row);
            for name in
                ["compliance_ml_cmh2o", "inspiratory_resistance_cmh2o_s_l", "expiratory_resistance_cmh2o_s_l"]
            {
                let expected = number(&row, &format!("expected_{name}"));
                worst.compare(
                    found[name].as_f64().unwrap(),
                    expected,
                    0.01,
                    format!("{kind} {name} {row:?}"),
                );
            }
            let auto = found["auto_peep_cmh2o"].as_f64().unwrap();
            worst.compare(
                auto,
                number(&row, "expected_auto_peep_cmh2o"),
                0.01,
                format!("{kind} auto-PEEP {row:?}"),
            );
        }
    }
    worst.judge(7 * 60 * 4);
}

/// What the engine reads from the readings of a row, charted in a case file.
fn baseline_of(row: &Table) -> serde_json::Value {
    let pressure = maybe(row, "inspiratory_pressure_cmh2o");
    // Only differences of airway pressure matter; a little more PEEP keeps all of them plausible for a patient.
    let lift = 5.0;
    let mut settings = vec![
        format!("rate = {:?}", number(row, "rate_per_min")),
        format!("peep = {:?}", number(row, "peep_cmh2o") + lift),
        format!("inspiratory_time = {:?}", number(row, "inspiratory_time_s")),
    ];
    let mut measured = vec![format!("total_rate = {:?}", number(row, "rate_per_min"))];
    if let Some(pressure) = pressure {
        settings.push(format!("control = \"pressure\"\ninspiratory_pressure = {pressure:?}"));
    } else {
        settings.push(format!("control = \"volume\"\ntidal_volume = {:?}", number(row, "tidal_volume_ml")));
        settings.push(format!("pause = {:?}", number(row, "pause_s")));
    }
    for (column, key) in [
        ("exhaled_tidal_volume_ml", "exhaled_tidal_volume"),
        ("plateau_cmh2o", "plateau"),
        ("peak_cmh2o", "peak"),
        ("total_peep_cmh2o", "total_peep"),
        ("given_resistance_cmh2o_s_l", "resistance"),
        ("given_expiratory_resistance_cmh2o_s_l", "expiratory_resistance"),
    ] {
        let lift = if ["plateau", "peak", "total_peep"].contains(&key) { lift } else { 0.0 };
        measured.extend(maybe(row, column).map(|value| format!("{key} = {:?}", value + lift)));
    }
    let case = format!(
        "format = 1\n[patient]\nsex = \"male\"\nheight = 175\n[[entry]]\n[entry.settings]\n{}\n[entry.measured]\n{}\n[entry.gas]\npaco2 = 50\nph = 7.3\n",
        settings.join("\n"),
        measured.join("\n")
    );
    let profiles = |name: &str| tidewright::case::file::profile(name, None);
    let (record, _) =
        read::case(case.as_bytes(), &profiles).unwrap_or_else(|problems| panic!("{case}\n{problems:?}"));
    let request = Request { asked: Asked::Paco2(45.0), aims: Vec::new(), ..Request::default() };
    let answer = plan(&record, &request).unwrap_or_else(|faults| panic!("{case}\n{faults:?}"));
    let answer = serde_json::to_value(&answer).unwrap();
    let mut found = answer["baseline"].clone();
    found["auto_peep_cmh2o"] = answer["now"]["auto_peep_cmh2o"].clone();
    found
}

/// scipy `brentq` on base excess.
#[test]
fn ph_at_constant_base_excess_as_inverted() {
    let mut worst = Worst::allowed(TEN_DIGITS);
    for row in rows(&read_table("lungs.toml"), "ph_at_constant_base_excess") {
        let excess = acid_base::base_excess(number(&row, "ph"), number(&row, "paco2_mmhg"));
        let paco2 = number(&row, "new_paco2_mmhg");
        let ph = acid_base::ph_at(excess, paco2);
        worst.compare(excess, number(&row, "expected_base_excess_mmol_l"), 1.0, format!("{row:?}"));
        worst.compare(ph, number(&row, "expected_new_ph"), 1.0, format!("{row:?}"));
        let expected = number(&row, "expected_new_bicarbonate_mmol_l");
        worst.compare(acid_base::bicarbonate(ph, paco2), expected, 1.0, format!("{row:?}"));
    }
    worst.judge(3 * 60);
}

/// scipy `minimize_scalar` on alveolar ventilation, refined.
#[test]
fn summits_as_maximised() {
    // The top of a maximum is flat: the place is known to half the digits of the height.
    let (mut places, mut heights) = (Worst::allowed(1e-5), Worst::allowed(TEN_DIGITS));
    for row in rows(&read_table("lungs.toml"), "pressure_control_summit") {
        let timing = maybe(&row, "held_inspiratory_time_s").map_or_else(
            || {
                format!(
                    "ratio = \"{:?}:{:?}\"",
                    number(&row, "held_inspiratory_part"),
                    number(&row, "held_expiratory_part")
                )
            },
            |seconds| format!("inspiratory_time = {seconds:?}"),
        );
        let case = format!(
            "format = 1\n[patient]\npredicted_weight = 35\n[[entry]]\n[entry.settings]\ncontrol = \"pressure\"\nrate = {:?}\ninspiratory_pressure = {:?}\npeep = 5\n{timing}\napparatus_dead_space = {:?}\n\
             [entry.measured]\ncompliance = {:?}\nresistance = {:?}\nexpiratory_resistance = {:?}\n[entry.gas]\npaco2 = {:?}\nph = 7.3\n",
            number(&row, "rate_per_min"),
            number(&row, "inspiratory_pressure_cmh2o"),
            number(&row, "series_dead_space_ml") - 38.5, // 1.1 mL/kg of 35 kg stand in the airway
            number(&row, "compliance_ml_cmh2o"),
            number(&row, "inspiratory_resistance_cmh2o_s_l"),
            number(&row, "expiratory_resistance_cmh2o_s_l"),
            number(&row, "paco2_mmhg"),
        );
        let profiles = |name: &str| tidewright::case::file::profile(name, None);
        let (record, _) =
            read::case(case.as_bytes(), &profiles).unwrap_or_else(|problems| panic!("{case}\n{problems:?}"));
        let request = Request { asked: Asked::Paco2(45.0), aims: Vec::new(), ..Request::default() };
        let found = plan(&record, &request).unwrap().summit.unwrap_or_else(|| panic!("no summit: {case}"));
        places.compare(
            found.rate_per_min,
            number(&row, "expected_summit_rate_per_min"),
            1.0,
            format!("{row:?}"),
        );
        heights.compare(
            found.paco2_mmhg,
            number(&row, "expected_summit_paco2_mmhg"),
            1.0,
            format!("{row:?}"),
        );
    }
    places.judge(60);
    heights.judge(60);
}

/// scipy `solve_ivp` on the two stores (tests/reference/courses.py).
#[test]
fn courses_as_integrated() {
    let mut worst = Worst::allowed(TEN_DIGITS);
    for row in rows(&read_table("courses.toml"), "course") {
        let course = stores::Course::new(
            number(&row, "predicted_weight_kg"),
            number(&row, "co2_production_ml_min"),
            number(&row, "paco2_start_mmhg"),
            number(&row, "paco2_final_mmhg"),
        );
        let minutes = row["minutes"].as_array().unwrap();
        let expected = row["expected_paco2_mmhg"].as_array().unwrap();
        for (minute, expected) in minutes.iter().zip(expected) {
            let found = course.paco2_mmhg(minute.as_float().unwrap());
            worst.compare(found, expected.as_float().unwrap(), 1.0, format!("{minute} {row:?}"));
        }
        worst.compare(
            course.settled_minutes(),
            number(&row, "expected_settled_minutes"),
            1.0,
            format!("{row:?}"),
        );
    }
    worst.judge(60 * 7);
}

/// iapws and the ideal gas law (tests/reference/gas_constants.py).
#[test]
fn constants_as_computed() {
    let table = read_table("gas_constants.toml");
    let mut worst = Worst::allowed(1e-9);
    let mut vapour = std::collections::BTreeMap::new();
    for row in rows(&table, "constant") {
        let temperature = number(&row, "temperature_c");
        let k = carbon_dioxide::ventilation_factor(Temperature::from_celsius(temperature)).mmhg();
        worst.compare(k, number(&row, "expected_k_mmhg"), 1.0, format!("{row:?}"));
        vapour.insert(format!("{temperature}"), number(&row, "expected_water_vapour_if97_mmhg"));
    }
    for row in rows(&table, "volume_factor") {
        let temperature = number(&row, "temperature_c");
        let Some(water) = vapour.get(&format!("{temperature}")) else { continue };
        let factor = carbon_dioxide::btps_per_stpd(
            GasPressure::from_mmhg(number(&row, "barometric_pressure_mmhg")),
            GasPressure::from_mmhg(*water),
            Temperature::from_celsius(temperature),
        );
        worst.compare(1.0 / factor, number(&row, "expected_stpd_from_btps_if97"), 0.1, format!("{row:?}"));
    }
    worst.judge(45 + 35);
}

/// The open table of K and volume factors (tests/reference/data/gas_volume_factors.csv, its five printed decimals).
#[test]
fn volume_factors_as_printed() {
    let text = include_str!("data/gas_volume_factors.csv");
    let mut worst = Worst::allowed(1e-5);
    for line in text.lines().filter(|line| line.starts_with(|first: char| first.is_ascii_digit())) {
        let fields: Vec<f64> = line.split(',').map(|field| field.parse().unwrap()).collect();
        let [barometric, celsius, water, btps, _, k] = fields[..] else { panic!("{line}") };
        let temperature = Temperature::from_celsius(celsius);
        let factor = carbon_dioxide::btps_per_stpd(
            GasPressure::from_mmhg(barometric),
            GasPressure::from_mmhg(water),
            temperature,
        );
        worst.compare(factor, btps, 1.0, line);
        worst.compare(carbon_dioxide::ventilation_factor(temperature).mmhg(), k, 1.0, line);
    }
    worst.judge(2 * 18);
}

/// pint (tests/reference/gas_constants.py): every unit there is understood and means the same.
#[test]
fn units_as_converted() {
    let table = rows(&read_table("units.toml"), "conversion");
    for row in &table {
        let (from, to) = (row["from"].as_str().unwrap(), row["to"].as_str().unwrap());
        let dimension = match to {
            "mmHg" | "kPa" => Dimension::GasPressure,
            "cmH2O" | "mbar" => Dimension::AirwayPressure,
            "kg" => Dimension::Mass,
            "cm" => Dimension::Length,
            "Cel" => Dimension::Temperature,
            "mL" => Dimension::Volume,
            "L/min" => Dimension::Flow,
            "s" => Dimension::Time,
            "m" => Dimension::Altitude,
            other => panic!("the unit {other} is not known here: add it"),
        };
        let typed = format!("{} {from}", number(row, "value"));
        let value = parse::parse(&typed, dimension).unwrap_or_else(|unread| panic!("{typed}: {unread}"));
        // The parser gives the default unit; the table may ask for another of the same dimension.
        let wanted = dimension.units().iter().find(|unit| unit.word == to || unit.ucum == to);
        let found = wanted.map_or(value, |unit| unit.from_default(value));
        assert!(wanted.is_some() || dimension.unit() == to, "{to} is no unit of {dimension:?}");
        let (expected, tolerance) = (number(row, "expected"), number(row, "relative_tolerance"));
        assert!((found - expected).abs() <= tolerance * expected.abs().max(1.0), "{row:?}: found {found}");
    }
    assert_eq!(table.len(), 41);
}
