//! Writing into the screen, cut to the room there is.

use ratatui::buffer::Buffer;
use ratatui::layout::Rect;
use ratatui::style::Style;
use unicode_width::UnicodeWidthStr;

use crate::note::face::Face;
use crate::panel::theme::Theme;

/// The screen with the theme and the face it is written in.
pub struct Pen<'a> {
    /// The cells.
    pub buffer: &'a mut Buffer,
    /// Colours.
    pub theme: Theme,
    /// Units and letters.
    pub face: Face,
}

impl Pen<'_> {
    /// Writes at `x`, `y` of `area`, cut to its width; gives the next `x`.
    pub fn text(&mut self, area: Rect, x: u16, y: u16, text: &str, style: Style) -> u16 {
        if y >= area.height || x >= area.width {
            return x;
        }
        let room = usize::from(area.width - x);
        let shown = if text.width() > room && room > 1 { cut(text, room) } else { text.to_owned() };
        let (next, _) = self.buffer.set_stringn(area.x + x, area.y + y, shown, room, style);
        next - area.x
    }

    /// Writes so that it ends before `end`.
    pub fn right(&mut self, area: Rect, end: u16, y: u16, text: &str, style: Style) {
        let width = u16::try_from(text.width()).unwrap_or(u16::MAX);
        self.text(area, end.saturating_sub(width), y, text, style);
    }

    /// A heading with a rule to the end of the row.
    pub fn rule(&mut self, area: Rect, y: u16, title: &str) {
        if y >= area.height {
            return;
        }
        let quiet = self.theme.quiet();
        let x = self.text(area, 0, y, "─ ", quiet);
        let x = self.text(area, x, y, title, self.theme.heading());
        let x = self.text(area, x, y, " ", quiet);
        let rest = "─".repeat(usize::from(area.width.saturating_sub(x)));
        self.text(area, x, y, &rest, quiet);
    }

    /// A column of one sign.
    pub fn column(&mut self, area: Rect, x: u16, sign: &str) {
        for y in 0..area.height {
            self.text(area, x, y, sign, self.theme.quiet());
        }
    }

    /// Text wrapped to the area from row `y`; gives the next row.
    pub fn wrapped(&mut self, area: Rect, y: u16, text: &str, style: Style) -> u16 {
        let mut y = y;
        for line in lines(text, area.width) {
            self.text(area, 0, y, &line, style);
            y = y.saturating_add(1);
        }
        y
    }
}

/// Text cut to `room` columns, its end shown as cut.
fn cut(text: &str, room: usize) -> String {
    let mut kept = String::new();
    for letter in text.chars() {
        if (kept.width() + UnicodeWidthStr::width(letter.encode_utf8(&mut [0; 4]) as &str)) >= room {
            break;
        }
        kept.push(letter);
    }
    kept.push('…');
    kept
}

/// Text in lines of at most `width` columns.
pub fn lines(text: &str, width: u16) -> Vec<String> {
    if width == 0 {
        return Vec::new();
    }
    textwrap::wrap(text, usize::from(width)).into_iter().map(std::borrow::Cow::into_owned).collect()
}

/// A number of cells or dots: rounded, never below 0.
#[allow(
    clippy::cast_possible_truncation,
    clippy::cast_sign_loss,
    reason = "screens are smaller than 2^16 cells, and the clamp keeps the sign"
)]
pub fn cells(value: f64) -> usize {
    value.round().clamp(0.0, f64::from(u16::MAX)) as usize
}
