//! A bound of the distance of two ways that go up or down.

use kurbo::Point;

use crate::num::Deviation;
use crate::toolpath::{Move, Position};

/// Further than this, in radians, a part of an arc is not held against its chord.
const WIDEST: f64 = 1.0;
/// By how much the place at a share of an arc's length is further from the place at that share of its chord than the
/// arc is high, at most, for arcs of [`WIDEST`] or less.
const EXCESS: f64 = 1.1;

/// An upper bound of the distance, in order from start to end, between straight moves and moves along lines and arcs.
///
/// Every joint of the new way is matched to its foot on the old one, further on than the last; every joint of the old
/// way to its foot on the new move beside it. Between two matches both ways go evenly, so that the distance is at most
/// the larger one at the matches and the height of the arc between them.
pub(super) fn deviation(old: &[Move], new: &[Move]) -> Deviation {
    let mut worst = Deviation { mm: 0.0, at: Point::ZERO, certified: true };
    let mut walk = Walk { moves: old, at: 0, t: 0.0 };
    for (k, m) in new.iter().enumerate() {
        let piece = if k + 1 == new.len() { walk.to_end() } else { walk.to_foot(m) };
        let bound = beside(m, &piece);
        if !(bound.mm <= worst.mm) {
            worst = bound;
        }
    }
    worst
}

/// The bound for one move and the places of the piece beside it, from its start to its end.
fn beside(m: &Move, piece: &[Position]) -> Deviation {
    let span = m.span();
    let sweep = span.sweep().abs();
    let height =
        |share: f64| if sweep * share > WIDEST { f64::INFINITY } else { span.part(0.0, share).sagitta() };
    let mut worst = Deviation { mm: 0.0, at: m.from.xy, certified: true };
    let (mut t, mut apart) = (0.0, 0.0);
    for (i, p) in piece.iter().enumerate() {
        let foot = match i {
            0 => 0.0,
            _ if i + 1 == piece.len() => 1.0,
            _ => span.nearest(p.xy).t.max(t),
        };
        let z = m.from.z + (m.to.z - m.from.z) * foot;
        let here = span.at(foot).distance(p.xy).hypot(z - p.z);
        let mm = here.max(apart) + if foot > t { EXCESS * height(foot - t) } else { 0.0 };
        if !(mm <= worst.mm) {
            worst = Deviation { mm, at: p.xy, certified: true };
        }
        (t, apart) = (foot, here);
    }
    worst
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
    fn to_foot(&mut self, m: &Move) -> Vec<Position> {
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

    fn to_end(&mut self) -> Vec<Position> {
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
