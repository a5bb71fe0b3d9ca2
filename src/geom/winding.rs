//! Which side of a closed chain a point is on.

use std::f64::consts::TAU;

use kurbo::Point;

use super::{ArcSpline, Span};

impl ArcSpline {
    /// How many times the closed chain runs round `p`, positive counter-clockwise: the turn of the sight line from
    /// `p` to a point that runs along it. Sound for every point that is not on the chain itself.
    pub fn winding(&self, p: Point) -> i32 {
        let turn: f64 = self.spans().map(|span| span.turn_seen_from(p)).sum();
        // A sum over a closed chain is a whole number of turns, give or take rounding.
        (turn / TAU).round() as i32
    }
}

impl Span {
    /// By how much a sight line from `p` turns as it follows the span from start to end, in radians.
    fn turn_seen_from(&self, p: Point) -> f64 {
        let (from, to) = (self.start - p, self.end - p);
        let cross = from.cross(to);
        let turn = cross.atan2(from.dot(to));
        let Some(centre) = self.centre() else { return turn };
        if cross == 0.0 {
            // On the chord or its extension: an arc passes the chord on the side that its sign says.
            return turn.abs().copysign(self.bulge);
        }
        let between = cross * self.bulge < 0.0 && p.distance(centre) < self.radius();
        // Between chord and arc, the two pass `p` on opposite sides: they differ by a full turn.
        if between { turn + TAU.copysign(self.bulge) } else { turn }
    }
}
