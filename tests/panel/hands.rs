//! Hands on a panel without a terminal: keys in, the screen out.

use ratatui::buffer::Buffer;
use ratatui::crossterm::event::{KeyCode, KeyEvent, KeyModifiers};
use ratatui::layout::Rect;
use ratatui::style::{Color, Modifier, Style};
use tidewright::case::moment::Moment;
use tidewright::case::{file, presets, read};
use tidewright::panel::action::Action;
use tidewright::panel::effect::{Effect, Files};
use tidewright::panel::key::action_for;
use tidewright::panel::state::{Origin, State};
use tidewright::panel::update::update;
use tidewright::panel::view;

/// A panel under hands.
pub struct Hands {
    pub state: State,
    files: Files,
    /// Whether it was left.
    pub left: bool,
}

/// 2026-03-20 12:00 at UTC+1: after every built-in case.
pub fn noon() -> Moment {
    let offset = jiff::tz::offset(1);
    let datetime = jiff::civil::datetime(2026, 3, 20, 12, 0, 0, 0);
    Moment { instant: offset.to_timestamp(datetime).unwrap(), offset }
}

impl Hands {
    /// Opens a built-in case.
    pub fn on(case: &str) -> Self {
        let text = presets::case(case).unwrap_or_else(|| panic!("no case {case}")).text;
        let (record, _) = read::case(text.as_bytes(), &|name| file::profile(name, None)).unwrap();
        let origin = Origin::Text { name: case.to_owned(), text: text.to_owned() };
        Self { state: State::new(record, origin, noon()), files: Files::default(), left: false }
    }

    /// Opens a case file.
    pub fn on_file(path: &std::path::Path) -> Self {
        let bytes = std::fs::read(path).unwrap();
        let (record, _) = read::case(&bytes, &|name| file::profile(name, Some(path))).unwrap();
        let mut state = State::new(record, Origin::File(path.to_owned()), noon());
        let files = Files::open(&mut state, &bytes);
        Self { state, files, left: false }
    }

    /// Presses keys: names (`Enter`, `Right`, `^R`, `S-Right`, `Space`) or letters, parted by spaces.
    pub fn press(&mut self, keys: &str) -> &mut Self {
        for key in keys.split_whitespace() {
            self.key(event(key));
        }
        self
    }

    /// Types a text letter by letter.
    pub fn types(&mut self, text: &str) -> &mut Self {
        for letter in text.chars() {
            self.key(KeyEvent::new(KeyCode::Char(letter), KeyModifiers::NONE));
        }
        self
    }

    pub fn key(&mut self, event: KeyEvent) {
        if let Some(action) = action_for(&self.state, event) {
            self.act(action);
        }
    }

    /// Does an action and what follows from it.
    pub fn act(&mut self, action: Action) {
        let mut next = Some(action);
        while let Some(action) = next.take() {
            if let Some(effect) = update(&mut self.state, action) {
                self.left |= effect == Effect::Quit;
                next = self.files.perform(&self.state, &effect);
            }
        }
    }

    /// The screen as it is painted.
    pub fn buffer(&self, width: u16, height: u16) -> Buffer {
        let area = Rect::new(0, 0, width, height);
        let mut buffer = Buffer::empty(area);
        view::paint(&self.state, area, &mut buffer);
        buffer
    }

    /// The screen as text, one line a row.
    pub fn screen(&self, width: u16, height: u16) -> String {
        text(&self.buffer(width, height))
    }

    /// What the screen says in a row that holds `words`.
    pub fn row(&self, words: &str) -> String {
        let screen = self.screen(160, 50);
        let row = screen.lines().find(|row| row.contains(words));
        row.unwrap_or_else(|| panic!("no row says {words}:\n{screen}")).to_owned()
    }

    /// PaCO2 as tried, mmHg.
    pub fn paco2(&self) -> f64 {
        self.tried(|state| state.paco2_mmhg)
    }

    /// Something of what is tried.
    pub fn tried<T>(&self, see: impl FnOnce(&tidewright::planning::state::State) -> T) -> T {
        tidewright::panel::update::on_scene(&self.state, |scene| {
            Ok(see(&scene.tried.as_ref().unwrap().outcome.state))
        })
        .unwrap()
    }
}

/// The event of a key's name.
pub fn event(key: &str) -> KeyEvent {
    let (modifiers, name) = match (key.strip_prefix('^'), key.strip_prefix("S-")) {
        (Some(name), _) if !name.is_empty() => (KeyModifiers::CONTROL, name),
        (_, Some(name)) => (KeyModifiers::SHIFT, name),
        _ => (KeyModifiers::NONE, key),
    };
    let code = match name {
        "Enter" => KeyCode::Enter,
        "Esc" => KeyCode::Esc,
        "Tab" if modifiers == KeyModifiers::SHIFT => KeyCode::BackTab,
        "Tab" => KeyCode::Tab,
        "Up" => KeyCode::Up,
        "Down" => KeyCode::Down,
        "Left" => KeyCode::Left,
        "Right" => KeyCode::Right,
        "Backspace" => KeyCode::Backspace,
        "Delete" => KeyCode::Delete,
        "PageUp" => KeyCode::PageUp,
        "PageDown" => KeyCode::PageDown,
        "Home" => KeyCode::Home,
        "End" => KeyCode::End,
        "Space" => KeyCode::Char(' '),
        other => {
            let mut letters = other.chars();
            let letter = letters.next().unwrap();
            assert!(letters.next().is_none(), "{key} is no key");
            KeyCode::Char(letter)
        }
    };
    KeyEvent::new(code, modifiers)
}

/// The symbols of a screen.
pub fn text(buffer: &Buffer) -> String {
    let width = usize::from(buffer.area.width);
    let rows = buffer.content.chunks(width.max(1)).map(|row| {
        let row: String = row.iter().map(ratatui::buffer::Cell::symbol).collect();
        row.trim_end().to_owned() + "\n"
    });
    rows.collect()
}

/// The styles of a screen: a line for each run that is not plain.
pub fn styles(buffer: &Buffer) -> String {
    let width = usize::from(buffer.area.width);
    let mut out = String::new();
    for (y, row) in buffer.content.chunks(width.max(1)).enumerate() {
        let mut x = 0;
        while x < row.len() {
            let style = row[x].style();
            let run = row[x..].iter().take_while(|cell| cell.style() == style).count();
            let words = words(style);
            let shown: String = row[x..x + run].iter().map(ratatui::buffer::Cell::symbol).collect();
            if !words.is_empty() && !shown.trim().is_empty() {
                out.push_str(&format!("{y:>2},{x:>3} {words}: {}\n", shown.trim()));
            }
            x += run;
        }
    }
    out
}

fn words(style: Style) -> String {
    let mut words = Vec::new();
    match style.fg {
        None | Some(Color::Reset) => {}
        Some(colour) => words.push(format!("{colour}")),
    }
    for (modifier, word) in [
        (Modifier::BOLD, "bold"),
        (Modifier::REVERSED, "reversed"),
        (Modifier::UNDERLINED, "underlined"),
        (Modifier::DIM, "dim"),
    ] {
        if style.add_modifier.contains(modifier) {
            words.push(word.to_owned());
        }
    }
    words.join(" ")
}
