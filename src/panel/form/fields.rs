//! The fields of the form, in parts.

use crate::quantity::input::Key;
use crate::quantity::show::PressureUnit;
use crate::quantity::unit::Dimension;

/// A field.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum FieldId {
    /// When the gas was drawn.
    DrawnAt,
    /// A number of the table of inputs.
    Number(Key),
    /// Volume control, pressure control or support.
    Control,
    /// Free text.
    Text,
    /// Initials or role.
    By,
}

/// A part of the form.
#[derive(Debug, Clone, Copy)]
pub struct Part {
    /// Its heading.
    pub name: &'static str,
    /// Its fields.
    pub fields: &'static [FieldId],
}

/// The parts, in the order they are walked.
pub static PARTS: [Part; 4] = [
    Part {
        name: "Gas",
        fields: &[
            FieldId::DrawnAt,
            FieldId::Number(Key::Ph),
            FieldId::Number(Key::Paco2),
            FieldId::Number(Key::Pao2),
            FieldId::Number(Key::Bicarbonate),
        ],
    },
    Part {
        name: "Measured",
        fields: &[
            FieldId::Number(Key::TotalRate),
            FieldId::Number(Key::ExhaledTidalVolume),
            FieldId::Number(Key::Plateau),
            FieldId::Number(Key::Peak),
            FieldId::Number(Key::TotalPeep),
            FieldId::Number(Key::AutoPeep),
            FieldId::Number(Key::EndTidalCo2),
            FieldId::Number(Key::DeadSpaceFraction),
            FieldId::Number(Key::MixedExpiredCo2),
            FieldId::Number(Key::Co2Production),
            FieldId::Number(Key::Temperature),
            FieldId::Number(Key::Spo2),
            FieldId::Number(Key::Compliance),
            FieldId::Number(Key::Resistance),
            FieldId::Number(Key::ExpiratoryResistance),
        ],
    },
    Part {
        name: "Settings",
        fields: &[
            FieldId::Control,
            FieldId::Number(Key::Rate),
            FieldId::Number(Key::TidalVolume),
            FieldId::Number(Key::InspiratoryPressure),
            FieldId::Number(Key::Peep),
            FieldId::Number(Key::Fio2),
            FieldId::Number(Key::InspiratoryTime),
            FieldId::Number(Key::Flow),
            FieldId::Number(Key::Ratio),
            FieldId::Number(Key::Pause),
            FieldId::Number(Key::ApparatusDeadSpace),
        ],
    },
    Part { name: "Note", fields: &[FieldId::Text, FieldId::By] },
];

impl FieldId {
    /// The field of a key of the case file.
    pub fn at(table: &str, key: &str) -> Option<Self> {
        match (table, key) {
            ("gas", "drawn_at") => Some(Self::DrawnAt),
            ("settings", "control") => Some(Self::Control),
            ("note", "text") => Some(Self::Text),
            _ => Key::find(table, key)
                .map(Self::Number)
                .filter(|id| PARTS.iter().any(|part| part.fields.contains(id))),
        }
    }

    /// Its name in what is kept for recovery.
    pub const fn name(self) -> &'static str {
        match self {
            Self::DrawnAt => "drawn_at",
            Self::Number(key) => key.name(),
            Self::Control => "control",
            Self::Text => "text",
            Self::By => "by",
        }
    }

    /// What a clinician calls it.
    pub fn words(self) -> &'static str {
        match self {
            Self::DrawnAt => "drawn at",
            Self::Number(Key::InspiratoryPressure) => "inspiratory pressure",
            Self::Number(Key::DeadSpaceFraction) => "VD/VT",
            Self::Number(Key::Compliance) => "compliance",
            Self::Number(Key::Plateau) => "plateau pressure",
            Self::Number(Key::Peak) => "peak pressure",
            Self::Number(key) => key.input().words,
            Self::Control => "control",
            Self::Text => "note",
            Self::By => "by",
        }
    }

    /// The unit of a plain number, or what else is understood.
    pub fn hint(self, unit: PressureUnit) -> String {
        match self {
            Self::DrawnAt => "08:10; empty: now".to_owned(),
            Self::Number(key) => {
                let input = key.input();
                let example = input.example.trim_matches('"');
                match (input.dimension, unit) {
                    (Dimension::GasPressure, unit) => unit.word().to_owned(),
                    _ if input.unit().is_empty() => format!("e.g. {example}"),
                    _ => input.unit().to_owned(),
                }
            }
            Self::Control => "volume, pressure or support".to_owned(),
            Self::Text => "free text".to_owned(),
            Self::By => "initials or role".to_owned(),
        }
    }
}
