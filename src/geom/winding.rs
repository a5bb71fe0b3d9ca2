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
    /// True when the level ray from `p` towards larger x crosses the span an odd number of times: once for the chord,
    /// and once more when `p` lies between chord and arc. An odd count over closed chains puts `p` within them by even
    /// and odd; sound for every point that is not on a span itself.
    pub fn crosses_level_ray(&self, p: Point) -> bool {
        let (a, b) = (self.start, self.end);
        let spanned = (a.y > p.y) != (b.y > p.y);
        // Ends as high as `p` count as lower; so a place on a level chord counts as a hair above it.
        let across = (b - a).cross(p - a);
        let left_of = across > 0.0 || (across == 0.0 && b.x > a.x);
        let chord = spanned && (left_of == (b.y > a.y));
        let on_arc_side = left_of != (self.bulge > 0.0);
        chord != (on_arc_side && self.is_seen_wider(p))
    }

    /// True where the ends are seen from `p` under a wider angle than from the arc: on the arc's side of the chord that
    /// is between the two (inscribed angle theorem). The centre, out of reach for nearly straight arcs, plays no part.
    fn is_seen_wider(&self, p: Point) -> bool {
        let (from, to) = (self.start - p, self.end - p);
        from.cross(to).abs().atan2(-from.dot(to)) < self.sweep().abs() / 2.0
    }

    /// By how much a sight line from `p` turns as it follows the span from start to end, in radians.
    fn turn_seen_from(&self, p: Point) -> f64 {
        let (from, to) = (self.start - p, self.end - p);
        let cross = from.cross(to);
        let turn = cross.atan2(from.dot(to));
        if self.is_line() {
            return turn;
        }
        if cross == 0.0 {
            // On the chord or its extension: an arc passes the chord on the side that its sign says.
            return turn.abs().copysign(self.bulge);
        }
        let between = cross * self.bulge < 0.0 && self.is_seen_wider(p);
        // Between chord and arc, the two pass `p` on opposite sides: they differ by a full turn.
        if between { turn + TAU.copysign(self.bulge) } else { turn }
    }
}
