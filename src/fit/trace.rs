//! The contour as the search sees it: vertices with the band that the path must keep to.

use std::ops::Range;
use std::rc::Rc;

use kurbo::{Point, Vec2};

use crate::geom::{ArcSpline, Span};
use crate::num::Tolerance;

use super::effort::Effort;
use super::lines::{Line, lines};
use super::narrowing::Strayed;

/// A point of the trace and how far from it the path may pass.
#[derive(Clone, Copy, Debug)]
pub(super) struct Bead {
    pub(super) at: Point,
    /// Band to either side, in mm.
    pub(super) band: f64,
    /// Length from bead to bead up to here.
    pub(super) along: f64,
    /// Which point of the trace it is; on the second lap of a closed one, counted on.
    pub(super) point: usize,
}

/// The points of one contour, and those of them that the search looks at: its beads. A closed trace repeats its beads for
/// a second lap, so that a run may start anywhere.
#[derive(Clone)]
pub(super) struct Trace {
    points: Rc<[Point]>,
    beads: Vec<Bead>,
    /// The straight runs among the points.
    runs: Rc<[Line]>,
    /// The same among the beads.
    lines: Vec<Line>,
    closed: bool,
    tolerance: f64,
    effort: Effort,
}

impl Trace {
    /// The trace of `contour`; `None` when it has no length.
    pub(super) fn new(contour: &ArcSpline, tolerance: Tolerance, effort: Effort) -> Option<Self> {
        let mut points = sampled(contour, tolerance.mm());
        points.dedup();
        if contour.closed && points.len() > 1 && points.first() == points.last() {
            points.pop();
        }
        if points.len() < 2 {
            return None;
        }
        let beads =
            outermost(&points, effort.group * tolerance.mm()).into_iter().map(|i| (i, tolerance.mm()));
        let beads = strung(&points, contour.closed, beads.collect());
        let all = (0..points.len()).map(|i| (i, tolerance.mm())).collect();
        let runs: Rc<[Line]> = lines(&strung(&points, contour.closed, all)).into();
        let lines = among(&runs, &beads);
        let (closed, tolerance) = (contour.closed, tolerance.mm());
        Some(Self { points: points.into(), beads, runs, lines, closed, tolerance, effort })
    }

    /// The same trace with a band of `share` of the tolerance.
    pub(super) fn narrowed(&self, share: f64) -> Self {
        let band = self.tolerance * share;
        let beads = self.beads.iter().map(|bead| Bead { band, ..*bead }).collect();
        Self {
            beads,
            lines: self.lines.clone(),
            runs: self.runs.clone(),
            points: self.points.clone(),
            ..*self
        }
    }

    /// Holds the search off the places where it strayed: points that it missed become beads; where it missed none that was
    /// no bead yet, the band about the worst place narrows by a little more than the excess.
    pub(super) fn mend(&mut self, strayed: &[Strayed]) {
        let mut bands: Vec<(usize, f64)> = self.once().iter().map(|b| (b.point, b.band)).collect();
        let last = bands.len() - 1;
        let mut added = Vec::new();
        for s in strayed {
            let before = added.len();
            for point in s.missed.iter().map(|i| i % self.points.len()) {
                if let Err(i) = bands.binary_search_by_key(&point, |b| b.0) {
                    added.push((point, bands[i.min(last)].1));
                }
            }
            if added.len() == before {
                let i = bands.partition_point(|b| b.0 < s.worst % self.points.len());
                for (_, band) in &mut bands[i.saturating_sub(2)..=(i + 2).min(last)] {
                    *band = (*band - NARROWING * s.excess).max(self.tolerance / 2.0);
                }
            }
        }
        bands.extend(added);
        bands.sort_by_key(|b| b.0);
        bands.dedup_by_key(|b| b.0);
        self.beads = strung(&self.points, self.closed, bands);
        self.lines = among(&self.runs, &self.beads);
    }

    /// The point of the given number, counted on from lap to lap.
    pub(super) fn point(&self, i: usize) -> Point {
        self.points[if self.closed { i % self.points.len() } else { i }]
    }

    /// The number of the point after point `i`, or of the last one.
    pub(super) fn next(&self, i: usize) -> usize {
        if self.closed { i + 1 } else { (i + 1).min(self.points.len() - 1) }
    }

    /// Beads of the trace; of a closed one, two laps and the first bead again.
    pub(super) fn beads(&self) -> &[Bead] {
        &self.beads
    }

    /// How widely to search.
    pub(super) fn effort(&self) -> Effort {
        self.effort
    }

    /// The straight runs among the beads.
    pub(super) fn lines(&self) -> &[Line] {
        &self.lines
    }

    /// Beads in one lap of a closed trace, 0 for an open one.
    pub(super) fn lap(&self) -> usize {
        if self.closed { self.beads.len() / 2 } else { 0 }
    }

    /// The beads of one lap of a closed trace, or of the whole of an open one.
    pub(super) fn once(&self) -> &[Bead] {
        &self.beads[..if self.closed { self.lap() } else { self.beads.len() }]
    }

    pub(super) fn closed(&self) -> bool {
        self.closed
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

/// Straight runs among all points as runs of beads.
fn among(runs: &[Line], beads: &[Bead]) -> Vec<Line> {
    let first = |run: &Line| beads.partition_point(|bead| bead.point < run.first);
    let last = |run: &Line| beads.partition_point(|bead| bead.point <= run.last).saturating_sub(1);
    runs.iter().map(|run| run.between(first(run), last(run))).collect()
}

/// The beads at the given points with their bands; of a closed trace two laps and the first bead again.
fn strung(points: &[Point], closed: bool, bands: Vec<(usize, f64)>) -> Vec<Bead> {
    let laps = if closed { 2 } else { 1 };
    let bands_of = |lap: usize| bands.iter().map(move |&(i, band)| (i + lap * points.len(), band));
    let back = closed.then(|| (bands[0].0 + 2 * points.len(), bands[0].1));
    let mut along = 0.0;
    let mut before = points[bands[0].0];
    let bead = |(point, band): (usize, f64)| {
        let at = points[point % points.len()];
        along += at.distance(before);
        before = at;
        Bead { at, band, along, point }
    };
    (0..laps).flat_map(bands_of).chain(back).map(bead).collect()
}

/// The points that bound a path from either side: of every group no longer than `reach` mm the two that lie furthest to the
/// left and to the right of the bend that the trace has there, and the trace's ends.
fn outermost(points: &[Point], reach: f64) -> Vec<usize> {
    let groups = groups(points, reach);
    let means: Vec<Point> = groups.iter().map(|group| mean(&points[group.clone()])).collect();
    let mut kept = vec![0];
    for (i, group) in groups.iter().enumerate() {
        let (before, here, after) =
            (means[i.saturating_sub(1)], means[i], means[(i + 1).min(means.len() - 1)]);
        let bend = Bend::through(before, here, after);
        let sides = group.clone().map(|k| (k, bend.side(points[k])));
        let left = sides.clone().max_by(|a, b| a.1.total_cmp(&b.1)).map(|s| s.0);
        let right = sides.min_by(|a, b| a.1.total_cmp(&b.1)).map(|s| s.0);
        kept.extend(left.min(right));
        kept.extend(left.max(right));
    }
    kept.push(points.len() - 1);
    kept.dedup();
    kept
}

/// The points in groups, in order; no point of a group is further than `reach` mm from its first.
fn groups(points: &[Point], reach: f64) -> Vec<Range<usize>> {
    let mut groups = Vec::new();
    let mut first = 0;
    while first < points.len() {
        let far = |p: &Point| p.distance_squared(points[first]) > reach * reach;
        let end = points[first..].iter().position(far).map_or(points.len(), |k| first + k);
        groups.push(first..end);
        first = end;
    }
    groups
}

fn mean(points: &[Point]) -> Point {
    (points.iter().map(|p| p.to_vec2()).sum::<Vec2>() / points.len() as f64).to_point()
}

/// A parabola for a short stretch of the trace.
struct Bend {
    at: Point,
    along: Vec2,
    /// In 1/mm.
    curvature: f64,
}

impl Bend {
    fn through(before: Point, at: Point, after: Point) -> Self {
        let (to, on) = (at - before, after - at);
        let chord = after - before;
        let length = chord.hypot();
        if length == 0.0 {
            return Self { at, along: Vec2::ZERO, curvature: 0.0 };
        }
        let curvature = 2.0 * to.cross(on) / (to.hypot() * on.hypot() * length);
        Self { at, along: chord / length, curvature: if curvature.is_finite() { curvature } else { 0.0 } }
    }

    /// How far to the left of the parabola a point lies.
    fn side(&self, p: Point) -> f64 {
        let d = p - self.at;
        let u = self.along.dot(d);
        self.along.cross(d) - self.curvature * u * u / 2.0
    }
}
