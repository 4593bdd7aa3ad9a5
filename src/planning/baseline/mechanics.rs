//! What the charted readings say of the lung: compliance, resistances, leak and triggering, each from the latest entry
//! that yields it.

mod pressure_control;

use serde::Serialize;

use crate::case::entry::{FlowPattern, Measured};
use crate::case::fault::{Fault, Place};
use crate::case::record::Occasion;
use crate::case::settings::{Inflation, Settings};
use crate::physiology::breath::bedside::{self, Unread};
use crate::physiology::breath::pressure_control::PressureBreath;
use crate::physiology::breath::volume_control::VolumeBreath;
use crate::physiology::breath::{Lung, Phases};
use crate::planning::caution::Cautions;

/// Where the expiratory resistance, and so trapping, comes from.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum TrappingEvidence {
    /// From a measured auto-PEEP or total PEEP.
    Measured,
    /// Expiratory resistance given outright.
    Given,
    /// Held equal to the inspiratory one: reads trapping too low in obstruction.
    Assumed,
    /// Not known.
    Unknown,
}

/// How good a compliance is; a better one is not replaced by a worse one.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd)]
enum Worth {
    /// Tidal volume over inspiratory pressure, nothing else known.
    Crude,
    /// From the volume a pressure moved, resistances known.
    Volume,
    /// From a plateau, or given outright.
    Plateau,
}

/// The lung and the ventilator as the bedside shows them.
#[derive(Debug, Clone, PartialEq)]
pub struct Mechanics {
    compliance: Option<(f64, Worth)>,
    inspiratory_resistance: Option<f64>,
    expiratory_resistance: Option<(f64, TrappingEvidence)>,
    trapping_unread: bool,
    /// Tidal volume over set volume in volume control, from the latest entry that yields it; 1 when none does.
    pub volume_per_set: f64,
    /// Measured over modelled volume in pressure control; `None` when neither can be had.
    pub pressure_scale: Option<f64>,
    /// The total rate where the patient triggers, 1/min.
    pub trigger_rate_per_min: Option<f64>,
    /// What each occasion delivered; `None` without complete settings.
    pub delivered: Vec<Option<Delivered>>,
    measured_pressure_breath: Option<(PressureBreath, f64)>,
    plateau_reading: Option<PlateauReading>,
}

/// What an occasion delivered.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Delivered {
    /// Effective rate, 1/min, by the total charted with it or before it.
    pub rate_per_min: f64,
    /// Whether a total rate had been charted by then.
    pub total_known: bool,
    /// Volume read on this occasion in pressure control, mL.
    pub pressure_volume_ml: Option<f64>,
}

/// A plateau read without total PEEP: its compliance hangs on the expiratory resistance finally in force.
#[derive(Debug, Clone, Copy, PartialEq)]
struct PlateauReading {
    number: usize,
    volume_ml: f64,
    above_cmh2o: f64,
    peep_cmh2o: f64,
    expiratory_s: f64,
}

impl Mechanics {
    /// A patient under volume control of whom only the delivered volume and the own rate are known.
    pub const fn of_volume_control(volume_per_set: f64, trigger_rate_per_min: Option<f64>) -> Self {
        Self {
            compliance: None,
            inspiratory_resistance: None,
            expiratory_resistance: None,
            trapping_unread: false,
            volume_per_set,
            pressure_scale: None,
            trigger_rate_per_min,
            delivered: Vec::new(),
            measured_pressure_breath: None,
            plateau_reading: None,
        }
    }

    /// Reads the occasions in order.
    ///
    /// # Errors
    /// Readings that contradict each other, each with its place.
    pub fn read(occasions: &[Occasion]) -> Result<(Self, Cautions), Vec<Fault>> {
        let mut reading = Self::of_volume_control(1.0, None);
        let mut any_total = false;
        let (mut cautions, mut faults) = (Cautions::default(), Vec::new());
        for occasion in occasions {
            let Some(settings) = occasion.in_force.mandatory() else {
                reading.delivered.push(None);
                continue;
            };
            let measured = &occasion.entry.measured;
            reading.read_rate(settings, measured);
            any_total |= measured.total_rate_per_min.is_some();
            let pressure_volume_ml = match (settings.inflation, measured.exhaled_tidal_volume_ml) {
                (Inflation::Pressure { .. }, Some(exhaled)) => {
                    Self::corrected_volume(occasion.number, exhaled, settings, measured).ok()
                }
                _ => None,
            };
            let rate_per_min = reading.effective_rate(settings.rate_per_min);
            reading.delivered.push(Some(Delivered {
                rate_per_min,
                total_known: any_total,
                pressure_volume_ml,
            }));
            if let Err(fault) = reading.read_lung(occasion.number, settings, measured, &mut cautions) {
                faults.push(fault);
            }
        }
        if let Err(fault) = reading.read_plateau_again(&mut cautions) {
            faults.push(fault);
        }
        if faults.is_empty() {
            reading.scale_pressure_control();
            Ok((reading, cautions))
        } else {
            Err(faults)
        }
    }

    /// The rate the patient gets when `set` is dialled: never below the patient's own.
    pub fn effective_rate(&self, set_per_min: f64) -> f64 {
        self.trigger_rate_per_min.map_or(set_per_min, |own| own.max(set_per_min))
    }

    /// The lung, once a compliance is known.
    pub fn lung(&self) -> Option<Lung> {
        self.compliance.map(|(compliance_ml_cmh2o, _)| Lung {
            compliance_ml_cmh2o,
            inspiratory_resistance: self.inspiratory_resistance,
            expiratory_resistance: self.expiratory().map(|(value, _)| value),
        })
    }

    /// Inspiratory resistance, cmH2O·s/L, also where no compliance is known.
    pub const fn inspiratory_resistance(&self) -> Option<f64> {
        self.inspiratory_resistance
    }

    /// Expiratory resistance, cmH2O·s/L, with its evidence.
    pub fn expiratory(&self) -> Option<(f64, TrappingEvidence)> {
        if self.trapping_unread {
            return None;
        }
        self.expiratory_resistance
            .or_else(|| self.inspiratory_resistance.map(|value| (value, TrappingEvidence::Assumed)))
    }

    /// Expiratory resistance to report, cmH2O·s/L: an assumption is made only once a compliance is known.
    pub fn expiratory_report(&self) -> Option<f64> {
        match self.compliance {
            Some(_) => self.expiratory().map(|(value, _)| value),
            None => self.expiratory_resistance.map(|(value, _)| value),
        }
    }

    /// Expiratory resistance, cmH2O·s/L, if the inspiratory one were `what_if`: it follows only where it is assumed.
    pub fn expiratory_if_resistance(&self, what_if: Option<f64>) -> Option<f64> {
        // Where no resistance was known at all, one under trial makes trapping known too.
        let crude = matches!(self.compliance, Some((_, Worth::Crude)));
        match self.expiratory_resistance {
            _ if self.trapping_unread && !(crude && what_if.is_some()) => None,
            Some((value, _)) => Some(value),
            None => what_if.or(self.inspiratory_resistance),
        }
    }

    /// Whether an expiratory resistance was given or measured, rather than assumed.
    pub const fn expiratory_known(&self) -> bool {
        self.expiratory_resistance.is_some()
    }

    /// Where trapping comes from.
    pub fn trapping_evidence(&self) -> TrappingEvidence {
        match (self.compliance, self.expiratory()) {
            (Some(_), Some((_, evidence))) => evidence,
            _ => TrappingEvidence::Unknown,
        }
    }

    /// A compliance read from a plateau without total PEEP, with the expiratory resistance finally in force.
    fn read_plateau_again(&mut self, cautions: &mut Cautions) -> Result<(), Fault> {
        let Some(reading) = self.plateau_reading else { return Ok(()) };
        let compliance = self.compliance_from_plateau(&reading, cautions)?;
        self.compliance = Some((compliance, Worth::Plateau));
        Ok(())
    }

    fn read_rate(&mut self, settings: &Settings, measured: &Measured) {
        if let Some(total) = measured.total_rate_per_min {
            self.trigger_rate_per_min = (total > settings.rate_per_min).then_some(total);
        }
    }

    /// Exhaled volume, less what the circuit takes: `VT = that − Cc·(plateau − PEEP)`.
    fn corrected_volume(
        number: usize,
        volume_ml: f64,
        settings: &Settings,
        measured: &Measured,
    ) -> Result<f64, Fault> {
        let circuit = measured
            .circuit_compliance_ml_cmh2o
            .zip(measured.plateau_cmh2o)
            .zip(settings.peep_cmh2o)
            .map_or(0.0, |((compliance, plateau), peep)| compliance * (plateau - peep));
        let left = volume_ml - circuit;
        if left > 0.0 {
            return Ok(left);
        }
        Err(Fault::new(
            [
                Place::in_entry(number, "measured", "circuit_compliance"),
                Place::in_entry(number, "measured", "plateau"),
            ],
            format!("the circuit would take {circuit:.0} mL of a breath of {volume_ml:.0} mL"),
            "Check circuit_compliance (mL/cmH2O, commonly 1 to 3) and plateau; leave circuit_compliance out if the \
             ventilator compensates.",
        ))
    }

    fn read_lung(
        &mut self,
        number: usize,
        settings: &Settings,
        measured: &Measured,
        cautions: &mut Cautions,
    ) -> Result<(), Fault> {
        let rate = self.effective_rate(settings.rate_per_min);
        let Some(phases) = Phases::at_rate(settings.inspiratory_time_s(), settings.pause_s(), rate) else {
            return Err(Fault::new(
                [Place::in_entry(number, "settings", "rate")],
                format!(
                    "an inspiratory time of {:.2} s at a total rate of {rate:.0}/min leaves no time to breathe out",
                    settings.inspiratory_time_s()
                ),
                "Check rate, total_rate and the inspiratory timing.",
            ));
        };
        if let Some(given) = measured.resistance_cmh2o_s_l {
            self.inspiratory_resistance = Some(given);
        }
        if let Some(given) = measured.expiratory_resistance_cmh2o_s_l {
            self.expiratory_resistance = Some((given, TrappingEvidence::Given));
            self.trapping_unread = false;
        }
        if let Some(given) = measured.compliance_ml_cmh2o {
            self.compliance = Some((given, Worth::Plateau));
            self.plateau_reading = None;
            self.trapping_unread = false;
        }
        let at = Bedside { number, settings, measured, phases };
        match settings.inflation {
            Inflation::Volume { tidal_volume_ml, flow_pattern, .. } => {
                self.read_volume_control(&at, tidal_volume_ml, flow_pattern, cautions)?;
            }
            Inflation::Pressure { inspiratory_pressure_cmh2o } => {
                self.read_pressure_control(&at, inspiratory_pressure_cmh2o, cautions)?;
            }
        }
        self.read_auto_peep(&at);
        Ok(())
    }

    fn read_volume_control(
        &mut self,
        at: &Bedside<'_>,
        set_ml: f64,
        flow_pattern: FlowPattern,
        cautions: &mut Cautions,
    ) -> Result<(), Fault> {
        let Bedside { number, settings, measured, phases } = *at;
        let corrects = measured.circuit_compliance_ml_cmh2o.is_some() && measured.plateau_cmh2o.is_some();
        if measured.exhaled_tidal_volume_ml.is_some() || corrects {
            let volume = measured.exhaled_tidal_volume_ml.unwrap_or(set_ml);
            self.volume_per_set = Self::corrected_volume(number, volume, settings, measured)? / set_ml;
        }
        let volume_ml = set_ml * self.volume_per_set;
        let breath = VolumeBreath {
            tidal_volume_ml: volume_ml,
            set_tidal_volume_ml: set_ml,
            peep_cmh2o: settings.peep_cmh2o,
            constant_flow: flow_pattern == FlowPattern::Constant,
            phases,
        };
        if let (Some(peak), Some(plateau), None, true) =
            (measured.peak_cmh2o, measured.plateau_cmh2o, measured.resistance_cmh2o_s_l, breath.constant_flow)
        {
            if peak > plateau {
                self.inspiratory_resistance =
                    Some(bedside::inspiratory_resistance(peak, plateau, breath.flow_l_s()));
            } else {
                cautions.say(
                    "peak_equals_plateau",
                    format!(
                        "Peak and plateau are both {plateau:.0} cmH2O under constant flow, so no resistance can be \
                         read: repeat the inspiratory hold."
                    ),
                );
            }
        }
        if measured.compliance_ml_cmh2o.is_some() {
            return Ok(());
        }
        let Some(above) = at.plateau_above_peep() else { return Ok(()) };
        let compliance = if let Some(auto) = at.auto_peep() {
            self.plateau_reading = None;
            self.trapping_unread = false;
            bedside::compliance(volume_ml, at.driving(above, auto)?)
        } else {
            let reading = at.plateau_reading(volume_ml, above);
            self.plateau_reading = Some(reading);
            self.compliance_from_plateau(&reading, cautions)?
        };
        self.compliance = Some((compliance, Worth::Plateau));
        Ok(())
    }

    /// Compliance where no total PEEP was measured: with trapping when a resistance is known, else without.
    fn compliance_from_plateau(
        &mut self,
        reading: &PlateauReading,
        cautions: &mut Cautions,
    ) -> Result<f64, Fault> {
        let PlateauReading { number, volume_ml, above_cmh2o: above, peep_cmh2o, expiratory_s } = *reading;
        self.trapping_unread = false;
        let apparent = volume_ml / above;
        let Some((resistance, evidence)) = self.expiratory() else { return Ok(apparent) };
        match bedside::compliance_with_trapping(volume_ml, above, expiratory_s, resistance) {
            Ok(compliance) => Ok(compliance),
            Err(Unread::Emptying(share)) if share >= 1.0 && evidence == TrappingEvidence::Given => {
                Err(Fault::new(
                    [
                        Place::in_entry(number, "measured", "plateau"),
                        Place::in_entry(number, "measured", "expiratory_resistance"),
                    ],
                    format!(
                        "a plateau of {:.0} cmH2O with {volume_ml:.0} mL cannot be: at an expiratory resistance of \
                         {resistance:.0} cmH2O·s/L the lung cannot empty so much in {:.1} s",
                        above + peep_cmh2o,
                        expiratory_s
                    ),
                    "Check plateau, expiratory_resistance and timing; an expiratory hold (total_peep) settles it.",
                ))
            }
            Err(Unread::Emptying(_) | Unread::Compliance(_)) => {
                self.trapping_unread = true;
                cautions.say(
                    "trapping_unknown",
                    "Plateau and resistance together do not tell compliance from trapping: trapped gas is unknown and \
                     compliance may read too high. Measure total PEEP with an expiratory hold.",
                );
                Ok(apparent)
            }
        }
    }

    /// Expiratory resistance from a measured auto-PEEP; an expiratory resistance given in the same entry stays.
    fn read_auto_peep(&mut self, at: &Bedside<'_>) {
        let Bedside { settings, measured, phases, .. } = *at;
        let (Some(auto), None) = (at.auto_peep(), measured.expiratory_resistance_cmh2o_s_l) else { return };
        let Some((compliance, _)) = self.compliance else { return };
        let driving = match settings.inflation {
            Inflation::Volume { tidal_volume_ml, .. } => {
                Some(tidal_volume_ml * self.volume_per_set / compliance)
            }
            // Without a volume of this entry the holds alone give the driving pressure.
            Inflation::Pressure { .. } if measured.exhaled_tidal_volume_ml.is_none() => {
                at.plateau_above_peep().map(|above| above - auto).filter(|driving| *driving > 0.0)
            }
            Inflation::Pressure { .. } => {
                self.measured_pressure_breath.map(|(_, volume_ml)| volume_ml / compliance)
            }
        };
        let Some(driving) = driving else { return };
        let litres = compliance / 1000.0;
        let had = self.expiratory_resistance;
        let resistance = if auto > 0.0 {
            bedside::time_constant_from_auto_peep(auto, driving, phases.expiratory_s) / litres
        } else if matches!(had, Some((_, TrappingEvidence::Given))) {
            return; // a hold that shows none does not cut a resistance that was given
        } else {
            let cap = bedside::longest_time_constant(driving, phases.expiratory_s) / litres;
            self.inspiratory_resistance.map_or(cap, |inspiratory| inspiratory.min(cap))
        };
        self.expiratory_resistance = Some((resistance, TrappingEvidence::Measured));
        self.trapping_unread = false;
    }

    /// Measured over modelled volume, with the compliance and resistances finally in force.
    fn scale_pressure_control(&mut self) {
        let Some(lung) = self.lung() else { return };
        self.pressure_scale = match self.measured_pressure_breath {
            Some((breath, volume_ml)) => Some(volume_ml / breath.tidal_volume_ml(&lung)),
            None => lung.inspiratory_resistance.map(|_| 1.0),
        };
    }
}

/// One occasion at the bedside.
#[derive(Clone, Copy)]
struct Bedside<'a> {
    number: usize,
    settings: &'a Settings,
    measured: &'a Measured,
    phases: Phases,
}

impl Bedside<'_> {
    fn plateau_above_peep(&self) -> Option<f64> {
        self.measured.plateau_cmh2o.zip(self.settings.peep_cmh2o).map(|(plateau, peep)| plateau - peep)
    }

    fn plateau_reading(&self, volume_ml: f64, above_cmh2o: f64) -> PlateauReading {
        PlateauReading {
            number: self.number,
            volume_ml,
            above_cmh2o,
            peep_cmh2o: self.settings.peep_cmh2o.unwrap_or(0.0),
            expiratory_s: self.phases.expiratory_s,
        }
    }

    /// Measured auto-PEEP, cmH2O: given, or total PEEP less PEEP (a total PEEP just below PEEP is a reading of none).
    fn auto_peep(&self) -> Option<f64> {
        self.measured.auto_peep_cmh2o.or_else(|| {
            self.measured
                .total_peep_cmh2o
                .zip(self.settings.peep_cmh2o)
                .map(|(total, peep)| (total - peep).max(0.0))
        })
    }

    fn driving(&self, above: f64, auto: f64) -> Result<f64, Fault> {
        if above > auto {
            return Ok(above - auto);
        }
        Err(Fault::new(
            [
                Place::in_entry(self.number, "measured", "plateau"),
                Place::in_entry(self.number, "measured", "total_peep"),
            ],
            format!(
                "the plateau lies {above:.1} cmH2O above PEEP, not above an auto-PEEP of {auto:.1} cmH2O"
            ),
            "Check plateau and total_peep (or auto_peep): the plateau must be the higher.",
        ))
    }
}
