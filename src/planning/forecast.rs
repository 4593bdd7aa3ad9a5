//! What settings lead to: the forecaster, and a forecast of one trial.

use serde::Serialize;

use super::baseline::{Baseline, volume_of};
use super::belief::{Ahead, Belief, Interval, passing_ml};
use super::course::Course;
use super::dialled::Dialled;
use super::limits;
use super::outcome::Outcome;
use super::state::State;
use super::target::profile_band_mmhg;
use crate::case::fault::{Fault, Place};
use crate::case::profile::Figures;
use crate::case::settings::{Inflation, Settings};
use crate::physiology::breath::Phases;
use crate::physiology::breath::pressure_control::PressureBreath;
use crate::physiology::breath::volume_control::VolumeBreath;
use crate::physiology::carbon_dioxide::{at_body_temperature, output};
use crate::physiology::{acid_base, stores};
use crate::quantity::typed::{BtpsFlow, GasPressure};

/// How dead space is held when settings change: the largest modelling choice there is.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Held {
    /// The airway stays a volume, the alveolar part a fraction.
    #[default]
    Split,
    /// The whole stays a volume.
    Volume,
    /// The whole stays a fraction of the tidal volume.
    Fraction,
}

/// One reading of dead space: a series volume and an alveolar fraction.
#[derive(Debug, Clone, Copy, PartialEq)]
struct Reading {
    /// At the gas, apparatus included, mL; 0 for the fraction reading.
    series_ml: f64,
    alveolar_fraction: Option<f64>,
}

/// The PaCO2 of one trial under each reading, mmHg; `None` where it cannot be.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct HeldReadings {
    /// Airway a volume, alveolar part a fraction.
    pub split: Option<f64>,
    /// The whole a volume.
    pub volume: Option<f64>,
    /// The whole a fraction.
    pub fraction: Option<f64>,
}

impl HeldReadings {
    /// How far the readings part, mmHg; infinite when one of two known readings finds no ventilation left.
    pub fn spread_mmhg(&self) -> f64 {
        let known = [self.split, self.volume, self.fraction].into_iter().flatten();
        let (low, high) =
            known.fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), p| (low.min(p), high.max(p)));
        high - low
    }
}

/// Answers what settings lead to, for one patient.
#[derive(Debug, Clone)]
pub struct Forecaster<'a> {
    baseline: &'a Baseline,
    belief: Belief,
    held: Held,
    split: Reading,
    volume: Option<Reading>,
    fraction: Option<Reading>,
    co2_output_ml_min: Option<f64>,
    now_paco2_mmhg: f64,
}

impl<'a> Forecaster<'a> {
    /// Prepares to forecast from `baseline` with the steadiness `figures`.
    ///
    /// # Errors
    /// Another reading of held dead space than `split` where the whole dead space is not known; settings in force that
    /// leave no alveolar ventilation.
    pub fn new(baseline: &'a Baseline, figures: Figures, held: Held) -> Result<Self, Fault> {
        let belief = Belief::hear(baseline, figures);
        let (split, co2_output_ml_min) = split_reading(baseline, &belief);
        let tidal = baseline.gas.tidal_volume_ml;
        let whole = split.alveolar_fraction.map(|f| split.series_ml + f * (tidal - split.series_ml));
        let volume = whole.map(|ml| Reading { series_ml: ml, alveolar_fraction: Some(0.0) });
        let fraction = whole.map(|ml| Reading { series_ml: 0.0, alveolar_fraction: Some(ml / tidal) });
        if held != Held::Split && whole.is_none() {
            return Err(Fault::new(
                [Place::top("trial", "held")],
                "the whole dead space is not known, so it cannot be held as a volume or a fraction",
                "Give sex and height (or predicted_weight), or a measured dead_space_fraction; or leave --held out.",
            ));
        }
        let mut forecaster =
            Self { baseline, belief, held, split, volume, fraction, co2_output_ml_min, now_paco2_mmhg: 0.0 };
        let now = forecaster.now();
        forecaster.now_paco2_mmhg = if baseline.now_is_measured {
            baseline.gas.paco2_mmhg
        } else {
            forecaster.paco2_mmhg(&now).ok_or_else(|| {
                Fault::new(
                    [Place::top("settings", "tidal_volume")],
                    "the settings in force now leave no breath beyond the dead space, so PaCO2 cannot be forecast",
                    "Check the tidal volume (or inspiratory pressure) and the apparatus dead space.",
                )
            })?
        };
        Ok(forecaster)
    }

    /// The baseline it forecasts from.
    pub const fn baseline(&self) -> &'a Baseline {
        self.baseline
    }

    /// Series dead space at the gas, apparatus included, mL.
    pub const fn series_ml(&self) -> f64 {
        self.split.series_ml
    }

    /// Alveolar dead-space fraction.
    pub const fn alveolar_fraction(&self) -> Option<f64> {
        self.split.alveolar_fraction
    }

    /// CO2 output, mL/min STPD.
    pub const fn co2_output_ml_min(&self) -> Option<f64> {
        self.co2_output_ml_min
    }

    /// PaCO2 under the settings in force now, mmHg.
    pub const fn now_paco2_mmhg(&self) -> f64 {
        self.now_paco2_mmhg
    }

    /// The settings in force now, for the patient as is.
    pub fn now(&self) -> Dialled {
        Dialled {
            settings: self.baseline.now,
            lung: self.baseline.mechanics.lung(),
            pressure_scale: self.baseline.mechanics.pressure_scale,
            trapping_assumed: self.trapping_assumed(),
            co2_factor: 1.0,
        }
    }

    /// The rate the patient gets when this is set.
    pub fn effective_rate(&self, set_per_min: f64) -> f64 {
        self.baseline.mechanics.effective_rate(set_per_min)
    }

    /// The tidal volume the patient gets, mL.
    pub fn volume(&self, dialled: &Dialled) -> Option<f64> {
        self.volume_at(dialled, self.effective_rate(dialled.settings.rate_per_min))
    }

    /// The tidal volume, mL, if the total rate were `rate_per_min`.
    pub fn volume_at(&self, dialled: &Dialled, rate_per_min: f64) -> Option<f64> {
        match dialled.settings.inflation {
            Inflation::Volume { .. } => volume_of(&self.baseline.mechanics, &dialled.settings, rate_per_min),
            Inflation::Pressure { .. } => {
                let phases = Phases::at_rate(dialled.settings.inspiratory_time_s(), 0.0, rate_per_min)?;
                Some(pressure_breath(dialled, phases)?.tidal_volume_ml(dialled.lung.as_ref()?))
            }
        }
    }

    /// Whether settings leave time to breathe in and out.
    pub fn breathes(&self, dialled: &Dialled) -> bool {
        let settings = &dialled.settings;
        let rate = self.effective_rate(settings.rate_per_min);
        Phases::at_rate(settings.inspiratory_time_s(), settings.pause_s(), rate).is_some()
    }

    const fn reading(&self) -> Reading {
        let held = match self.held {
            Held::Split => Some(self.split),
            Held::Volume => self.volume,
            Held::Fraction => self.fraction,
        };
        match held {
            Some(reading) => reading,
            None => self.split,
        }
    }

    /// Series dead space, mL, under a reading with this apparatus: a change of apparatus moves every reading alike.
    fn series_with(&self, reading: Reading, settings: &Settings) -> f64 {
        reading.series_ml + (settings.apparatus_dead_space_ml - self.baseline.gas.apparatus_ml)
    }

    /// Plain arithmetic from the latest gas: `PaCO2·V̇A/V̇A'`, with what V̇CO2 and 1 − f have in common cancelled.
    fn arithmetic(
        &self,
        reading: Reading,
        settings: &Settings,
        rate: f64,
        tidal: f64,
        co2: f64,
    ) -> Option<f64> {
        let gas = &self.baseline.gas;
        let room = tidal - self.series_with(reading, settings);
        let before = gas.rate_per_min * (gas.tidal_volume_ml - reading.series_ml);
        (room > 0.0 && before > 0.0).then(|| gas.paco2_mmhg * (before / (rate * room)) * co2)
    }

    /// The forecast PaCO2, mmHg, of settings under the reading held; `None` when nothing passes the dead space.
    pub fn paco2_mmhg(&self, dialled: &Dialled) -> Option<f64> {
        let tidal = self.volume(dialled)?;
        let rate = self.effective_rate(dialled.settings.rate_per_min);
        self.arithmetic(self.reading(), &dialled.settings, rate, tidal, dialled.co2_factor)
    }

    /// The alveolar ventilation over (1 − f), mL/min, that would bring PaCO2 to `target_mmhg`.
    pub fn needed_ml_min(&self, target_mmhg: f64, co2_factor: f64) -> f64 {
        let gas = &self.baseline.gas;
        gas.paco2_mmhg * co2_factor * gas.rate_per_min * (gas.tidal_volume_ml - self.reading().series_ml)
            / target_mmhg
    }

    /// Series dead space, mL, under these settings and the reading held.
    pub fn series_under(&self, settings: &Settings) -> f64 {
        self.series_with(self.reading(), settings)
    }

    /// The PaCO2 of settings under each reading.
    pub fn held_readings(&self, dialled: &Dialled) -> HeldReadings {
        let rate = self.effective_rate(dialled.settings.rate_per_min);
        let tidal = self.volume(dialled);
        let of = |reading: Option<Reading>| {
            self.arithmetic(reading?, &dialled.settings, rate, tidal?, dialled.co2_factor)
        };
        HeldReadings { split: of(Some(self.split)), volume: of(self.volume), fraction: of(self.fraction) }
    }

    /// What settings lead to; `None` when they cannot be dialled (no time to breathe out, or no breath beyond the dead
    /// space).
    pub fn state(&self, dialled: &Dialled) -> Option<State> {
        let paco2 = self.paco2_mmhg(dialled)?;
        let fall =
            self.curve(dialled, paco2).map(|course| (self.now_paco2_mmhg - course.paco2_mmhg(60.0)).max(0.0));
        self.describe(dialled, paco2, fall)
    }

    /// The state under the settings in force now, at its measured or forecast PaCO2.
    pub fn state_now(&self) -> Option<State> {
        let mut state = self.describe(&self.now(), self.now_paco2_mmhg, Some(0.0))?;
        if self.baseline.now_is_measured {
            state.ph = self.baseline.ph;
            state.bicarbonate_mmol_l = self.baseline.bicarbonate_mmol_l;
            state.end_tidal_co2_mmhg = self.baseline.end_tidal_co2_mmhg;
        }
        Some(state)
    }

    fn describe(&self, dialled: &Dialled, paco2_mmhg: f64, fall: Option<f64>) -> Option<State> {
        let settings = &dialled.settings;
        let rate = self.effective_rate(settings.rate_per_min);
        let phases = Phases::at_rate(settings.inspiratory_time_s(), settings.pause_s(), rate)?;
        let tidal = self.volume(dialled)?;
        let breath = match settings.inflation {
            Inflation::Volume { tidal_volume_ml, flow_pattern, .. } => {
                let breath = VolumeBreath {
                    tidal_volume_ml: tidal,
                    set_tidal_volume_ml: tidal_volume_ml,
                    peep_cmh2o: settings.peep_cmh2o,
                    constant_flow: flow_pattern == crate::case::entry::FlowPattern::Constant,
                    phases,
                };
                dialled.lung.map(|lung| breath.breathe(&lung)).unwrap_or_default()
            }
            Inflation::Pressure { .. } => pressure_breath(dialled, phases)?.breathe(dialled.lung.as_ref()?),
        };
        let reading = self.reading();
        let series = self.series_with(reading, settings);
        let room = tidal - series;
        let alveolar_dead = reading.alveolar_fraction.map(|f| f * room);
        let whole = alveolar_dead.map(|alveolar| series + alveolar);
        let excess = self.baseline.base_excess_mmol_l;
        let ph = excess.map(|excess| acid_base::ph_at(excess, paco2_mmhg));
        let temperature = self.baseline.gas.temperature;
        let body = at_body_temperature(GasPressure::from_mmhg(paco2_mmhg), temperature).mmhg();
        Some(State {
            rate_per_min: rate,
            tidal_volume_ml: tidal,
            tidal_volume_ml_kg: self.baseline.predicted_weight_kg.map(|kg| tidal / kg),
            inspiratory_time_s: phases.inspiratory_s,
            expiratory_time_s: phases.expiratory_s,
            minute_ventilation_l_min: rate * tidal / 1000.0,
            alveolar_ventilation_l_min: reading.alveolar_fraction.map(|f| rate * room * (1.0 - f) / 1000.0),
            apparatus_dead_space_ml: settings.apparatus_dead_space_ml,
            series_dead_space_ml: series,
            alveolar_dead_space_ml: alveolar_dead,
            dead_space_fraction: whole.map(|ml| ml / tidal),
            dead_space_loss_l_min: whole.map(|ml| rate * ml / 1000.0),
            paco2_mmhg,
            ph,
            bicarbonate_mmol_l: ph.map(|ph| acid_base::bicarbonate(ph, paco2_mmhg)),
            end_tidal_co2_mmhg: self
                .baseline
                .end_tidal_co2_mmhg
                .and(reading.alveolar_fraction)
                .map(|f| body * (1.0 - f)),
            auto_peep_cmh2o: breath.auto_peep_cmh2o,
            total_peep_cmh2o: breath.total_peep_cmh2o,
            plateau_cmh2o: breath.plateau_cmh2o,
            peak_cmh2o: breath.peak_cmh2o,
            driving_pressure_cmh2o: breath.driving_pressure_cmh2o,
            mean_airway_pressure_cmh2o: breath.mean_cmh2o,
            trapped_volume_ml: breath.trapped_ml,
            expiratory_time_constants: breath.expiratory_time_constants,
            mechanical_power_j_min: breath.power_j_min(rate),
            load_index: breath.load_index(rate),
            paco2_fall_per_hour_mmhg: fall,
        })
    }

    /// The way from PaCO2 now to `final_mmhg`; `None` without predicted weight or CO2 output.
    pub fn curve(&self, dialled: &Dialled, final_mmhg: f64) -> Option<stores::Course> {
        let weight = self.baseline.predicted_weight_kg?;
        let output = self.co2_output_ml_min? * dialled.co2_factor;
        Some(stores::Course::new(weight, output, self.now_paco2_mmhg, final_mmhg))
    }

    /// How many minutes the change of ventilation before the latest gas needed to settle, from the gas before it; `None`
    /// where there is none, or without predicted weight or CO2 output.
    pub fn latest_gas_settles_after_min(&self) -> Option<f64> {
        let [.., before, latest] = self.baseline.gases.as_slice() else { return None };
        let airway = self.baseline.exchange.series_ml - self.baseline.gas.apparatus_ml;
        let moved = |gas: &super::baseline::HeardGas| {
            gas.rate_per_min * passing_ml(gas.tidal_volume_ml, gas.apparatus_ml + airway)
        };
        let settled_at = before.paco2_mmhg * moved(before) / moved(latest);
        let output = self.baseline.exchange.co2_output_ml_min?;
        let course =
            stores::Course::new(self.baseline.predicted_weight_kg?, output, before.paco2_mmhg, settled_at);
        Some(course.settled_minutes())
    }

    /// The course of settings.
    pub fn course(&self, dialled: &Dialled) -> Option<Course> {
        let curve = self.curve(dialled, self.paco2_mmhg(dialled)?)?;
        Some(Course::report(curve, self.baseline.base_excess_mmol_l))
    }

    /// How sure the forecast PaCO2 of settings is.
    pub fn interval(&self, dialled: &Dialled, band_mmhg: Option<[f64; 2]>) -> Option<Interval> {
        let mixture = self.mixture(dialled)?;
        let quantile = |p: f64| mixture.quantile(p).map(libm::exp);
        Some(Interval {
            paco2_expected_mmhg: quantile(0.50),
            paco2_half_low_mmhg: quantile(0.25),
            paco2_half_high_mmhg: quantile(0.75),
            paco2_low_mmhg: quantile(0.05),
            paco2_high_mmhg: quantile(0.95),
            chance_on_target: band_mmhg.map(|[low, high]| {
                let below_low = if low > 0.0 { mixture.below(libm::log(low)) } else { 0.0 };
                let below_high = if high > 0.0 { mixture.below(libm::log(high)) } else { 0.0 };
                below_high - below_low
            }),
        })
    }

    /// The distribution of ln PaCO2 under settings.
    pub fn mixture(&self, dialled: &Dialled) -> Option<super::belief::Mixture> {
        let tidal = self.volume(dialled)?;
        let settings = &dialled.settings;
        let rate = self.effective_rate(settings.rate_per_min);
        let gas = &self.baseline.gas;
        // Ventilation ratios are taken throughout with the dead space of section 1, not the posterior one.
        let section_one = self.baseline.exchange.series_ml;
        let before = gas.rate_per_min * passing_ml(gas.tidal_volume_ml, section_one);
        let apparatus_change = settings.apparatus_dead_space_ml - gas.apparatus_ml;
        let ahead = rate * passing_ml(tidal, section_one + apparatus_change);
        let readings = self.held_readings(dialled);
        let held = self.arithmetic(self.reading(), settings, rate, tidal, dialled.co2_factor);
        let other = held.zip(readings.split).map_or(0.0, |(held, split)| libm::log(held / split));
        Some(self.belief.ahead(&Ahead {
            rate_per_min: rate,
            tidal_volume_ml: tidal,
            apparatus_ml: settings.apparatus_dead_space_ml,
            ln_ventilation: libm::log(ahead / before),
            ln_readings:
                readings.volume.zip(readings.fraction).map(|(volume, fraction)| libm::log(volume / fraction)),
            shift: libm::log(dialled.co2_factor) + other,
        }))
    }

    /// The whole outcome of settings, with interval and verdicts.
    pub fn outcome(&self, dialled: &Dialled, band_mmhg: Option<[f64; 2]>) -> Option<Outcome> {
        let state = self.state(dialled)?;
        let interval = self.interval(dialled, band_mmhg).unwrap_or_default();
        Some(self.judge(&state, interval, dialled.trapping_assumed))
    }

    /// The outcome now: measured, without an interval, or forecast, with one.
    pub fn outcome_now(&self, band_mmhg: Option<[f64; 2]>) -> Option<Outcome> {
        let interval = if self.baseline.now_is_measured {
            Interval::default()
        } else {
            self.interval(&self.now(), band_mmhg).unwrap_or_default()
        };
        Some(self.judge(&self.state_now()?, interval, self.trapping_assumed()))
    }

    /// True where trapping rests on an assumed resistance.
    pub fn trapping_assumed(&self) -> bool {
        self.baseline.mechanics.trapping_evidence() == super::baseline::mechanics::TrappingEvidence::Assumed
    }

    fn judge(&self, state: &State, interval: Interval, trapping_assumed: bool) -> Outcome {
        let limits = limits::verdicts(&self.baseline.profile.limits, state, trapping_assumed);
        Outcome { state: *state, interval, limits }
    }

    /// The band that counts as on target where no target was typed, mmHg.
    pub fn profile_band_mmhg(&self) -> Option<[f64; 2]> {
        profile_band_mmhg(self.baseline.profile.target, self.baseline.base_excess_mmol_l)
    }
}

fn pressure_breath(dialled: &Dialled, phases: Phases) -> Option<PressureBreath> {
    Some(PressureBreath {
        inspiratory_pressure_cmh2o: dialled.settings.inspiratory_pressure_cmh2o()?,
        peep_cmh2o: dialled.settings.peep_cmh2o,
        scale: dialled.pressure_scale?,
        phases,
    })
}

/// The split reading: with one gas as the evidence has it; with several the posterior mean of the series dead space, and
/// the alveolar fraction that the whole then leaves, not below 0.
fn split_reading(baseline: &Baseline, belief: &Belief) -> (Reading, Option<f64>) {
    let exchange = &baseline.exchange;
    let as_charted = Reading { series_ml: exchange.series_ml, alveolar_fraction: exchange.alveolar_fraction };
    if belief.gases() < 2 {
        return (as_charted, exchange.co2_output_ml_min);
    }
    let gas = &baseline.gas;
    let series_ml = belief.airway_mean_ml() + gas.apparatus_ml;
    let Some(charted_fraction) = exchange.alveolar_fraction else {
        return (Reading { series_ml, alveolar_fraction: None }, None);
    };
    let whole = exchange.series_ml + charted_fraction * (gas.tidal_volume_ml - exchange.series_ml);
    let fraction = (whole - series_ml) / (gas.tidal_volume_ml - series_ml);
    if fraction >= 0.0 {
        return (Reading { series_ml, alveolar_fraction: Some(fraction) }, exchange.co2_output_ml_min);
    }
    // The posterior exceeds the whole: no alveolar part, and the CO2 output that the gas then implies.
    let useful = BtpsFlow::from_ml_per_min(gas.rate_per_min * (gas.tidal_volume_ml - series_ml));
    let arterial = at_body_temperature(GasPressure::from_mmhg(gas.paco2_mmhg), gas.temperature);
    let implied = output(useful, arterial, gas.temperature).ml_per_min();
    (Reading { series_ml, alveolar_fraction: Some(0.0) }, Some(implied))
}
