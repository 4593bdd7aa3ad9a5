//! A profile file: the band to aim at, the limits, the steps, a unit's own steadiness.

use toml::de::DeTable;

use super::walk::{Value, Walk};
use super::{in_order, syntax};
use crate::case::fault::Place;
use crate::case::problem::Problem;
use crate::case::profile::{Band, Figures, Limit, LimitId, Profile, Steps};
use crate::quantity::input::{Key, Plausible};
use crate::quantity::unit::Dimension;

const TOP: [&str; 7] = ["format", "name", "summary", "target", "limits", "steps", "steadiness"];
const STEADINESS: [&str; 4] = ["gas", "wander_per_hour", "change", "source"];

/// Reads a profile.
///
/// # Errors
/// Everything wrong with it, in the order of the text: not UTF-8, not TOML, unknown keys and limits, values of a wrong
/// kind or unit, bounds that are implausible, crossed or missing.
pub fn profile(bytes: &[u8]) -> Result<Profile, Vec<Problem>> {
    let text = syntax::text(bytes).map_err(|problem| vec![problem])?;
    let (table, slips) = syntax::table(text);
    let mut walk = Walk::default();
    if slips.problems.is_empty() {
        walk.format(text, &table);
    }
    let whole = walk.whole_profile(&table);
    if !slips.problems.is_empty() {
        return Err(super::beside_slips(slips, walk.problems));
    }
    match whole {
        Some(profile) if walk.problems.is_empty() => Ok(profile),
        _ => Err(in_order(walk.problems)),
    }
}

/// What a bound of a limit may be, as its key `name`. Wide: a unit may want a bound far from common practice.
fn bound(id: LimitId, name: &'static str) -> Plausible {
    let (dimension, [min, max], example) = match id {
        LimitId::TidalVolumePerKg => (Dimension::VolumePerMass, [1.0, 20.0], "8"),
        LimitId::Plateau => (Dimension::AirwayPressure, [5.0, 80.0], "30"),
        LimitId::DrivingPressure => (Dimension::AirwayPressure, [2.0, 60.0], "15"),
        LimitId::Rate => (Dimension::Rate, [4.0, 80.0], "35"),
        LimitId::AutoPeep => (Dimension::AirwayPressure, [0.0, 40.0], "5"),
        LimitId::ExpiratoryTimeConstants => (Dimension::Number, [0.5, 20.0], "3"),
        LimitId::MechanicalPower => (Dimension::Power, [1.0, 100.0], "17"),
        LimitId::LoadIndex => (Dimension::Number, [5.0, 400.0], "85"),
        LimitId::Ph => (Dimension::Ph, [6.5, 8.0], "7.2"),
        LimitId::Paco2 => (Dimension::GasPressure, [10.0, 150.0], "80"),
        LimitId::Paco2FallPerHour => (Dimension::PressurePerHour, [0.0, 140.0], "20"),
    };
    Plausible {
        name,
        words: id.words(),
        dimension,
        min,
        max,
        digits: 2,
        example,
        weather: false,
        as_flag: false,
    }
}

fn figure(name: &'static str, words: &'static str, [min, max]: [f64; 2], example: &'static str) -> Plausible {
    Plausible {
        name,
        words,
        dimension: Dimension::Number,
        min,
        max,
        digits: 3,
        example,
        weather: false,
        as_flag: false,
    }
}

impl Walk {
    fn whole_profile(&mut self, table: &DeTable<'_>) -> Option<Profile> {
        let mut name = None;
        let mut summary = String::new();
        let mut target = None;
        let mut limits = Vec::new();
        let mut steps = Steps::default();
        let mut steadiness = None;
        for (key, value) in table {
            match key.get_ref().as_ref() {
                "format" => {}
                "name" => name = self.text(Place::top("", "name"), value, false, "name = \"our-unit\""),
                "summary" => {
                    let example = "summary = \"Injured lungs, low volumes\"";
                    summary = self.text(Place::top("", "summary"), value, false, example).unwrap_or_default();
                }
                "target" => target = self.target(value),
                "limits" => limits = self.limits(value),
                "steps" => self.steps(value, &mut steps),
                "steadiness" => steadiness = self.steadiness(value),
                _ => self.unknown(key, "", &TOP, None),
            }
        }
        if !table.is_empty() {
            if !table.contains_key("name") {
                self.problem(
                    Place::top("", "name"),
                    0..0,
                    "the profile has no name",
                    "add a line such as name = \"our-unit\"",
                );
            }
            if !table.contains_key("target") {
                let help = "add [target] and below it ph = [7.30, 7.45] or paco2 = [35, 45]";
                self.problem(Place::top("target", ""), 0..0, "the profile has no target band", help);
            }
        }
        Some(Profile { name: name?, summary, target: target?, limits, steps, steadiness })
    }

    fn target(&mut self, value: &Value<'_>) -> Option<Band> {
        let place = Place::top("target", "");
        let table = self.table(place, value, "[target]")?;
        let (mut ph, mut paco2) = (None, None);
        for (key, band) in table {
            match key.get_ref().as_ref() {
                "ph" => {
                    let input = Plausible { example: "[7.30, 7.45]", ..bound(LimitId::Ph, "ph") };
                    ph = Some(self.pair(&input, Place::top("target", "ph"), band));
                }
                "paco2" => {
                    let input = Plausible { example: "[35, 45]", ..bound(LimitId::Paco2, "paco2") };
                    paco2 = Some(self.pair(&input, Place::top("target", "paco2"), band));
                }
                _ => self.unknown(key, "[target]", &["ph", "paco2"], None),
            }
        }
        let help = "keep one of ph = [7.30, 7.45] and paco2 = [35, 45] under [target]";
        match (ph, paco2) {
            (Some(band), None) => band.map(Band::Ph),
            (None, Some(band)) => band.map(Band::Paco2),
            (Some(_), Some(_)) => {
                self.problem(place, value.span(), "the target is given as a pH and as a PaCO2", help);
                None
            }
            (None, None) => {
                self.problem(place, value.span(), "the target band is not given", help);
                None
            }
        }
    }

    /// The limits, in the order they are shown.
    fn limits(&mut self, value: &Value<'_>) -> Vec<Limit> {
        let Some(table) = self.table(Place::top("limits", ""), value, "[limits.plateau]") else {
            return Vec::new();
        };
        let mut limits = Vec::new();
        for (key, value) in table {
            match LimitId::ALL.into_iter().find(|id| id.key() == key.get_ref()) {
                Some(id) => limits.extend(self.limit(id, value)),
                None => self.unknown(key, "[limits]", &LimitId::ALL.map(LimitId::key), None),
            }
        }
        limits.sort_by_key(|limit: &Limit| limit.id);
        limits
    }

    fn limit(&mut self, id: LimitId, value: &Value<'_>) -> Option<Limit> {
        let place = Place::top("limits", id.key());
        let header = format!("[limits.{}]", id.key());
        let table = self.table(place, value, &header)?;
        let (mut min, mut max, mut source) = (None, None, String::new());
        for (key, value) in table {
            match key.get_ref().as_ref() {
                "min" => min = self.number(&bound(id, "min"), place, value),
                "max" => max = self.number(&bound(id, "max"), place, value),
                "source" => {
                    source = self.text(place, value, false, "source = \"our protocol\"").unwrap_or_default();
                }
                _ => self.unknown(key, &header, &["min", "max", "source"], None),
            }
        }
        if !table.contains_key("min") && !table.contains_key("max") {
            let help =
                format!("add min or max below {header}, for example max = {}", bound(id, "max").example);
            self.problem(place, value.span(), format!("the limit on {} has no bound", id.words()), help);
        }
        if let (Some(low), Some(high)) = (min, max)
            && low > high
        {
            let shown = [low, high].map(|value| bound(id, "max").shown(value));
            let message =
                format!("the limit on {} has a min above its max: {}", id.words(), shown.join(" and "));
            self.problem(place, value.span(), message, "exchange the two, or correct the one that is wrong");
        }
        Some(Limit { id, min, max, source })
    }

    fn steps(&mut self, value: &Value<'_>, steps: &mut Steps) {
        let Some(table) = self.table(Place::top("steps", ""), value, "[steps]") else { return };
        for (key, value) in table {
            let (input, step) = match key.get_ref().as_ref() {
                "rate" => (Key::Rate.input(), &mut steps.rate_per_min),
                "tidal_volume" => (Key::TidalVolume.input(), &mut steps.tidal_volume_ml),
                "inspiratory_pressure" => {
                    (Key::InspiratoryPressure.input(), &mut steps.inspiratory_pressure_cmh2o)
                }
                _ => {
                    self.unknown(key, "[steps]", &["rate", "tidal_volume", "inspiratory_pressure"], None);
                    continue;
                }
            };
            let (words, example, [min, max]) = match input.key {
                Key::Rate => ("step of the rate", "1", [0.1, 10.0]),
                Key::TidalVolume => ("step of the tidal volume", "10", [1.0, 100.0]),
                _ => ("step of the inspiratory pressure", "1", [0.1, 10.0]),
            };
            let plausible = Plausible { words, min, max, example, ..input.plausible() };
            if let Some(read) = self.number(&plausible, Place::top("steps", input.name), value) {
                *step = read;
            }
        }
    }

    /// The ranges that `review` fits within, and a little beyond.
    fn steadiness(&mut self, value: &Value<'_>) -> Option<(Figures, String)> {
        let place = Place::top("steadiness", "");
        let table = self.table(place, value, "[steadiness]")?;
        let mut gas = None;
        let mut wander_per_hour = None;
        let mut change = None;
        let mut source = String::new();
        for (key, value) in table {
            let at = |key: &'static str| Place::top("steadiness", key);
            match key.get_ref().as_ref() {
                "gas" => {
                    let input = figure("gas", "spread of a gas", [0.005, 1.0], "0.12");
                    gas = self.number(&input, at("gas"), value);
                }
                "wander_per_hour" => {
                    let input = figure("wander_per_hour", "wander in an hour", [0.0, 1.0], "0.03");
                    wander_per_hour = self.number(&input, at("wander_per_hour"), value);
                }
                "change" => {
                    let input = figure("change", "spread per change", [0.0, 3.0], "0.45");
                    change = self.number(&input, at("change"), value);
                }
                "source" => {
                    let example = "source = \"our own 400 gases, 2025\"";
                    source = self.text(at("source"), value, false, example).unwrap_or_default();
                }
                _ => self.unknown(key, "[steadiness]", &STEADINESS, None),
            }
        }
        let missing: Vec<&str> =
            STEADINESS.into_iter().take(3).filter(|key| !table.contains_key(*key)).collect();
        if !missing.is_empty() {
            let message = format!("the steadiness lacks {}", missing.join(" and "));
            self.problem(
                place,
                value.span(),
                message,
                "the three figures belong together: gas, wander_per_hour and change",
            );
        }
        Some((Figures { gas: gas?, wander_per_hour: wander_per_hour?, change: change? }, source))
    }
}
