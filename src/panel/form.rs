//! The form: a gas, measurements and settings typed field by field, saved as one entry.

mod fields;
mod read;

pub use fields::{FieldId, PARTS, Part};

use tui_input::{Input, InputRequest};

use super::line::Slip;
use super::state::draft_of;
use crate::case::entry::Entry;
use crate::case::moment::Moment;
use crate::case::record::Record;
use crate::quantity::show::PressureUnit;

/// One field.
#[derive(Debug, Clone)]
pub struct Field {
    /// Which.
    pub id: FieldId,
    /// What is typed.
    pub input: Input,
}

/// The form.
#[derive(Debug, Clone)]
pub struct Form {
    /// The fields, in order.
    pub fields: Vec<Field>,
    /// The field typed in; one past the last is the line that charts.
    pub at: usize,
    /// What is wrong with fields once charting was asked for.
    pub slips: Vec<(FieldId, Slip)>,
    /// What is wrong with the whole.
    pub whole: Vec<Slip>,
}

impl Default for Form {
    fn default() -> Self {
        let fields = PARTS
            .iter()
            .flat_map(|part| part.fields)
            .map(|id| Field { id: *id, input: Input::default() })
            .collect();
        Self { fields, at: 0, slips: Vec::new(), whole: Vec::new() }
    }
}

impl Form {
    /// Whether anything is typed.
    pub fn holds_anything(&self) -> bool {
        self.fields.iter().any(|field| !field.input.value().trim().is_empty())
    }

    /// Whether the line that charts is marked.
    pub fn at_end(&self) -> bool {
        self.at >= self.fields.len()
    }

    /// The field typed in.
    pub fn field(&self) -> Option<&Field> {
        self.fields.get(self.at)
    }

    /// Edits the field typed in.
    pub fn edit(&mut self, request: InputRequest) {
        let at = self.at;
        if let Some(field) = self.fields.get_mut(at) {
            field.input.handle(request);
            let id = field.id;
            self.slips.retain(|(slip, _)| *slip != id);
            self.whole.clear();
        }
    }

    /// Puts a text into a field, as recovery does.
    pub fn put(&mut self, name: &str, text: &str) {
        if let Some(field) = self.fields.iter_mut().find(|field| field.id.name() == name) {
            field.input = Input::new(text.to_owned());
        }
    }

    /// Moves by fields.
    pub fn step(&mut self, by: isize) {
        self.at = self.at.saturating_add_signed(by).min(self.fields.len());
    }

    /// Moves to the first field of the next or previous part; past the last part is the line that charts.
    pub fn part(&mut self, by: isize) {
        let mut starts: Vec<usize> = PARTS
            .iter()
            .scan(0, |at, part| {
                let start = *at;
                *at += part.fields.len();
                Some(start)
            })
            .collect();
        starts.push(self.fields.len());
        let here = starts.iter().rposition(|start| *start <= self.at).unwrap_or(0);
        let next = here.saturating_add_signed(by).min(starts.len() - 1);
        self.at = starts.get(next).copied().unwrap_or(0);
    }

    /// What is wrong with the text of a field, if it is.
    pub fn slip_of(&self, field: &Field, clock: Moment, unit: PressureUnit) -> Option<Slip> {
        let told = self.slips.iter().find(|(id, _)| *id == field.id).map(|(_, slip)| slip.clone());
        told.or_else(|| read::field(field.id, field.input.value(), clock, unit, &mut Entry::default()).err())
    }

    /// The entry that the fields make, checked with the record it will stand in. What is wrong is kept in the form.
    pub fn entry(&mut self, record: &Record, clock: Moment, unit: PressureUnit) -> Option<(Entry, Record)> {
        self.slips.clear();
        self.whole.clear();
        let mut entry = Entry { at: Some(clock), ..Entry::default() };
        for field in &self.fields {
            if let Err(slip) = read::field(field.id, field.input.value(), clock, unit, &mut entry) {
                self.slips.push((field.id, slip));
            }
        }
        if !self.holds_anything() {
            self.whole.push(Slip {
                message: "nothing is typed".to_owned(),
                help: "type at least one value, or press Esc".to_owned(),
            });
        }
        if !self.slips.is_empty() || !self.whole.is_empty() {
            self.mark_first_slip();
            return None;
        }
        let mut draft = draft_of(record);
        draft.entries.push(entry.clone());
        let number = draft.entries.len();
        match Record::check(draft) {
            Ok(record) => Some((entry, record)),
            Err(faults) => {
                for fault in faults {
                    let slip = Slip { message: fault.message, help: fault.help };
                    let mut here = fault.places.iter().filter(|place| place.entry == Some(number));
                    let field = here.find_map(|place| FieldId::at(place.table, place.key));
                    match field {
                        Some(id) => self.slips.push((id, slip)),
                        None => self.whole.push(slip),
                    }
                }
                self.mark_first_slip();
                None
            }
        }
    }

    fn mark_first_slip(&mut self) {
        let first = self.fields.iter().position(|field| self.slips.iter().any(|(id, _)| *id == field.id));
        self.at = first.unwrap_or(self.at);
    }
}
