//! The contour as the search sees it: vertices with the band that the path must keep to.

use kurbo::{Point, Vec2};

use crate::geom::{ArcSpline, Span};
use crate::num::Tolerance;

use super::lines::{Line, lines};

/// A vertex of the trace and how far from it the path may pass.
#[derive(Clone, Copy, Debug)]
pub(super) struct Bead {
    pub(super) at: Point,
    /// Band to either side, in mm.
    pub(super) band: f64,
    /// Length of the trace up to here.
    pub(super) along: f64,
}

/// The beads of one contour. A closed trace repeats its beads for a second lap, so that a run may start anywhere.
pub(super) struct Trace {
    beads: Vec<Bead>,
    lines: Vec<Line>,
    /// Beads in one lap of a closed trace, 0 for an open one.
    lap: usize,
    tolerance: f64,
}

impl Trace {
    /// The trace of `contour`; `None` when it has no length.
    pub(super) fn new(contour: &ArcSpline, tolerance: Tolerance) -> Option<Self> {
        let mut points = sampled(contour, tolerance.mm());
        points.dedup();
        if contour.closed && points.len() > 1 && points.first() == points.last() {
            points.pop();
        }
        if points.len() < 2 {
            return None;
        }
        let lap = if contour.closed { points.len() } else { 0 };
        if contour.closed {
            points.extend_from_within(..);
            points.push(points[0]);
        }
        let beads = strung(&points, tolerance.mm());
        let lines = lines(&beads);
        Some(Self { beads, lines, lap, tolerance: tolerance.mm() })
    }

    /// The same trace with a band of `share` of the tolerance.
    pub(super) fn narrowed(&self, share: f64) -> Self {
        let band = self.tolerance * share;
        let beads = self.beads.iter().map(|bead| Bead { band, ..*bead }).collect();
        Self { beads, lines: self.lines.clone(), ..*self }
    }

    /// Narrows the band about bead `i` by a little more than `excess`, in both laps of a closed trace.
    pub(super) fn narrow(&mut self, i: usize, excess: f64) {
        let last = self.beads.len() - 1;
        let near = i.saturating_sub(2)..=(i + 2).min(last);
        let twins = near.flat_map(|k| [Some(k), k.checked_sub(self.lap), Some(k + self.lap)]);
        let mut twins: Vec<usize> = twins.flatten().filter(|&k| k <= last).collect();
        twins.sort_unstable();
        twins.dedup();
        for k in twins {
            self.beads[k].band = (self.beads[k].band - NARROWING * excess).max(self.tolerance / 2.0);
        }
    }

    /// Beads of the trace; of a closed one, two laps and the first bead again.
    pub(super) fn beads(&self) -> &[Bead] {
        &self.beads
    }

    /// The straight runs among the beads.
    pub(super) fn lines(&self) -> &[Line] {
        &self.lines
    }

    /// Beads in one lap of a closed trace, 0 for an open one.
    pub(super) fn lap(&self) -> usize {
        self.lap
    }

    pub(super) fn closed(&self) -> bool {
        self.lap > 0
    }

    /// The unit direction of the trace about bead `i`, measured over at least the tolerance on either side.
    pub(super) fn direction(&self, i: usize) -> Vec2 {
        let here = self.beads[i];
        let wide = 2.0 * self.tolerance;
        let after = self.beads[i..].iter().find(|b| b.at.distance(here.at) > wide);
        let before = self.beads[..i].iter().rev().find(|b| b.at.distance(here.at) > wide);
        let chord =
            after.unwrap_or(&self.beads[self.beads.len() - 1]).at - before.unwrap_or(&self.beads[0]).at;
        if chord.hypot2() > 0.0 { chord.normalize() } else { Vec2::new(1.0, 0.0) }
    }
}

/// The contour's vertices, with points between them on arcs and on long chords, so that a path that keeps to the
/// points cannot leave the contour between them.
pub(super) fn sampled(contour: &ArcSpline, tolerance: f64) -> Vec<Point> {
    let spans = contour.spans();
    let mut points: Vec<Point> = Vec::with_capacity(spans.len() + 1);
    for span in spans {
        let pieces = pieces(span, tolerance);
        points.push(span.start);
        points.extend((1..pieces).map(|k| span.at(f64::from(k) / f64::from(pieces))));
    }
    if let (false, Some(last)) = (contour.closed, contour.vertices.last()) {
        points.push(last.at);
    }
    points
}

/// Into how many pieces a span is cut: none longer than [`LONGEST`] tolerances, nor with a sagitta over a fiftieth of one.
fn pieces(span: Span, tolerance: f64) -> u32 {
    let by_length = span.length() / (LONGEST * tolerance);
    let by_sagitta = (50.0 * span.sagitta() / tolerance).sqrt();
    by_length.max(by_sagitta).ceil().clamp(1.0, MOST_PIECES) as u32
}

/// How much the band narrows, in excesses.
const NARROWING: f64 = 2.0;
/// Longest stretch between two points of the trace, in tolerances.
const LONGEST: f64 = 10.0;
/// Most points put on one span.
const MOST_PIECES: f64 = 2000.0;

fn strung(points: &[Point], band: f64) -> Vec<Bead> {
    let mut along = 0.0;
    let mut before = points[0];
    let bead = |&at: &Point| {
        along += at.distance(before);
        before = at;
        Bead { at, band, along }
    };
    points.iter().map(bead).collect()
}
