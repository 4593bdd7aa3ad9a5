//! The one table of lines: what can be turned, in which unit, by which step, and what it means.

mod typed;
mod value;

pub use typed::{Read, Slip, quantity, read};
pub use value::{Held, held, is_moved, put, reset, value};

use crate::case::entry::Control;
use crate::case::settings::Timing;
use crate::planning::dialled::Dialled;
use crate::quantity::input::Key;

/// A line of the settings.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum LineId {
    /// Volume or pressure control.
    Control,
    /// Set rate.
    Rate,
    /// Set tidal volume (volume control).
    TidalVolume,
    /// Inspiratory pressure above PEEP (pressure control).
    InspiratoryPressure,
    /// Set PEEP.
    Peep,
    /// Inspired oxygen.
    Fio2,
    /// What times inspiration: inspiratory time, flow or I:E.
    Timing,
    /// End-inspiratory pause (volume control).
    Pause,
    /// Apparatus dead space.
    Apparatus,
    /// What if CO2 output were different.
    Co2Output,
    /// What if compliance were different.
    Compliance,
    /// What if resistance were different.
    Resistance,
    /// The PaCO2 or pH aimed at.
    Goal,
}

/// One line.
#[derive(Debug, Clone, Copy)]
pub struct LineRow {
    /// Which.
    pub id: LineId,
    /// Its name, at most 20 characters.
    pub name: &'static str,
    /// What it means and what turning it does, for the help.
    pub meaning: &'static str,
    /// The relation that the forecast uses, and where it comes from.
    pub source: &'static str,
}

/// Every line, in the order they are shown.
pub static LINES: [LineRow; 13] = [
    LineRow {
        id: LineId::Control,
        name: "control",
        meaning: "Volume or pressure control. A switch keeps the tidal volume that the patient gets.",
        source: "pressure control: VT = C·P·(1 − a)(1 − b)/(1 − a·b), a and b what is left of filling and emptying; algebra",
    },
    LineRow {
        id: LineId::Rate,
        name: "rate",
        meaning: "Set rate. More breaths move more air, but each pays for its dead space and has less time to leave.",
        source: "PaCO2 = K·V'CO2/V'A, V'A = rate·(VT − VDs)·(1 − f): alveolar ventilation equation",
    },
    LineRow {
        id: LineId::TidalVolume,
        name: "tidal volume",
        meaning: "Set tidal volume. A larger breath loses a smaller share to the airway and raises driving pressure.",
        source: "driving pressure = VT/C; PaCO2 as for the rate",
    },
    LineRow {
        id: LineId::InspiratoryPressure,
        name: "inspiratory pressure",
        meaning: "Inspiratory pressure above PEEP. The tidal volume follows from it, the lung and the time given.",
        source: "one linear compartment, filled and emptied passively: algebra",
    },
    LineRow {
        id: LineId::Peep,
        name: "PEEP",
        meaning: "Set PEEP. It moves pressures, not the forecast PaCO2: recruitment is not modelled.",
        source: "plateau = total PEEP + VT/C",
    },
    LineRow {
        id: LineId::Fio2,
        name: "FiO2",
        meaning: "Inspired oxygen. It moves alveolar PO2 only; PaO2 is not forecast.",
        source: "alveolar gas equation with an exchange ratio of 0.8",
    },
    LineRow {
        id: LineId::Timing,
        name: "inspiratory time",
        meaning: "What times inspiration: a time, a flow or I:E, whichever the ventilator holds when the rate changes. \
                  Type 0.9 s, 50 L/min or 1:2 to change which.",
        source: "expiratory time = 60/rate − inspiratory time",
    },
    LineRow {
        id: LineId::Pause,
        name: "pause",
        meaning: "End-inspiratory pause, part of the inspiratory time.",
        source: "flow = VT/(inspiratory time − pause)",
    },
    LineRow {
        id: LineId::Apparatus,
        name: "apparatus",
        meaning: "Dead space of apparatus between the wye and the airway: exchanger, catheter mount, elbow.",
        source: "a change of apparatus changes the series dead space by the same volume",
    },
    LineRow {
        id: LineId::Co2Output,
        name: "if CO2 output",
        meaning: "What if the patient made more or less CO2: fever, shivering, sedation, feeding. Type 160 or x0.9.",
        source: "PaCO2 is proportional to CO2 output; 13 % more per °C of fever: from memory",
    },
    LineRow {
        id: LineId::Compliance,
        name: "if compliance",
        meaning: "What if the respiratory-system compliance were different: recruitment, drainage, position.",
        source: "driving pressure = VT/C",
    },
    LineRow {
        id: LineId::Resistance,
        name: "if resistance",
        meaning: "What if the inspiratory resistance were different: suction, a bronchodilator. The expiratory one follows \
                  only where it is assumed.",
        source: "time constant = resistance·compliance",
    },
    LineRow {
        id: LineId::Goal,
        name: "goal",
        meaning: "The PaCO2 or pH aimed at. Type 50, 6.5 kPa or pH 7.32; Backspace returns to the band of the profile.",
        source: "a pH goal is turned into PaCO2 at the patient's base excess: Henderson–Hasselbalch, Siggaard-Andersen",
    },
];

impl LineId {
    /// Its row.
    pub fn row(self) -> &'static LineRow {
        // One row an id: kept by a test below.
        LINES.iter().find(|row| row.id == self).unwrap_or(&FIRST)
    }

    /// The input whose range, step and digits it shares; `None` for control and goal.
    pub const fn key(self, timing: Timing) -> Option<Key> {
        Some(match self {
            Self::Control | Self::Goal => return None,
            Self::Rate => Key::Rate,
            Self::TidalVolume => Key::TidalVolume,
            Self::InspiratoryPressure => Key::InspiratoryPressure,
            Self::Peep => Key::Peep,
            Self::Fio2 => Key::Fio2,
            Self::Timing => match timing {
                Timing::InspiratoryTime(_) => Key::InspiratoryTime,
                Timing::Flow(_) => Key::Flow,
                Timing::Ratio(_) => Key::Ratio,
            },
            Self::Pause => Key::Pause,
            Self::Apparatus => Key::ApparatusDeadSpace,
            Self::Co2Output => Key::Co2Production,
            Self::Compliance => Key::Compliance,
            Self::Resistance => Key::Resistance,
        })
    }

    /// Whether it is there under this control.
    pub const fn shown_in(self, control: Control) -> bool {
        match self {
            Self::TidalVolume | Self::Pause => matches!(control, Control::Volume),
            Self::InspiratoryPressure => matches!(control, Control::Pressure),
            Self::Control
            | Self::Rate
            | Self::Peep
            | Self::Fio2
            | Self::Timing
            | Self::Apparatus
            | Self::Co2Output
            | Self::Compliance
            | Self::Resistance
            | Self::Goal => true,
        }
    }

    /// Its name, given what times inspiration.
    pub fn name(self, timing: Timing) -> &'static str {
        match (self, timing) {
            (Self::Timing, Timing::Flow(_)) => "inspiratory flow",
            (Self::Timing, Timing::Ratio(_)) => "I:E",
            _ => self.row().name,
        }
    }

    /// True for what dialling does not make so.
    pub const fn is_what_if(self) -> bool {
        matches!(self, Self::Co2Output | Self::Compliance | Self::Resistance)
    }
}

static FIRST: LineRow = {
    let [first, ..] = LINES;
    first
};

/// The lines that are there for settings.
pub fn shown(dialled: &Dialled) -> impl Iterator<Item = LineId> + use<> {
    let control = dialled.settings.control();
    LINES.iter().map(|row| row.id).filter(move |id| id.shown_in(control))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn each_line_has_a_row_of_its_own() {
        for row in &LINES {
            assert_eq!(row.id.row().name, row.name);
            assert!(row.name.chars().count() <= 20 && !row.meaning.is_empty() && !row.source.is_empty());
        }
    }
}
