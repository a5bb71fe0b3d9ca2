//! What a program cuts: its moves below the stock's top, sorted into passes and the ways down to them.

use kurbo::{Point, Rect};

use crate::gcode::read::Program;
use crate::geom::{ArcSpline, Span};
use crate::toolpath::{Move, Position};

/// All cuts of a program.
pub(super) struct Cuts<'a> {
    /// Runs of moves that go no deeper than the first of them, in the order of the program.
    pub(super) passes: Vec<Pass<'a>>,
    /// Moves that go deeper and along at once: ramps and helices.
    pub(super) ramps: Vec<&'a Move>,
    /// Moves straight down that no pass starts from.
    pub(super) plunges: Vec<&'a Move>,
    /// How far the moves may be from what the text says, in mm.
    pub(super) unsure: f64,
}

/// How things stood when the cutter left the work.
struct Lifted {
    at: Position,
    floor: f64,
    open: bool,
}

impl Lifted {
    /// True when the next cut only goes straight down to where the cutter left: the cut goes on as if it had not.
    fn comes_back_by(&self, m: &Move) -> bool {
        m.to == self.at && m.from.xy == m.to.xy && m.from.z > m.to.z
    }
}

/// A run of moves at one depth. It may rise and come down again, as over a tab, but not below that depth.
pub(super) struct Pass<'a> {
    /// The moves that go along.
    pub(super) moves: Vec<&'a Move>,
    /// The height of its floor, in mm.
    pub(super) z: f64,
    /// True when the cutter went up and straight down again where the pass before it ends.
    goes_on: bool,
}

impl<'a> Cuts<'a> {
    /// The cuts of `program` in stock whose top is at the height `top`.
    pub(super) fn of(program: &'a Program, top: f64) -> Self {
        let moves = &program.toolpath.moves;
        let unsure = program.approximated;
        let mut cuts = Self { passes: Vec::new(), ramps: Vec::new(), plunges: Vec::new(), unsure };
        let mut floor = f64::INFINITY;
        let mut open = false;
        let (mut lifted, mut goes_on) = (None, false);
        for m in moves {
            let low = m.from.z.min(m.to.z);
            if m.is_rapid() && floor < f64::INFINITY {
                lifted = Some(Lifted { at: m.from, floor, open });
            }
            if low >= top || m.is_rapid() {
                floor = f64::INFINITY;
                (open, goes_on) = (false, false);
                continue;
            }
            if let Some(before) = lifted.take().filter(|lifted| lifted.comes_back_by(m)) {
                (floor, goes_on) = (before.floor, before.open);
                continue;
            }
            if floor == f64::INFINITY {
                floor = m.from.z;
            }
            let along = m.from.xy != m.to.xy;
            if m.to.z < floor {
                floor = m.to.z;
                (open, goes_on) = (false, false);
                if along { &mut cuts.ramps } else { &mut cuts.plunges }.push(m);
            } else if along {
                if !open && cuts.plunges.last().is_some_and(|plunge| plunge.to == m.from) {
                    cuts.plunges.pop();
                }
                cuts.push(m, floor, open, goes_on);
                (open, goes_on) = (true, false);
            }
        }
        cuts
    }

    fn push(&mut self, m: &'a Move, z: f64, open: bool, goes_on: bool) {
        match self.passes.last_mut() {
            Some(pass) if open => pass.moves.push(m),
            _ => self.passes.push(Pass { moves: vec![m], z, goes_on }),
        }
    }

    /// The smallest upright box around all that is cut along; `None` when nothing is.
    pub(super) fn bbox(&self) -> Option<Rect> {
        let passes = self.passes.iter().flat_map(|pass| pass.moves.iter());
        passes.chain(&self.ramps).map(|m| m.span().bbox()).reduce(|a, b| a.union(b))
    }
}

impl<'a> Pass<'a> {
    /// Passes in groups: each with those that go on where it ends.
    pub(super) fn groups<'b>(passes: &'b [Pass<'a>]) -> impl Iterator<Item = &'b [Pass<'a>]> {
        passes.chunk_by(|_, next| next.goes_on)
    }

    /// The passes of a group as one; `None` for a single one.
    pub(super) fn joined(group: &[Pass<'a>]) -> Option<Self> {
        let first = group.first().filter(|_| group.len() > 1)?;
        let moves = group.iter().flat_map(|pass| pass.moves.iter().copied()).collect();
        Some(Pass { moves, z: first.z, goes_on: false })
    }

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
