//! The formulas of breaths, by the names in the published tables.

use tidewright::physiology::breath::pressure_control::PressureBreath;
use tidewright::physiology::breath::volume_control::VolumeBreath;
use tidewright::physiology::breath::{Breath, Lung, Phases};
use toml::Table;

use crate::table::{maybe, number};

/// Phases of a breath whose I:E is given as Ti over Te.
fn phases(row: &Table) -> Phases {
    let (rate, ratio) = (number(row, "rate_per_min"), maybe(row, "ie_ratio").unwrap_or(0.5));
    Phases::at_rate(60.0 / rate * ratio / (1.0 + ratio), 0.0, rate).unwrap()
}

fn volume_breath(row: &Table, inspiratory: Option<f64>, expiratory: Option<f64>) -> Breath {
    let volume = number(row, "tidal_volume_ml");
    let lung = Lung {
        compliance_ml_cmh2o: number(row, "compliance_ml_cmh2o"),
        inspiratory_resistance: inspiratory,
        expiratory_resistance: expiratory,
    };
    VolumeBreath {
        tidal_volume_ml: volume,
        set_tidal_volume_ml: volume,
        peep_cmh2o: Some(maybe(row, "peep_cmh2o").unwrap_or(0.0)),
        constant_flow: true,
        phases: phases(row),
    }
    .breathe(&lung)
}

fn pressure_breath(row: &Table) -> (PressureBreath, Lung) {
    let lung = Lung {
        compliance_ml_cmh2o: number(row, "compliance_ml_cmh2o"),
        inspiratory_resistance: Some(number(row, "inspiratory_resistance_cmh2o_s_l")),
        expiratory_resistance: Some(number(row, "expiratory_resistance_cmh2o_s_l")),
    };
    let breath = PressureBreath {
        inspiratory_pressure_cmh2o: number(row, "inspiratory_pressure_cmh2o"),
        peep_cmh2o: Some(0.0),
        scale: 1.0,
        phases: phases(row),
    };
    (breath, lung)
}

/// The published formula of that name on a row.
pub fn breath(formula: &str, row: &Table) -> f64 {
    let n = |key: &str| number(row, key);
    match formula {
        "vc_auto_peep" => {
            let resistance = n("expiratory_resistance_cmh2o_s_l");
            volume_breath(row, None, Some(resistance)).auto_peep_cmh2o.unwrap()
        }
        "fraction_emptied" => {
            // One breath of 100 mL from a lung of time constant 1 s, left to expire for so many seconds.
            let expiratory_s = n("expiratory_time_constants");
            let lung = Lung {
                compliance_ml_cmh2o: 100.0,
                inspiratory_resistance: None,
                expiratory_resistance: Some(10.0),
            };
            let phases = Phases { inspiratory_s: 1.0, pause_s: 0.0, expiratory_s };
            let breath = VolumeBreath {
                tidal_volume_ml: 100.0,
                set_tidal_volume_ml: 100.0,
                peep_cmh2o: Some(0.0),
                constant_flow: true,
                phases,
            };
            let trapped = breath.breathe(&lung).trapped_ml.unwrap();
            100.0 * (1.0 - trapped / (trapped + 100.0))
        }
        "vc_power_without_trapping" => {
            let resistance = n("inspiratory_resistance_cmh2o_s_l");
            volume_breath(row, Some(resistance), None).power_j_min(n("rate_per_min")).unwrap()
        }
        "power_from_pressures" => {
            let (plateau, total) = (n("plateau_cmh2o"), n("total_peep_cmh2o"));
            let work = n("tidal_volume_ml") * (n("peak_cmh2o") - (plateau - total) / 2.0);
            let breath = Breath { work_cmh2o_ml: Some(work), ..Breath::default() };
            breath.power_j_min(n("rate_per_min")).unwrap()
        }
        "pc_power" => {
            // A lung that moves just this volume under this pressure.
            let volume = n("tidal_volume_ml");
            let pressure = n("inspiratory_pressure_cmh2o");
            let lung = Lung {
                compliance_ml_cmh2o: volume / pressure,
                inspiratory_resistance: None,
                expiratory_resistance: None,
            };
            let breath = PressureBreath {
                inspiratory_pressure_cmh2o: pressure,
                peep_cmh2o: Some(n("peep_cmh2o")),
                scale: 1.0,
                phases: phases(row),
            };
            breath.breathe(&lung).power_j_min(n("rate_per_min")).unwrap()
        }
        "load_index" => {
            let breath =
                Breath { driving_pressure_cmh2o: Some(n("driving_pressure_cmh2o")), ..Breath::default() };
            breath.load_index(n("rate_per_min")).unwrap()
        }
        "pc_tidal_volume" => {
            let (breath, lung) = pressure_breath(row);
            breath.tidal_volume_ml(&lung)
        }
        "pc_auto_peep" => {
            let (breath, lung) = pressure_breath(row);
            breath.breathe(&lung).auto_peep_cmh2o.unwrap()
        }
        other => panic!("the formula {other} is not known here: add it"),
    }
}
