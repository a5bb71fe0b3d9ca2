//! A drawing in its file's own units: chains of curves, exact, before the scale is known. y is up.

use std::f64::consts::PI;

use kurbo::{Affine, CubicBez, Point, QuadBez, Rect, Shape, Vec2};

use super::scale::FileUnit;
use crate::geom::{Span, Vertex};
use crate::sketch::Place;

/// What a reader found in a file.
#[derive(Clone, Debug, Default)]
pub struct Drawing {
    /// The drawn elements in the order of the file.
    pub elements: Vec<Element>,
    /// The unit that the file states itself, if it does.
    pub unit: Option<FileUnit>,
    /// The unit to take bare numbers for when neither the file nor the user names one.
    pub assumed: Option<FileUnit>,
    /// What was read but not kept, or needs a word: one sentence each.
    pub notes: Vec<String>,
}

/// One drawn element: a chain of curves and what the file says of it.
#[derive(Clone, Debug)]
pub struct Element {
    /// The geometry.
    pub chain: Chain,
    /// The layer, or empty.
    pub layer: String,
    /// The colour as written, or empty.
    pub colour: String,
    /// Where it stands in the file.
    pub place: Place,
}

/// Curves laid end to end. Where one ends the next begins; small disagreements are settled by the next one's start.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Chain {
    /// The curves in order.
    pub curves: Vec<Curve>,
    /// True when the end is joined to the start, by a straight line where they differ.
    pub closed: bool,
}

/// One curve, exactly as the file has it.
#[derive(Clone, Debug, PartialEq)]
pub enum Curve {
    /// Lines and circular arcs through vertices. The last vertex is the end, and its bulge means nothing.
    Spans(Vec<Vertex>),
    /// A piece of an ellipse.
    Ellipse(EllipseArc),
    /// A quadratic Bézier curve.
    Quad(QuadBez),
    /// A cubic Bézier curve.
    Cubic(CubicBez),
    /// A B-spline, rational or not.
    Nurbs(Nurbs),
}

/// The points `centre + u cos t + v sin t`, t from `start` to `start + sweep`. `u` and `v` are any pair of conjugate
/// half axes, so that every affine image is again of this form.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct EllipseArc {
    /// The centre.
    pub centre: Point,
    /// Half axis at t = 0.
    pub u: Vec2,
    /// Half axis at t = pi/2.
    pub v: Vec2,
    /// The parameter at the start, in radians (not the angle seen from the centre).
    pub start: f64,
    /// How far the parameter runs, signed, in radians.
    pub sweep: f64,
}

/// A B-spline of any degree on any knot vector, clamped or not. It runs over the knots from `degree` to the number of
/// control points.
#[derive(Clone, Debug, PartialEq)]
pub struct Nurbs {
    degree: usize,
    knots: Vec<f64>,
    points: Vec<Point>,
    weights: Vec<f64>,
}

/// The smallest weight of a B-spline as a share of its largest: with less, the products of points and weights leave too
/// few digits of a double for a thousandth of a millimetre in a metre.
const WEIGHT_RANGE: f64 = 1e-9;

impl EllipseArc {
    /// The arc of a circle about `centre`, from the angle `start` through `sweep`, both in radians.
    pub fn circular(centre: Point, radius: f64, start: f64, sweep: f64) -> Self {
        Self { centre, u: Vec2::new(radius, 0.0), v: Vec2::new(0.0, radius), start, sweep }
    }

    /// The point at parameter `t`.
    pub fn at(&self, t: f64) -> Point {
        let (sin, cos) = t.sin_cos();
        self.centre + self.u * cos + self.v * sin
    }

    /// The vertices of the equal arcs, each of at most half a turn, where the ellipse is a circle to within rounding;
    /// `None` for every other ellipse.
    pub fn as_arcs(&self) -> Option<Vec<Vertex>> {
        let slack = 64.0 * f64::EPSILON * self.u.hypot2().max(self.v.hypot2());
        let round = (self.u.hypot2() - self.v.hypot2()).abs() <= slack && self.u.dot(self.v).abs() <= slack;
        if !round {
            return None;
        }
        let count = (self.sweep.abs() / PI - 64.0 * f64::EPSILON).ceil().max(1.0);
        let bulge = (self.sweep / count / 4.0).tan() * self.u.cross(self.v).signum();
        let at = |i: usize| self.at(self.start + self.sweep * (i as f64 / count));
        Some((0..=count as usize).map(|i| Vertex { at: at(i), bulge }).collect())
    }

    fn transformed(&self, map: Affine) -> Self {
        let image = |w: Vec2| map * w.to_point() - map * Point::ORIGIN;
        Self { centre: map * self.centre, u: image(self.u), v: image(self.v), ..*self }
    }

    /// The smallest upright box, from the two parameters where each coordinate turns.
    fn bbox(&self) -> Rect {
        let ends = Rect::from_points(self.at(self.start), self.at(self.start + self.sweep));
        let turns = [self.v.x.atan2(self.u.x), self.v.y.atan2(self.u.y)];
        turns.iter().flat_map(|&t| [t, t + PI]).fold(ends, |bbox, t| {
            let along = ((t - self.start) * self.sweep.signum()).rem_euclid(2.0 * PI);
            if along < self.sweep.abs() { bbox.union_pt(self.at(t)) } else { bbox }
        })
    }
}

impl Nurbs {
    /// A B-spline; empty `weights` are all 1. Says in words why the parts do not make one.
    ///
    /// # Errors
    /// When the counts do not fit (knots = points + degree + 1), a knot is less than the one before it, the curve has
    /// no extent in its parameter, or a weight is not above zero.
    pub fn new(
        degree: usize,
        knots: Vec<f64>,
        points: Vec<Point>,
        mut weights: Vec<f64>,
    ) -> Result<Self, String> {
        if weights.is_empty() {
            weights = vec![1.0; points.len()];
        }
        if degree == 0 || points.len() <= degree {
            return Err(format!("degree {degree} with {} control points", points.len()));
        }
        if knots.len() != points.len() + degree + 1 {
            let wanted = points.len() + degree + 1;
            return Err(format!("{} knots where {wanted} are needed", knots.len()));
        }
        if weights.len() != points.len() {
            return Err(format!("{} weights for {} control points", weights.len(), points.len()));
        }
        if weights.iter().any(|w| !(w.is_finite() && *w > 0.0)) {
            return Err("a weight that is not above zero".into());
        }
        let heaviest = weights.iter().copied().fold(0.0, f64::max);
        if weights.iter().any(|w| *w < heaviest * WEIGHT_RANGE) {
            return Err("weights so far apart that the curve has no accuracy".into());
        }
        weights.iter_mut().for_each(|w| *w /= heaviest);
        if !knots.is_sorted() || knots.iter().any(|k| !k.is_finite()) || knots[degree] >= knots[points.len()]
        {
            return Err("knots that do not rise".into());
        }
        Ok(Self { degree, knots, points, weights })
    }

    /// The curve as rational Bézier pieces, one for each knot interval that is not empty; control points are
    /// homogeneous, (x w, y w, w). Each is a value of the polar form (Ramshaw 1989).
    pub(super) fn pieces(&self) -> Vec<Vec<[f64; 3]>> {
        let p = self.degree;
        (p..self.points.len())
            .filter(|&i| self.knots[i] < self.knots[i + 1])
            .map(|i| {
                let (a, b) = (self.knots[i], self.knots[i + 1]);
                (0..=p).map(|j| self.polar(i, |k| if k < p - j { a } else { b })).collect()
            })
            .collect()
    }

    /// The polar form of the polynomial on knot interval `i`, at the `degree` arguments `arg(0), arg(1), ...`.
    fn polar(&self, i: usize, arg: impl Fn(usize) -> f64) -> [f64; 3] {
        let p = self.degree;
        let mut d: Vec<[f64; 3]> = (i - p..=i)
            .map(|k| {
                let (at, w) = (self.points[k], self.weights[k]);
                [at.x * w, at.y * w, w]
            })
            .collect();
        for r in 1..=p {
            for j in (r..=p).rev() {
                let (low, high) = (self.knots[i - p + j], self.knots[i + 1 + j - r]);
                let t = (arg(r - 1) - low) / (high - low);
                d[j] = std::array::from_fn(|c| d[j - 1][c] * (1.0 - t) + d[j][c] * t);
            }
        }
        d[p]
    }
}

impl Curve {
    /// The straight line from one point to another.
    pub fn line(from: Point, to: Point) -> Self {
        Self::polyline([from, to])
    }

    /// The straight lines through `points`.
    pub fn polyline(points: impl IntoIterator<Item = Point>) -> Self {
        Self::Spans(points.into_iter().map(|at| Vertex { at, bulge: 0.0 }).collect())
    }

    /// A box around the curve: the smallest one, but for B-splines the box of their control points.
    pub fn bbox(&self) -> Option<Rect> {
        match self {
            Self::Spans(vertices) => spans_bbox(vertices),
            Self::Ellipse(arc) => Some(arc.bbox()),
            Self::Quad(quad) => Some(quad.bounding_box()),
            Self::Cubic(cubic) => Some(cubic.bounding_box()),
            Self::Nurbs(nurbs) => points_bbox(nurbs.points.iter().copied()),
        }
    }

    /// True when every number of the curve is finite.
    pub fn is_finite(&self) -> bool {
        match self {
            Self::Spans(vertices) => vertices.iter().all(|v| v.at.is_finite() && v.bulge.is_finite()),
            Self::Ellipse(arc) => {
                let vectors = arc.centre.is_finite() && arc.u.is_finite() && arc.v.is_finite();
                vectors && arc.start.is_finite() && arc.sweep.is_finite()
            }
            Self::Quad(quad) => quad.is_finite(),
            Self::Cubic(cubic) => cubic.is_finite(),
            // Weights far apart overflow or vanish in the homogeneous points.
            Self::Nurbs(nurbs) => {
                nurbs.pieces().iter().flatten().all(|&h| super::sample::project(h).is_finite())
            }
        }
    }

    /// The image under `map`: arcs stay arcs under a similarity and become ellipses under any other map.
    fn transformed(self, map: Affine, into: &mut Vec<Self>) {
        match self {
            Self::Spans(vertices) => transform_spans(vertices, map, into),
            Self::Ellipse(arc) => into.push(Self::Ellipse(arc.transformed(map))),
            Self::Quad(quad) => into.push(Self::Quad(map * quad)),
            Self::Cubic(cubic) => into.push(Self::Cubic(map * cubic)),
            Self::Nurbs(mut nurbs) => {
                nurbs.points.iter_mut().for_each(|p| *p = map * *p);
                into.push(Self::Nurbs(nurbs));
            }
        }
    }
}

impl Chain {
    /// A chain of one curve.
    pub fn of(curve: Curve, closed: bool) -> Self {
        Self { curves: vec![curve], closed }
    }

    /// How many lines, arcs and curves the chain has.
    pub fn len(&self) -> usize {
        let parts = |curve: &Curve| match curve {
            Curve::Spans(vertices) => vertices.len().saturating_sub(1),
            Curve::Nurbs(nurbs) => nurbs.points.len(),
            _ => 1,
        };
        self.curves.iter().map(parts).sum()
    }

    /// True when the chain has no line, arc or curve.
    pub fn is_empty(&self) -> bool {
        self.len() == 0
    }

    /// The image under any affine map.
    #[must_use]
    pub fn transformed(self, map: Affine) -> Self {
        let mut curves = Vec::with_capacity(self.curves.len());
        for curve in self.curves {
            curve.transformed(map, &mut curves);
        }
        Self { curves, closed: self.closed }
    }

    /// True when every number of the chain is finite.
    pub fn is_finite(&self) -> bool {
        self.curves.iter().all(Curve::is_finite)
    }

    /// A box around the chain.
    pub fn bbox(&self) -> Option<Rect> {
        self.curves.iter().filter_map(Curve::bbox).reduce(|a, b| a.union(b))
    }
}

/// True when `map` scales equally in all directions, mirrored or not, to within rounding.
fn is_similarity(map: Affine) -> bool {
    let [a, b, c, d, ..] = map.as_coeffs();
    let slack = 64.0 * f64::EPSILON * (a.abs() + b.abs() + c.abs() + d.abs());
    let turned = (a - d).abs() <= slack && (b + c).abs() <= slack;
    let mirrored = (a + d).abs() <= slack && (b - c).abs() <= slack;
    turned || mirrored
}

fn transform_spans(mut vertices: Vec<Vertex>, map: Affine, into: &mut Vec<Curve>) {
    if is_similarity(map) || vertices.iter().all(|v| v.bulge == 0.0) {
        let sign = map.determinant().signum();
        for v in &mut vertices {
            *v = Vertex { at: map * v.at, bulge: v.bulge * sign };
        }
        into.push(Curve::Spans(vertices));
        return;
    }
    for pair in vertices.windows(2) {
        let span = Span::arc(pair[0].at, pair[1].at, pair[0].bulge);
        match ellipse_of(span) {
            None => into.push(Curve::line(map * span.start, map * span.end)),
            Some(arc) => into.push(Curve::Ellipse(arc.transformed(map))),
        }
    }
}

/// The circular span as a piece of an ellipse; `None` for a line.
fn ellipse_of(span: Span) -> Option<EllipseArc> {
    let centre = span.centre()?;
    let u = span.start - centre;
    let v = Vec2::new(-u.y, u.x);
    Some(EllipseArc { centre, u, v, start: 0.0, sweep: span.sweep() })
}

fn spans_bbox(vertices: &[Vertex]) -> Option<Rect> {
    let first = points_bbox(vertices.first().map(|v| v.at))?;
    Some(vertices.windows(2).fold(first, |bbox, pair| {
        let span = Span::arc(pair[0].at, pair[1].at, pair[0].bulge);
        if span.is_line() { bbox.union_pt(span.end) } else { bbox.union(span.bbox()) }
    }))
}

fn points_bbox(points: impl IntoIterator<Item = Point>) -> Option<Rect> {
    points.into_iter().map(|p| Rect::from_points(p, p)).reduce(|a, b| a.union(b))
}
