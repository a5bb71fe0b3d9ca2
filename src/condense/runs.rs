//! Runs of straight cuts between which nothing but X and Y changes, or Z in proportion.

use std::ops::Range;

use kurbo::Point;

use super::follow::{Seen, State};
use crate::geom::ArcSpline;

/// A run of straight cuts, one line of the program after the other.
#[derive(Clone, Debug)]
pub(super) struct Run {
    /// Its blocks among those followed.
    pub(super) blocks: Range<usize>,
    /// Its places from the start to the end, in mm.
    pub(super) points: Vec<Point>,
    /// The heights at its ends; `None` where they are not told, and the same.
    pub(super) heights: Option<(f64, f64)>,
}

impl Run {
    /// The way seen from above.
    pub(super) fn path(&self) -> ArcSpline {
        ArcSpline::polyline(self.points.iter().copied(), false)
    }

    /// True when it goes up or down on its way.
    pub(super) fn slopes(&self) -> bool {
        self.heights.is_some_and(|(from, to): (f64, f64)| (to - from).abs() > 0.0)
    }
}

/// The runs of at least two cuts, in order. Heights count as in proportion when they are so within `place` mm; with
/// `level` no run slopes.
pub(super) fn runs(blocks: &[Seen], place: f64, level: bool) -> Vec<Run> {
    let mut runs = Vec::new();
    let mut growing: Option<Growing> = None;
    for (i, seen) in blocks.iter().enumerate() {
        let goes_on = growing.as_mut().is_some_and(|run| run.takes(&blocks[i - 1], seen, place, level));
        if !goes_on {
            runs.extend(growing.take().and_then(|run| run.ended(i)));
            growing = Growing::from(seen, i).filter(|run| !level || run.flat);
        }
    }
    runs.extend(growing.and_then(|run| run.ended(blocks.len())));
    runs
}

/// A run under way.
struct Growing {
    first: usize,
    points: Vec<Point>,
    start: Option<f64>,
    end: Option<f64>,
    /// True while the height has not changed.
    flat: bool,
    /// Length in the plane so far.
    along: f64,
    /// The slopes from the start that every height allows.
    slopes: (f64, f64),
}

impl Growing {
    fn from(seen: &Seen, first: usize) -> Option<Self> {
        let (from, to) = (place(&seen.before)?, place(&seen.after)?);
        let (start, end) = (seen.before.at[2], seen.after.at[2]);
        let slopes = (f64::NEG_INFINITY, f64::INFINITY);
        let flat = start == end;
        let run = Self { first, points: vec![from, to], start, end, flat, along: from.distance(to), slopes };
        (seen.is_cut && (flat || from != to)).then_some(run)
    }

    /// Takes the next cut, if it goes on with nothing but X and Y changed, or Z in proportion.
    fn takes(&mut self, last: &Seen, next: &Seen, step: f64, level: bool) -> bool {
        let follows = next.is_cut && next.line == last.line + 1 && next.after.feed == last.after.feed;
        let (Some(to), true) = (place(&next.after), follows) else { return false };
        let height = next.after.at[2];
        let along = self.along + to.distance(self.points[self.points.len() - 1]);
        if self.flat && height != self.end {
            return false;
        }
        if let (false, Some(start), Some(height)) = (self.flat, self.start, height) {
            let rise = |by: f64| (height - start + by) / along;
            let slopes = (self.slopes.0.max(rise(-step)), self.slopes.1.min(rise(step)));
            if level || slopes.0 > slopes.1 {
                return false;
            }
            self.slopes = slopes;
        }
        (self.along, self.end) = (along, height);
        self.points.push(to);
        true
    }

    fn ended(self, end: usize) -> Option<Run> {
        let heights = self.start.zip(self.end);
        let run = Run { blocks: self.first..end, points: self.points, heights };
        (run.blocks.len() > 1 && self.along > 0.0).then_some(run)
    }
}

fn place(state: &State) -> Option<Point> {
    Some(Point::new(state.at[0]?, state.at[1]?))
}
