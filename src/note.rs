//! Faces on paper: an answer or a record as text or JSON, one file each.

pub mod columns;
pub mod course_line;
pub mod face;
pub mod forecast_text;
pub mod json;
pub mod patient_lines;
pub mod plan_text;

/// The caution at the foot of every screen and note.
pub const SAFETY: &str = "Decision support for trained clinicians. Confirm with a repeat gas. Local protocol and the \
                          responsible clinician decide.";
