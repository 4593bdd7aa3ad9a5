//! A small drawing of curves and signs, eight dots to a cell.

use ratatui::layout::Rect;

use super::pen::{Pen, cells};

/// Dots of a cell, by column and row within it, as Braille patterns number them.
const DOTS: [[u8; 4]; 2] = [[0x01, 0x02, 0x04, 0x40], [0x08, 0x10, 0x20, 0x80]];
/// Room for the numbers at the left.
const MARGIN: u16 = 5;

/// A drawing.
pub struct Plot {
    width: usize,
    height: usize,
    x: [f64; 2],
    y: [f64; 2],
    dots: Vec<u8>,
    signs: Vec<Option<char>>,
    band: Option<[f64; 2]>,
}

impl Plot {
    /// A drawing for `area` (its margin and axis row left out) over these ranges.
    pub fn new(area: Rect, x: [f64; 2], y: [f64; 2]) -> Self {
        let width = usize::from(area.width.saturating_sub(MARGIN + 1));
        let height = usize::from(area.height.saturating_sub(u16::from(area.height > 4)));
        let cells = width * height;
        Self { width, height, x, y, dots: vec![0; cells], signs: vec![None; cells], band: None }
    }

    /// Dots across.
    pub const fn columns(&self) -> usize {
        self.width * 2
    }

    /// The value of x at a column of dots.
    pub fn x_at(&self, column: usize) -> f64 {
        let [low, high] = self.x;
        low + (high - low) * column as f64 / self.columns().saturating_sub(1).max(1) as f64
    }

    fn share(value: f64, [low, high]: [f64; 2]) -> Option<f64> {
        let share = (value - low) / (high - low);
        (0.0..=1.0).contains(&share).then_some(share)
    }

    /// The dot of a point.
    fn dot(&self, x: f64, y: f64) -> Option<(usize, usize)> {
        if self.width == 0 || self.height == 0 {
            return None;
        }
        let across = Self::share(x, self.x)? * (self.columns() - 1) as f64;
        let down = (1.0 - Self::share(y, self.y)?) * (self.height * 4 - 1) as f64;
        Some((cells(across), cells(down)))
    }

    fn set(&mut self, column: usize, row: usize) {
        let bit = DOTS.get(column % 2).and_then(|rows| rows.get(row % 4)).copied().unwrap_or(0);
        if let Some(cell) = self.dots.get_mut((row / 4) * self.width + column / 2) {
            *cell |= bit;
        }
    }

    /// Draws a curve through points in the order of x; a missing one leaves a gap.
    pub fn curve(&mut self, points: impl Iterator<Item = (f64, Option<f64>)>) {
        let mut before: Option<(usize, usize)> = None;
        for (x, y) in points {
            let Some((column, row)) = y.and_then(|y| self.dot(x, y)) else {
                before = None;
                continue;
            };
            if let Some((_, was)) = before {
                let (low, high) = (was.min(row), was.max(row));
                for between in low..=high {
                    self.set(column, between);
                }
            }
            self.set(column, row);
            before = Some((column, row));
        }
    }

    /// Puts a sign at a point; outside the ranges nothing.
    pub fn sign(&mut self, x: f64, y: f64, sign: char) {
        if let Some((column, row)) = self.dot(x, y)
            && let Some(cell) = self.signs.get_mut((row / 4) * self.width + column / 2)
        {
            *cell = Some(sign);
        }
    }

    /// A line up and down at `x`.
    pub fn upright(&mut self, x: f64, from: f64, to: f64, sign: char) {
        let [low, high] = self.y;
        let (Some((column, bottom)), Some((_, top))) =
            (self.dot(x, from.clamp(low, high)), self.dot(x, to.clamp(low, high)))
        else {
            return;
        };
        for row in (top / 4)..=(bottom / 4) {
            if let Some(cell) = self.signs.get_mut(row * self.width + column / 2)
                && cell.is_none()
            {
                *cell = Some(sign);
            }
        }
    }

    /// Shades a band of y.
    pub const fn shade(&mut self, band: [f64; 2]) {
        self.band = Some(band);
    }

    fn shaded(&self, row: usize) -> bool {
        let [low, high] = self.y;
        let middle = high - (high - low) * (row as f64 + 0.5) / self.height.max(1) as f64;
        self.band.is_some_and(|[from, to]| (from..=to).contains(&middle))
    }

    /// Draws it with the numbers at its edges.
    pub fn draw(&self, area: Rect, labels: [&str; 4], pen: &mut Pen<'_>) {
        let theme = pen.theme;
        let [low, high, left, right] = labels;
        pen.right(area, MARGIN, 0, high, theme.quiet());
        let last = u16::try_from(self.height.saturating_sub(1)).unwrap_or(0);
        pen.right(area, MARGIN, last, low, theme.quiet());
        for row in 0..self.height {
            for column in 0..self.width {
                let at = row * self.width + column;
                let (x, y) =
                    (MARGIN + 1 + u16::try_from(column).unwrap_or(0), u16::try_from(row).unwrap_or(0));
                if let Some(Some(sign)) = self.signs.get(at) {
                    let style = if matches!(sign, '●') { theme.tried() } else { theme.plain() };
                    pen.text(area, x, y, &sign.to_string(), style);
                    continue;
                }
                let dots = self.dots.get(at).copied().unwrap_or(0);
                if dots != 0 {
                    pen.text(area, x, y, &braille(dots, pen.face.ascii).to_string(), theme.plain());
                } else if self.shaded(row) {
                    // Sparse: the goal must not drown the curves.
                    if column % 2 == 0 {
                        pen.text(area, x, y, "·", theme.goal());
                    }
                }
            }
        }
        if area.height > 4 {
            pen.text(area, MARGIN + 1, last + 1, left, theme.quiet());
            pen.right(area, area.width, last + 1, right, theme.quiet());
        }
    }
}

fn braille(dots: u8, ascii: bool) -> char {
    if !ascii {
        return char::from_u32(0x2800 + u32::from(dots)).unwrap_or('·');
    }
    // The upper two rows of dots, the lower two, or both.
    match (dots & 0x1b, dots & 0xe4) {
        (0, _) => '.',
        (_, 0) => '\'',
        _ => ':',
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn points_land_where_they_belong_and_outside_nothing_is_drawn() {
        let mut plot = Plot::new(Rect::new(0, 0, 16, 5), [0.0, 10.0], [0.0, 100.0]);
        assert_eq!((plot.width, plot.height), (10, 4));
        assert_eq!(plot.dot(0.0, 100.0), Some((0, 0)));
        assert_eq!(plot.dot(10.0, 0.0), Some((19, 15)));
        assert_eq!(plot.dot(11.0, 50.0), None);
        assert_eq!(plot.dot(f64::NAN, 50.0), None);
        plot.curve([(0.0, Some(f64::NAN)), (1.0, None), (2.0, Some(500.0))].into_iter());
        assert!(plot.dots.iter().all(|dots| *dots == 0));
    }
}
