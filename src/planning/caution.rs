//! Cautions: what a reader must know beside a number, and what to do about it.

use serde::Serialize;

use crate::quantity::show::{PressureUnit, paco2_with_unit};

/// A caution: a stable id, and a sentence that says what to do.
#[derive(Debug, Clone, PartialEq, Eq, Serialize)]
pub struct Caution {
    /// Stable id.
    pub id: &'static str,
    /// The sentence, gas pressures in mmHg.
    pub text: String,
    /// The same with gas pressures in kPa, where it holds any.
    #[serde(skip)]
    kpa: Option<String>,
}

impl Caution {
    /// The sentence with gas pressures in the reader's unit.
    pub fn text_in(&self, unit: PressureUnit) -> &str {
        match (unit, &self.kpa) {
            (PressureUnit::KPa, Some(kpa)) => kpa,
            _ => &self.text,
        }
    }
}

/// Cautions in the order they arose, each id once.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Cautions(Vec<Caution>);

impl Cautions {
    /// Adds one unless its id is already there.
    pub fn say(&mut self, id: &'static str, text: impl Into<String>) {
        self.add(Caution { id, text: text.into(), kpa: None });
    }

    /// Adds one that speaks of gas pressures: `sentence` is given what writes a pressure in mmHg with its unit.
    pub fn say_gas(&mut self, id: &'static str, sentence: impl Fn(&dyn Fn(f64) -> String) -> String) {
        let written = |unit| sentence(&|mmhg| paco2_with_unit(mmhg, unit));
        self.add(Caution { id, text: written(PressureUnit::MmHg), kpa: Some(written(PressureUnit::KPa)) });
    }

    fn add(&mut self, caution: Caution) {
        if !self.0.iter().any(|known| known.id == caution.id) {
            self.0.push(caution);
        }
    }

    /// Adds all of `others`.
    pub fn join(&mut self, others: Self) {
        for caution in others.0 {
            self.add(caution);
        }
    }

    /// As a plain list.
    pub fn into_vec(self) -> Vec<Caution> {
        self.0
    }
}
