//! The contour as the search sees it: vertices with the band that the path must keep to.

use kurbo::{Point, Vec2};

use crate::geom::{ArcSpline, Span};
use crate::num::Tolerance;

/// A vertex of the trace and how far from it the path may pass.
#[derive(Clone, Copy, Debug)]
pub(super) struct Bead {
    pub(super) at: Point,
    /// Band to either side, in mm.
    pub(super) band: f64,
    /// Length of the trace up to here.
    pub(super) along: f64,
}

/// The beads of one contour, in canonical order: a closed contour runs counter-clockwise from its lowest vertex, an
/// open one from its lower end, so that the result depends on neither. A closed trace repeats its beads for a
/// second lap, so that a run may start anywhere.
pub(super) struct Trace {
    beads: Vec<Bead>,
    /// Beads in one lap of a closed trace, 0 for an open one.
    lap: usize,
    tolerance: f64,
    reversed: bool,
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
        let reversed = if contour.closed { turn_to_canonical(&mut points) } else { runs_down(&points) };
        if reversed {
            points.reverse();
        }
        if contour.closed && reversed {
            points.rotate_right(1);
        }
        let lap = if contour.closed { points.len() } else { 0 };
        if contour.closed {
            points.extend_from_within(..);
            points.push(points[0]);
        }
        Some(Self {
            beads: strung(&points, tolerance.mm() * SHARE),
            lap,
            tolerance: tolerance.mm(),
            reversed,
        })
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

    /// Beads in one lap of a closed trace, 0 for an open one.
    pub(super) fn lap(&self) -> usize {
        self.lap
    }

    pub(super) fn closed(&self) -> bool {
        self.lap > 0
    }

    /// A fitted path turned back to the contour's own direction.
    pub(super) fn restored(&self, path: ArcSpline) -> ArcSpline {
        if self.reversed { path.reversed() } else { path }
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

/// The share of the tolerance that the search may use; the rest is what certifying costs.
const SHARE: f64 = 0.993;
/// How much the band narrows, in excesses.
const NARROWING: f64 = 2.0;
/// Longest stretch between two points of the trace, in tolerances.
const LONGEST: f64 = 10.0;
/// Most points put on one span.
const MOST_PIECES: f64 = 2000.0;

/// Rotates a closed trace to its lowest vertex and tells whether it must be reversed to run counter-clockwise.
fn turn_to_canonical(points: &mut [Point]) -> bool {
    let lowest = (0..points.len()).min_by(|&a, &b| ordered(points[a], points[b])).unwrap_or(0);
    points.rotate_left(lowest);
    let origin = points[0];
    let double_area: f64 = points.windows(2).map(|w| (w[0] - origin).cross(w[1] - origin)).sum();
    double_area < 0.0
}

/// True when an open trace ends lower than it starts.
fn runs_down(points: &[Point]) -> bool {
    ordered(points[points.len() - 1], points[0]).is_lt()
}

fn ordered(a: Point, b: Point) -> std::cmp::Ordering {
    a.x.total_cmp(&b.x).then(a.y.total_cmp(&b.y))
}

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
