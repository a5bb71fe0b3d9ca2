//! The cutter's course as it is built, move by move, by rules that keep it safe.

use kurbo::Point;

use crate::geom::Span;
use crate::toolpath::{Move, Position, Toolpath};

use super::cut::Cut;
use super::profile::Profile;
use super::setup::{Heights, Setup};
use super::track::Track;

/// A toolpath under construction, and where the cutter is.
pub(super) struct Course {
    moves: Vec<Move>,
    at: Position,
    heights: Heights,
    step_mm: f64,
    spindle_rpm: f64,
}

impl Course {
    /// A course that begins above the park position at the clearance height.
    pub(super) fn new(setup: &Setup) -> Self {
        let heights = setup.heights();
        let at = Position { xy: setup.park, z: heights.clearance };
        Self { moves: Vec::new(), at, heights, step_mm: setup.step_mm, spindle_rpm: 0.0 }
    }

    /// The heights of the program.
    pub(super) fn heights(&self) -> Heights {
        self.heights
    }

    /// The height that the cutter is at.
    pub(super) fn height(&self) -> f64 {
        self.at.z
    }

    /// One unit of the program's last place, in mm.
    pub(super) fn step_mm(&self) -> f64 {
        self.step_mm
    }

    /// Sets the spindle's speed from here on.
    pub(super) fn spin(&mut self, rpm: f64) {
        self.spindle_rpm = rpm;
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

    /// Straight down or up to `z` at the plunge feed.
    pub(super) fn height_to(&mut self, z: f64, cut: &Cut) {
        self.push(Position { z, ..self.at }, 0.0, Some(cut.plunge));
    }

    /// Straight on to `xy` at the present height.
    pub(super) fn line_to(&mut self, xy: Point, cut: &Cut) {
        self.along(Span::line(self.at.xy, xy), self.at.z, cut);
    }

    /// Along a span, its height changing evenly to `z`; more than half a turn in two moves.
    pub(super) fn along(&mut self, span: Span, z: f64, cut: &Cut) {
        let from = self.at.z;
        let feed = cut.sloping_feed(span.length(), z - from);
        let halves = if span.bulge.abs() > 1.0 { 2 } else { 1 };
        for k in 1..=halves {
            let share = |k: i32| f64::from(k) / f64::from(halves);
            let part = span.part(share(k - 1), share(k));
            let z = if k == halves { z } else { from + (z - from) * share(k) };
            self.push(Position { xy: part.end, z }, part.bulge, Some(feed));
        }
    }

    /// Along a track from one way to another at the heights of `profile`.
    pub(super) fn follow(&mut self, track: &Track, (from, to): (f64, f64), profile: &Profile, cut: &Cut) {
        for stretch in track.stretches(from, to, profile, 2.0 * self.step_mm) {
            self.along(stretch.span, stretch.z, cut);
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

    /// How many moves there are so far.
    pub(super) fn len(&self) -> usize {
        self.moves.len()
    }

    /// The finished toolpath.
    pub(super) fn finish(self) -> Toolpath {
        Toolpath { moves: self.moves }
    }
}
