//! What a key, the mouse or a finished effect asks for.

use tui_input::InputRequest;

use super::line::LineId;
use super::state::View;
use crate::case::record::Record;

/// One thing to do.
#[derive(Debug, Clone, PartialEq)]
pub enum Action {
    /// Mark the line this many places on.
    Mark(isize),
    /// Mark this line.
    MarkLine(LineId),
    /// Turn the marked line by this many steps.
    Turn(i32),
    /// Turn it by this many big steps.
    TurnBig(i32),
    /// Mark this line and turn it, as the wheel does.
    TurnLine(LineId, i32),
    /// Begin to type a value with this letter.
    Begin(char),
    /// Fit the marked line to the goal.
    Fit,
    /// Dial the gentlest pair.
    Gentlest,
    /// Everything back to now.
    BackToNow,
    /// The marked line back to now.
    BackLine,
    /// Undo.
    Undo,
    /// Redo.
    Redo,
    /// Ask which slot.
    Slots,
    /// Keep in this slot, or bring back from it.
    Slot(usize),
    /// The view this many places on.
    StepView(isize),
    /// This view.
    OpenView(View),
    /// The view over the whole screen, and back.
    Large,
    /// Scroll the view by this many rows.
    Scroll(isize),
    /// Enter a gas and readings.
    Form,
    /// Chart the trial.
    Chart,
    /// Choose a profile.
    Profiles,
    /// Write the note.
    Note,
    /// The note to a file.
    NoteToFile,
    /// The note to the terminal's clipboard.
    NoteToClipboard,
    /// Look up keys and lines.
    Help,
    /// Leave.
    Leave,
    /// Leave without charting what was typed.
    LeaveAnyway,
    /// Stop for the shell, to be resumed.
    Suspend,
    /// Listen to the mouse, or leave it to the terminal.
    Mouse,
    /// Enter.
    Accept,
    /// Esc.
    Cancel,
    /// Move within a table, a list or a form.
    Move {
        /// Columns to the right.
        across: isize,
        /// Rows down.
        down: isize,
    },
    /// To the next part of a form, or the previous one.
    Part(isize),
    /// To the line that charts.
    Last,
    /// Switch what stands beside the question.
    Switch,
    /// Edit the field that is typed in.
    Edit(InputRequest),
    /// Text pasted.
    Paste(String),
    /// Take this pair from the table.
    Take {
        /// Rate, 1/min.
        rate_per_min: f64,
        /// Volume (mL) or inspiratory pressure (cmH2O).
        volume: f64,
    },
    /// An entry was charted.
    Charted {
        /// The record as it now is.
        record: Box<Record>,
        /// Its file.
        path: std::path::PathBuf,
        /// How many entries someone else had added since it was read.
        meanwhile: usize,
    },
    /// Something done: a sentence.
    Done(String),
    /// Something failed: a sentence.
    Failed(String),
}
