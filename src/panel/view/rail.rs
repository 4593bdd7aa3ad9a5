//! Rails: a value drawn on a line, now and try.

use super::pen::cells;

/// A row of signs.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Rail {
    signs: Vec<char>,
}

impl Rail {
    /// A rail of `width` cells of `sign`.
    pub fn new(width: u16, sign: char) -> Self {
        Self { signs: vec![sign; usize::from(width)] }
    }

    /// The cell of a place between 0 and 1; outside, the end cell.
    fn cell(&self, place: f64) -> usize {
        let last = self.signs.len().saturating_sub(1);
        cells(place.clamp(0.0, 1.0) * last as f64)
    }

    /// Puts a sign at a place.
    pub fn put(&mut self, place: f64, sign: char) {
        let cell = self.cell(place);
        if let Some(at) = self.signs.get_mut(cell) {
            *at = sign;
        }
    }

    /// Fills from one place to another.
    pub fn fill(&mut self, from: f64, to: f64, sign: char) {
        let (from, to) = (self.cell(from), self.cell(to));
        for at in self.signs.iter_mut().take(to + 1).skip(from) {
            *at = sign;
        }
    }

    /// As text.
    pub fn text(&self) -> String {
        self.signs.iter().collect()
    }
}

/// Where the bound of a limit stands on its rail, so that all bounds stand on one line.
pub const BOUND: f64 = 0.75;

/// Where a value stands on the rail of its limit: on the bound at [`BOUND`], beyond it to the right. The margin to the
/// nearer bound counts as a share of that bound (pH: of 0.2).
pub fn place(value: f64, min: Option<f64>, max: Option<f64>, ph: bool) -> f64 {
    let share = |margin: f64, bound: f64| margin / if ph { 0.2 } else { bound.abs().max(1e-9) };
    let over = max.map(|max| share(max - value, max));
    let under = min.map(|min| share(value - min, min));
    let margin = match (over, under) {
        (Some(over), Some(under)) => over.min(under),
        (Some(one), None) | (None, Some(one)) => one,
        (None, None) => 1.0,
    };
    BOUND * (1.0 - margin)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn bounds_stand_on_one_line_and_beyond_is_to_the_right() {
        // By hand: 30 of at most 30 is on the bound; 15 of at most 30 half way; 33 a tenth beyond.
        assert!((place(30.0, None, Some(30.0), false) - BOUND).abs() < 1e-12);
        assert!((place(15.0, None, Some(30.0), false) - BOUND * 0.5).abs() < 1e-12);
        assert!((place(33.0, None, Some(30.0), false) - BOUND * 1.1).abs() < 1e-12);
        assert!((place(3.0, Some(3.0), None, false) - BOUND).abs() < 1e-12);
        assert!(place(0.7, Some(3.0), None, false) > BOUND);
        assert!((place(7.20, Some(7.20), Some(7.45), true) - BOUND).abs() < 1e-9);
        // Between two bounds the nearer one counts: 7 of 4 to 8 is an eighth of 8 away.
        assert!((place(7.0, Some(4.0), Some(8.0), false) - BOUND * 0.875).abs() < 1e-12);
    }

    #[test]
    fn signs_stay_on_the_rail() {
        let mut rail = Rail::new(5, '-');
        rail.put(-3.0, 'a');
        rail.put(9.0, 'b');
        rail.fill(0.25, 0.5, '=');
        assert_eq!(rail.text(), "a==-b");
        Rail::new(0, '-').put(0.5, 'x');
    }
}
