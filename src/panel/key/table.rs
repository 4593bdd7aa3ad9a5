//! The rows of the table of keys.

use ratatui::crossterm::event::KeyCode;

use super::{KeyRow, Press, When};
use crate::panel::action::Action;
use crate::panel::state::View;

const fn row(
    when: When,
    shown: &'static str,
    does: &'static str,
    foot: &'static str,
    presses: &'static [(Press, Action)],
) -> KeyRow {
    KeyRow { when, shown, does, foot, presses }
}

const UP: Press = Press::Code(KeyCode::Up);
const DOWN: Press = Press::Code(KeyCode::Down);
const LEFT: Press = Press::Code(KeyCode::Left);
const RIGHT: Press = Press::Code(KeyCode::Right);
const ENTER: Press = Press::Code(KeyCode::Enter);
const ESC: Press = Press::Code(KeyCode::Esc);
const TAB: Press = Press::Code(KeyCode::Tab);
const BACK_TAB: Press = Press::Code(KeyCode::BackTab);
const PAGE_UP: Press = Press::Code(KeyCode::PageUp);
const PAGE_DOWN: Press = Press::Code(KeyCode::PageDown);

const fn key(letter: char) -> Press {
    Press::Sign(letter)
}

/// Every key.
pub static KEYS: &[KeyRow] = &[
    row(
        When::Look,
        "↑ ↓ j k",
        "choose a line",
        "",
        &[
            (UP, Action::Mark(-1)),
            (DOWN, Action::Mark(1)),
            (key('k'), Action::Mark(-1)),
            (key('j'), Action::Mark(1)),
        ],
    ),
    row(
        When::Look,
        "← → h l",
        "turn the marked line by the ventilator's own step",
        "turn",
        &[
            (LEFT, Action::Turn(-1)),
            (RIGHT, Action::Turn(1)),
            (key('h'), Action::Turn(-1)),
            (key('l'), Action::Turn(1)),
        ],
    ),
    row(
        When::Look,
        "H L",
        "turn it by five steps; Shift with an arrow does the same",
        "",
        &[
            (Press::Shift(KeyCode::Left), Action::TurnBig(-1)),
            (Press::Shift(KeyCode::Right), Action::TurnBig(1)),
            (key('H'), Action::TurnBig(-1)),
            (key('L'), Action::TurnBig(1)),
        ],
    ),
    row(When::Look, "0–9 Enter", "type the value, with any unit, then Enter", "", &[]),
    row(
        When::Look,
        "Backspace",
        "the marked line back to now",
        "",
        &[
            (Press::Code(KeyCode::Backspace), Action::BackLine),
            (Press::Code(KeyCode::Delete), Action::BackLine),
        ],
    ),
    row(
        When::Look,
        "f",
        "fit the marked line to the goal: rate, tidal volume, inspiratory pressure or time",
        "fit",
        &[(key('f'), Action::Fit)],
    ),
    row(
        When::Look,
        "g",
        "dial the gentlest pair of rate and volume that meets the goal within limits",
        "gentlest",
        &[(key('g'), Action::Gentlest)],
    ),
    row(When::Look, "n", "everything back to now; the goal stays", "now", &[(key('n'), Action::BackToNow)]),
    row(When::Look, "u", "undo", "undo", &[(key('u'), Action::Undo)]),
    row(
        When::Look,
        "Ctrl-R",
        "redo what was undone",
        "",
        &[(Press::Ctrl('r'), Action::Redo), (key('U'), Action::Redo)],
    ),
    row(
        When::Look,
        "s 1 2 3",
        "keep this trial in a slot; bring it back from there",
        "",
        &[(key('s'), Action::Slots)],
    ),
    row(
        When::Look,
        "c",
        "chart: add this trial and its forecast to the record",
        "chart",
        &[(key('c'), Action::Chart)],
    ),
    row(When::Look, "e", "enter a gas, measurements and settings", "gas", &[(key('e'), Action::Form)]),
    row(
        When::Look,
        "Tab Shift-Tab",
        "next view, previous view",
        "view",
        &[(TAB, Action::StepView(1)), (BACK_TAB, Action::StepView(-1))],
    ),
    row(When::Look, "v", "the view over the whole screen, and back", "large", &[(key('v'), Action::Large)]),
    row(When::Look, "!", "every caution in full", "", &[(key('!'), Action::OpenView(View::Cautions))]),
    row(
        When::Look,
        "PageUp PageDown",
        "scroll the view",
        "",
        &[(PAGE_UP, Action::Scroll(-1)), (PAGE_DOWN, Action::Scroll(1))],
    ),
    row(When::Look, "Esc", "leave the large view", "", &[(ESC, Action::Cancel)]),
    row(When::Look, "p", "choose a profile of limits", "", &[(key('p'), Action::Profiles)]),
    row(When::Look, "w", "write the note to a file or the clipboard", "", &[(key('w'), Action::Note)]),
    row(When::Look, "m", "leave the mouse to the terminal, and back", "", &[(key('m'), Action::Mouse)]),
    row(When::Look, "?", "all keys, and what each line means", "keys", &[(key('?'), Action::Help)]),
    row(
        When::Look,
        "q Ctrl-C",
        "leave; asks only if something typed is not charted",
        "leave",
        &[(key('q'), Action::Leave)],
    ),
    row(When::Look, "Ctrl-Z", "stop for the shell; fg comes back", "", &[]),
    row(When::Typing, "Enter", "take the value", "take", &[(ENTER, Action::Accept), (TAB, Action::Accept)]),
    row(When::Typing, "Esc", "leave the value as it was", "leave as it was", &[(ESC, Action::Cancel)]),
    row(
        When::Walk,
        "arrows h j k l",
        "walk the table",
        "walk",
        &[
            (UP, Action::Move { across: 0, down: -1 }),
            (DOWN, Action::Move { across: 0, down: 1 }),
            (LEFT, Action::Move { across: -1, down: 0 }),
            (RIGHT, Action::Move { across: 1, down: 0 }),
            (key('k'), Action::Move { across: 0, down: -1 }),
            (key('j'), Action::Move { across: 0, down: 1 }),
            (key('h'), Action::Move { across: -1, down: 0 }),
            (key('l'), Action::Move { across: 1, down: 0 }),
        ],
    ),
    row(When::Walk, "Enter", "dial this pair", "dial this pair", &[(ENTER, Action::Accept)]),
    row(When::Walk, "Esc", "leave the table", "leave", &[(ESC, Action::Cancel), (key('q'), Action::Cancel)]),
    row(When::Look, "Enter in the table", "walk the cells with the arrows", "", &[]),
    row(
        When::Slots,
        "1 2 3",
        "an empty slot keeps this trial; a full one brings its trial back",
        "keep or bring back",
        &[(key('1'), Action::Slot(0)), (key('2'), Action::Slot(1)), (key('3'), Action::Slot(2))],
    ),
    row(When::Slots, "Esc", "leave it", "leave", &[(ESC, Action::Cancel)]),
    row(
        When::Form,
        "Enter ↓",
        "next field; on the last line: chart",
        "next",
        &[(ENTER, Action::Accept), (DOWN, Action::Move { across: 0, down: 1 })],
    ),
    row(When::Form, "↑", "previous field", "", &[(UP, Action::Move { across: 0, down: -1 })]),
    row(
        When::Form,
        "Tab Shift-Tab",
        "next part, previous part",
        "next part",
        &[(TAB, Action::Part(1)), (BACK_TAB, Action::Part(-1))],
    ),
    row(When::Form, "PageDown", "to the line that charts", "to the end", &[(PAGE_DOWN, Action::Last)]),
    row(When::Form, "Esc", "put the form aside; e goes on with it", "aside", &[(ESC, Action::Cancel)]),
    row(When::Chart, "Enter", "add this to the record", "add to the record", &[(ENTER, Action::Accept)]),
    row(
        When::Chart,
        "Space",
        "chart the settings as dialled too, or the plan alone",
        "dialled or planned",
        &[(key(' '), Action::Switch)],
    ),
    row(When::Chart, "Esc", "chart nothing", "chart nothing", &[(ESC, Action::Cancel)]),
    row(When::Naming, "Enter", "begin this file", "begin this file", &[(ENTER, Action::Accept)]),
    row(When::Naming, "Esc", "chart nothing", "chart nothing", &[(ESC, Action::Cancel)]),
    row(
        When::Profiles,
        "↑ ↓ j k",
        "choose a profile",
        "choose",
        &[
            (UP, Action::Move { across: 0, down: -1 }),
            (DOWN, Action::Move { across: 0, down: 1 }),
            (key('k'), Action::Move { across: 0, down: -1 }),
            (key('j'), Action::Move { across: 0, down: 1 }),
        ],
    ),
    row(When::Profiles, "Enter", "read the limits of this profile", "take", &[(ENTER, Action::Accept)]),
    row(When::Profiles, "Esc", "keep the profile", "keep", &[(ESC, Action::Cancel)]),
    row(When::Note, "f", "write it to a file", "file", &[(key('f'), Action::NoteToFile)]),
    row(
        When::Note,
        "c",
        "send it to the terminal's clipboard",
        "clipboard",
        &[(key('c'), Action::NoteToClipboard)],
    ),
    row(When::Note, "Esc", "write nothing", "nothing", &[(ESC, Action::Cancel)]),
    row(
        When::Help,
        "↑ ↓",
        "mark a key or a line",
        "mark",
        &[
            (UP, Action::Move { across: 0, down: -1 }),
            (DOWN, Action::Move { across: 0, down: 1 }),
            (PAGE_UP, Action::Move { across: 0, down: -10 }),
            (PAGE_DOWN, Action::Move { across: 0, down: 10 }),
        ],
    ),
    row(When::Help, "letters", "search", "search", &[]),
    row(
        When::Help,
        "Enter",
        "do what the marked key does, go to the marked line",
        "do it",
        &[(ENTER, Action::Accept)],
    ),
    row(When::Help, "Esc", "back", "back", &[(ESC, Action::Cancel)]),
    row(
        When::Leave,
        "y",
        "leave; what was typed is not charted",
        "leave without charting",
        &[(key('y'), Action::LeaveAnyway)],
    ),
    row(
        When::Leave,
        "Esc n",
        "stay and go on with the form",
        "stay",
        &[(ESC, Action::Cancel), (key('n'), Action::Cancel), (ENTER, Action::Cancel)],
    ),
    row(
        When::Recover,
        "Enter y",
        "bring back what was typed",
        "bring it back",
        &[(ENTER, Action::Accept), (key('y'), Action::Accept)],
    ),
    row(
        When::Recover,
        "Esc n",
        "begin without it; it is thrown away",
        "throw it away",
        &[(ESC, Action::Cancel), (key('n'), Action::Cancel)],
    ),
];
