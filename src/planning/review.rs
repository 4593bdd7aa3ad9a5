//! How forecasts did on a unit's own past gases, and the steadiness figures that fit them.
//!
//! Each gas is forecast from the earlier gases of its stay exactly as `forecast` would, and scored against what came.

mod fit;
mod score;

pub use fit::{Fitted, Sample, fit};
pub use score::{Figures, Score, Tally};

use super::baseline::gas_exchange::{GasBreath, GasExchange};
use super::baseline::mechanics::Mechanics;
use super::baseline::{Baseline, HeardGas};
use super::caution::Cautions;
use super::dialled::Dialled;
use super::forecast::{Forecaster, Held};
use crate::case::entry::{FlowPattern, Measured, Patient};
use crate::case::profile::{self, Band, Profile, Steps};
use crate::case::settings::{Inflation, Settings, Timing};
use crate::physiology::carbon_dioxide::ANALYSER_TEMPERATURE;

/// A stay is forecast from no more than this many of its latest gases; by then earlier ones weigh nothing.
pub const MOST_GASES: usize = 200;

/// One past gas under volume control.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct PastGas {
    /// Hours, from any origin.
    pub hours: f64,
    /// Set rate, 1/min.
    pub rate_set_per_min: f64,
    /// Set tidal volume, mL.
    pub volume_set_ml: f64,
    /// PaCO2, mmHg.
    pub paco2_mmhg: f64,
    /// Total rate, 1/min.
    pub rate_observed_per_min: Option<f64>,
    /// Exhaled tidal volume, mL.
    pub volume_observed_ml: Option<f64>,
    /// Apparatus dead space, mL.
    pub apparatus_ml: f64,
    /// pH.
    pub ph: Option<f64>,
}

/// The gases of one stay, oldest first.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Stay {
    /// Sex, height and airway as known.
    pub patient: Patient,
    gases: Vec<PastGas>,
}

impl Stay {
    /// A stay without gases yet.
    pub const fn new(patient: Patient) -> Self {
        Self { patient, gases: Vec::new() }
    }

    /// Takes up what a row says of the patient; what it leaves out stays as it was.
    pub fn know(&mut self, patient: &Patient) {
        self.patient.sex = patient.sex.or(self.patient.sex);
        self.patient.height_cm = patient.height_cm.or(self.patient.height_cm);
        self.patient.predicted_weight_kg = patient.predicted_weight_kg.or(self.patient.predicted_weight_kg);
        self.patient.airway = patient.airway.or(self.patient.airway);
    }

    /// Its latest gas.
    pub fn latest(&self) -> Option<&PastGas> {
        self.gases.last()
    }

    /// Adds the next gas.
    pub fn add(&mut self, gas: PastGas) {
        if self.gases.len() >= MOST_GASES {
            self.gases.remove(0);
        }
        self.gases.push(gas);
    }

    /// The baseline after the gases so far: as a record with one entry a gas would give it.
    ///
    /// `None` when there is no gas, or when the evidence cannot be (a breath that the dead space swallows).
    pub fn baseline(&self) -> Option<Baseline> {
        let latest = self.gases.last()?;
        let per_set = self
            .gases
            .iter()
            .rev()
            .find_map(|gas| gas.volume_observed_ml.map(|observed| observed / gas.volume_set_ml))
            .unwrap_or(1.0);
        let mut own = None;
        let mut heard = Vec::with_capacity(self.gases.len());
        let first = self.gases.first()?.hours;
        for gas in &self.gases {
            if let Some(observed) = gas.rate_observed_per_min {
                own = (observed > gas.rate_set_per_min).then_some(observed);
            }
            heard.push(HeardGas {
                hours: gas.hours - first,
                paco2_mmhg: gas.paco2_mmhg,
                rate_per_min: own.map_or(gas.rate_set_per_min, |own| own.max(gas.rate_set_per_min)),
                tidal_volume_ml: gas.volume_set_ml * per_set,
                apparatus_ml: gas.apparatus_ml,
                minutes_since_change: None,
            });
        }
        let last = heard.last()?;
        let breath = GasBreath {
            number: self.gases.len(),
            paco2_mmhg: latest.paco2_mmhg,
            temperature: ANALYSER_TEMPERATURE,
            rate_per_min: last.rate_per_min,
            tidal_volume_ml: last.tidal_volume_ml,
            apparatus_ml: latest.apparatus_ml,
        };
        let exchange =
            GasExchange::read(&breath, &self.patient, &Measured::default(), &mut Cautions::default()).ok()?;
        Some(Baseline {
            label: String::new(),
            profile: no_limits(),
            predicted_weight_kg: super::baseline::gas_exchange::predicted_weight_kg(&self.patient),
            airway_by_rule_ml: super::baseline::gas_exchange::airway_by_rule_ml(&self.patient),
            gas: breath,
            ph: None,
            bicarbonate_mmol_l: None,
            base_excess_mmol_l: None,
            pao2_fio2_mmhg: None,
            alveolar_po2_mmhg: None,
            alveolar_arterial_po2_mmhg: None,
            end_tidal_co2_mmhg: None,
            exchange,
            mechanics: Mechanics::of_volume_control(per_set, own),
            now: settings(latest),
            now_is_measured: true,
            gases: heard,
            cautions: Cautions::default(),
        })
    }
}

/// The settings of a past gas, with the default timing.
const fn settings(gas: &PastGas) -> Settings {
    Settings {
        inflation: Inflation::Volume {
            tidal_volume_ml: gas.volume_set_ml,
            pause_s: 0.0,
            flow_pattern: FlowPattern::Constant,
        },
        rate_per_min: gas.rate_set_per_min,
        peep_cmh2o: None,
        fio2: None,
        timing: Timing::Ratio(2.0),
        timing_assumed: true,
        apparatus_dead_space_ml: gas.apparatus_ml,
        apparatus_assumed: false,
    }
}

/// A profile without limits: a review judges forecasts, not settings.
const fn no_limits() -> Profile {
    Profile {
        name: String::new(),
        summary: String::new(),
        target: Band::Paco2([35.0, 45.0]),
        limits: Vec::new(),
        steps: Steps { rate_per_min: 1.0, tidal_volume_ml: 10.0, inspiratory_pressure_cmh2o: 1.0 },
        steadiness: None,
    }
}

/// What is dialled for the next gas: its set rate and volume, the rest as before.
pub(super) fn dialled(forecaster: &Forecaster<'_>, next: &PastGas) -> Dialled {
    forecaster.now().with_rate(next.rate_set_per_min).with_volume(next.volume_set_ml)
}

/// Whether rate or volume was changed between two gases.
pub(super) fn changed(before: &PastGas, next: &PastGas) -> bool {
    (before.rate_set_per_min - next.rate_set_per_min).abs() > 0.0
        || (before.volume_set_ml - next.volume_set_ml).abs() > 0.0
}

impl Stay {
    /// Forecasts `next` from the gases so far and scores it; `None` where no forecast can be made.
    pub fn score(&self, next: &PastGas, figures: profile::Figures) -> Option<Score> {
        let baseline = self.baseline()?;
        let forecaster = Forecaster::new(&baseline, figures, Held::Split).ok()?;
        Score::of(&forecaster, self.latest()?, next)
    }
}
