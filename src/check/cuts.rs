//! What a program cuts: its moves below the stock's top, sorted into passes and the ways down to them.

use kurbo::{Point, Rect};

use crate::geom::{ArcSpline, Span};
use crate::toolpath::Move;

/// All cuts of a program.
pub(super) struct Cuts<'a> {
    /// Runs of moves that go no deeper than the first of them, in the order of the program.
    pub(super) passes: Vec<Pass<'a>>,
    /// Moves that go deeper and along at once: ramps and helices.
    pub(super) ramps: Vec<&'a Move>,
    /// Moves straight down that no pass starts from.
    pub(super) plunges: Vec<&'a Move>,
}

/// A run of moves at one depth. It may rise and come down again, as over a tab, but not below that depth.
pub(super) struct Pass<'a> {
    /// The moves that go along.
    pub(super) moves: Vec<&'a Move>,
    /// The height of its floor, in mm.
    pub(super) z: f64,
}

impl<'a> Cuts<'a> {
    /// The cuts of `moves` in stock whose top is at the height `top`.
    pub(super) fn of(moves: &'a [Move], top: f64) -> Self {
        let mut cuts = Self { passes: Vec::new(), ramps: Vec::new(), plunges: Vec::new() };
        let mut floor = f64::INFINITY;
        let mut open = false;
        for m in moves {
            let low = m.from.z.min(m.to.z);
            if low >= top || m.is_rapid() {
                floor = f64::INFINITY;
                open = false;
                continue;
            }
            if floor == f64::INFINITY {
                floor = m.from.z;
            }
            let along = m.from.xy != m.to.xy;
            if m.to.z < floor {
                floor = m.to.z;
                open = false;
                if along { &mut cuts.ramps } else { &mut cuts.plunges }.push(m);
            } else if along {
                if !open && cuts.plunges.last().is_some_and(|plunge| plunge.to == m.from) {
                    cuts.plunges.pop();
                }
                cuts.push(m, floor, open);
                open = true;
            }
        }
        cuts
    }

    fn push(&mut self, m: &'a Move, z: f64, open: bool) {
        match self.passes.last_mut() {
            Some(pass) if open => pass.moves.push(m),
            _ => self.passes.push(Pass { moves: vec![m], z }),
        }
    }

    /// The smallest upright box around all that is cut along; `None` when nothing is.
    pub(super) fn bbox(&self) -> Option<Rect> {
        let passes = self.passes.iter().flat_map(|pass| pass.moves.iter());
        passes.chain(&self.ramps).map(|m| m.span().bbox()).reduce(|a, b| a.union(b))
    }
}

impl Pass<'_> {
    /// The way of the cutter from above, and whether it comes back to within `gap` mm of its start.
    pub(super) fn chain(&self, gap: f64) -> ArcSpline {
        let spans: Vec<Span> = self.moves.iter().map(|m| m.span()).collect();
        let (first, last) = (spans[0].start, spans[spans.len() - 1].end);
        let closed = spans.len() > 1 && first.distance(last) <= gap;
        let mut chain = ArcSpline::from_spans(&spans, closed);
        if closed && first != last {
            chain.vertices.push(crate::geom::Vertex { at: last, bulge: 0.0 });
        }
        chain
    }

    /// The move of the pass that comes nearest to a place.
    pub(super) fn move_near(&self, place: Point) -> &Move {
        let distance = |m: &&&Move| m.span().nearest(place).distance;
        let nearest = self.moves.iter().min_by(|a, b| distance(a).total_cmp(&distance(b)));
        nearest.unwrap_or(&self.moves[0])
    }
}
