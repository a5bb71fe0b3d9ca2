//! A bound of the distance of two ways that go up or down.

use kurbo::{Point, Vec2};

use crate::geom::Span;
use crate::num::Deviation;
use crate::toolpath::{Move, Position};

/// Further than this, in radians, a part of an arc is not held against its chord.
const WIDEST: f64 = 1.0;
/// How far the place at a share of an arc's length is along its chord from the place at that share of the chord, at most,
/// in heights of the arc, for arcs of [`WIDEST`] or less.
const ALONG: f64 = 0.1;

/// An upper bound of the distance, in order from start to end, between straight moves and moves along lines and arcs.
///
/// Every joint of the new way is matched to its foot on the old one, further on than the last; every joint of the old
/// way to its foot on the new move beside it. Between two matches both ways go evenly, the new one bowed by the arc's
/// height: what lies between them is within the hull of what lies there at the matches, with and without that height.
pub(super) fn deviation(old: &[Move], new: &[Move]) -> Deviation {
    let mut worst = Deviation { mm: 0.0, at: Point::ZERO, certified: true };
    let mut walk = Walk { moves: old, at: 0, t: 0.0 };
    for (k, m) in new.iter().enumerate() {
        let piece = if k + 1 == new.len() { walk.finish() } else { walk.follow(m) };
        let bound = beside(m, &piece);
        if bound.mm > worst.mm {
            worst = bound;
        }
    }
    worst
}

/// The bound for one move and the places of the piece beside it, from its start to its end.
fn beside(m: &Move, piece: &[Position]) -> Deviation {
    let span = m.span();
    let mut worst = Deviation { mm: 0.0, at: m.from.xy, certified: true };
    let mut before = (0.0, Apart { xy: span.start - piece[0].xy, z: m.from.z - piece[0].z });
    for (i, p) in piece.iter().enumerate() {
        let t = match i {
            0 => 0.0,
            _ if i + 1 == piece.len() => 1.0,
            _ => span.nearest(p.xy).t.max(before.0),
        };
        let apart = Apart { xy: span.at(t) - p.xy, z: m.from.z + (m.to.z - m.from.z) * t - p.z };
        let bow = bow(&span, before.0, t);
        let hull = [before.1, before.1.bowed(bow), apart, apart.bowed(bow)];
        let mm = hull.into_iter().map(Apart::size).fold(0.0, f64::max) + ALONG * bow.hypot();
        // NaN is worse than any number.
        if mm.is_nan() || mm > worst.mm {
            worst = Deviation { mm: if mm.is_nan() { f64::INFINITY } else { mm }, at: p.xy, certified: true };
        }
        before = (t, apart);
    }
    worst
}

/// From the middle of the chord between two shares of a span to the middle of the arc; endless for a wide one.
fn bow(span: &Span, from: f64, to: f64) -> Vec2 {
    if span.is_line() {
        return Vec2::ZERO;
    }
    if span.sweep().abs() * (to - from) > WIDEST {
        return Vec2::new(f64::INFINITY, 0.0);
    }
    span.at((from + to) / 2.0) - span.at(from).midpoint(span.at(to))
}

/// How far, and which way, the new way is from the old one.
#[derive(Clone, Copy)]
struct Apart {
    xy: Vec2,
    z: f64,
}

impl Apart {
    fn bowed(self, bow: Vec2) -> Self {
        Self { xy: self.xy + bow, ..self }
    }

    fn size(self) -> f64 {
        self.xy.hypot().hypot(self.z)
    }
}

/// A place on the old way, going forward.
struct Walk<'a> {
    moves: &'a [Move],
    at: usize,
    t: f64,
}

impl Walk<'_> {
    fn place(&self, at: usize, t: f64) -> Position {
        let m = &self.moves[at];
        Position { xy: m.from.xy.lerp(m.to.xy, t), z: m.from.z + (m.to.z - m.from.z) * t }
    }

    /// On to the place nearest to the end of `m`, not further than twice its length. Returns the places passed.
    fn follow(&mut self, m: &Move) -> Vec<Position> {
        let (mut gone, mut best) = (0.0, (f64::INFINITY, self.at, self.t));
        for at in self.at..self.moves.len() {
            let near = self.moves[at].span().nearest(m.to.xy);
            let t = if at == self.at { near.t.max(self.t) } else { near.t };
            let distance = self.place(at, t).xy.distance(m.to.xy);
            if distance < best.0 {
                best = (distance, at, t);
            }
            gone += self.moves[at].length();
            if gone > 2.0 * m.length() + self.moves[self.at].length() {
                break;
            }
        }
        self.passed(best.1, best.2)
    }

    fn finish(&mut self) -> Vec<Position> {
        self.passed(self.moves.len() - 1, 1.0)
    }

    fn passed(&mut self, at: usize, t: f64) -> Vec<Position> {
        let mut places = vec![self.place(self.at, self.t)];
        places.extend(self.moves[self.at..at].iter().map(|m| m.to));
        places.push(self.place(at, t));
        (self.at, self.t) = (at, t);
        places
    }
}
