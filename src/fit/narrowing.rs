//! The search again and again, in a band that is narrower where the path strayed between the vertices.

use std::collections::HashSet;

use kurbo::Point;

use crate::geom::{ArcSpline, Span, frechet_within};
use crate::num::Tolerance;

use super::LAST_PLACE;
use super::beam::Run;
use super::keeping::keeps;
use super::simplify;
use super::trace::Trace;

/// The share of the tolerance that straight lines keep to in place of a span that strays.
const STRAIGHT: f64 = 0.9;

/// The path of least cost that `search` finds and that stays within `tolerance` of the trace.
///
/// A span that strays still after the last attempt gives way to straight lines.
pub(super) fn within(mut trace: Trace, tolerance: Tolerance, search: fn(&Trace) -> Run) -> Narrowed {
    let mut run = search(&trace);
    for _ in 1..trace.effort().attempts {
        let strayed = strayed(&run, &trace, tolerance);
        if strayed.is_empty() {
            break;
        }
        trace.mend(&strayed);
        run = search(&trace);
    }
    straighten(&mut run, &trace);
    let strayed: Vec<usize> = strayed(&run, &trace, tolerance).iter().map(|s| s.span).collect();
    let joints = joints(&run, &trace);
    let stretches = run.spans.iter().zip(joints.windows(2)).enumerate();
    let spans: Vec<Span> = stretches
        .flat_map(|(i, (span, ends))| match strayed.binary_search(&i) {
            Ok(_) => straight(span, ends, &trace, tolerance),
            Err(_) => vec![*span],
        })
        .collect();
    Narrowed { path: ArcSpline::from_spans(&spans, trace.closed()), patches: strayed.len() }
}

/// What the search came to.
pub(super) struct Narrowed {
    pub(super) path: ArcSpline,
    /// How many spans strayed to the last and gave way to straight lines.
    pub(super) patches: usize,
}

/// Replaces arcs that run from corner to corner by lines where those keep to the trace too.
fn straighten(run: &mut Run, trace: &Trace) {
    let path = ArcSpline::from_spans(&run.spans, trace.closed());
    let ends = (0..=path.len()).filter(|&k| !trace.closed() && (k == 0 || k == path.len()));
    let mut free: HashSet<usize> = path.corners(LAST_PLACE).chain(ends).collect();
    if free.contains(&0) && trace.closed() {
        free.insert(path.len());
    }
    for (i, span) in run.spans.iter_mut().enumerate() {
        let line = Span::line(span.start, span.end);
        let is_free = free.contains(&i) && free.contains(&(i + 1));
        if is_free && keeps(&line, trace.beads(), run.passed[i], run.passed[i + 1]) {
            *span = line;
        }
    }
}

/// Where a run strays from the trace.
pub(super) struct Strayed {
    /// The span.
    span: usize,
    /// The points of the trace that lie too far from it: of every group of neighbours the one that lies furthest.
    pub(super) missed: Vec<usize>,
    /// The point beside the worst place.
    pub(super) worst: usize,
    /// By how much the tolerance is exceeded there, in mm.
    pub(super) excess: f64,
}

/// The spans that stray, in order.
fn strayed(run: &Run, trace: &Trace, tolerance: Tolerance) -> Vec<Strayed> {
    let joints = joints(run, trace);
    let stretches = run.spans.iter().zip(joints.windows(2)).enumerate();
    stretches
        .filter_map(|(i, (span, ends))| {
            let path = ArcSpline::from_spans(&[*span], false);
            let stretch = ArcSpline::polyline(stretch(ends, trace), false);
            let deviation = frechet_within(&path, &stretch, tolerance.mm());
            let excess = deviation.mm - tolerance.mm();
            (excess > 0.0).then(|| {
                let distance = |k: &usize| trace.point(*k).distance(deviation.at);
                let near = ends[0].after..=trace.next(ends[1].after);
                let nearest = near.min_by(|a, b| distance(a).total_cmp(&distance(b)));
                let worst = nearest.unwrap_or(ends[0].after);
                Strayed { span: i, missed: missed(span, ends, trace, tolerance), worst, excess }
            })
        })
        .collect()
}

/// The points beside a span that lie further from it than the tolerance: of every group of neighbours the furthest.
fn missed(span: &Span, ends: &[Joint], trace: &Trace, tolerance: Tolerance) -> Vec<usize> {
    let beyond = |k| (k, span.nearest(trace.point(k)).distance - tolerance.mm());
    let distances: Vec<(usize, f64)> = (ends[0].after + 1..=ends[1].after).map(beyond).collect();
    let groups = distances.chunk_by(|a, b| (a.1 > 0.0) == (b.1 > 0.0));
    let furthest = |group: &[(usize, f64)]| group.iter().copied().max_by(|a, b| a.1.total_cmp(&b.1));
    groups.filter_map(furthest).filter(|far| far.1 > 0.0).map(|far| far.0).collect()
}

/// The place on the trace beside a joint of the path.
#[derive(Clone, Copy)]
struct Joint {
    /// The last point of the trace before it.
    after: usize,
    at: Point,
}

/// The places beside the start of every span, and the end of the last.
fn joints(run: &Run, trace: &Trace) -> Vec<Joint> {
    let ends = run.spans.iter().map(|s| s.start).chain(run.spans.last().map(|s| s.end));
    ends.zip(&run.passed).map(|(p, &passed)| beside(trace, passed, p)).collect()
}

/// The place beside `p` on the stretch after bead `i`.
fn beside(trace: &Trace, i: usize, p: Point) -> Joint {
    let first = trace.beads()[i].point;
    let next = trace.beads().get(i + 1).map_or(first, |next| next.point);
    let foot = |k: usize| (k, Span::line(trace.point(k), trace.point(k + 1)).nearest(p));
    let nearest = (first..next).map(foot).min_by(|a, b| a.1.distance.total_cmp(&b.1.distance));
    nearest
        .map_or(Joint { after: first, at: trace.point(first) }, |(after, foot)| Joint { after, at: foot.at })
}

/// The way from a span's start to its end by as few of the points it passes as straight lines need.
fn straight(span: &Span, ends: &[Joint], trace: &Trace, tolerance: Tolerance) -> Vec<Span> {
    let inner = (ends[0].after + 1..=ends[1].after).map(|k| trace.point(k));
    let mut points: Vec<Point> = [span.start].into_iter().chain(inner).chain([span.end]).collect();
    points.dedup();
    let left = simplify::left(&points, STRAIGHT * tolerance.mm());
    left.windows(2).map(|w| Span::line(w[0], w[1])).collect()
}

/// The part of the trace that belongs to a span.
fn stretch(ends: &[Joint], trace: &Trace) -> Vec<Point> {
    let inner = (ends[0].after + 1..=ends[1].after).map(|k| trace.point(k));
    [ends[0].at].into_iter().chain(inner).chain([ends[1].at]).collect()
}
