//! The values that readiness and indices rest on at one occasion, and how old the borrowed ones may be.

use crate::case::record::{Occasion, Record};
use crate::physiology::carbon_dioxide::at_body_temperature;
use crate::physiology::oxygen;
use crate::physiology::weaning::rapid_shallow_breathing_index;
use crate::physiology::{body, dead_space};
use crate::planning::baseline::gas_exchange::predicted_weight_kg;
use crate::quantity::typed::{GasPressure, Temperature};

/// A gas or a pressure reading from before the weaning measures is borrowed up to this age, hours: common practice.
const BORROWED_HOURS: f64 = 24.0;

/// What is known at an occasion; `None` where it was not recorded.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub(super) struct Values {
    pub rate_per_min: Option<f64>,
    pub rapid_shallow: Option<f64>,
    pub tidal_volume_ml_kg: Option<f64>,
    pub inspiratory_pressure_max_cmh2o: Option<f64>,
    pub vital_capacity_ml_kg: Option<f64>,
    pub occlusion_pressure_cmh2o: Option<f64>,
    pub heart_rate_per_min: Option<f64>,
    pub systolic_pressure_mmhg: Option<f64>,
    pub spo2: Option<f64>,
    pub spo2_on_fio2: Option<f64>,
    pub pao2_fio2_mmhg: Option<f64>,
    pub arterial_over_alveolar_po2: Option<f64>,
    pub peep_cmh2o: Option<f64>,
    pub static_compliance_ml_cmh2o: Option<f64>,
    pub dynamic_compliance_ml_cmh2o: Option<f64>,
    pub ventilatory_ratio: Option<f64>,
    pub dead_space_fraction: Option<f64>,
}

impl Values {
    pub(super) fn at(record: &Record, index: usize) -> Option<Self> {
        let now = record.occasions().get(index)?;
        let until = record.occasions().get(..=index)?;
        let recent = |value: &dyn Fn(&Occasion) -> Option<f64>| {
            until.iter().rev().take_while(|it| is_recent(it, now)).find_map(value)
        };
        let weaning = &now.entry.weaning;
        let kg = predicted_weight_kg(record.patient());
        let per_kg = |ml: Option<f64>| ml.zip(kg).map(|(ml, kg)| ml / kg);
        let (rate, volume) = (weaning.spontaneous_rate_per_min, weaning.spontaneous_tidal_volume_ml);
        Some(Self {
            rate_per_min: rate,
            rapid_shallow: rate.zip(volume).map(|(rate, volume)| rapid_shallow_breathing_index(rate, volume)),
            tidal_volume_ml_kg: per_kg(volume),
            inspiratory_pressure_max_cmh2o: weaning.inspiratory_pressure_max_cmh2o,
            vital_capacity_ml_kg: per_kg(weaning.vital_capacity_ml),
            occlusion_pressure_cmh2o: weaning.occlusion_pressure_cmh2o,
            heart_rate_per_min: weaning.heart_rate_per_min,
            systolic_pressure_mmhg: weaning.systolic_pressure_mmhg,
            spo2: now.entry.measured.spo2,
            spo2_on_fio2: weaning.spo2_fraction_on.or_else(|| now.in_force.fio2()),
            pao2_fio2_mmhg: recent(&|it| Some(it.entry.gas.pao2_mmhg? / it.in_force.fio2()?)),
            arterial_over_alveolar_po2: recent(&|it| arterial_over_alveolar(record, it)),
            peep_cmh2o: now.in_force.peep_cmh2o(),
            static_compliance_ml_cmh2o: recent(&static_compliance),
            dynamic_compliance_ml_cmh2o: recent(&dynamic_compliance),
            ventilatory_ratio: recent(&|it| ventilatory_ratio(it, kg)),
            dead_space_fraction: recent(&dead_space_fraction),
        })
    }
}

fn is_recent(it: &Occasion, now: &Occasion) -> bool {
    it.number == now.number
        || it.drawn_at().zip(now.at).is_some_and(|(then, now)| now.hours_since(then) <= BORROWED_HOURS)
}

fn arterial_over_alveolar(record: &Record, it: &Occasion) -> Option<f64> {
    let gas = &it.entry.gas;
    let patient = record.patient();
    let barometric = patient.barometric_pressure_mmhg.unwrap_or_else(|| {
        patient.altitude_m.map_or(oxygen::SEA_LEVEL_MMHG, oxygen::barometric_at_altitude_mmhg)
    });
    let alveolar = oxygen::alveolar_po2_mmhg(it.in_force.fio2()?, barometric, gas.paco2_mmhg?);
    (alveolar > 0.0).then_some(gas.pao2_mmhg? / alveolar)
}

/// Exhaled volume of a mandatory breath, else the set one.
fn mandatory_volume(it: &Occasion) -> Option<f64> {
    let settings = it.in_force.mandatory()?;
    it.entry.measured.exhaled_tidal_volume_ml.or(settings.tidal_volume_ml())
}

/// Given, or volume over plateau less total PEEP (set PEEP where no total was read) of a mandatory breath.
fn static_compliance(it: &Occasion) -> Option<f64> {
    let measured = &it.entry.measured;
    if let Some(given) = measured.compliance_ml_cmh2o {
        return Some(given);
    }
    let peep = it.in_force.mandatory()?.peep_cmh2o?;
    let total = measured.total_peep_cmh2o.unwrap_or(peep + measured.auto_peep_cmh2o.unwrap_or(0.0));
    let driving = measured.plateau_cmh2o? - total;
    (driving > 0.0).then_some(mandatory_volume(it)? / driving)
}

/// Volume over peak less PEEP of a mandatory breath.
fn dynamic_compliance(it: &Occasion) -> Option<f64> {
    let rise = it.entry.measured.peak_cmh2o? - it.in_force.mandatory()?.peep_cmh2o?;
    (rise > 0.0).then_some(mandatory_volume(it)? / rise)
}

fn ventilatory_ratio(it: &Occasion, kg: Option<f64>) -> Option<f64> {
    let measured = &it.entry.measured;
    let by_breath = || {
        let set = it.in_force.mandatory().map(|settings| settings.rate_per_min);
        Some(measured.total_rate_per_min.or(set)? * measured.exhaled_tidal_volume_ml?)
    };
    let volume = measured.minute_ventilation_l_min.map(|l_min| l_min * 1000.0).or_else(by_breath)?;
    Some(body::ventilatory_ratio(volume, it.entry.gas.paco2_mmhg?, kg?))
}

/// Measured VD/VT, or Enghoff's from mixed expired PCO2 and the gas charted with it.
fn dead_space_fraction(it: &Occasion) -> Option<f64> {
    let measured = &it.entry.measured;
    measured.dead_space_fraction.or_else(|| {
        let temperature = Temperature::from_celsius(measured.temperature_c.unwrap_or(37.0));
        let arterial = at_body_temperature(GasPressure::from_mmhg(it.entry.gas.paco2_mmhg?), temperature);
        Some(dead_space::enghoff(GasPressure::from_mmhg(measured.mixed_expired_co2_mmhg?), arterial))
    })
}
