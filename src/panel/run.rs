//! The loop: wait for the terminal, do what is asked, draw. Idle it waits and draws nothing.

use std::io;
use std::path::PathBuf;
use std::time::Duration;

use ratatui::Terminal;
use ratatui::backend::CrosstermBackend;
use ratatui::crossterm::clipboard::CopyToClipboard;
use ratatui::crossterm::event::{self, Event, KeyCode, KeyEvent, KeyModifiers, MouseButton, MouseEventKind};
use ratatui::crossterm::execute;
use ratatui::crossterm::terminal::{BeginSynchronizedUpdate, EndSynchronizedUpdate};
use ratatui::layout::{Position, Rect};

use super::action::Action;
use super::effect::{self, Effect, Files};
use super::key::action_for;
use super::recovery::{self, Kept};
use super::state::{Mode, State};
use super::terminal::{self, Screen};
use super::update::update;
use super::view;
use crate::case::moment::Moment;

/// A late answer of the terminal to a question about its colours is read as keys; it is over within this time.
const LATE_ANSWER: Duration = Duration::from_millis(50);

/// What goes on outside the state.
struct Outside {
    files: Files,
    kept_at: Option<PathBuf>,
    kept: Kept,
    screen: Screen,
}

/// The wall clock here.
pub fn clock() -> Moment {
    let now = jiff::Zoned::now();
    Moment { instant: now.timestamp(), offset: now.offset() }
}

/// Runs the panel until it is left. `bytes` are those of the case file as it was read.
///
/// # Errors
/// When the terminal is lost or refuses.
pub fn run(mut state: State, bytes: &[u8]) -> io::Result<()> {
    let files = Files::open(&mut state, bytes);
    let kept_at = recovery::place(&state.origin);
    let found = kept_at.as_deref().filter(|_| state.read_only.is_none()).and_then(recovery::load);
    if let Some(kept) = found {
        state.mode = Mode::Recover(Box::new(kept));
    }
    terminal::restore_on_panic();
    terminal::restore_on_signals()?;
    terminal::enter(state.mouse)?;
    let left = Terminal::new(CrosstermBackend::new(io::stdout())).and_then(|screen| {
        let mut outside = Outside { files, kept_at, kept: Kept::default(), screen };
        until_left(&mut state, &mut outside)
    });
    let _held = terminal::writing();
    terminal::restore();
    left
}

fn until_left(state: &mut State, outside: &mut Outside) -> io::Result<()> {
    // Listen before drawing: a resize during the first drawing would be missed.
    event::poll(Duration::ZERO)?;
    draw(state, outside)?;
    loop {
        let mut redraw_all = false;
        let mut next = Some(event::read()?);
        // All that waits is taken before one drawing: resizes and held keys do not pile up.
        while let Some(event) = next {
            if is_late_answer(&event) {
                drop_late_answer()?;
            } else if let Event::Resize(..) = event {
                redraw_all = true;
            } else if let Some(action) = action_of(state, &event, outside) {
                state.clock = clock();
                if matches!(action, Action::Suspend) {
                    let held = terminal::writing();
                    terminal::suspend(state.mouse)?;
                    drop(held);
                    redraw_all = true;
                } else if !perform(state, action, outside)? {
                    return Ok(());
                }
            }
            next = if event::poll(Duration::ZERO)? { Some(event::read()?) } else { None };
        }
        if redraw_all {
            // Not `clear`, which asks the terminal where its cursor is and fails where none answers.
            let size = outside.screen.size()?;
            outside.screen.resize(Rect::new(0, 0, size.width, size.height))?;
        }
        draw(state, outside)?;
    }
}

/// Does an action and what follows from it; false when the panel is left.
fn perform(state: &mut State, action: Action, outside: &mut Outside) -> io::Result<bool> {
    let mut next = Some(action);
    let mut leaving = false;
    while let Some(action) = next.take() {
        next = match update(state, action) {
            None | Some(Effect::Suspend) => None,
            Some(Effect::Quit) => {
                leaving = true;
                None
            }
            Some(Effect::CopyNote) => Some(copy_note(state)),
            Some(Effect::Mouse(on)) => {
                terminal::mouse(on)?;
                None
            }
            Some(other) => outside.files.perform(state, &other),
        };
    }
    keep(state, outside, leaving);
    Ok(!leaving)
}

/// Keeps what is typed and turned; on leaving, nothing.
fn keep(state: &mut State, outside: &mut Outside, leaving: bool) {
    if state.read_only.is_some() || matches!(state.mode, Mode::Recover(_)) {
        return;
    }
    if let super::state::Origin::File(_) = state.origin
        && outside.kept.case != state.origin.name()
    {
        // The record has a file now: what was kept under its old name is done with.
        if let Some(place) = &outside.kept_at {
            let _ = recovery::forget(place);
        }
        outside.kept_at = recovery::place(&state.origin);
    }
    let kept = if leaving { Kept { case: state.origin.name(), ..Kept::default() } } else { Kept::of(state) };
    if kept == outside.kept {
        return;
    }
    if let Some(place) = &outside.kept_at
        && let Err(error) = recovery::keep(place, &kept)
    {
        state.message = Some(format!("What you type is not kept against a loss: {error}. Chart it soon."));
    }
    outside.kept = kept;
}

fn copy_note(state: &State) -> Action {
    match effect::note(state) {
        Err(why) => Action::Failed(why),
        Ok(note) => {
            let _held = terminal::writing();
            match execute!(io::stdout(), CopyToClipboard::to_clipboard_from(note)) {
                Ok(()) => Action::Done(
                    "Sent to the terminal's clipboard; not every terminal takes it. f writes a file."
                        .to_owned(),
                ),
                Err(error) => Action::Failed(format!("The terminal took no clipboard text: {error}.")),
            }
        }
    }
}

fn draw(state: &State, outside: &mut Outside) -> io::Result<()> {
    let _held = terminal::writing();
    execute!(io::stdout(), BeginSynchronizedUpdate)?;
    let drawn = outside.screen.draw(|frame| view::draw(state, frame)).map(|_| ());
    execute!(io::stdout(), EndSynchronizedUpdate)?;
    drawn
}

fn action_of(state: &State, event: &Event, outside: &Outside) -> Option<Action> {
    match event {
        Event::Key(key) => action_for(state, *key),
        Event::Paste(text) => Some(Action::Paste(text.clone())),
        Event::Mouse(mouse) => {
            let size = outside.screen.size().ok()?;
            let area = Rect::new(0, 0, size.width, size.height);
            let at = Position { x: mouse.column, y: mouse.row };
            match mouse.kind {
                MouseEventKind::Down(MouseButton::Left) => view::touched(state, area, at, 0),
                MouseEventKind::ScrollUp => view::touched(state, area, at, 1),
                MouseEventKind::ScrollDown => view::touched(state, area, at, -1),
                _ => None,
            }
        }
        Event::Resize(..) | Event::FocusGained | Event::FocusLost => None,
    }
}

/// The start of a terminal's answer about its colours, read as a key: Alt with a bracket.
fn is_late_answer(event: &Event) -> bool {
    matches!(event, Event::Key(KeyEvent { code: KeyCode::Char(']'), modifiers, .. }) if modifiers.contains(KeyModifiers::ALT))
}

fn drop_late_answer() -> io::Result<()> {
    while event::poll(LATE_ANSWER)? {
        if let Event::Key(KeyEvent { code: KeyCode::Char(letter), modifiers, .. }) = event::read()? {
            let ends = (letter == '\\' && modifiers.contains(KeyModifiers::ALT))
                || (letter == 'g' && modifiers.contains(KeyModifiers::CONTROL));
            if ends {
                break;
            }
        }
    }
    Ok(())
}
