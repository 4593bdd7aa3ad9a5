//! Faces on paper: an answer or a record as text or JSON, one file each.

pub mod columns;
pub mod course_line;
pub mod document;
pub mod entry_items;
pub mod face;
pub mod fhir;
pub mod forecast_text;
pub mod json;
pub mod patient_lines;
pub mod plan_text;
pub mod reckoning_lines;
pub mod record_brief;
pub mod record_csv;
pub mod record_json;
pub mod record_markdown;
pub mod record_note;
pub mod record_text;
pub mod weaning_lines;

/// The caution at the foot of every screen and note.
pub const SAFETY: &str = "Decision support for trained clinicians. Confirm with a repeat gas. Local protocol and the \
                          responsible clinician decide.";
