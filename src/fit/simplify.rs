//! Straight-line simplification: what the fitter has to better, and its way out.

use kurbo::Point;

use crate::geom::{ArcSpline, Span};
use crate::num::Tolerance;

use super::trace::{self, Trace};

/// The contour with vertices left out so that those left out lie within `tolerance` of the straight path (Ramer 1972;
/// Douglas and Peucker 1973). A closed contour is cut at its first vertex and the one furthest from it.
///
/// Distances are to the chord, ends included, so every vertex is covered; on traces that turn back on themselves the
/// Frechet distance may be larger.
pub fn simplify(contour: &ArcSpline, tolerance: Tolerance) -> ArcSpline {
    let mut points = trace::sampled(contour, tolerance.mm());
    if points.len() < 3 {
        return contour.clone();
    }
    if contour.closed {
        points.push(points[0]);
    }
    let mut left = left(&points, tolerance.mm());
    left.truncate(left.len() - usize::from(contour.closed));
    ArcSpline::polyline(left, contour.closed)
}

/// How many lines simplification leaves of a trace, or a few less: that of its beads.
pub(super) fn lines_of(trace: &Trace, tolerance: Tolerance) -> usize {
    let once = trace.once();
    let back = trace.closed().then_some(&once[0]);
    let points: Vec<Point> = once.iter().chain(back).map(|bead| bead.at).collect();
    left(&points, tolerance.mm()).len() - 1
}

/// The points that are not left out.
pub(super) fn left(points: &[Point], tolerance: f64) -> Vec<Point> {
    let last = points.len() - 1;
    let mut kept = vec![false; points.len()];
    (kept[0], kept[last]) = (true, true);
    let mut open = vec![(0, last)];
    while let Some((from, to)) = open.pop() {
        if let Some((at, distance)) = furthest(points, from, to)
            && (distance > tolerance || points[from] == points[to])
        {
            kept[at] = true;
            open.extend([(from, at), (at, to)]);
        }
    }
    points.iter().zip(&kept).filter(|(_, k)| **k).map(|(p, _)| *p).collect()
}

/// The point between two others that lies furthest from their chord, and how far.
fn furthest(points: &[Point], from: usize, to: usize) -> Option<(usize, f64)> {
    let chord = Span::line(points[from], points[to]);
    let distances = (from + 1..to).map(|i| (i, chord.nearest(points[i]).distance));
    distances.max_by(|a, b| a.1.total_cmp(&b.1))
}
