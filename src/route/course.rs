//! The cutter's course as it is built, move by move, by rules that keep it safe.

use kurbo::Point;

use crate::geom::{ArcSpline, Span};
use crate::toolpath::{Move, Position, Toolpath};

use super::setup::{Cut, Heights, Setup};

/// A toolpath under construction, and where the cutter is.
pub(super) struct Course {
    moves: Vec<Move>,
    at: Position,
    heights: Heights,
    spindle_rpm: f64,
}

impl Course {
    /// A course that begins above the park position at the clearance height.
    pub(super) fn new(setup: &Setup) -> Self {
        let heights = setup.heights();
        let at = Position { xy: setup.park, z: heights.clearance };
        Self { moves: Vec::new(), at, heights, spindle_rpm: 0.0 }
    }

    /// Cuts one contour in all its passes, from its first vertex: a closed one round and round, an open one to and
    /// fro.
    pub(super) fn cut_contour(&mut self, path: &ArcSpline, cut: &Cut) {
        self.spindle_rpm = cut.spindle_rpm;
        let back = path.reversed();
        self.travel_to(path.vertices[0].at);
        for (pass, depth) in cut.passes().into_iter().enumerate() {
            self.height_to(self.heights.top - depth, cut.plunge);
            let chain = if path.closed || pass % 2 == 0 { path } else { &back };
            chain.spans().for_each(|span| self.along(span, cut.feed));
        }
        self.retract();
    }

    /// Up to the clearance height, then across to `xy`, by rapid.
    pub(super) fn travel_to(&mut self, xy: Point) {
        self.retract();
        self.push(Position { xy, ..self.at }, 0.0, None);
    }

    /// Straight up to the clearance height.
    pub(super) fn retract(&mut self) {
        self.push(Position { z: self.heights.clearance, ..self.at }, 0.0, None);
    }

    /// Straight down or up to `z` at a feed.
    fn height_to(&mut self, z: f64, feed: f64) {
        self.push(Position { z, ..self.at }, 0.0, Some(feed));
    }

    /// Along a span at the present height; more than half a turn in two moves.
    fn along(&mut self, span: Span, feed: f64) {
        let halves = if span.bulge.abs() > 1.0 { 2 } else { 1 };
        for k in 0..halves {
            let part = span.part(f64::from(k) / f64::from(halves), f64::from(k + 1) / f64::from(halves));
            self.push(Position { xy: part.end, ..self.at }, part.bulge, Some(feed));
        }
    }

    /// One move to `to`; none when the cutter is there already.
    fn push(&mut self, to: Position, bulge: f64, feed: Option<f64>) {
        if to == self.at {
            return;
        }
        self.moves.push(Move { from: self.at, to, bulge, feed, spindle_rpm: self.spindle_rpm, line: 0 });
        self.at = to;
    }

    /// The finished toolpath.
    pub(super) fn finish(self) -> Toolpath {
        Toolpath { moves: self.moves }
    }
}
