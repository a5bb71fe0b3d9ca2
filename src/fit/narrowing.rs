//! The search again and again, in a band that is narrower where the path strayed between the vertices.

use std::collections::HashSet;

use kurbo::Point;

use crate::geom::{ArcSpline, Span, frechet_within};
use crate::num::Tolerance;

use super::LAST_PLACE;
use super::beam::Run;
use super::keeping::{beside, keeps};
use super::trace::{Bead, Trace};

/// How often the search is repeated before spans that stray are given up.
const ATTEMPTS: usize = 4;

/// The path of least cost that `search` finds and that stays within `tolerance` of the trace.
///
/// A span that strays still after the last attempt gives way to the trace's own vertices.
pub(super) fn within(mut trace: Trace, tolerance: Tolerance, search: fn(&Trace) -> Run) -> ArcSpline {
    let mut run = search(&trace);
    for _ in 1..ATTEMPTS {
        let strayed = strayed(&run, &trace, tolerance);
        if strayed.is_empty() {
            break;
        }
        for s in strayed {
            trace.narrow(s.bead, s.excess);
        }
        run = search(&trace);
    }
    straighten(&mut run, &trace);
    let strayed: Vec<usize> = strayed(&run, &trace, tolerance).iter().map(|s| s.span).collect();
    let stretches = run.spans.iter().zip(run.passed.windows(2)).enumerate();
    let spans: Vec<Span> = stretches
        .flat_map(|(i, (span, passed))| match strayed.binary_search(&i) {
            Ok(_) => straight(span, passed, trace.beads()),
            Err(_) => vec![*span],
        })
        .collect();
    ArcSpline::from_spans(&spans, trace.closed())
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
struct Strayed {
    /// The span.
    span: usize,
    /// The bead beside the worst place.
    bead: usize,
    /// By how much the tolerance is exceeded, in mm.
    excess: f64,
}

/// The spans that stray, in order.
fn strayed(run: &Run, trace: &Trace, tolerance: Tolerance) -> Vec<Strayed> {
    let beads = trace.beads();
    let stretches = run.spans.iter().zip(run.passed.windows(2)).enumerate();
    stretches
        .filter_map(|(i, (span, passed))| {
            let path = ArcSpline::from_spans(&[*span], false);
            let stretch = ArcSpline::polyline(stretch(span, passed, beads), false);
            let deviation = frechet_within(&path, &stretch, tolerance.mm());
            let distance = |k: &usize| beads[*k].at.distance(deviation.at);
            let near = (passed[0]..=(passed[1] + 1).min(beads.len() - 1))
                .min_by(|a, b| distance(a).total_cmp(&distance(b)))?;
            let excess = deviation.mm - tolerance.mm();
            (excess > 0.0).then_some(Strayed { span: i, bead: near, excess })
        })
        .collect()
}

/// The straight way from a span's start to its end by the beads it passes.
fn straight(span: &Span, passed: &[usize], beads: &[Bead]) -> Vec<Span> {
    let inner = beads[passed[0] + 1..=passed[1]].iter().map(|b| b.at);
    let mut points: Vec<Point> = [span.start].into_iter().chain(inner).chain([span.end]).collect();
    points.dedup();
    points.windows(2).map(|w| Span::line(w[0], w[1])).collect()
}

/// The part of the trace that belongs to a span: its beads, between the places beside the span's ends.
fn stretch(span: &Span, passed: &[usize], beads: &[Bead]) -> Vec<Point> {
    let inner = beads[passed[0] + 1..=passed[1]].iter().map(|b| b.at);
    let start = beside(beads, passed[0], span.start);
    [start].into_iter().chain(inner).chain([beside(beads, passed[1], span.end)]).collect()
}
