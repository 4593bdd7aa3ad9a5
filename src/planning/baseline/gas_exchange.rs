//! How the patient's dead space and CO2 output follow from the gas and the evidence charted with it.

use serde::Serialize;

use crate::case::entry::{Airway, Measured, Patient, Sex};
use crate::case::fault::{Fault, Place};
use crate::physiology::carbon_dioxide::{alveolar_ventilation, output, pressure};
use crate::physiology::{body, dead_space, energy};
use crate::planning::caution::Cautions;
use crate::quantity::show::PressureUnit;
use crate::quantity::typed::{BtpsFlow, GasPressure, StpdFlow, Temperature, Volume};

/// What fixes the CO2 output.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum Co2Evidence {
    /// A dead-space fraction or mixed expired PCO2.
    DeadSpace,
    /// Measured CO2 production.
    Co2Production,
    /// End-tidal PCO2 with the series dead space by rule.
    EndTidal,
    /// Nothing: estimated from energy or weight.
    Estimated,
}

/// Where the series dead space comes from.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum SeriesEvidence {
    /// From the whole dead space and end-tidal PCO2 together.
    Measured,
    /// By rule from predicted weight (or a fixed volume without it).
    Rule,
    /// By rule, cut to the measured whole.
    CutToWhole,
}

/// The breath under which the gas was drawn.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct GasBreath {
    /// The occasion's number, from 1.
    pub number: usize,
    /// PaCO2, mmHg, as reported at 37 °C.
    pub paco2_mmhg: f64,
    /// Body temperature.
    pub temperature: Temperature,
    /// Effective rate, 1/min.
    pub rate_per_min: f64,
    /// Effective tidal volume, mL.
    pub tidal_volume_ml: f64,
    /// Apparatus dead space, mL.
    pub apparatus_ml: f64,
}

/// Dead space and CO2 output under the gas.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct GasExchange {
    /// Series dead space, apparatus included, mL.
    pub series_ml: f64,
    /// Where it comes from.
    pub series_evidence: SeriesEvidence,
    /// Alveolar dead-space fraction.
    pub alveolar_fraction: Option<f64>,
    /// CO2 output, mL/min STPD.
    pub co2_output_ml_min: Option<f64>,
    /// What fixes it.
    pub co2_evidence: Co2Evidence,
}

/// Predicted weight, kg: given, or from sex and height.
pub fn predicted_weight_kg(patient: &Patient) -> Option<f64> {
    patient.predicted_weight_kg.or_else(|| {
        let (sex, height) = patient.sex.zip(patient.height_cm)?;
        body::predicted_weight_kg(sex == Sex::Female, height)
    })
}

/// Airway dead space by rule, mL, without apparatus.
pub fn airway_by_rule_ml(patient: &Patient) -> f64 {
    let native = patient.airway == Some(Airway::Native);
    dead_space::airway_by_rule(predicted_weight_kg(patient), native).ml()
}

/// CO2 output estimated from resting energy when age, weight, height and sex are known, else from predicted weight.
fn estimated_output(patient: &Patient) -> Option<StpdFlow> {
    match (patient.sex, patient.weight_kg, patient.height_cm, patient.age_years) {
        (Some(sex), Some(weight), Some(height), Some(age)) => {
            Some(energy::co2_output(energy::resting_kcal_per_day(sex == Sex::Female, weight, height, age)))
        }
        _ => predicted_weight_kg(patient).map(energy::co2_output_by_weight),
    }
}

impl GasExchange {
    /// Dead space and CO2 output from the best evidence at hand, best first: VD/VT or mixed expired PCO2; measured
    /// CO2 production; end-tidal PCO2; an estimate.
    ///
    /// # Errors
    /// Evidence that cannot be, with the fields at fault.
    pub fn read(
        breath: &GasBreath,
        patient: &Patient,
        measured: &Measured,
        cautions: &mut Cautions,
    ) -> Result<Self, Fault> {
        let reading = Reading::new(breath, patient);
        reading.doubt_units(measured, cautions);
        let whole = reading.whole_dead_space(measured, cautions)?;
        let fraction = reading.fraction_from_end_tidal(measured, cautions)?;
        match (whole, fraction) {
            (Some((whole, evidence)), Some(f)) => Ok(reading.both(whole, f, evidence, cautions)),
            (Some((whole, evidence)), None) => Ok(reading.whole_alone(whole, evidence, cautions)),
            (None, Some(f)) => reading.fraction_alone(f),
            (None, None) => reading.estimated(estimated_output(patient)),
        }
    }
}

/// The breath of the gas in typed quantities.
struct Reading {
    number: usize,
    tidal: Volume,
    rate: f64,
    arterial: GasPressure,
    temperature: Temperature,
    apparatus: Volume,
    rule: Volume,
}

impl Reading {
    fn new(breath: &GasBreath, patient: &Patient) -> Self {
        let apparatus = Volume::from_ml(breath.apparatus_ml);
        Self {
            number: breath.number,
            tidal: Volume::from_ml(breath.tidal_volume_ml),
            rate: breath.rate_per_min,
            arterial: crate::physiology::carbon_dioxide::at_body_temperature(
                GasPressure::from_mmhg(breath.paco2_mmhg),
                breath.temperature,
            ),
            temperature: breath.temperature,
            apparatus,
            rule: Volume::from_ml(airway_by_rule_ml(patient)) + apparatus,
        }
    }

    fn place(&self, key: &'static str) -> Place {
        Place::in_entry(self.number, "measured", key)
    }

    /// `VDphys`, from VD/VT, mixed expired PCO2 or measured CO2 production.
    fn whole_dead_space(
        &self,
        measured: &Measured,
        cautions: &mut Cautions,
    ) -> Result<Option<(Volume, Co2Evidence)>, Fault> {
        let mixed = measured
            .mixed_expired_co2_mmhg
            .map(|mmhg| dead_space::enghoff(GasPressure::from_mmhg(mmhg), self.arterial));
        if let (Some(fraction), Some(mixed)) = (measured.dead_space_fraction, mixed)
            && (fraction - mixed).abs() > 0.05
        {
            cautions.say(
                "dead_space_evidence_differs",
                format!(
                    "VD/VT was charted as {fraction:.2}, but mixed expired CO2 gives {mixed:.2}: {fraction:.2} is used. \
                     Repeat the measurement that is older."
                ),
            );
        }
        if let Some(fraction) = measured.dead_space_fraction.or(mixed) {
            let whole = self.tidal * fraction;
            if fraction <= 0.0 || fraction >= 1.0 {
                return Err(Fault::new(
                    [self.place("mixed_expired_co2"), self.place("dead_space_fraction")],
                    format!("a dead space of {fraction:.2} of the tidal volume cannot be"),
                    "Mixed expired CO2 lies between 0 and PaCO2; check both.",
                ));
            }
            if let Some(production) = measured.co2_production_ml_min {
                self.compare_with_production(whole, production, cautions);
            }
            return Ok(Some((whole, Co2Evidence::DeadSpace)));
        }
        let Some(production) = measured.co2_production_ml_min else { return Ok(None) };
        let useful =
            alveolar_ventilation(StpdFlow::from_ml_per_min(production), self.arterial, self.temperature);
        let moved = self.tidal.times_rate(self.rate);
        if useful >= moved {
            return Err(Fault::new(
                [self.place("co2_production")],
                format!(
                    "a CO2 production of {production:.0} mL/min at this PaCO2 needs {:.1} L/min of alveolar \
                     ventilation, but only {:.1} L/min are breathed",
                    useful.ml_per_min() / 1000.0,
                    moved.ml_per_min() / 1000.0
                ),
                "Check co2_production (mL/min STPD, commonly 120 to 350), rate, tidal volume and PaCO2.",
            ));
        }
        Ok(Some((self.tidal - useful.per_breath(self.rate), Co2Evidence::Co2Production)))
    }

    fn compare_with_production(&self, whole: Volume, production: f64, cautions: &mut Cautions) {
        let useful = (self.tidal - whole).times_rate(self.rate);
        let reproduced = pressure(StpdFlow::from_ml_per_min(production), useful, self.temperature);
        if (reproduced / self.arterial - 1.0).abs() > 0.15 {
            cautions.say_gas("co2_evidence_differs", |gas| {
                format!(
                    "CO2 production of {production:.0} mL/min and VD/VT of {:.2} together would give a PaCO2 of {}, not \
                     the measured one: VD/VT is used. Check both.",
                    whole / self.tidal,
                    gas(reproduced / self.arterial * self.paco2_at_37())
                )
            });
        }
    }

    /// A low expired PCO2 that would be plain in kPa: plausible as typed, so asked, not refused.
    fn doubt_units(&self, measured: &Measured, cautions: &mut Cautions) {
        for (key, words, value) in [
            ("end_tidal_co2", "End-tidal", measured.end_tidal_co2_mmhg),
            ("mixed_expired_co2", "Mixed expired", measured.mixed_expired_co2_mmhg),
        ] {
            let Some(mmhg) = value else { continue };
            let as_kpa = PressureUnit::KPa.to_mmhg(mmhg);
            if mmhg < 0.25 * self.arterial.mmhg() && as_kpa < 1.15 * self.arterial.mmhg() {
                cautions.say(
                    "perhaps_kilopascal",
                    format!(
                        "{words} PCO2 of {mmhg:.0} mmHg is far below arterial. If it was read in kPa, write {key} = \"{mmhg} kPa\"; \
                         if not, check the capnometer and the circulation."
                    ),
                );
            }
        }
    }

    fn paco2_at_37(&self) -> f64 {
        let per_degree = crate::physiology::carbon_dioxide::at_body_temperature(
            GasPressure::from_mmhg(1.0),
            self.temperature,
        );
        self.arterial / per_degree
    }

    fn fraction_from_end_tidal(
        &self,
        measured: &Measured,
        cautions: &mut Cautions,
    ) -> Result<Option<f64>, Fault> {
        let Some(mmhg) = measured.end_tidal_co2_mmhg else { return Ok(None) };
        let fraction =
            dead_space::alveolar_fraction_from_end_tidal(GasPressure::from_mmhg(mmhg), self.arterial);
        let arterial = self.arterial.mmhg();
        if mmhg > 1.15 * arterial {
            return Err(Fault::new(
                [self.place("end_tidal_co2"), Place::in_entry(self.number, "gas", "paco2")],
                format!(
                    "an end-tidal PCO2 of {mmhg:.0} mmHg cannot stand so far above arterial {arterial:.0} mmHg"
                ),
                "Check both values and that they belong to the same minutes.",
            ));
        }
        if fraction < 0.0 {
            cautions.say_gas("end_tidal_above_arterial", |gas| {
                format!(
                    "End-tidal PCO2 ({}) is above arterial ({} at body temperature): no alveolar dead space is taken. \
                     Check the capnometer and the time of the gas.",
                    gas(mmhg),
                    gas(arterial)
                )
            });
        }
        Ok(Some(fraction.max(0.0)))
    }

    fn both(&self, whole: Volume, f: f64, evidence: Co2Evidence, cautions: &mut Cautions) -> GasExchange {
        let series = dead_space::series(whole, f, self.tidal);
        if series < self.apparatus {
            cautions.say(
                "end_tidal_dropped",
                "End-tidal PCO2 and the measured dead space contradict each other, so end-tidal is not used to part \
                 airway from alveolar dead space. Check the capnometer and the dead-space measurement.",
            );
            return self.whole_alone(whole, evidence, cautions);
        }
        self.with(series, SeriesEvidence::Measured, f, evidence)
    }

    fn whole_alone(&self, whole: Volume, evidence: Co2Evidence, cautions: &mut Cautions) -> GasExchange {
        // A rule that exceeds the breath, or the measured whole, gives way to the measurement.
        if self.rule >= self.tidal || whole < self.rule {
            if whole < self.apparatus {
                cautions.say(
                    "dead_space_below_apparatus",
                    format!(
                        "The measured dead space ({:.0} mL) is less than the apparatus alone ({:.0} mL): check both.",
                        whole.ml(),
                        self.apparatus.ml()
                    ),
                );
            }
            return self.with(whole, SeriesEvidence::CutToWhole, 0.0, evidence);
        }
        let f = dead_space::alveolar_fraction(whole, self.rule, self.tidal);
        self.with(self.rule, SeriesEvidence::Rule, f, evidence)
    }

    fn fraction_alone(&self, f: f64) -> Result<GasExchange, Fault> {
        self.rule_must_fit()?;
        Ok(self.with(self.rule, SeriesEvidence::Rule, f, Co2Evidence::EndTidal))
    }

    fn estimated(&self, guess: Option<StpdFlow>) -> Result<GasExchange, Fault> {
        self.rule_must_fit()?;
        let Some(guess) = guess else {
            return Ok(GasExchange {
                series_ml: self.rule.ml(),
                series_evidence: SeriesEvidence::Rule,
                alveolar_fraction: None,
                co2_output_ml_min: None,
                co2_evidence: Co2Evidence::Estimated,
            });
        };
        let useful = alveolar_ventilation(guess, self.arterial, self.temperature).per_breath(self.rate);
        let f = dead_space::alveolar_fraction(self.tidal - useful, self.rule, self.tidal);
        let kept = f.clamp(0.0, dead_space::LARGEST_ESTIMATED_FRACTION);
        let mut exchange = self.with(self.rule, SeriesEvidence::Rule, kept, Co2Evidence::Estimated);
        if (kept - f).abs() <= 0.0 {
            exchange.co2_output_ml_min = Some(guess.ml_per_min());
        }
        Ok(exchange)
    }

    fn rule_must_fit(&self) -> Result<(), Fault> {
        if self.rule < self.tidal {
            return Ok(());
        }
        Err(Fault::new(
            [
                Place::in_entry(self.number, "settings", "tidal_volume"),
                Place::in_entry(self.number, "settings", "apparatus_dead_space"),
            ],
            format!(
                "a breath of {:.0} mL does not exceed the airway and apparatus dead space of {:.0} mL",
                self.tidal.ml(),
                self.rule.ml()
            ),
            "Check the tidal volume, the apparatus dead space, sex and height; a measured dead_space_fraction settles it.",
        ))
    }

    /// The whole from its parts; CO2 output is the one that the gas then implies.
    fn with(&self, series: Volume, how: SeriesEvidence, f: f64, evidence: Co2Evidence) -> GasExchange {
        let useful: BtpsFlow = dead_space::useful(series, f, self.tidal).times_rate(self.rate);
        GasExchange {
            series_ml: series.ml(),
            series_evidence: how,
            alveolar_fraction: Some(f),
            co2_output_ml_min: Some(output(useful, self.arterial, self.temperature).ml_per_min()),
            co2_evidence: evidence,
        }
    }
}
