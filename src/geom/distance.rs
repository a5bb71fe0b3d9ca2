//! The certified distance between two chains of lines and arcs: a proven upper bound of the Fréchet distance.

use kurbo::Point;

use super::ArcSpline;
use super::chords::{Chords, reopened};
use super::coupling::{Coupling, Foot, Outlier, Walk, foot, nearest};
use super::free_space::{Reach, within};
use crate::num::Deviation;

/// How far above the true distance the polylines' bound may stay before it is worked on, as a ratio.
const LOOSE: f64 = 1.03;

/// Arcs are first cut into chords this close to them, in mm: fine enough for a deviation of 0.05 mm.
const FIRST_SAGITTA: f64 = 5e-4;

/// Arcs are cut no finer than this, in mm: fine enough for a deviation of a micrometre.
const LEAST_SAGITTA: f64 = 1e-5;

/// An upper bound of the Fréchet distance between `path` and `contour`, with the place on the contour where it is
/// reached.
///
/// Open chains are compared in their own directions or with one of them reversed, whichever is nearer; closed chains
/// from any start, in either direction; a closed and an open one with the closed one opened beside the other's
/// start. The bound is proven whatever the chains are. Where it is above a micrometre it is meant to be within 5 %
/// of the true distance, and is so wherever the work stays linear in the number of spans (for chains that are wildly
/// different it is not tightened further). Infinite when a chain is empty or not finite.
///
/// ```
/// use kurbo::Point;
/// use ribband::geom::{ArcSpline, frechet};
///
/// let line = |y| ArcSpline::polyline([Point::new(0.0, y), Point::new(10.0, y)], false);
/// assert!((frechet(&line(0.0), &line(0.5)).mm - 0.5).abs() < 1e-12);
/// ```
pub fn frechet(path: &ArcSpline, contour: &ArcSpline) -> Deviation {
    bounded(path, contour, 0.0)
}

/// As [`frechet`], but settled against a limit: the bound is at most `limit` wherever the true distance is below it by
/// more than a five-hundredth, and is not tightened further there.
///
/// Certifies a path that uses the whole of its tolerance.
pub fn frechet_within(path: &ArcSpline, contour: &ArcSpline, limit: f64) -> Deviation {
    bounded(path, contour, limit)
}

/// The bound, tightened until it is at most `limit` or near the distance.
fn bounded(path: &ArcSpline, contour: &ArcSpline, limit: f64) -> Deviation {
    let Some(scale) = scale(path).zip(scale(contour)).map(|(a, b)| a.max(b)) else {
        let at = contour.vertices.first().map_or(Point::ZERO, |v| v.at);
        return Deviation { mm: f64::INFINITY, at, certified: true };
    };
    // A chain of a billion times the least sagitta or more is cut relative to its size.
    let least = LEAST_SAGITTA.max(scale * 1e-9);
    let first = if limit > 0.0 { FIRST_SAGITTA.min(limit / 1000.0) } else { FIRST_SAGITTA };
    let mut sagitta = first.max(least);
    let rounding = 16.0 * f64::EPSILON * scale;
    loop {
        let (p, q) = (Chords::new(path, sagitta), Chords::new(contour, sagitta));
        let spent = p.sagitta + q.sagitta;
        // Below this the chords take too large a part of the bound, and finer ones are tried.
        let enough = if sagitta <= least { LEAST_SAGITTA } else { 50.0 * spent };
        let enough = enough.max(limit - spent - rounding);
        let flat = polyline_distance(&p, &q, enough);
        let mm = if flat.mm + spent == 0.0 { 0.0 } else { flat.mm + spent + rounding };
        // What was settled to be below the limit is, whatever the last place of the sum.
        let mm = if flat.mm <= limit - spent - rounding { mm.min(limit) } else { mm };
        if flat.mm >= enough || sagitta <= least || mm <= limit {
            return Deviation { mm, at: flat.at, certified: true };
        }
        sagitta = (0.009 * flat.mm).min(sagitta / 2.0).max(least);
    }
}

/// A bound of the coordinates of a chain in size; `None` when it is empty or not finite.
fn scale(chain: &ArcSpline) -> Option<f64> {
    let size = |p: Point| p.x.abs().max(p.y.abs());
    let corners = chain.vertices.iter().map(|v| size(v.at)).reduce(f64::max)?;
    let arcs = chain.spans().filter(|s| !s.is_line()).map(|s| s.sagitta()).fold(0.0, f64::max);
    let finite = chain.vertices.iter().all(|v| v.at.is_finite() && v.bulge.is_finite());
    let scale = corners + arcs;
    // Squares of coordinates must stay finite too.
    (finite && (scale * scale * 16.0).is_finite()).then_some(scale)
}

/// A bound with its place.
#[derive(Clone, Copy)]
struct Bound {
    mm: f64,
    at: Point,
}

impl From<Coupling> for Bound {
    fn from(coupling: Coupling) -> Self {
        Self { mm: coupling.mm, at: coupling.at }
    }
}

impl Bound {
    fn none(at: Point) -> Self {
        Self { mm: f64::INFINITY, at }
    }

    fn least(self, other: Self) -> Self {
        if other.mm < self.mm { other } else { self }
    }
}

/// The bound for two polylines; one below `enough` is not worked on.
fn polyline_distance(path: &Chords, contour: &Chords, enough: f64) -> Bound {
    let directions = Directions::of(path, contour);
    let in_direction = |against: bool| {
        let (p, mut q) = (path.lap(), contour.lap());
        if against {
            q.reverse();
        }
        match (path.closed, contour.closed) {
            (false, false) => open_bound(&p, &q, enough),
            (true, true) => closed_bound(&p, &q, enough),
            (true, false) => nearest_opening(&p, q[0], enough, |p| open_bound(p, &q, enough)),
            (false, true) => nearest_opening(&q, p[0], enough, |q| open_bound(&p, q, enough)),
        }
    };
    let bound = in_direction(directions.against);
    if bound.mm <= directions.other { bound } else { bound.least(in_direction(!directions.against)) }
}

/// The least of the bounds for a lap opened beside `start`; one of them that is enough will do, and none comes below the
/// distance between the ends that it matches.
fn nearest_opening(lap: &[Point], start: Point, enough: f64, bound: impl Fn(&[Point]) -> Bound) -> Bound {
    let mut best = Bound::none(start);
    for opening in openings(lap, start) {
        if best.mm <= enough.max(opening.distance) {
            break;
        }
        best = best.least(bound(&opening.lap));
    }
    best
}

/// In which direction to walk the contour first.
struct Directions {
    /// True when against its own.
    against: bool,
    /// A distance that the other direction does not come below, in mm.
    other: f64,
}

impl Directions {
    /// By the ends of open chains; by the areas of closed ones, which differ by no more than distance times length
    /// when the chains run alike.
    fn of(path: &Chords, contour: &Chords) -> Self {
        if path.closed && contour.closed {
            let (p, q) = (Extent::of(path), Extent::of(contour));
            let other = p.area.abs().min(q.area.abs()) / p.length.max(q.length);
            return Self { against: p.area * q.area < 0.0, other: if other.is_nan() { 0.0 } else { other } };
        }
        let ends =
            |c: &Chords| (c.points[0], if c.closed { c.points[0] } else { c.points[c.points.len() - 1] });
        let ((p0, p1), (q0, q1)) = (ends(path), ends(contour));
        let along = p0.distance(q0).max(p1.distance(q1));
        let against = p0.distance(q1).max(p1.distance(q0));
        let other = if path.closed == contour.closed { along.max(against) } else { 0.0 };
        Self { against: against < along, other }
    }
}

/// Area and length of a closed polyline.
struct Extent {
    area: f64,
    length: f64,
}

impl Extent {
    fn of(chain: &Chords) -> Self {
        let origin = chain.points[0];
        chain.pieces().fold(Self { area: 0.0, length: 0.0 }, |sum, (a, b)| Self {
            area: sum.area + (a - origin).cross(b - origin) / 2.0,
            length: sum.length + a.distance(b),
        })
    }
}

/// The bound for two laps, the first corner repeated. Both are opened at a matched place, which makes them open
/// ones: beside the contour's first corner, then, where that is not good enough, where the walk shows that nothing
/// pulls the match elsewhere.
fn closed_bound(path: &[Point], contour: &[Point], enough: f64) -> Bound {
    let mut best: Option<(Coupling, Vec<Point>)> = None;
    for opening in openings(path, contour[0]) {
        if best.as_ref().is_some_and(|(least, _)| opening.distance >= least.mm) {
            break;
        }
        let coupling = Walk::new(&opening.lap, contour).couple();
        if coupling.mm <= enough || is_tight(&coupling, furthest(&opening.lap, contour, &coupling), enough) {
            return coupling.into();
        }
        if best.as_ref().is_none_or(|(least, _)| coupling.mm < least.mm) {
            best = Some((coupling, opening.lap));
        }
    }
    let Some((coupling, open)) = best else { return Bound::none(contour[0]) };
    let walk = Walk::new(&open, contour);
    let bound = match walk.cut() {
        Some(cut) => {
            let contour = reopened(contour, cut.corner, contour[cut.corner]);
            open_bound(&reopened(&open, cut.piece, cut.foot), &contour, enough)
        }
        None => tightened(&open, contour, coupling, enough),
    };
    bound.least(coupling.into())
}

/// A lap opened beside a point.
struct Opening {
    lap: Vec<Point>,
    /// How far the ends are from the point, in mm.
    distance: f64,
}

/// A lap opened beside `start`: at each of the few places where it comes nearest, nearest first.
fn openings(lap: &[Point], start: Point) -> impl Iterator<Item = Opening> + '_ {
    let feet: Vec<Foot> = lap.windows(2).map(|ends| foot(start, ends[0], ends[1])).collect();
    let n = feet.len();
    let is_least = |&k: &usize| {
        let (before, here, after) = (feet[(k + n - 1) % n], feet[k], feet[(k + 1) % n]);
        n == 1 || here.squared < before.squared && here.squared <= after.squared
    };
    let mut minima: Vec<usize> = (0..n).filter(is_least).collect();
    minima.sort_by(|&a, &b| feet[a].squared.total_cmp(&feet[b].squared));
    if minima.is_empty() {
        minima.push(0);
    }
    minima.truncate(3);
    minima.into_iter().map(move |k| Opening {
        lap: reopened(lap, k, lap[k].lerp(lap[k + 1], feet[k].t)),
        distance: feet[k].squared.sqrt(),
    })
}

/// The bound for two open polylines of at least two corners, walked from first to last.
fn open_bound(path: &[Point], contour: &[Point], enough: f64) -> Bound {
    let coupling = Walk::new(path, contour).couple();
    if coupling.mm <= enough || is_tight(&coupling, proven(path, contour, &coupling), enough) {
        return coupling.into();
    }
    tightened(path, contour, coupling, enough)
}

/// True when the bound cannot be much too large, nor come down to what is enough.
fn is_tight(coupling: &Coupling, proven: f64, enough: f64) -> bool {
    proven > enough && coupling.mm <= LOOSE * proven
}

/// The distance of the furthest corner from the whole of the other chain: a lower bound, whatever the match.
fn furthest(path: &[Point], contour: &[Point], coupling: &Coupling) -> f64 {
    match coupling.outlier {
        Outlier::OfPath(corner) => nearest(corner, contour),
        Outlier::OfContour(corner) => nearest(corner, path),
    }
}

/// A lower bound for open polylines, whose ends are matched.
fn proven(path: &[Point], contour: &[Point], coupling: &Coupling) -> f64 {
    let starts = path[0].distance(contour[0]);
    let ends = path[path.len() - 1].distance(contour[contour.len() - 1]);
    furthest(path, contour, coupling).max(starts).max(ends)
}

/// Halves the gap between the proven lower bound and the coupling's distance by deciding distances between, until
/// it is narrow or the chains are too unlike for that in linear work. A distance that is enough is tried first.
fn tightened(path: &[Point], contour: &[Point], coupling: Coupling, enough: f64) -> Bound {
    let budget = 64 * (path.len() + contour.len()) + 50_000;
    let mut bound = Bound::from(coupling);
    let mut low = proven(path, contour, &coupling).max(LEAST_SAGITTA);
    let mut high = bound.mm;
    // The walk is seldom far off: try near its distance before halving.
    let mut trial = if low < enough { enough } else { high / LOOSE };
    while high > enough && (high > LOOSE * low || low < enough) {
        match within(path, contour, trial, budget) {
            Reach::Within => {
                bound.mm = trial;
                high = trial;
            }
            Reach::Stuck(at) => {
                bound.at = at;
                low = trial;
            }
            Reach::Unknown => high = trial,
        }
        trial = (low * high).sqrt();
    }
    bound
}
