//! Random hands: whatever is pressed, what is shown stays sane.

use ratatui::crossterm::event::{KeyCode, KeyEvent, KeyModifiers};
use tidewright::case::presets::CASES;
use tidewright::panel::state::{Mode, View};

use crate::hands::Hands;

/// A small generator, so that a failure comes back with its seed (xorshift, Marsaglia 2003).
struct Dice(u64);

impl Dice {
    fn roll(&mut self, sides: usize) -> usize {
        self.0 ^= self.0 << 13;
        self.0 ^= self.0 >> 7;
        self.0 ^= self.0 << 17;
        usize::try_from(self.0 % sides as u64).unwrap()
    }
}

const KEYS: &[KeyCode] = &[
    KeyCode::Up,
    KeyCode::Down,
    KeyCode::Left,
    KeyCode::Right,
    KeyCode::Left,
    KeyCode::Right,
    KeyCode::Enter,
    KeyCode::Esc,
    KeyCode::Tab,
    KeyCode::BackTab,
    KeyCode::Backspace,
    KeyCode::PageDown,
    KeyCode::PageUp,
];
const LETTERS: &str = "hjklHLjjllfgnuUscepvm!?0123456789.,:x yn13%";

fn press(hands: &mut Hands, dice: &mut Dice) -> String {
    let letters: Vec<char> = LETTERS.chars().collect();
    let code = if dice.roll(3) == 0 {
        KEYS[dice.roll(KEYS.len())]
    } else {
        KeyCode::Char(letters[dice.roll(letters.len())])
    };
    // Files are for the scripts: random hands do not begin any.
    if matches!(hands.state.mode, Mode::Naming { .. } | Mode::Note) {
        hands.press("Esc");
    }
    hands.key(KeyEvent::new(code, KeyModifiers::NONE));
    format!("{code:?}")
}

fn now(hands: &Hands) -> String {
    tidewright::panel::update::on_scene(&hands.state, |scene| Ok(format!("{:?}", scene.now.state)))
        .unwrap_or_default()
}

#[test]
fn ten_thousand_keys_keep_the_invariants() {
    for (seed, preset) in (1..).zip(&CASES) {
        let mut dice = Dice(0x9e37_79b9_7f4a_7c15 ^ seed);
        let mut hands = Hands::on(preset.name);
        let fresh = now(&hands);
        let mut pressed = Vec::new();
        for count in 0..840 {
            pressed.push(press(&mut hands, &mut dice));
            assert_eq!(now(&hands), fresh, "{}: now moved after {pressed:?}", preset.name);
            if count % 7 == 0 {
                let (width, height) = [(80, 24), (100, 30), (160, 50)][dice.roll(3)];
                let screen = hands.screen(width, height);
                for wrong in ["NaN", "inf ", "not known", "-0 "] {
                    assert!(!screen.contains(wrong), "{}: {wrong} after {pressed:?}\n{screen}", preset.name);
                }
            }
        }
        // Undo to the end returns to what was opened, but for marks, views and slots.
        hands.press("Esc Esc Esc");
        if matches!(hands.state.mode, Mode::Look) {
            for _ in 0..600 {
                hands.press("u");
            }
            let mut first = Hands::on(preset.name);
            first.state.marked = hands.state.marked;
            (first.state.view, first.state.large, first.state.scroll) = (View::Curve, false, 0);
            (hands.state.view, hands.state.large, hands.state.scroll) = (View::Curve, false, 0);
            (hands.state.message, first.state.message) = (None, None);
            assert_eq!(hands.screen(100, 30), first.screen(100, 30), "{}: {pressed:?}", preset.name);
        }
    }
}

#[test]
fn every_size_draws_without_a_panic() {
    let mut every = Vec::new();
    for (at, view) in View::ALL.into_iter().enumerate() {
        let mut hands = Hands::on(CASES[at % CASES.len()].name);
        hands.press("l l s 1 l");
        hands.state.view = view;
        every.push(hands);
    }
    for keys in ["?", "e 8", "l c", "p", "l c Enter", "e 8 Esc q", "v", "Tab Enter"] {
        let mut hands = Hands::on("three-days");
        hands.press(keys);
        every.push(hands);
    }
    for width in 1..=220_u16 {
        for height in [1, 2, 5, 12, 17, 18, 19, 21, 22, 24, 27, 28, 30, 39, 40, 50, 70_u16] {
            let hands = &every[usize::from(width + height) % every.len()];
            let _ = hands.buffer(width, height);
        }
    }
    // The least screens, each with each.
    for hands in &every {
        for (width, height) in
            [(60, 18), (60, 24), (79, 18), (80, 24), (100, 30), (139, 30), (140, 24), (220, 70)]
        {
            let _ = hands.buffer(width, height);
        }
    }
}
