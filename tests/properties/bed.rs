//! Random bedsides, drawn from the ranges of the table of inputs.

use std::collections::VecDeque;
use std::fmt::Write as _;

use proptest::prelude::*;
use tidewright::case::record::Record;
use tidewright::case::{file, read};
use tidewright::quantity::input::Key;

/// Reads a case; `None` when anything is wrong with it.
pub fn record(text: &str) -> Option<Record> {
    read::case(text.as_bytes(), &|name| file::profile(name, None)).ok().map(|(record, _)| record)
}

/// How a random value lies in the range of its input.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Reach {
    /// Anywhere from the least to the greatest plausible value.
    Whole,
    /// Where patients mostly are, so that most cases are accepted.
    Bedside,
}

/// Where patients mostly are, for inputs whose whole range would mostly be refused: common practice.
const BEDSIDE: [(Key, f64, f64); 24] = [
    (Key::Height, 150.0, 195.0),
    (Key::PredictedWeight, 40.0, 85.0),
    (Key::Rate, 8.0, 34.0),
    (Key::TidalVolume, 280.0, 700.0),
    (Key::InspiratoryPressure, 8.0, 28.0),
    (Key::Peep, 0.0, 18.0),
    (Key::InspiratoryTime, 0.5, 1.3),
    (Key::Flow, 35.0, 90.0),
    (Key::Ratio, 1.0, 4.0),
    (Key::Pause, 0.0, 0.3),
    (Key::ApparatusDeadSpace, 0.0, 60.0),
    (Key::Compliance, 15.0, 80.0),
    (Key::Resistance, 4.0, 25.0),
    (Key::ExpiratoryResistance, 4.0, 35.0),
    (Key::CircuitCompliance, 0.0, 2.0),
    (Key::MixedExpiredCo2, 10.0, 30.0),
    (Key::DeadSpaceFraction, 0.45, 0.75),
    (Key::Co2Production, 120.0, 260.0),
    (Key::Temperature, 35.0, 39.5),
    (Key::Ph, 7.1, 7.55),
    (Key::Paco2, 28.0, 90.0),
    (Key::Pao2, 50.0, 150.0),
    (Key::BarometricPressure, 600.0, 770.0),
    (Key::Altitude, 0.0, 2500.0),
];

/// A bedside as it would be charted: one patient, one entry.
#[derive(Debug, Clone, PartialEq)]
pub struct Bed {
    /// Lines of `[patient]`.
    pub patient: Vec<(Key, f64)>,
    /// Sex, airway and the like: table, key, word.
    pub words: Vec<(&'static str, &'static str, &'static str)>,
    /// Lines of `[entry.settings]`.
    pub settings: Vec<(Key, f64)>,
    /// Lines of `[entry.measured]`.
    pub measured: Vec<(Key, f64)>,
    /// Lines of `[entry.gas]`.
    pub gas: Vec<(Key, f64)>,
}

/// Shares between 0 and 1, used up one by one, so that proptest can shrink them.
struct Dice {
    shares: VecDeque<f64>,
    reach: Reach,
}

impl Dice {
    fn share(&mut self) -> f64 {
        self.shares.pop_front().unwrap_or(0.0)
    }

    /// True in `percent` of 100 throws.
    fn chance(&mut self, percent: f64) -> bool {
        self.share() * 100.0 > 100.0 - percent
    }

    /// A value of an input, with one digit more than it is shown with.
    fn value(&mut self, key: Key) -> f64 {
        let input = key.input();
        let narrow = BEDSIDE.iter().find(|(known, _, _)| *known == key && self.reach == Reach::Bedside);
        let (low, high) = narrow.map_or((input.min, input.max), |(_, low, high)| (*low, *high));
        self.between(key, low, high)
    }

    /// A value of an input between two bounds of our own, kept in its range.
    fn between(&mut self, key: Key, low: f64, high: f64) -> f64 {
        let input = key.input();
        let scale = 10_f64.powi(i32::try_from(input.digits).unwrap() + 1);
        let value = low + self.share() * (high - low);
        ((value * scale).round() / scale).clamp(input.min, input.max)
    }

    fn maybe(&mut self, percent: f64, key: Key) -> Option<(Key, f64)> {
        self.chance(percent).then(|| (key, self.value(key)))
    }

    fn one_of(&mut self, choices: &[Option<&'static str>]) -> Option<&'static str> {
        choices[((self.share() * choices.len() as f64) as usize).min(choices.len() - 1)]
    }
}

/// Any bedside whose values lie in the ranges of the table of inputs. Readings that would contradict each other in most
/// draws (a plateau below PEEP) are drawn above one another.
pub fn bed(reach: Reach) -> impl Strategy<Value = Bed> {
    proptest::collection::vec(0.0_f64..1.0, 64)
        .prop_map(move |shares| Bed::drawn(&mut Dice { shares: shares.into(), reach }))
}

impl Bed {
    fn drawn(dice: &mut Dice) -> Self {
        let mut bed =
            Self { patient: vec![], words: vec![], settings: vec![], measured: vec![], gas: vec![] };
        bed.draw_patient(dice);
        let pressure_control = dice.chance(35.0);
        bed.draw_settings(dice, pressure_control);
        bed.draw_lung(dice, pressure_control);
        bed.draw_gas(dice);
        bed
    }

    fn draw_patient(&mut self, dice: &mut Dice) {
        if let Some(sex) = dice.one_of(&[Some("female"), Some("male"), None]) {
            self.words.push(("patient", "sex", sex));
        }
        if let Some(airway) = dice.one_of(&[Some("tube"), Some("native"), Some("tracheostomy"), None, None]) {
            self.words.push(("patient", "airway", airway));
        }
        self.patient.extend(dice.maybe(80.0, Key::Height));
        self.patient.extend(dice.maybe(40.0, Key::Weight));
        self.patient.extend(dice.maybe(40.0, Key::Age));
        self.patient.extend(dice.maybe(15.0, Key::PredictedWeight));
        let air = if dice.chance(50.0) { Key::BarometricPressure } else { Key::Altitude };
        self.patient.extend(dice.maybe(40.0, air));
    }

    fn draw_settings(&mut self, dice: &mut Dice, pressure_control: bool) {
        self.settings.push((Key::Rate, dice.value(Key::Rate)));
        self.settings.push((Key::Peep, dice.value(Key::Peep)));
        self.settings.extend(dice.maybe(70.0, Key::Fio2));
        self.settings.extend(dice.maybe(40.0, Key::ApparatusDeadSpace));
        let timing = dice.share();
        if timing > 0.3 {
            let keys = [Key::InspiratoryTime, Key::Ratio, Key::Flow];
            let key = keys[((timing - 0.3) / 0.7 * 3.0) as usize % 3];
            if !(pressure_control && key == Key::Flow) {
                self.settings.push((key, dice.value(key)));
            }
        }
        if pressure_control {
            self.words.push(("settings", "control", "pressure"));
            self.settings.push((Key::InspiratoryPressure, dice.value(Key::InspiratoryPressure)));
        } else {
            self.words.push(("settings", "control", "volume"));
            self.settings.push((Key::TidalVolume, dice.value(Key::TidalVolume)));
            self.settings.extend(dice.maybe(30.0, Key::Pause));
            if dice.chance(10.0) {
                self.words.push(("settings", "flow_pattern", "decelerating"));
            }
        }
    }

    fn draw_lung(&mut self, dice: &mut Dice, pressure_control: bool) {
        let rate = self.of(Key::Rate).unwrap();
        let peep = self.of(Key::Peep).unwrap();
        if dice.chance(30.0) {
            let total = dice.between(Key::TotalRate, rate, rate + 8.0);
            self.measured.push((Key::TotalRate, total));
        }
        let driving = 6.0 + 18.0 * dice.share();
        let volume = self.of(Key::TidalVolume);
        if pressure_control || dice.chance(50.0) {
            // In pressure control a lung of ordinary compliance; in volume control about what is set.
            let (low, high) = volume.map_or((250.0, 650.0), |set| (0.85 * set, 1.05 * set));
            self.measured.push((Key::ExhaledTidalVolume, dice.between(Key::ExhaledTidalVolume, low, high)));
        }
        if dice.chance(60.0) {
            let most = self.of(Key::InspiratoryPressure).unwrap_or(driving);
            let above = dice.between(Key::Plateau, 0.6 * most, most);
            let plateau = (peep + above).min(Key::Plateau.input().max);
            self.measured.push((Key::Plateau, plateau));
            if !pressure_control && dice.chance(60.0) {
                self.measured.push((Key::Peak, dice.between(Key::Peak, plateau + 1.0, plateau + 20.0)));
            }
            let auto = dice.between(Key::AutoPeep, 0.0, 0.4 * above);
            match dice.share() {
                share if share > 0.75 => self.measured.push((Key::AutoPeep, auto)),
                share if share > 0.5 => self.measured.push((Key::TotalPeep, peep + auto)),
                _ => {}
            }
        }
        for (percent, key) in [
            (20.0, Key::Compliance),
            (30.0, Key::Resistance),
            (20.0, Key::ExpiratoryResistance),
            (5.0, Key::CircuitCompliance),
        ] {
            self.measured.extend(dice.maybe(percent, key));
        }
    }

    fn draw_gas(&mut self, dice: &mut Dice) {
        let paco2 = dice.value(Key::Paco2);
        self.gas.push((Key::Paco2, paco2));
        self.gas.extend(dice.maybe(80.0, Key::Ph));
        self.gas.extend(dice.maybe(50.0, Key::Pao2));
        self.measured.extend(dice.maybe(25.0, Key::Temperature));
        if dice.chance(30.0) {
            self.measured.push((Key::EndTidalCo2, dice.between(Key::EndTidalCo2, 0.5 * paco2, paco2)));
        }
        match dice.share() {
            share if share > 0.85 => self.measured.push((Key::Co2Production, dice.value(Key::Co2Production))),
            share if share > 0.70 => {
                self.measured.push((Key::DeadSpaceFraction, dice.value(Key::DeadSpaceFraction)));
            }
            share if share > 0.55 => {
                let mixed = dice.between(Key::MixedExpiredCo2, 0.3 * paco2, 0.6 * paco2);
                self.measured.push((Key::MixedExpiredCo2, mixed));
            }
            _ => {}
        }
    }

    /// A value drawn.
    pub fn of(&self, key: Key) -> Option<f64> {
        let all = self.patient.iter().chain(&self.settings).chain(&self.measured).chain(&self.gas);
        all.into_iter().find(|(known, _)| *known == key).map(|(_, value)| *value)
    }

    /// Whether volume is controlled.
    pub fn in_volume_control(&self) -> bool {
        self.of(Key::TidalVolume).is_some()
    }

    /// The case file, each number as `spell` writes it.
    pub fn written(&self, spell: &dyn Fn(Key, f64) -> String) -> String {
        let mut text = "format = 1\n".to_owned();
        self.table(&mut text, "[patient]", "patient", &self.patient, spell);
        text.push_str("[[entry]]\n");
        self.entry(&mut text, spell);
        text
    }

    /// The tables of the entry.
    pub fn entry(&self, text: &mut String, spell: &dyn Fn(Key, f64) -> String) {
        self.table(text, "[entry.settings]", "settings", &self.settings, spell);
        self.table(text, "[entry.measured]", "measured", &self.measured, spell);
        self.table(text, "[entry.gas]", "gas", &self.gas, spell);
    }

    fn table(
        &self,
        text: &mut String,
        header: &str,
        table: &str,
        lines: &[(Key, f64)],
        spell: &dyn Fn(Key, f64) -> String,
    ) {
        writeln!(text, "{header}").unwrap();
        for (_, key, word) in self.words.iter().filter(|(of, _, _)| *of == table) {
            writeln!(text, "{key} = \"{word}\"").unwrap();
        }
        for (key, value) in lines {
            writeln!(text, "{} = {}", key.name(), spell(*key, *value)).unwrap();
        }
    }

    /// The case file in default units.
    pub fn text(&self) -> String {
        self.written(&plain)
    }

    /// The record, when everything is accepted.
    pub fn record(&self) -> Option<Record> {
        record(&self.text())
    }
}

/// A number in its default unit.
pub fn plain(_: Key, value: f64) -> String {
    format!("{value:?}")
}

/// Enough cases to find a slip, few enough for a short run; `TIDEWRIGHT_CASES=20` runs twenty times as many.
pub fn cases(count: u32) -> ProptestConfig {
    let times = std::env::var("TIDEWRIGHT_CASES").ok().and_then(|text| text.parse().ok()).unwrap_or(1);
    ProptestConfig {
        cases: count * times,
        max_global_rejects: 10_000_000,
        failure_persistence: None,
        ..ProptestConfig::default()
    }
}
