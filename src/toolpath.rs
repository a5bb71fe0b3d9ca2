//! The cutter's moves: what we meant, and, read back from text, what a program says.

use kurbo::Point;

use crate::geom::Span;

/// A chain of moves of the cutter's tip, in mm, in the program's own coordinates.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Toolpath {
    /// The moves in the order of execution.
    pub moves: Vec<Move>,
}

/// A place of the cutter's tip, in mm.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Position {
    /// The place in the plane.
    pub xy: Point,
    /// The height.
    pub z: f64,
}

/// One motion block: straight, or an arc in XY, or (with a change of height) a helix.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Move {
    /// Where the move starts.
    pub from: Position,
    /// Where it ends.
    pub to: Position,
    /// tan(sweep/4) in XY; 0 for a straight move, at most 1 in size (a longer arc is several moves).
    pub bulge: f64,
    /// Feed in mm/min along the path; `None` for a rapid.
    pub feed: Option<f64>,
    /// Spindle speed in rev/min while it moves; 0 when stopped.
    pub spindle_rpm: f64,
    /// Line of the program text, from 1; 0 for a move that was not read from text.
    pub line: usize,
}

impl Move {
    /// The move's projection on the XY plane.
    pub fn span(&self) -> Span {
        Span::arc(self.from.xy, self.to.xy, self.bulge)
    }

    /// The move in `n` parts of equal length, at least one.
    pub fn in_parts(&self, n: usize) -> impl Iterator<Item = Self> + '_ {
        let n = n.max(1);
        let span = self.span();
        let place = move |k: usize| {
            let t = k as f64 / n as f64;
            Position { xy: span.at(t), z: self.from.z + (self.to.z - self.from.z) * t }
        };
        let ends = move |k: usize| match k {
            0 => self.from,
            k if k == n => self.to,
            k => place(k),
        };
        let bulge = (self.bulge.atan() / n as f64).tan();
        (0..n).map(move |k| Self { from: ends(k), to: ends(k + 1), bulge, ..*self })
    }

    /// True for a rapid.
    pub fn is_rapid(&self) -> bool {
        self.feed.is_none()
    }

    /// Length along the path in mm, the height included.
    pub fn length(&self) -> f64 {
        self.span().length().hypot(self.to.z - self.from.z)
    }
}
