//! What an action changes: the only place where the state moves.

mod dial;
mod leave;
mod solve;

use tui_input::{Input, InputRequest};

use super::action::Action;
use super::chart;
use super::effect::Effect;
use super::form::Form;
use super::help;
use super::line::{self, LineId};
use super::scene::Scene;
use super::state::{Mode, Origin, State, View};
use crate::case::presets::PROFILES;
use crate::case::read;
use crate::planning::baseline::Baseline;

/// Does `action`; gives what is to be done outside.
pub fn update(state: &mut State, action: Action) -> Option<Effect> {
    state.message = None;
    match action {
        Action::Mark(by) => mark(state, by),
        Action::MarkLine(line) => mark_line(state, line),
        Action::Turn(steps) => dial::turn(state, state.marked, steps),
        Action::TurnBig(steps) => dial::turn(state, state.marked, steps * dial::BIG),
        Action::TurnLine(line, steps) => {
            mark_line(state, line);
            dial::turn(state, line, steps);
        }
        Action::Begin(first) => begin(state, first),
        Action::Fit => solve::fit(state),
        Action::Gentlest => solve::gentlest(state),
        Action::BackToNow => dial::back_to_now(state),
        Action::BackLine => dial::back_line(state),
        Action::Undo => dial::undo(state),
        Action::Redo => dial::redo(state),
        Action::Slots => state.mode = Mode::Slots,
        Action::Slot(slot) => dial::slot(state, slot),
        Action::StepView(by) => open_view(state, state.view.step(by)),
        Action::OpenView(view) => open_view(state, view),
        Action::Large => {
            state.large = !state.large;
            state.scroll = 0;
        }
        Action::Scroll(by) => state.scroll = state.scroll.saturating_add_signed(by * 5),
        Action::Form => open_form(state),
        Action::Chart => chart::ask(state),
        Action::Profiles => state.mode = Mode::Profiles { chosen: 0 },
        Action::Note => state.mode = Mode::Note,
        Action::NoteToFile => return Some(leave::note(state, true)),
        Action::NoteToClipboard => return Some(leave::note(state, false)),
        Action::Help => state.mode = Mode::Help { query: Input::default(), chosen: 0 },
        Action::Leave => return leave::ask(state),
        Action::LeaveAnyway => {
            // Said no to charting it: nothing is kept either.
            state.mode = Mode::Look;
            state.aside = None;
            return Some(Effect::Quit);
        }
        Action::Suspend => return Some(Effect::Suspend),
        Action::Mouse => {
            state.mouse = !state.mouse;
            let said = if state.mouse {
                "The panel listens to the mouse."
            } else {
                "The mouse selects text; m takes it back."
            };
            state.message = Some(said.to_owned());
            return Some(Effect::Mouse(state.mouse));
        }
        Action::Accept => return accept(state),
        Action::Cancel => cancel(state),
        Action::Move { across, down } => walk(state, across, down),
        Action::Part(by) => with_form(state, |form| form.part(by)),
        Action::Last => with_form(state, |form| form.at = form.fields.len()),
        Action::Switch => {
            if let Mode::Chart { dialled } = &mut state.mode {
                *dialled = !*dialled;
            }
        }
        Action::Edit(request) => edit(state, request),
        Action::Paste(text) => paste(state, &text),
        Action::Take { rate_per_min, volume } => dial::take(state, rate_per_min, volume),
        Action::Charted { record, path, meanwhile } => chart::done(state, *record, path, meanwhile),
        Action::Done(said) => {
            state.mode = Mode::Look;
            state.message = Some(said);
        }
        Action::Failed(said) => {
            if let Mode::Chart { .. } | Mode::Note = state.mode {
                state.mode = Mode::Look;
            }
            state.message = Some(said);
        }
    }
    None
}

/// Asks the scene that the state amounts to.
///
/// # Errors
/// A sentence: what keeps the record from being forecast.
pub fn on_scene<T>(state: &State, ask: impl FnOnce(&Scene<'_>) -> Result<T, String>) -> Result<T, String> {
    let sentence = |faults: Vec<crate::case::fault::Fault>| {
        faults.first().map_or_else(String::new, |fault| format!("{}. {}", fault.message, fault.help))
    };
    let record = state.record();
    let baseline = Baseline::read(&record).map_err(sentence)?;
    let scene = Scene::of(&record, &baseline, &state.turned).map_err(sentence)?;
    ask(&scene)
}

fn lines(state: &State) -> Vec<LineId> {
    on_scene(state, |scene| Ok(line::shown(&scene.dialled()).collect())).unwrap_or_default()
}

fn mark(state: &mut State, by: isize) {
    let lines = lines(state);
    let at = lines.iter().position(|line| *line == state.marked).unwrap_or(0);
    let next = at.saturating_add_signed(by).min(lines.len().saturating_sub(1));
    if let Some(line) = lines.get(next) {
        state.marked = *line;
    }
}

fn mark_line(state: &mut State, line: LineId) {
    state.mode = Mode::Look;
    if lines(state).contains(&line) {
        state.marked = line;
    }
}

fn begin(state: &mut State, first: char) {
    if state.marked == LineId::Control {
        state.message = Some("Control is turned with the arrows, not typed.".to_owned());
        return;
    }
    let text = if first == ' ' { String::new() } else { first.to_string() };
    state.mode = Mode::Typing(Input::new(text));
}

fn open_view(state: &mut State, view: View) {
    state.view = view;
    state.scroll = 0;
    state.mode = Mode::Look;
}

fn open_form(state: &mut State) {
    if let Some(why) = &state.read_only {
        state.message = Some(format!("Nothing can be charted: {why}."));
        return;
    }
    state.mode = Mode::Form(state.aside.take().unwrap_or_else(|| Box::new(Form::default())));
}

fn with_form(state: &mut State, change: impl FnOnce(&mut Form)) {
    if let Mode::Form(form) = &mut state.mode {
        change(form);
    }
}

fn accept(state: &mut State) -> Option<Effect> {
    match std::mem::replace(&mut state.mode, Mode::Look) {
        Mode::Look => {
            if state.view == View::Table {
                dial::enter_table(state);
            }
        }
        Mode::Typing(input) => dial::typed(state, input),
        Mode::Walk { rate_per_min, volume } => dial::take(state, rate_per_min, volume),
        Mode::Slots | Mode::Note => {}
        Mode::Chart { dialled } => return chart::accept(state, dialled),
        Mode::Naming { name, entry } => return chart::named(state, name, entry),
        Mode::Form(form) => return chart::form(state, form),
        Mode::Profiles { chosen } => choose_profile(state, chosen),
        Mode::Help { query, chosen } => {
            return help::chosen(query.value(), chosen).and_then(|action| update(state, action));
        }
        Mode::Leave(form) => state.mode = Mode::Form(form),
        Mode::Recover(kept) => leave::recover(state, &kept),
    }
    None
}

fn cancel(state: &mut State) {
    match std::mem::replace(&mut state.mode, Mode::Look) {
        Mode::Look => state.large = false,
        Mode::Form(form) => {
            if form.holds_anything() {
                state.message = Some("The form is put aside, not charted: e goes on with it.".to_owned());
                state.aside = Some(form);
            }
        }
        Mode::Leave(form) => state.mode = Mode::Form(form),
        Mode::Chart { .. } => state.message = Some("Nothing was charted.".to_owned()),
        Mode::Naming { .. } => {
            state.message = Some("Nothing was charted.".to_owned());
            if let Some(form) = state.aside.take() {
                state.mode = Mode::Form(form);
            }
        }
        Mode::Typing(_)
        | Mode::Walk { .. }
        | Mode::Slots
        | Mode::Profiles { .. }
        | Mode::Note
        | Mode::Help { .. }
        | Mode::Recover(_) => {}
    }
}

fn walk(state: &mut State, across: isize, down: isize) {
    match &mut state.mode {
        Mode::Form(form) => form.step(down),
        Mode::Profiles { chosen } => *chosen = chosen.saturating_add_signed(down).min(PROFILES.len()),
        Mode::Help { query, chosen } => {
            let last = help::found(query.value()).len().saturating_sub(1);
            *chosen = chosen.saturating_add_signed(down).min(last);
        }
        Mode::Walk { .. } => dial::walk_table(state, across, down),
        Mode::Look
        | Mode::Typing(_)
        | Mode::Slots
        | Mode::Chart { .. }
        | Mode::Naming { .. }
        | Mode::Note
        | Mode::Leave(_)
        | Mode::Recover(_) => {}
    }
}

fn edit(state: &mut State, request: InputRequest) {
    match &mut state.mode {
        Mode::Typing(input) | Mode::Naming { name: input, .. } => {
            input.handle(request);
        }
        Mode::Help { query, chosen } => {
            query.handle(request);
            *chosen = 0;
        }
        Mode::Form(form) => form.edit(request),
        Mode::Look
        | Mode::Walk { .. }
        | Mode::Slots
        | Mode::Chart { .. }
        | Mode::Profiles { .. }
        | Mode::Note
        | Mode::Leave(_)
        | Mode::Recover(_) => {}
    }
}

/// Pasted text goes into the field being typed, as one line; anywhere else it could turn things, so it is dropped.
fn paste(state: &mut State, text: &str) {
    if !super::key::When::of(&state.mode).types() {
        state.message = Some("Pasted text was dropped: open a field first (digits, e or ?).".to_owned());
        return;
    }
    let line = text.lines().next().unwrap_or("");
    for letter in line.chars().filter(|letter| !letter.is_control()).take(200) {
        edit(state, InputRequest::InsertChar(letter));
    }
}

fn choose_profile(state: &mut State, chosen: usize) {
    let preset = chosen.checked_sub(1).and_then(|at| PROFILES.get(at));
    let read = preset.map(|preset| (preset.name, read::profile(preset.text.as_bytes())));
    let profile = match read {
        None => None,
        Some((_, Ok(profile))) => Some(profile),
        Some((name, Err(_))) => {
            state.message = Some(format!("The built-in profile {name} is faulty; report this."));
            return;
        }
    };
    let name = profile.as_ref().unwrap_or(state.charted.profile()).name.clone();
    let turned = super::state::Turned { profile, ..state.turned.clone() };
    dial::commit(state, format!("profile {name}"), turned);
    state.message =
        Some(format!("Limits and goal of {name} are read here; the case file keeps its own profile."));
}

/// What a new file is called unless another name is typed: the label in plain letters.
pub fn suggested_name(state: &State) -> String {
    let label = state.charted.label();
    let label = if label.is_empty() { "case" } else { label };
    let plain: String = label
        .to_lowercase()
        .chars()
        .map(|letter| if letter.is_alphanumeric() { letter } else { '-' })
        .collect();
    format!("{}.toml", plain.trim_matches('-'))
}

/// The path of the case file, where there is one.
pub fn path_of(state: &State) -> Option<&std::path::Path> {
    match &state.origin {
        Origin::File(path) => Some(path),
        Origin::Text { .. } => None,
    }
}
