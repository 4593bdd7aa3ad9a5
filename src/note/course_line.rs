//! The course in one line: PaCO2 drawn over the hour, and when it has settled.

use super::face::Face;
use crate::planning::course::Course;

/// Heights, low to high.
const BLOCKS: [char; 8] = ['▁', '▂', '▃', '▄', '▅', '▆', '▇', '█'];
/// The same in ASCII.
const LETTERS: [char; 8] = ['_', '.', ',', '-', '=', '+', '*', '#'];
/// One column every two minutes, for an hour.
const COLUMNS: u32 = 30;

/// PaCO2 over the next hour as one row of blocks, lowest and highest value at its ends.
pub fn drawing(course: &Course, face: Face) -> String {
    let curve = &course.curve;
    let at = |column: u32| curve.paco2_mmhg(f64::from(column) * 60.0 / f64::from(COLUMNS - 1));
    let (first, last) = (at(0), at(COLUMNS - 1));
    let (low, high) = (first.min(last), first.max(last));
    let glyphs = if face.ascii { LETTERS } else { BLOCKS };
    let row: String = (0..COLUMNS)
        .filter_map(|column| {
            let share = if high - low > 1e-9 { (at(column) - low) / (high - low) } else { 0.5 };
            (1..8).zip(glyphs.iter().skip(1)).fold(glyphs.first(), |reached, (height, glyph)| {
                if share * 7.0 >= f64::from(height) - 0.5 { Some(glyph) } else { reached }
            })
        })
        .collect();
    let end = |mmhg: f64| face.paco2(mmhg);
    format!("{} {row} {} {} at 60 min", end(first), end(last), face.unit.word())
}

/// The course in words: forecasts at their minutes, when it has settled, when to draw.
pub fn words(course: &Course, face: Face) -> Vec<String> {
    let at: Vec<String> = course
        .points
        .iter()
        .skip(1)
        .map(|point| format!("{:.0} min {}", point.minutes, face.paco2(point.paco2_mmhg)))
        .collect();
    let minutes = course.next_gas_minutes;
    let next = if course.settled_minutes > 0.0 {
        let settled = course.settled_minutes.ceil();
        format!("Settled after about {settled:.0} min. Draw the next gas {minutes:.0} min after the change.")
    } else {
        format!("Hardly any change to wait for: a gas tells from {minutes:.0} min on.")
    };
    vec![at.join(face.dot()), next]
}
