//! A trial: what a clinician would dial, and what if the patient were different.

use crate::case::entry::Control;
use crate::case::fault::{Fault, Place};
use crate::case::settings::{Inflation, Settings, Timing};
use crate::physiology::breath::pressure_control::filling;
use crate::physiology::breath::{Lung, Phases};
use crate::quantity::show::number;

use super::dialled::Dialled;
use super::forecast::Forecaster;

/// CO2 output under trial.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Co2Trial {
    /// An output, mL/min STPD.
    Output(f64),
    /// Times the present output.
    Times(f64),
}

/// What a trial changes; `None` keeps what is in force now. Values are checked at the door.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub struct Trial {
    /// Volume or pressure control.
    pub control: Option<Control>,
    /// Set rate, 1/min.
    pub rate_per_min: Option<f64>,
    /// Set tidal volume, mL.
    pub tidal_volume_ml: Option<f64>,
    /// Inspiratory pressure above PEEP, cmH2O.
    pub inspiratory_pressure_cmh2o: Option<f64>,
    /// PEEP, cmH2O.
    pub peep_cmh2o: Option<f64>,
    /// Inspired oxygen, fraction.
    pub fio2: Option<f64>,
    /// What times inspiration.
    pub timing: Option<Timing>,
    /// End-inspiratory pause, s.
    pub pause_s: Option<f64>,
    /// Apparatus dead space, mL.
    pub apparatus_dead_space_ml: Option<f64>,
    /// CO2 output.
    pub co2: Option<Co2Trial>,
    /// What if compliance were this, mL/cmH2O.
    pub compliance_ml_cmh2o: Option<f64>,
    /// What if resistance were this, cmH2O·s/L; moves the expiratory one only where that was assumed.
    pub resistance_cmh2o_s_l: Option<f64>,
}

const fn flag(key: &'static str) -> Place {
    Place::top("trial", key)
}

impl Trial {
    /// Applies the trial to the settings in force now.
    ///
    /// # Errors
    /// Flags that contradict each other or the control, a switch of control that lacks what it needs, or settings that
    /// leave no time to breathe out.
    pub fn apply(&self, forecaster: &Forecaster<'_>) -> Result<Dialled, Fault> {
        let now = forecaster.now();
        let mut dialled = Dialled { co2_factor: self.co2_factor(forecaster)?, ..now };
        self.change_lung(&mut dialled, forecaster);
        let settings = &mut dialled.settings;
        settings.rate_per_min = self.rate_per_min.unwrap_or(settings.rate_per_min);
        settings.peep_cmh2o = self.peep_cmh2o.or(settings.peep_cmh2o);
        settings.fio2 = self.fio2.or(settings.fio2);
        if let Some(apparatus) = self.apparatus_dead_space_ml {
            settings.apparatus_dead_space_ml = apparatus;
            settings.apparatus_assumed = false;
        }
        if let Some(timing) = self.timing {
            settings.timing = timing;
            settings.timing_assumed = false;
        }
        if let (Some(new), Inflation::Volume { pause_s, .. }) = (self.pause_s, &mut settings.inflation) {
            *pause_s = new;
        }
        let control = self.control.unwrap_or_else(|| settings.control());
        let settings = match (settings.control(), control) {
            (_, Control::Support) => {
                return Err(Fault::new(
                    [flag("control")],
                    "under support every breath is the patient's own, so no forecast can be made",
                    "Try control volume or pressure.",
                ));
            }
            (Control::Volume, Control::Pressure) => self.in_pressure_control(&dialled, forecaster)?,
            (Control::Pressure, Control::Volume) => self.in_volume_control(dialled.settings, forecaster)?,
            _ => self.same_control(dialled.settings)?,
        };
        dialled.settings = settings;
        let rate = forecaster.effective_rate(settings.rate_per_min);
        if Phases::at_rate(settings.inspiratory_time_s(), settings.pause_s(), rate).is_none() {
            return Err(Fault::new(
                [flag("rate")],
                format!(
                    "at a total rate of {rate:.0}/min an inspiratory time of {} s leaves no time to breathe out",
                    number(settings.inspiratory_time_s(), 2)
                ),
                "Lower the rate or shorten inspiration, for example with --inspiratory-time 0.8.",
            ));
        }
        Ok(dialled)
    }

    fn co2_factor(&self, forecaster: &Forecaster<'_>) -> Result<f64, Fault> {
        match self.co2 {
            None => Ok(1.0),
            Some(Co2Trial::Times(factor)) => Ok(factor),
            Some(Co2Trial::Output(output)) => {
                forecaster.co2_output_ml_min().map(|present| output / present).ok_or_else(|| {
                    Fault::new(
                        [flag("co2_production")],
                        format!("the present CO2 output is not known, so {output:.0} mL/min has nothing to be set against"),
                        "Give a factor instead, for example --co2-production x0.9.",
                    )
                })
            }
        }
    }

    fn change_lung(&self, dialled: &mut Dialled, forecaster: &Forecaster<'_>) {
        if self.compliance_ml_cmh2o.is_none() && self.resistance_cmh2o_s_l.is_none() {
            return;
        }
        let mechanics = &forecaster.baseline().mechanics;
        let compliance = self.compliance_ml_cmh2o.or(dialled.lung.map(|lung| lung.compliance_ml_cmh2o));
        let Some(compliance_ml_cmh2o) = compliance else { return };
        dialled.lung = Some(Lung {
            compliance_ml_cmh2o,
            inspiratory_resistance: self.resistance_cmh2o_s_l.or(mechanics.inspiratory_resistance()),
            expiratory_resistance: mechanics.expiratory_if_resistance(self.resistance_cmh2o_s_l),
        });
        dialled.trapping_assumed = dialled.lung.is_some_and(|lung| lung.expiratory_resistance.is_some())
            && !mechanics.expiratory_known();
        if dialled.pressure_scale.is_none()
            && dialled.lung.is_some_and(|lung| lung.inspiratory_resistance.is_some())
        {
            dialled.pressure_scale = Some(1.0);
        }
    }

    fn same_control(&self, mut settings: Settings) -> Result<Settings, Fault> {
        match &mut settings.inflation {
            Inflation::Volume { tidal_volume_ml, .. } => {
                if self.inspiratory_pressure_cmh2o.is_some() {
                    return Err(wrong_control("inspiratory_pressure", "volume", "--tidal-volume"));
                }
                *tidal_volume_ml = self.tidal_volume_ml.unwrap_or(*tidal_volume_ml);
            }
            Inflation::Pressure { inspiratory_pressure_cmh2o } => {
                if self.tidal_volume_ml.is_some() {
                    return Err(wrong_control("tidal_volume", "pressure", "--inspiratory-pressure"));
                }
                only_volume_control(self.timing, self.pause_s)?;
                *inspiratory_pressure_cmh2o =
                    self.inspiratory_pressure_cmh2o.unwrap_or(*inspiratory_pressure_cmh2o);
            }
        }
        Ok(settings)
    }

    /// Volume to pressure control: the pressure given, or the one that moves the same volume at the trial's rate and
    /// timing. A held flow becomes its inspiratory time; pause and flow pattern end.
    fn in_pressure_control(&self, dialled: &Dialled, forecaster: &Forecaster<'_>) -> Result<Settings, Fault> {
        let mut settings = dialled.settings;
        only_volume_control(self.timing, self.pause_s)?;
        if self.tidal_volume_ml.is_some() {
            return Err(wrong_control("tidal_volume", "pressure", "--inspiratory-pressure"));
        }
        if let Timing::Flow(_) = settings.timing {
            settings.timing = Timing::InspiratoryTime(settings.inspiratory_time_s());
        }
        let rate = forecaster.effective_rate(settings.rate_per_min);
        let found = dialled.lung.zip(dialled.pressure_scale).and_then(|(lung, scale)| {
            let phases = Phases::at_rate(settings.inspiratory_time_s(), 0.0, rate)?;
            let volume = forecaster.volume(dialled)?;
            Some(volume / (scale * lung.compliance_ml_cmh2o * filling(&lung, &phases).tidal))
        });
        let lacking = || {
            Fault::new(
                [flag("control")],
                "a switch to pressure control needs the lung's compliance and resistance, and they are not known",
                "Chart plateau and peak under constant flow, or give --compliance and --resistance.",
            )
        };
        // Without compliance and resistance the volume of a given pressure is not known either.
        let matched = found.ok_or_else(lacking)?;
        settings.inflation = Inflation::Pressure {
            inspiratory_pressure_cmh2o: self.inspiratory_pressure_cmh2o.unwrap_or(matched),
        };
        Ok(settings)
    }

    /// Pressure to volume control: the volume given, or the one the patient gets now.
    fn in_volume_control(
        &self,
        mut settings: Settings,
        forecaster: &Forecaster<'_>,
    ) -> Result<Settings, Fault> {
        if self.inspiratory_pressure_cmh2o.is_some() {
            return Err(wrong_control("inspiratory_pressure", "volume", "--tidal-volume"));
        }
        let per_set = forecaster.baseline().mechanics.volume_per_set;
        let kept = forecaster.volume(&forecaster.now()).map(|moved| moved / per_set);
        let volume = self.tidal_volume_ml.or(kept);
        let Some(tidal_volume_ml) = volume else {
            return Err(Fault::new(
                [flag("control")],
                "the tidal volume to keep is not known",
                "Give it, for example --tidal-volume 400.",
            ));
        };
        settings.inflation = Inflation::Volume {
            tidal_volume_ml,
            pause_s: self.pause_s.unwrap_or(0.0),
            flow_pattern: crate::case::entry::FlowPattern::Constant,
        };
        Ok(settings)
    }
}

fn wrong_control(key: &'static str, control: &str, instead: &str) -> Fault {
    Fault::new(
        [flag(key)],
        format!("{} is not dialled in {control} control", key.replace('_', " ")),
        format!("Give {instead}, or switch with --control."),
    )
}

fn only_volume_control(timing: Option<Timing>, pause_s: Option<f64>) -> Result<(), Fault> {
    if let Some(Timing::Flow(_)) = timing {
        return Err(wrong_control("flow", "pressure", "--inspiratory-time or --ratio"));
    }
    if pause_s.is_some_and(|pause| pause > 0.0) {
        return Err(wrong_control("pause", "pressure", "--inspiratory-time"));
    }
    Ok(())
}
