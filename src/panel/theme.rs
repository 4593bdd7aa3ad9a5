//! Colours: blue and orange, beside words and marks and never in place of them.

use ratatui::style::{Color, Modifier, Style};

use crate::planning::limits::Verdict;

/// How many colours there are.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Depth {
    /// None: the terminal's own letters, with bold and underline.
    None,
    /// The sixteen of the terminal.
    #[default]
    Sixteen,
    /// Any.
    True,
}

/// What the letters stand on.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Ground {
    /// Dark.
    #[default]
    Dark,
    /// Light.
    Light,
}

/// Colours of one terminal.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct Theme {
    /// How many colours.
    pub depth: Depth,
    /// What they stand on.
    pub ground: Ground,
}

/// One colour in every terminal: 16 colours on dark and light, any colour on dark and light.
struct Shade {
    sixteen: [Color; 2],
    any: [Color; 2],
}

/// What is tried: blue. Chosen for a contrast of 4.5 and more on black and on white.
const TRY: Shade = Shade {
    sixteen: [Color::LightBlue, Color::Blue],
    any: [Color::Rgb(110, 180, 255), Color::Rgb(0, 84, 166)],
};
/// What is beyond: orange.
const BEYOND: Shade = Shade {
    sixteen: [Color::LightYellow, Color::Red],
    any: [Color::Rgb(255, 165, 80), Color::Rgb(176, 70, 0)],
};
/// What is near: a paler orange.
const NEAR: Shade =
    Shade { sixteen: [Color::Yellow, Color::Red], any: [Color::Rgb(228, 195, 130), Color::Rgb(130, 84, 0)] };
/// The goal: a green blue.
const GOAL: Shade =
    Shade { sixteen: [Color::Cyan, Color::Blue], any: [Color::Rgb(110, 205, 195), Color::Rgb(0, 105, 100)] };
/// Frames and what stands back: grey.
const QUIET: Shade = Shade {
    sixteen: [Color::Gray, Color::DarkGray],
    any: [Color::Rgb(160, 165, 172), Color::Rgb(96, 100, 108)],
};

impl Theme {
    fn paint(self, shade: &Shade) -> Style {
        let of = |[dark, light]: [Color; 2]| match self.ground {
            Ground::Dark => dark,
            Ground::Light => light,
        };
        match self.depth {
            Depth::None => Style::new(),
            Depth::Sixteen => Style::new().fg(of(shade.sixteen)),
            Depth::True => Style::new().fg(of(shade.any)),
        }
    }

    /// Plain letters: the terminal's own.
    pub const fn plain(self) -> Style {
        Style::new()
    }

    /// What stands back.
    pub fn quiet(self) -> Style {
        self.paint(&QUIET)
    }

    /// Headings.
    pub fn heading(self) -> Style {
        Style::new().add_modifier(Modifier::BOLD)
    }

    /// What is tried.
    pub fn tried(self) -> Style {
        self.paint(&TRY).add_modifier(Modifier::BOLD)
    }

    /// What the goal is.
    pub fn goal(self) -> Style {
        self.paint(&GOAL)
    }

    /// The marked line, cell or choice.
    pub fn marked(self) -> Style {
        self.tried().add_modifier(Modifier::REVERSED)
    }

    /// A caution.
    pub fn caution(self) -> Style {
        self.paint(&BEYOND)
    }

    /// A key in the footer.
    pub fn key(self) -> Style {
        Style::new().add_modifier(Modifier::BOLD)
    }

    /// A verdict.
    pub fn verdict(self, verdict: Verdict) -> Style {
        match verdict {
            Verdict::Within => self.plain(),
            Verdict::Near => self.paint(&NEAR),
            Verdict::Beyond => self.paint(&BEYOND).add_modifier(Modifier::BOLD),
            Verdict::Unknown => self.paint(&NEAR).add_modifier(Modifier::UNDERLINED),
        }
    }
}

/// The mark of a verdict, beside its word.
pub const fn mark(verdict: Verdict) -> &'static str {
    match verdict {
        Verdict::Within => " ",
        Verdict::Near => "~",
        Verdict::Beyond => "!",
        Verdict::Unknown => "?",
    }
}

/// A sign in ASCII; letters that are ASCII already stay.
pub fn ascii(symbol: &str) -> &str {
    match symbol {
        "│" | "┃" | "┆" | "╎" | "├" | "┤" | "▏" | "▕" => "|",
        "┼" | "╋" | "▇" => "+",
        "○" => "o",
        "◆" => "*",
        "●" => "@",
        "▸" | "›" | "≥" | "→" => ">",
        "‹" | "◂" | "≤" | "←" => "<",
        "▲" | "↑" => "^",
        "▼" | "↓" => "v",
        "█" => "#",
        "▓" => "%",
        "▒" | "▆" => "=",
        "░" | "…" | "▃" => ".",
        "×" => "x",
        "°" | "’" => "'",
        "τ" => "t",
        "▂" => "_",
        "▄" => ":",
        "▅" => "-",
        "✓" => "y",
        other if other.is_ascii() => other,
        _ => "?",
    }
}
