//! What stands where, for a screen of a given size.

use ratatui::layout::Rect;

use super::pen::Pen;
use crate::panel::state::{State, View};

/// Rows that the parts would take.
#[derive(Debug, Clone, Copy)]
pub struct Needs {
    /// Of the settings.
    pub settings: usize,
    /// Of the limits.
    pub limits: usize,
}

/// Where everything stands.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Layout {
    /// Everything but the foot.
    pub whole: Rect,
    /// Who the patient is.
    pub head: Rect,
    /// Settings, what follows and limits together.
    pub body: Rect,
    /// The settings.
    pub settings: Rect,
    /// What follows.
    pub follows: Rect,
    /// The limits.
    pub limits: Rect,
    /// The names of the views.
    pub tabs: Rect,
    /// The views that are open.
    pub views: Vec<(View, Rect)>,
    /// The cautions.
    pub cautions: Rect,
    /// Keys, or what happened.
    pub foot: Rect,
    /// Decision support and so on.
    pub safety: Rect,
    /// Whether the view fills the screen.
    pub large: bool,
}

/// From this width on three columns and two views stand side by side.
pub const WIDE: u16 = 140;
/// From this height on what follows is told in full.
pub const TALL: u16 = 28;
/// The rows of what follows, in full and in short, heading included.
pub const FOLLOWS: [u16; 2] = [9, 7];

impl Layout {
    /// The layout of a screen; `area` is at least the least one.
    pub fn of(state: &State, area: Rect, needs: Needs) -> Self {
        let rows = |count: usize| u16::try_from(count).unwrap_or(u16::MAX);
        let row = |y: u16, height: u16| Rect { y: area.y + y, height, ..area }.intersection(area);
        let (safety, foot) = (row(area.height - 1, 1), row(area.height - 2, 1));
        let whole = row(0, area.height - 2);
        let cautions = match area.height {
            0..22 => 1,
            22..28 => 2,
            28..40 => 3,
            _ => 5,
        };
        let wide = area.width >= WIDE;
        let follows = if area.height >= TALL { FOLLOWS[0] } else { FOLLOWS[1] };
        let settings_rows = rows(needs.settings + 1);
        let limits_rows = rows(needs.limits + 1);
        let right = if wide { follows.max(limits_rows) } else { follows + limits_rows };
        let room = whole.height.saturating_sub(1 + cautions);
        // A view of less than three rows shows nothing: then none is shown.
        let body_height = if state.large { 3 } else { settings_rows.max(right).min(room) };
        let left_over = room.saturating_sub(body_height);
        let view_height = if left_over >= 4 { left_over - 1 } else { 0 };
        let body_height = if view_height == 0 { room } else { body_height };
        let body = row(1, body_height);
        let tabs = row(1 + body_height, u16::from(view_height > 0));
        let below = row(2 + body_height, view_height);
        let left = match area.width {
            0..80 => 32,
            80..100 => 37,
            100..WIDE => 42,
            _ => 46,
        };
        let settings = Rect { width: left, ..body };
        let (follows_place, limits_place) = if wide {
            let middle = 54;
            (
                Rect { x: body.x + left + 2, width: middle - 2, ..body },
                Rect { x: body.x + left + middle + 1, width: area.width - left - middle - 1, ..body },
            )
        } else {
            let column = Rect { x: body.x + left + 2, width: area.width - left - 2, ..body };
            (
                Rect { height: follows.min(column.height), ..column },
                Rect { y: column.y + follows, height: column.height.saturating_sub(follows), ..column },
            )
        };
        let views = if view_height == 0 {
            Vec::new()
        } else if wide && !state.large {
            let half = area.width / 2;
            let second = second_of(state.view);
            vec![
                (state.view, Rect { width: half - 1, ..below }),
                (second, Rect { x: below.x + half + 1, width: area.width - half - 1, ..below }),
            ]
        } else {
            vec![(state.view, below)]
        };
        Self {
            whole,
            head: row(0, 1),
            body,
            settings,
            follows: follows_place,
            limits: limits_place,
            tabs,
            views,
            cautions: row(2 + body_height + view_height - u16::from(view_height == 0), cautions),
            foot,
            safety,
            large: state.large && view_height > 0,
        }
    }

    /// The lines between the columns.
    pub fn separators(&self, pen: &mut Pen<'_>) {
        pen.column(self.body, self.settings.width, "│");
        if self.limits.x > self.follows.x {
            pen.column(self.body, self.limits.x - self.body.x - 2, "│");
        }
        for (_, place) in self.views.iter().skip(1) {
            let whole = Rect { x: self.body.x, width: self.body.width, ..*place };
            pen.column(whole, place.x - self.body.x - 1, "│");
        }
    }
}

/// What stands beside a view on a wide screen: the course, or the curve beside the course.
pub const fn second_of(view: View) -> View {
    match view {
        View::Curve => View::Course,
        View::Table
        | View::Course
        | View::Breath
        | View::Kept
        | View::Record
        | View::Working
        | View::Cautions => View::Curve,
    }
}
