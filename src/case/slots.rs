//! Which field of the record holds which key: one line a key, so that no key is read, corrected or checked twice.

use super::entry::{ChartedPlan, Entry, Observation, Patient};
use crate::quantity::input::Key;

/// The field of a `T` that holds a key.
pub(super) struct Slot<T> {
    /// The key.
    pub key: Key,
    /// Reads the field.
    pub get: fn(&T) -> Option<f64>,
    /// Opens the field.
    pub open: fn(&mut T) -> &mut Option<f64>,
}

const fn slot<T>(key: Key, get: fn(&T) -> Option<f64>, open: fn(&mut T) -> &mut Option<f64>) -> Slot<T> {
    Slot { key, get, open }
}

/// The value of `key` in `entry`; `None` when it is not given or not a key of entries.
pub fn entry_value(entry: &Entry, key: Key) -> Option<f64> {
    ENTRY.iter().find(|slot| slot.key == key).and_then(|slot| (slot.get)(entry))
}

/// The field of `key` in `entry`; `None` when it is not a key of settings, measured, gas or weaning.
pub fn entry_slot(entry: &mut Entry, key: Key) -> Option<&mut Option<f64>> {
    ENTRY.iter().find(|slot| slot.key == key).map(|slot| (slot.open)(entry))
}

/// The value of `key` in `patient`; `None` when it is not given or not a key of patients.
pub fn patient_value(patient: &Patient, key: Key) -> Option<f64> {
    PATIENT.iter().find(|slot| slot.key == key).and_then(|slot| (slot.get)(patient))
}

/// The field of `key` in `patient`; `None` when it is not a key of patients.
pub fn patient_slot(patient: &mut Patient, key: Key) -> Option<&mut Option<f64>> {
    PATIENT.iter().find(|slot| slot.key == key).map(|slot| (slot.open)(patient))
}

/// The value of `key` in `plan`; `None` when it is not given or not a single number of plans.
pub fn plan_value(plan: &ChartedPlan, key: Key) -> Option<f64> {
    PLAN.iter().find(|slot| slot.key == key).and_then(|slot| (slot.get)(plan))
}

/// The value of `key` in `observation`; `None` when it is not given or not a key of observations, or their minute.
pub fn observation_value(observation: &Observation, key: Key) -> Option<f64> {
    OBSERVATION.iter().find(|slot| slot.key == key).and_then(|slot| (slot.get)(observation))
}

/// The field of `key` in `observation`; `None` when it is not a key of observations, or their minute.
pub fn observation_slot(observation: &mut Observation, key: Key) -> Option<&mut Option<f64>> {
    OBSERVATION.iter().find(|slot| slot.key == key).map(|slot| (slot.open)(observation))
}

/// Of a patient.
pub(super) static PATIENT: [Slot<Patient>; 6] = [
    slot(Key::Height, |it| it.height_cm, |it| &mut it.height_cm),
    slot(Key::Weight, |it| it.weight_kg, |it| &mut it.weight_kg),
    slot(Key::Age, |it| it.age_years, |it| &mut it.age_years),
    slot(Key::PredictedWeight, |it| it.predicted_weight_kg, |it| &mut it.predicted_weight_kg),
    slot(Key::BarometricPressure, |it| it.barometric_pressure_mmhg, |it| &mut it.barometric_pressure_mmhg),
    slot(Key::Altitude, |it| it.altitude_m, |it| &mut it.altitude_m),
];

/// Of an entry: settings, measured, gas, weaning.
pub(super) static ENTRY: [Slot<Entry>; 40] = [
    slot(Key::Rate, |it| it.settings.rate_per_min, |it| &mut it.settings.rate_per_min),
    slot(Key::TidalVolume, |it| it.settings.tidal_volume_ml, |it| &mut it.settings.tidal_volume_ml),
    slot(
        Key::InspiratoryPressure,
        |it| it.settings.inspiratory_pressure_cmh2o,
        |it| &mut it.settings.inspiratory_pressure_cmh2o,
    ),
    slot(Key::Peep, |it| it.settings.peep_cmh2o, |it| &mut it.settings.peep_cmh2o),
    slot(Key::Fio2, |it| it.settings.fio2, |it| &mut it.settings.fio2),
    slot(Key::InspiratoryTime, |it| it.settings.inspiratory_time_s, |it| &mut it.settings.inspiratory_time_s),
    slot(Key::Flow, |it| it.settings.flow_l_min, |it| &mut it.settings.flow_l_min),
    slot(Key::Ratio, |it| it.settings.ratio, |it| &mut it.settings.ratio),
    slot(Key::Pause, |it| it.settings.pause_s, |it| &mut it.settings.pause_s),
    slot(
        Key::ApparatusDeadSpace,
        |it| it.settings.apparatus_dead_space_ml,
        |it| &mut it.settings.apparatus_dead_space_ml,
    ),
    slot(Key::TotalRate, |it| it.measured.total_rate_per_min, |it| &mut it.measured.total_rate_per_min),
    slot(
        Key::ExhaledTidalVolume,
        |it| it.measured.exhaled_tidal_volume_ml,
        |it| &mut it.measured.exhaled_tidal_volume_ml,
    ),
    slot(
        Key::MinuteVentilation,
        |it| it.measured.minute_ventilation_l_min,
        |it| &mut it.measured.minute_ventilation_l_min,
    ),
    slot(Key::Plateau, |it| it.measured.plateau_cmh2o, |it| &mut it.measured.plateau_cmh2o),
    slot(Key::Peak, |it| it.measured.peak_cmh2o, |it| &mut it.measured.peak_cmh2o),
    slot(Key::TotalPeep, |it| it.measured.total_peep_cmh2o, |it| &mut it.measured.total_peep_cmh2o),
    slot(Key::AutoPeep, |it| it.measured.auto_peep_cmh2o, |it| &mut it.measured.auto_peep_cmh2o),
    slot(
        Key::MeanAirwayPressure,
        |it| it.measured.mean_airway_pressure_cmh2o,
        |it| &mut it.measured.mean_airway_pressure_cmh2o,
    ),
    slot(Key::Compliance, |it| it.measured.compliance_ml_cmh2o, |it| &mut it.measured.compliance_ml_cmh2o),
    slot(Key::Resistance, |it| it.measured.resistance_cmh2o_s_l, |it| &mut it.measured.resistance_cmh2o_s_l),
    slot(
        Key::ExpiratoryResistance,
        |it| it.measured.expiratory_resistance_cmh2o_s_l,
        |it| &mut it.measured.expiratory_resistance_cmh2o_s_l,
    ),
    slot(
        Key::CircuitCompliance,
        |it| it.measured.circuit_compliance_ml_cmh2o,
        |it| &mut it.measured.circuit_compliance_ml_cmh2o,
    ),
    slot(Key::EndTidalCo2, |it| it.measured.end_tidal_co2_mmhg, |it| &mut it.measured.end_tidal_co2_mmhg),
    slot(
        Key::MixedExpiredCo2,
        |it| it.measured.mixed_expired_co2_mmhg,
        |it| &mut it.measured.mixed_expired_co2_mmhg,
    ),
    slot(
        Key::DeadSpaceFraction,
        |it| it.measured.dead_space_fraction,
        |it| &mut it.measured.dead_space_fraction,
    ),
    slot(
        Key::Co2Production,
        |it| it.measured.co2_production_ml_min,
        |it| &mut it.measured.co2_production_ml_min,
    ),
    slot(Key::Temperature, |it| it.measured.temperature_c, |it| &mut it.measured.temperature_c),
    slot(Key::Spo2, |it| it.measured.spo2, |it| &mut it.measured.spo2),
    slot(Key::Ph, |it| it.gas.ph, |it| &mut it.gas.ph),
    slot(Key::Paco2, |it| it.gas.paco2_mmhg, |it| &mut it.gas.paco2_mmhg),
    slot(Key::Pao2, |it| it.gas.pao2_mmhg, |it| &mut it.gas.pao2_mmhg),
    slot(Key::Bicarbonate, |it| it.gas.bicarbonate_mmol_l, |it| &mut it.gas.bicarbonate_mmol_l),
    slot(
        Key::SpontaneousRate,
        |it| it.weaning.spontaneous_rate_per_min,
        |it| &mut it.weaning.spontaneous_rate_per_min,
    ),
    slot(
        Key::SpontaneousTidalVolume,
        |it| it.weaning.spontaneous_tidal_volume_ml,
        |it| &mut it.weaning.spontaneous_tidal_volume_ml,
    ),
    slot(
        Key::InspiratoryPressureMax,
        |it| it.weaning.inspiratory_pressure_max_cmh2o,
        |it| &mut it.weaning.inspiratory_pressure_max_cmh2o,
    ),
    slot(Key::VitalCapacity, |it| it.weaning.vital_capacity_ml, |it| &mut it.weaning.vital_capacity_ml),
    slot(
        Key::OcclusionPressure,
        |it| it.weaning.occlusion_pressure_cmh2o,
        |it| &mut it.weaning.occlusion_pressure_cmh2o,
    ),
    slot(Key::Spo2FractionOn, |it| it.weaning.spo2_fraction_on, |it| &mut it.weaning.spo2_fraction_on),
    slot(Key::HeartRate, |it| it.weaning.heart_rate_per_min, |it| &mut it.weaning.heart_rate_per_min),
    slot(
        Key::SystolicPressure,
        |it| it.weaning.systolic_pressure_mmhg,
        |it| &mut it.weaning.systolic_pressure_mmhg,
    ),
];

/// Of an observation, but for its minute, which is never missing.
pub(super) static OBSERVATION: [Slot<Observation>; 5] = [
    slot(Key::ObservedRate, |it| it.rate_per_min, |it| &mut it.rate_per_min),
    slot(Key::ObservedTidalVolume, |it| it.tidal_volume_ml, |it| &mut it.tidal_volume_ml),
    slot(Key::ObservedHeartRate, |it| it.heart_rate_per_min, |it| &mut it.heart_rate_per_min),
    slot(Key::ObservedSystolicPressure, |it| it.systolic_pressure_mmhg, |it| &mut it.systolic_pressure_mmhg),
    slot(Key::ObservedSpo2, |it| it.spo2, |it| &mut it.spo2),
];

/// Of a charted plan, but for its intervals, which are pairs.
pub(super) static PLAN: [Slot<ChartedPlan>; 7] = [
    slot(Key::PlannedPaco2, |it| it.target_paco2_mmhg, |it| &mut it.target_paco2_mmhg),
    slot(Key::PlannedRate, |it| it.rate_per_min, |it| &mut it.rate_per_min),
    slot(Key::PlannedTidalVolume, |it| it.tidal_volume_ml, |it| &mut it.tidal_volume_ml),
    slot(
        Key::PlannedInspiratoryPressure,
        |it| it.inspiratory_pressure_cmh2o,
        |it| &mut it.inspiratory_pressure_cmh2o,
    ),
    slot(Key::ForecastPaco2, |it| it.forecast_paco2_mmhg, |it| &mut it.forecast_paco2_mmhg),
    slot(Key::ExpectedPaco2, |it| it.expected_paco2_mmhg, |it| &mut it.expected_paco2_mmhg),
    slot(Key::SettleMinutes, |it| it.settle_minutes, |it| &mut it.settle_minutes),
];

#[cfg(test)]
mod tests {
    use super::*;

    fn each_holds_its_own<T: Default>(slots: &[Slot<T>]) {
        for (index, slot) in slots.iter().enumerate() {
            let mut whole = T::default();
            *(slot.open)(&mut whole) = Some(1.0);
            for (other, read) in slots.iter().enumerate() {
                assert_eq!((read.get)(&whole).is_some(), index == other, "{:?} and {:?}", slot.key, read.key);
            }
        }
    }

    #[test]
    fn every_key_has_a_field_of_its_own() {
        each_holds_its_own(&PATIENT);
        each_holds_its_own(&ENTRY);
        each_holds_its_own(&OBSERVATION);
        each_holds_its_own(&PLAN);
    }

    #[test]
    fn every_key_of_the_table_of_inputs_is_held_somewhere() {
        let held: Vec<Key> = PATIENT
            .iter()
            .map(|slot| slot.key)
            .chain(ENTRY.iter().map(|slot| slot.key))
            .chain(OBSERVATION.iter().map(|slot| slot.key))
            .chain(PLAN.iter().map(|slot| slot.key))
            // Not single optional numbers: read by hand.
            .chain([Key::TrialSupport, Key::ObservedMinute, Key::HalfInterval, Key::WideInterval])
            .collect();
        for input in &crate::quantity::input::INPUTS {
            assert!(held.contains(&input.key), "{:?}", input.key);
        }
        assert_eq!(held.len(), crate::quantity::input::INPUTS.len());
    }
}
