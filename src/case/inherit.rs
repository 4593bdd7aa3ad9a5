//! Settings in force: a new entry inherits what it does not repeat.

use super::entry::{Control, Entry, FlowPattern};
use super::fault::{Fault, Place};
use super::settings::{InForce, Inflation, Settings, Timing};

/// A setting in force and where it was typed.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Held<T> {
    /// The value.
    pub value: T,
    /// Where it stands in the file; for a control that was inferred, what it was inferred from.
    pub place: Place,
}

/// Everything in force after an entry, each with the place it comes from.
#[derive(Debug, Clone, Default, PartialEq)]
pub(super) struct Carried {
    pub control: Option<Held<Control>>,
    pub rate_per_min: Option<Held<f64>>,
    pub tidal_volume_ml: Option<Held<f64>>,
    pub inspiratory_pressure_cmh2o: Option<Held<f64>>,
    pub peep_cmh2o: Option<Held<f64>>,
    pub fio2: Option<Held<f64>>,
    pub timing: Option<Held<Timing>>,
    pub pause_s: Option<Held<f64>>,
    pub flow_pattern: Option<Held<FlowPattern>>,
    pub apparatus_dead_space_ml: Option<Held<f64>>,
}

fn value<T: Copy>(held: Option<Held<T>>) -> Option<T> {
    held.map(|held| held.value)
}

impl Carried {
    /// Takes over what `entry` types; `place` tells where a settings key of it stands.
    pub(super) fn advance(&mut self, entry: &Entry, place: impl Fn(&'static str) -> Place) -> Vec<Fault> {
        let typed = &entry.settings;
        if let Some(control) = typed.control {
            self.switch_to(Held { value: control, place: place("control") });
        }
        let mut faults = Vec::new();
        let number = |held: &mut Option<Held<f64>>, typed: Option<f64>, key: &'static str| {
            if let Some(value) = typed {
                *held = Some(Held { value, place: place(key) });
            }
        };
        number(&mut self.rate_per_min, typed.rate_per_min, "rate");
        number(&mut self.tidal_volume_ml, typed.tidal_volume_ml, "tidal_volume");
        number(
            &mut self.inspiratory_pressure_cmh2o,
            typed.inspiratory_pressure_cmh2o,
            "inspiratory_pressure",
        );
        number(&mut self.peep_cmh2o, typed.peep_cmh2o, "peep");
        number(&mut self.fio2, typed.fio2, "fio2");
        number(&mut self.pause_s, typed.pause_s, "pause");
        number(&mut self.apparatus_dead_space_ml, typed.apparatus_dead_space_ml, "apparatus_dead_space");
        if let Some(pattern) = typed.flow_pattern {
            self.flow_pattern = Some(Held { value: pattern, place: place("flow_pattern") });
        }
        let timings = [
            ("inspiratory_time", typed.inspiratory_time_s.map(Timing::InspiratoryTime)),
            ("flow", typed.flow_l_min.map(Timing::Flow)),
            ("ratio", typed.ratio.map(Timing::Ratio)),
        ];
        let named: Vec<Held<Timing>> = timings
            .into_iter()
            .filter_map(|(key, timing)| timing.map(|value| Held { value, place: place(key) }))
            .collect();
        if let Some(first) = named.first() {
            self.timing = Some(*first);
        }
        if named.len() > 1 {
            faults.push(two_timings(&named));
        }
        if self.control.is_none() {
            faults.extend(self.infer_control(entry, &place));
        }
        faults.extend(self.misplaced(entry, &place));
        faults
    }

    /// Switching to pressure control: the breath has no flow, pause or pattern to set any more, and a held flow
    /// becomes the inspiratory time that it gave.
    fn switch_to(&mut self, control: Held<Control>) {
        if control.value == Control::Pressure {
            if let Some(Held { value: Timing::Flow(l_min), place }) = self.timing {
                let pause_s = value(self.pause_s).unwrap_or(0.0);
                self.timing = value(self.tidal_volume_ml).map(|ml| Held {
                    value: Timing::InspiratoryTime(ml / (l_min * 1000.0 / 60.0) + pause_s),
                    place,
                });
            }
            self.pause_s = None;
            self.flow_pattern = None;
        }
        self.control = Some(control);
    }

    /// Control never given: a tidal volume means volume control, an inspiratory pressure pressure control.
    fn infer_control(&mut self, entry: &Entry, place: &impl Fn(&'static str) -> Place) -> Option<Fault> {
        if entry.settings.tidal_volume_ml.is_some() && entry.settings.inspiratory_pressure_cmh2o.is_some() {
            return Some(Fault::new(
                [place("inspiratory_pressure"), place("tidal_volume"), place("control")],
                "a tidal volume and an inspiratory pressure are both set, and no control is named",
                "say which one the ventilator delivers: control = \"volume\" or control = \"pressure\", and take the other away",
            ));
        }
        self.control = match (self.tidal_volume_ml, self.inspiratory_pressure_cmh2o) {
            (Some(held), _) => Some(Held { value: Control::Volume, place: held.place }),
            (None, Some(held)) => Some(Held { value: Control::Pressure, place: held.place }),
            (None, None) => None,
        };
        None
    }

    /// Settings typed that the control in force does not have.
    fn misplaced(&self, entry: &Entry, place: &impl Fn(&'static str) -> Place) -> Vec<Fault> {
        let Some(control) = self.control else { return Vec::new() };
        let typed = &entry.settings;
        let fault = |key: &'static str, message: String, help: &str| {
            Fault::new([place(key), control.place, place("control")], message, help)
        };
        let mut faults = Vec::new();
        if control.value == Control::Volume {
            if typed.inspiratory_pressure_cmh2o.is_some() {
                faults.push(fault(
                    "inspiratory_pressure",
                    "inspiratory_pressure is set, but the control in force is volume".to_owned(),
                    "if the ventilator was switched, add control = \"pressure\"; a measured pressure goes under measured as plateau or peak",
                ));
            }
            return faults;
        }
        let mode = if control.value == Control::Pressure { "pressure" } else { "support" };
        let says = |key: &str| format!("{key} is set, but the control in force is {mode}");
        if typed.tidal_volume_ml.is_some() {
            faults.push(fault(
                "tidal_volume",
                says("tidal_volume"),
                "chart the volume that comes back as exhaled_tidal_volume under measured; if the ventilator was switched, add control = \"volume\"",
            ));
        }
        if typed.flow_l_min.is_some() {
            faults.push(fault(
                "flow",
                says("flow"),
                "the ventilator sets no flow here: chart inspiratory_time = \"0.9 s\" or ratio = \"1:2\" instead",
            ));
        }
        if typed.pause_s.is_some_and(|pause_s| pause_s > 0.0) {
            faults.push(fault(
                "pause",
                says("pause"),
                "a pause belongs to volume control: leave it out, or write pause = 0",
            ));
        }
        if typed.flow_pattern.is_some() {
            faults.push(fault(
                "flow_pattern",
                says("flow_pattern"),
                "a flow pattern belongs to volume control: leave it out",
            ));
        }
        faults
    }

    /// The settings in force, complete, or the key that is missing.
    pub(super) fn in_force(&self) -> InForce {
        let Some(control) = value(self.control) else { return InForce::Missing("control") };
        let peep_cmh2o = value(self.peep_cmh2o);
        let fio2 = value(self.fio2);
        let inspiratory_pressure_cmh2o = value(self.inspiratory_pressure_cmh2o);
        if control == Control::Support {
            return InForce::Support { inspiratory_pressure_cmh2o, peep_cmh2o, fio2 };
        }
        let Some(rate_per_min) = value(self.rate_per_min) else { return InForce::Missing("rate") };
        let inflation = if control == Control::Volume {
            let Some(tidal_volume_ml) = value(self.tidal_volume_ml) else {
                return InForce::Missing("tidal_volume");
            };
            Inflation::Volume {
                tidal_volume_ml,
                pause_s: value(self.pause_s).unwrap_or(0.0),
                flow_pattern: value(self.flow_pattern).unwrap_or_default(),
            }
        } else {
            let Some(inspiratory_pressure_cmh2o) = inspiratory_pressure_cmh2o else {
                return InForce::Missing("inspiratory_pressure");
            };
            Inflation::Pressure { inspiratory_pressure_cmh2o }
        };
        InForce::Mandatory(Settings {
            inflation,
            rate_per_min,
            peep_cmh2o,
            fio2,
            timing: value(self.timing).unwrap_or(Timing::Ratio(2.0)),
            timing_assumed: self.timing.is_none(),
            apparatus_dead_space_ml: value(self.apparatus_dead_space_ml).unwrap_or(0.0),
            apparatus_assumed: self.apparatus_dead_space_ml.is_none(),
        })
    }
}

fn two_timings(named: &[Held<Timing>]) -> Fault {
    let keys: Vec<&str> = named.iter().map(|held| held.place.key).collect();
    // The last one is shown first: it is the one that was added to a file that was right before.
    let places: Vec<Place> = named.iter().rev().map(|held| held.place).collect();
    Fault::new(
        places,
        format!(
            "{} are given together, and each of them fixes how long inspiration lasts",
            keys.join(" and ")
        ),
        "keep the one that the ventilator holds when rate or volume changes, and take the other away",
    )
}
