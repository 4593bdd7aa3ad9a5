//! What a reader must know beside the numbers of an answer, each with what to do.

use super::answer::Now;
use super::baseline::gas_exchange::{Co2Evidence, SeriesEvidence};
use super::baseline::mechanics::TrappingEvidence;
use super::caution::Cautions;
use super::course::Course;
use super::dialled::Dialled;
use super::forecast::{Forecaster, Held, HeldReadings};
use super::gentle::{Least, NoGentle};
use super::outcome::Outcome;
use super::solve::Summit;
use super::state::State;
use super::target::Target;
use crate::case::entry::{Control, FlowPattern, Measured};
use crate::case::record::{Record, Steadiness};
use crate::case::settings::Inflation;
use crate::quantity::show::PACO2_TOLD_UP_TO_MMHG;

/// Readings of dead space further apart than this, mmHg, are shown: engine contract, about the noise of a gas.
pub const READINGS_APART_MMHG: f64 = 3.0;
/// Arithmetic and expectation further apart than this, mmHg, are said.
const EXPECTATION_APART_MMHG: f64 = 3.0;
/// A measured pressure further than this from the model's, cmH2O, is said.
const PRESSURE_APART_CMH2O: f64 = 2.0;
/// Exhaled over set volume outside this is a leak, or a circuit that adds: common practice.
const VOLUME_PER_SET: [f64; 2] = [0.90, 1.10];
/// Minute volume further than this share from rate × volume is said: ISO 80601-2-12 allows a monitor 15 %, from memory.
const MINUTE_VOLUME_SHARE: f64 = 0.15;

/// What holds for the patient whatever is dialled.
pub fn of_patient(forecaster: &Forecaster<'_>, record: &Record, now: &Now, cautions: &mut Cautions) {
    of_gas(forecaster, cautions);
    of_dead_space(forecaster, cautions);
    of_breathing(forecaster, cautions);
    of_lung(forecaster, cautions);
    of_readings_at_bedside(record, &now.outcome.state, cautions);
    if record
        .occasions()
        .iter()
        .zip(record.occasions().iter().skip(1))
        .any(|(one, next)| one.number > next.number)
    {
        cautions.say(
            "entries_out_of_order",
            "Entries do not stand in the order of their times; they are read in the order of time. Check the clock, and \
             correct a wrong time with an amending entry.",
        );
    }
}

/// A bicarbonate outside this, mmol/L, is more often a slip than a patient: common practice.
const BICARBONATE_MMOL_L: [f64; 2] = [5.0, 50.0];
/// A PaCO2 below this, mmHg, would be plain in kPa, and is rare in mmHg: common practice.
const PERHAPS_KPA_BELOW_MMHG: f64 = 20.0;
/// A compliance above this, mL/cmH2O, is not a patient's: common practice.
const LARGEST_COMPLIANCE: f64 = 150.0;
/// Where the course is unknown, a gas sooner than this after a change, min, is taken as unsettled: common practice.
const UNSETTLED_WITHIN_MIN: f64 = 30.0;

/// A gas that may be a slip of the pen, or may not have settled.
fn of_gas(forecaster: &Forecaster<'_>, cautions: &mut Cautions) {
    let baseline = forecaster.baseline();
    let paco2 = baseline.gas.paco2_mmhg;
    if paco2 < PERHAPS_KPA_BELOW_MMHG {
        cautions.say(
            "paco2_perhaps_kilopascal",
            format!(
                "A PaCO2 of {paco2:.0} mmHg is rare. If the report is in kPa, write \"{paco2} kPa\"; every number here would \
                 change. Check before anything is dialled."
            ),
        );
    }
    let [low, high] = BICARBONATE_MMOL_L;
    if let Some(bicarbonate) = baseline.bicarbonate_mmol_l.filter(|value| !(low..=high).contains(value)) {
        cautions.say(
            "gas_implausible",
            format!(
                "pH and PaCO2 together give a bicarbonate of {bicarbonate:.0} mmol/L, which is hardly possible: check both \
                 against the report, and their units, before anything is dialled."
            ),
        );
    }
    of_unsettled_gas(forecaster, cautions);
}

/// The latest gas, drawn before the change of ventilation before it had settled.
fn of_unsettled_gas(forecaster: &Forecaster<'_>, cautions: &mut Cautions) {
    let baseline = forecaster.baseline();
    let Some(minutes) = baseline.gases.last().and_then(|gas| gas.minutes_since_change) else { return };
    let settled = forecaster.latest_gas_settles_after_min().unwrap_or(UNSETTLED_WITHIN_MIN);
    if minutes < settled {
        cautions.say(
            "gas_unsettled",
            format!(
                "The latest gas was drawn {minutes:.0} min after ventilation was changed, before it had settled (about \
                 {settled:.0} min): PaCO2 was still on its way, and a plan from it will overshoot. Repeat the gas first."
            ),
        );
    }
}

fn of_dead_space(forecaster: &Forecaster<'_>, cautions: &mut Cautions) {
    let baseline = forecaster.baseline();
    if baseline.predicted_weight_kg.is_none() {
        cautions.say(
            "predicted_weight_unknown",
            format!(
                "Predicted weight is unknown: airway dead space is assumed to be {:.0} mL, and figures per kg and the \
                 course are unknown. Give sex and height.",
                baseline.airway_by_rule_ml
            ),
        );
    }
    if forecaster.co2_output_ml_min().is_none() {
        cautions.say(
            "co2_output_unknown",
            "CO2 output, useful and wasted ventilation are unknown; the forecast PaCO2 does not hang on them. Give sex and \
             height, or end-tidal CO2, CO2 production or VD/VT.",
        );
    } else if baseline.exchange.co2_evidence == Co2Evidence::Estimated {
        cautions.say(
            "co2_output_estimated",
            "CO2 output is estimated, so useful and wasted ventilation are estimates too; the forecast PaCO2 does not hang \
             on it. End-tidal CO2, CO2 production or VD/VT would fix it.",
        );
    }
    if baseline.exchange.series_evidence == SeriesEvidence::Rule {
        cautions.say(
            "airway_dead_space_by_rule",
            format!(
                "Airway dead space ({:.0} mL) is assumed by a weak rule, which matters when the tidal volume changes. VD/VT \
                 together with end-tidal CO2 would measure it.",
                baseline.airway_by_rule_ml
            ),
        );
    }
    if baseline.now.apparatus_assumed {
        cautions.say(
            "apparatus_assumed",
            "No apparatus dead space was given and 0 mL is assumed. A heat-and-moisture exchanger or connector adds its \
             volume: give apparatus_dead_space.",
        );
    }
}

fn of_breathing(forecaster: &Forecaster<'_>, cautions: &mut Cautions) {
    let baseline = forecaster.baseline();
    let [low, high] = VOLUME_PER_SET;
    let per_set = match baseline.now.control() {
        Control::Pressure => baseline.mechanics.pressure_scale.unwrap_or(1.0),
        Control::Volume | Control::Support => baseline.mechanics.volume_per_set,
    };
    if !(low..=high).contains(&per_set) {
        let (expected, look) = match baseline.now.control() {
            Control::Pressure => {
                ("of what compliance and resistance would give", "Check those values and look for a leak")
            }
            Control::Volume | Control::Support => {
                ("of the set volume", "Look for a leak and check the flow sensor")
            }
        };
        cautions.say(
            "volume_differs",
            format!(
                "The exhaled tidal volume is {:.0} % {expected}, and that is held for new settings. {look}.",
                per_set * 100.0
            ),
        );
    }
    if let Some(own) = baseline.mechanics.trigger_rate_per_min {
        cautions.say(
            "patient_triggers",
            format!(
                "The patient triggers ({own:.0} breaths/min in all): a lower set rate will not slow breathing, and the \
                 patient's own drive will answer a change of PaCO2. Repeat the gas early."
            ),
        );
    }
    if baseline.now.timing_assumed {
        cautions.say(
            "timing_assumed",
            "No inspiratory timing was given and I:E 1:2 is assumed. Give inspiratory_time, flow or ratio.",
        );
    }
}

fn of_lung(forecaster: &Forecaster<'_>, cautions: &mut Cautions) {
    let baseline = forecaster.baseline();
    let mechanics = &baseline.mechanics;
    let Some(lung) = mechanics.lung() else {
        cautions.say(
            "pressures_unknown",
            "No plateau or compliance is charted: plateau, driving pressure, trapping and power are unknown, not fine. \
             Measure a plateau with an inspiratory hold.",
        );
        return;
    };
    if lung.compliance_ml_cmh2o > LARGEST_COMPLIANCE {
        cautions.say(
            "compliance_implausible",
            format!(
                "The readings give a respiratory-system compliance of {:.0} mL/cmH2O, which is hardly possible: check tidal \
                 volume, plateau and PEEP; the pressures shown rest on it.",
                lung.compliance_ml_cmh2o
            ),
        );
    }
    match mechanics.trapping_evidence() {
        TrappingEvidence::Assumed => cautions.say(
            "trapping_assumed",
            "No total PEEP was measured: trapping rests on an assumed expiratory resistance and is at least what is shown. \
             Measure total PEEP with an expiratory hold.",
        ),
        TrappingEvidence::Unknown => cautions.say(
            "trapping_unknown",
            "Trapped gas and auto-PEEP are unknown. Measure total PEEP with an expiratory hold, and peak with plateau.",
        ),
        TrappingEvidence::Measured | TrappingEvidence::Given => {}
    }
    if let Inflation::Volume { flow_pattern: FlowPattern::Decelerating, .. } = baseline.now.inflation {
        cautions.say(
            "falling_flow",
            "With a falling flow peak, mean airway pressure and power are unknown. Measure them under constant flow if \
             they matter.",
        );
    } else if lung.inspiratory_resistance.is_none() && baseline.now.control() == Control::Volume {
        cautions.say(
            "resistance_unknown",
            "No resistance is known: peak, mean airway pressure, power and trapping are unknown. Chart peak and plateau \
             under constant flow.",
        );
    }
}

/// Measured values far from the model's, which both stand in the record.
fn of_readings_at_bedside(record: &Record, now: &State, cautions: &mut Cautions) {
    let Some(last) = record.occasions().last() else { return };
    let measured: &Measured = &last.entry.measured;
    let peep = last.in_force.mandatory().and_then(|settings| settings.peep_cmh2o);
    let total =
        measured.total_peep_cmh2o.or(measured.auto_peep_cmh2o.zip(peep).map(|(auto, peep)| auto + peep));
    for (id, name, measured, model) in [
        ("plateau_differs", "plateau", measured.plateau_cmh2o, now.plateau_cmh2o),
        ("peak_differs", "peak", measured.peak_cmh2o, now.peak_cmh2o),
        ("total_peep_differs", "total PEEP", total, now.total_peep_cmh2o),
        (
            "mean_airway_pressure_differs",
            "mean airway pressure",
            measured.mean_airway_pressure_cmh2o,
            now.mean_airway_pressure_cmh2o,
        ),
    ] {
        if let (Some(measured), Some(model)) = (measured, model)
            && (measured - model).abs() > PRESSURE_APART_CMH2O
        {
            cautions.say(
                id,
                format!(
                    "Measured {name} is {measured:.0} cmH2O, but the other readings give {model:.0}. Repeat the holds and \
                     check the settings."
                ),
            );
        }
    }
    if let Some(minute) = measured.minute_ventilation_l_min
        && (minute / now.minute_ventilation_l_min - 1.0).abs() > MINUTE_VOLUME_SHARE
    {
        cautions.say(
            "minute_volume_differs",
            format!(
                "Measured minute volume is {minute:.1} L/min, but rate and tidal volume give {:.1}. Check total rate and \
                 exhaled tidal volume.",
                now.minute_ventilation_l_min
            ),
        );
    }
}

/// What holds for the settings under trial.
pub fn of_trial(forecaster: &Forecaster<'_>, dialled: &Dialled, cautions: &mut Cautions) {
    let factor = dialled.co2_factor;
    if (factor - 1.0).abs() > 0.0 {
        cautions.say(
            "co2_output_under_trial",
            format!(
                "This asks what if CO2 output were {:.0} % of the present one; dialling does not make it so.",
                factor * 100.0
            ),
        );
    }
    if dialled.lung != forecaster.baseline().mechanics.lung() {
        cautions.say(
            "lung_under_trial",
            "This asks what if compliance or resistance were different; dialling does not make it so.",
        );
    }
}

/// A reading of dead space, or of the patient, that the user chose: what was chosen stands beside the numbers.
pub fn of_choices(held: Held, steadiness: Steadiness, cautions: &mut Cautions) {
    let held = match held {
        Held::Split => None,
        Held::Volume => Some(("held_volume", "volume")),
        Held::Fraction => Some(("held_fraction", "fraction of the breath")),
    };
    if let Some((id, what)) = held {
        cautions.say(
            id,
            format!(
                "As asked, all dead space is held as a {what}; the usual reading holds the airway as a volume and the \
                 alveolar part as a fraction. Look at the other readings before acting."
            ),
        );
    }
    if steadiness == Steadiness::Settled {
        cautions.say(
            "taken_as_settled",
            "As stated, the patient is taken as settled, stable and untouched within the hour, which makes the intervals \
             narrow. If that no longer holds, use steadiness usual.",
        );
    }
}

/// What holds for the course.
pub fn of_course(forecaster: &Forecaster<'_>, course: Option<&Course>, cautions: &mut Cautions) {
    let Some(course) = course else {
        cautions.say(
            "course_unknown",
            "When PaCO2 will have settled is unknown without predicted weight and CO2 output: repeat the gas after 30 min, \
             and again after 60.",
        );
        return;
    };
    if course.settles_late() {
        cautions.say(
            "settles_late",
            format!(
                "PaCO2 will still be moving after an hour (settled at about {:.0} min): a gas at 60 min shows the way, not \
                 the end. Repeat it.",
                course.settled_minutes.ceil()
            ),
        );
    }
    if forecaster.baseline().exchange.co2_evidence == Co2Evidence::Estimated {
        cautions.say(
            "pace_estimated",
            "The pace of the change rests on an estimated CO2 output; where it ends does not.",
        );
    }
}

/// Arithmetic and expectation apart.
pub fn of_expectation(outcome: &Outcome, cautions: &mut Cautions) {
    let arithmetic = outcome.state.paco2_mmhg;
    if let Some(expected) = outcome.interval.paco2_expected_mmhg
        && (expected - arithmetic).abs() > EXPECTATION_APART_MMHG
        && expected.min(arithmetic) <= PACO2_TOLD_UP_TO_MMHG
    {
        // With one gas too: where little room is left beside the dead space, its doubt moves the middle.
        cautions.say_gas("earlier_gases_differ", |gas| {
            format!(
                "Arithmetic from the latest gas gives {}, but with every gas and the doubt about dead space heard the middle \
                 is {}. Repeat the gas before a large change.",
                gas(arithmetic),
                gas(expected)
            )
        });
    }
}

/// Readings of dead space apart.
pub fn of_readings(what: &str, readings: &HeldReadings, cautions: &mut Cautions) {
    let (Some(split), Some(fraction)) = (readings.split, readings.fraction) else { return };
    let apart = readings.volume.is_none() || readings.spread_mmhg() > READINGS_APART_MMHG;
    if apart {
        let (id, name) = match what {
            "rate" => ("dead_space_readings_rate", "By rate"),
            "volume" => ("dead_space_readings_volume", "By volume"),
            "gentle" => ("dead_space_readings_gentle", "By the gentlest pair"),
            _ => ("dead_space_readings", "With these settings"),
        };
        cautions.say_gas(id, |gas| {
            let volume = readings.volume.map_or("no useful breath".to_owned(), gas);
            format!(
                "{name} PaCO2 hangs on how dead space behaves: {} if the airway stays a volume and the alveolar part a \
                 fraction, {volume} if all of it stays a volume, {} if all stays a fraction. Change in smaller steps and \
                 repeat the gas.",
                gas(split),
                gas(fraction)
            )
        });
    }
}

/// Past the summit, or a target beyond it.
pub fn of_summit(summit: Option<Summit>, target: &Target, now: &Now, cautions: &mut Cautions) {
    let Some(summit) = summit else { return };
    if target.paco2_mmhg < summit.paco2_mmhg {
        cautions.say_gas("beyond_summit", |gas| {
            format!(
                "No rate reaches the goal: alveolar ventilation is highest at a rate of {:.0}/min, with a PaCO2 of {}. \
                 Raise inspiratory pressure, lengthen expiration or lower resistance.",
                summit.rate_per_min,
                gas(summit.paco2_mmhg)
            )
        });
    } else if now.outcome.state.rate_per_min > summit.rate_per_min {
        cautions.say(
            "past_summit",
            format!(
                "The rate is past its summit ({:.0}/min): a faster rate clears less CO2, a slower one more.",
                summit.rate_per_min
            ),
        );
    }
}

/// Why there is no gentle plan.
pub fn of_no_gentle(why: NoGentle, least: Least, cautions: &mut Cautions) {
    match (why, least) {
        (NoGentle::LoadUnknown, Least::Load) => cautions.say(
            "no_gentle_plan",
            "No gentlest pair: the load on the lung is unknown. Measure a plateau with an inspiratory hold.",
        ),
        (NoGentle::LoadUnknown, Least::Power) => cautions.say(
            "no_gentle_plan",
            "No gentlest pair: mechanical power is unknown. Measure peak and plateau under constant flow.",
        ),
        (NoGentle::NoneAllowed, _) => cautions.say(
            "no_gentle_plan",
            "No gentlest pair: every settable pair goes further beyond a limit than now. Review the limits, the dead space \
             of the apparatus and what raises CO2 output.",
        ),
    }
}
