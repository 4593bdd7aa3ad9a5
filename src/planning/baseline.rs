//! The baseline: what the latest gas, the settings it was drawn under and the charted readings say of this patient.

pub mod gas_exchange;
pub mod mechanics;

use crate::case::fault::{Fault, Place};
use crate::case::profile::Profile;
use crate::case::record::{Occasion, Record};
use crate::case::settings::{InForce, Inflation, Settings};
use crate::physiology::breath::Phases;
use crate::physiology::breath::pressure_control::PressureBreath;
use crate::physiology::{acid_base, oxygen};
use crate::quantity::typed::Temperature;

use super::caution::Cautions;
use gas_exchange::{GasBreath, GasExchange};
use mechanics::Mechanics;

/// A gas of the record that the belief hears.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct HeardGas {
    /// Hours from the first heard gas.
    pub hours: f64,
    /// PaCO2, mmHg.
    pub paco2_mmhg: f64,
    /// Effective rate, 1/min.
    pub rate_per_min: f64,
    /// Effective tidal volume, mL.
    pub tidal_volume_ml: f64,
    /// Apparatus dead space, mL.
    pub apparatus_ml: f64,
    /// Minutes from the preceding change of ventilation to the gas; `None` when there was none, or when the entry that
    /// carries the change carries the gas too.
    pub minutes_since_change: Option<f64>,
}

/// The patient at the latest gas, and the settings in force now.
#[derive(Debug, Clone, PartialEq)]
pub struct Baseline {
    /// The record's label.
    pub label: String,
    /// The profile.
    pub profile: Profile,
    /// Predicted body weight, kg.
    pub predicted_weight_kg: Option<f64>,
    /// Airway dead space by rule, mL.
    pub airway_by_rule_ml: f64,
    /// The breath of the latest gas.
    pub gas: GasBreath,
    /// pH of the gas: measured, or from typed bicarbonate.
    pub ph: Option<f64>,
    /// Bicarbonate of the gas, mmol/L.
    pub bicarbonate_mmol_l: Option<f64>,
    /// Standard base excess of the gas, mmol/L.
    pub base_excess_mmol_l: Option<f64>,
    /// PaO2/FiO2, mmHg.
    pub pao2_fio2_mmhg: Option<f64>,
    /// Alveolar PO2, mmHg.
    pub alveolar_po2_mmhg: Option<f64>,
    /// Alveolar–arterial PO2 difference, mmHg.
    pub alveolar_arterial_po2_mmhg: Option<f64>,
    /// End-tidal PCO2 charted with the gas, mmHg.
    pub end_tidal_co2_mmhg: Option<f64>,
    /// Dead space and CO2 output by section 1 evidence.
    pub exchange: GasExchange,
    /// The lung and the ventilator.
    pub mechanics: Mechanics,
    /// The settings in force in the last entry.
    pub now: Settings,
    /// True when the latest gas was drawn under the settings in force now.
    pub now_is_measured: bool,
    /// The gases of the record under mandatory ventilation, oldest first; the last is the latest.
    pub gases: Vec<HeardGas>,
    /// What a reader must know.
    pub cautions: Cautions,
}

/// A gas with its occasion.
struct Drawn<'a> {
    occasion: &'a Occasion,
    index: usize,
    paco2_mmhg: f64,
    settings: &'a Settings,
}

impl Baseline {
    /// Reads a record.
    ///
    /// # Errors
    /// What keeps a forecast from being made (no gas, support, missing settings) or evidence that cannot be.
    pub fn read(record: &Record) -> Result<Self, Vec<Fault>> {
        let occasions = record.occasions();
        let (mechanics, mut cautions) = Mechanics::read(occasions)?;
        let (last, now) = settings_now(occasions)?;
        let drawn = latest_gas(occasions)?;
        let now_is_measured = unchanged_since(occasions, drawn.index);
        let set_rate = drawn.settings.rate_per_min;
        // Unchanged settings must give the measured PaCO2 back, so a gas drawn under the settings in force now is read with
        // the patient's own rate as known now; so is one before which no total rate was charted.
        let then = mechanics.delivered.get(drawn.index).copied().flatten();
        let rate_per_min = then
            .filter(|then| then.total_known && !now_is_measured)
            .map_or_else(|| mechanics.effective_rate(set_rate), |then| then.rate_per_min);
        let tidal_volume_ml = volume_of(&mechanics, drawn.settings, rate_per_min)
            .ok_or_else(|| vec![pressure_control_unread(drawn.occasion.number)])?;
        let measured = &drawn.occasion.entry.measured;
        let temperature = Temperature::from_celsius(measured.temperature_c.unwrap_or(37.0));
        let gas = GasBreath {
            number: drawn.occasion.number,
            paco2_mmhg: drawn.paco2_mmhg,
            temperature,
            rate_per_min,
            tidal_volume_ml,
            apparatus_ml: drawn.settings.apparatus_dead_space_ml,
        };
        let patient = record.patient();
        let exchange =
            GasExchange::read(&gas, patient, measured, &mut cautions).map_err(|fault| vec![fault])?;
        volume_of(&mechanics, now, mechanics.effective_rate(now.rate_per_min))
            .ok_or_else(|| vec![pressure_control_unread(last.number)])?;
        let blood = Blood::read(&drawn, &mut cautions);
        let barometric = patient.barometric_pressure_mmhg.unwrap_or_else(|| {
            patient.altitude_m.map_or(oxygen::SEA_LEVEL_MMHG, oxygen::barometric_at_altitude_mmhg)
        });
        let alveolar =
            drawn.settings.fio2.map(|fio2| oxygen::alveolar_po2_mmhg(fio2, barometric, drawn.paco2_mmhg));
        let pao2 = drawn.occasion.entry.gas.pao2_mmhg;
        Ok(Self {
            label: record.label().to_owned(),
            profile: record.profile().clone(),
            predicted_weight_kg: gas_exchange::predicted_weight_kg(patient),
            airway_by_rule_ml: gas_exchange::airway_by_rule_ml(patient),
            gas,
            ph: blood.ph,
            bicarbonate_mmol_l: blood.ph.map(|ph| acid_base::bicarbonate(ph, drawn.paco2_mmhg)),
            base_excess_mmol_l: blood.ph.map(|ph| acid_base::base_excess(ph, drawn.paco2_mmhg)),
            pao2_fio2_mmhg: pao2.zip(drawn.settings.fio2).map(|(pao2, fio2)| pao2 / fio2),
            alveolar_po2_mmhg: alveolar,
            alveolar_arterial_po2_mmhg: alveolar.zip(pao2).map(|(alveolar, arterial)| alveolar - arterial),
            end_tidal_co2_mmhg: measured.end_tidal_co2_mmhg,
            exchange,
            gases: heard_gases(occasions, &mechanics, &gas),
            mechanics,
            now: *now,
            now_is_measured,
            cautions,
        })
    }
}

impl Baseline {
    /// Evidence in a record that cannot be, for validation: a record that merely lacks what a forecast needs (a gas, a
    /// mandatory mode, a setting) has none.
    pub fn evidence_faults(record: &Record) -> Vec<Fault> {
        let occasions = record.occasions();
        if let Err(faults) = Mechanics::read(occasions) {
            return faults;
        }
        if settings_now(occasions).is_err() || latest_gas(occasions).is_err() {
            return Vec::new();
        }
        Self::read(record).err().unwrap_or_default()
    }
}

/// pH of a gas, measured or from typed bicarbonate, cross-checked.
struct Blood {
    ph: Option<f64>,
}

impl Blood {
    fn read(drawn: &Drawn<'_>, cautions: &mut Cautions) -> Self {
        let gas = &drawn.occasion.entry.gas;
        if let (Some(ph), Some(typed)) = (gas.ph, gas.bicarbonate_mmol_l) {
            let computed = acid_base::bicarbonate(ph, drawn.paco2_mmhg);
            if (computed - typed).abs() > 2.0 {
                cautions.say_gas("gas_disagrees", |gas| {
                    format!(
                        "The gas does not agree with itself: pH {ph:.2} and PaCO2 {} give a bicarbonate of {computed:.1} \
                         mmol/L, charted is {typed:.1}. Check the typed values against the report.",
                        gas(drawn.paco2_mmhg)
                    )
                });
            }
        }
        let ph = gas.ph.or_else(|| {
            gas.bicarbonate_mmol_l.map(|bicarbonate| acid_base::ph(bicarbonate, drawn.paco2_mmhg))
        });
        if ph.is_none() {
            cautions.say(
                "ph_unknown",
                "No pH with the latest gas: the pH that follows is unknown. Chart the pH of the gas.",
            );
        }
        Self { ph }
    }
}

fn settings_now(occasions: &[Occasion]) -> Result<(&Occasion, &Settings), Vec<Fault>> {
    let Some(last) = occasions.last() else {
        return Err(vec![Fault::new(
            [Place::top("", "entry")],
            "the record has no entry",
            "Chart settings and a gas, for example: rate = 22, tidal_volume = 380, peep = 10, paco2 = 63, ph = 7.24.",
        )]);
    };
    match &last.in_force {
        InForce::Mandatory(settings) => Ok((last, settings)),
        InForce::Support { .. } => Err(vec![Fault::new(
            [Place::in_entry(last.number, "settings", "control")],
            "under support every breath is the patient's own, so no forecast and no plan can be made",
            "Notes and weaning measures still work; for a plan chart the settings of volume or pressure control.",
        )]),
        InForce::Missing("control") => Err(vec![Fault::new(
            [
                Place::in_entry(last.number, "settings", "rate"),
                Place::in_entry(last.number, "settings", "tidal_volume"),
            ],
            "no ventilator settings are in force",
            "Give at least rate and tidal_volume (volume control), or rate, inspiratory_pressure and peep (pressure \
             control), for example: rate = 22, tidal_volume = 380, peep = 10.",
        )]),
        InForce::Missing(key) => Err(vec![Fault::new(
            [Place::in_entry(last.number, "settings", key)],
            format!("the settings in force lack {}", key.replace('_', " ")),
            format!(
                "Give {key} (and whatever else is set: control, rate, tidal_volume or inspiratory_pressure, peep)."
            ),
        )]),
    }
}

/// Gases with PaCO2, in the order they were drawn.
fn gases_by_time(occasions: &[Occasion]) -> Vec<(usize, &Occasion, f64)> {
    let mut gases: Vec<_> = occasions
        .iter()
        .enumerate()
        .filter_map(|(index, occasion)| occasion.entry.gas.paco2_mmhg.map(|paco2| (index, occasion, paco2)))
        .collect();
    gases.sort_by_key(|(_, occasion, _)| occasion.drawn_at());
    gases
}

fn latest_gas(occasions: &[Occasion]) -> Result<Drawn<'_>, Vec<Fault>> {
    let Some((index, occasion, paco2_mmhg)) = gases_by_time(occasions).pop() else {
        return Err(vec![Fault::new(
            [Place::top("gas", "paco2")],
            "the record holds no PaCO2, so there is nothing to forecast from",
            "Give the arterial gas, for example: paco2 = 63 and ph = 7.24.",
        )]);
    };
    match &occasion.in_force {
        InForce::Mandatory(settings) => Ok(Drawn { occasion, index, paco2_mmhg, settings }),
        InForce::Support { .. } => Err(vec![Fault::new(
            [Place::in_entry(occasion.number, "gas", "paco2")],
            "the latest gas was drawn under support, where every breath is the patient's own: no forecast can start there",
            "Draw a gas under the settings in force now.",
        )]),
        InForce::Missing(key) => Err(vec![Fault::new(
            [Place::in_entry(occasion.number, "settings", key)],
            format!("the settings under which the gas was drawn lack {}", key.replace('_', " ")),
            format!("Give {key} in that entry or an earlier one."),
        )]),
    }
}

fn unchanged_since(occasions: &[Occasion], index: usize) -> bool {
    let mut later = occasions.iter().skip(index).map(|occasion| &occasion.in_force);
    let Some(at_gas) = later.next() else { return false };
    later.all(|in_force| in_force == at_gas)
}

/// Effective rate, 1/min, and tidal volume, mL, of an occasion: in pressure control the volume read on it, where one was.
fn delivered(mechanics: &Mechanics, index: usize, settings: &Settings) -> Option<(f64, f64)> {
    let delivered = mechanics.delivered.get(index).copied().flatten()?;
    let rate = delivered.rate_per_min;
    let volume = delivered.pressure_volume_ml.or_else(|| volume_of(mechanics, settings, rate))?;
    Some((rate, volume))
}

/// Effective tidal volume, mL, of settings with the leak and the lung finally in force.
pub fn volume_of(mechanics: &Mechanics, settings: &Settings, rate_per_min: f64) -> Option<f64> {
    match settings.inflation {
        Inflation::Volume { tidal_volume_ml, .. } => Some(tidal_volume_ml * mechanics.volume_per_set),
        Inflation::Pressure { inspiratory_pressure_cmh2o } => {
            let phases = Phases::at_rate(settings.inspiratory_time_s(), 0.0, rate_per_min)?;
            let breath = PressureBreath {
                inspiratory_pressure_cmh2o,
                peep_cmh2o: settings.peep_cmh2o,
                scale: mechanics.pressure_scale?,
                phases,
            };
            Some(breath.tidal_volume_ml(&mechanics.lung()?))
        }
    }
}

fn pressure_control_unread(number: usize) -> Fault {
    Fault::new(
        [
            Place::in_entry(number, "measured", "exhaled_tidal_volume"),
            Place::in_entry(number, "measured", "compliance"),
            Place::in_entry(number, "measured", "resistance"),
        ],
        "in pressure control the tidal volume is not known: neither exhaled_tidal_volume nor both compliance and \
         resistance are charted",
        "Give exhaled_tidal_volume (mL), or compliance (mL/cmH2O) and resistance (cmH2O·s/L).",
    )
}

/// Whether two settings move the same ventilation: rate, volume and apparatus as the patient gets them.
fn same_ventilation(mechanics: &Mechanics, one: &InForce, other: &InForce) -> bool {
    let moved = |in_force: &InForce| {
        let settings = in_force.mandatory()?;
        let rate = mechanics.effective_rate(settings.rate_per_min);
        Some((rate, volume_of(mechanics, settings, rate)?, settings.apparatus_dead_space_ml))
    };
    one == other || moved(one).is_some_and(|one| Some(one) == moved(other))
}

/// The gases under mandatory ventilation, in the order they were drawn, ending with the latest.
fn heard_gases(occasions: &[Occasion], mechanics: &Mechanics, latest: &GasBreath) -> Vec<HeardGas> {
    let gases = gases_by_time(occasions);
    let carriers = carriers(occasions, mechanics);
    let first = gases.first().and_then(|(_, occasion, _)| occasion.drawn_at());
    let mut heard: Vec<HeardGas> = gases
        .iter()
        .filter_map(|&(index, occasion, paco2_mmhg)| {
            let settings = occasion.in_force.mandatory()?;
            let (rate_per_min, tidal_volume_ml) = delivered(mechanics, index, settings)?;
            let drawn_at = occasion.drawn_at();
            Some(HeardGas {
                hours: drawn_at.zip(first).map_or(0.0, |(at, first)| at.hours_since(first)),
                paco2_mmhg,
                rate_per_min,
                tidal_volume_ml,
                apparatus_ml: settings.apparatus_dead_space_ml,
                minutes_since_change: minutes_since_change(occasions, &carriers, index),
            })
        })
        .collect();
    if let Some(last) = heard.last_mut() {
        last.rate_per_min = latest.rate_per_min;
        last.tidal_volume_ml = latest.tidal_volume_ml;
    }
    heard
}

/// For each occasion, the one from which its ventilation has been in force without a break.
fn carriers(occasions: &[Occasion], mechanics: &Mechanics) -> Vec<usize> {
    let mut carriers: Vec<usize> = Vec::with_capacity(occasions.len());
    let mut before: Option<(usize, &InForce)> = None;
    for (index, occasion) in occasions.iter().enumerate() {
        let carrier = before
            .filter(|(_, in_force)| same_ventilation(mechanics, in_force, &occasion.in_force))
            .map_or(index, |(carrier, _)| carrier);
        carriers.push(carrier);
        before = Some((carrier, &occasion.in_force));
    }
    carriers
}

/// Minutes from the entry that first carries the ventilation of occasion `index` to its gas; `None` when that is the
/// first of all, or the gas's own entry, where the change counts as settled.
fn minutes_since_change(occasions: &[Occasion], carriers: &[usize], index: usize) -> Option<f64> {
    let carrier = *carriers.get(index)?;
    if carrier == 0 || carrier == index {
        return None;
    }
    let changed = occasions.get(carrier)?.at?;
    Some(occasions.get(index)?.drawn_at()?.minutes_since(changed).max(0.0))
}
