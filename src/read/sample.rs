//! Curves to lines and arcs: arcs stay exact, ellipses and free curves are cut into chords.

use kurbo::{Point, Rect, Vec2};

use super::curve::{Chain, Curve, EllipseArc};
use crate::geom::{ArcSpline, Vertex};
use crate::sketch::snap;

/// How far chords of sampled curves may be from the true curve, in mm: 0.0005, a two-hundredth of the default tolerance
/// and half a unit of the last place of a program in mm with three decimals. A drawing over 50 m, which only a wrong
/// scale makes, is sampled to a 10^-8th of its size, so that it can still be measured and refused.
pub(super) fn sampling_tolerance(bbox: Rect, mm_per_unit: f64) -> f64 {
    let size_mm = bbox.width().max(bbox.height()) * mm_per_unit;
    (size_mm * 1e-8).max(0.0005)
}

/// A homogeneous point, (x w, y w, w).
pub(super) type Homogeneous = [f64; 3];

/// A chain turned into lines and arcs, and how far these are from it at most, in mm.
pub(super) struct Sampled {
    pub(super) path: ArcSpline,
    pub(super) error_mm: f64,
}

/// The chain times `mm_per_unit` as lines and arcs, snapped, chords within `tolerance_mm`.
pub(super) fn sample(chain: Chain, mm_per_unit: f64, tolerance_mm: f64) -> Sampled {
    let closed = chain.closed;
    let mut sampler = Sampler { mm_per_unit, tolerance_mm, vertices: Vec::new(), error_mm: 0.0 };
    for curve in chain.curves {
        sampler.push(curve);
    }
    let mut vertices = sampler.vertices;
    for v in &mut vertices {
        v.at = Point::new(snap(v.at.x * mm_per_unit), snap(v.at.y * mm_per_unit));
    }
    close(&mut vertices, closed);
    Sampled { path: ArcSpline { vertices, closed }, error_mm: sampler.error_mm }
}

/// Leaves the last vertex of an open chain without a bulge, and drops the repeated start of a closed one.
fn close(vertices: &mut Vec<Vertex>, closed: bool) {
    let (Some(first), Some(last)) = (vertices.first().copied(), vertices.last_mut()) else { return };
    last.bulge = 0.0;
    if closed && last.at == first.at && vertices.len() > 1 {
        vertices.pop();
    }
}

/// Collects the vertices of one chain, in the file's units.
struct Sampler {
    mm_per_unit: f64,
    tolerance_mm: f64,
    vertices: Vec<Vertex>,
    error_mm: f64,
}

impl Sampler {
    fn push(&mut self, curve: Curve) {
        // The curve's own start stands for the end of the one before it.
        self.vertices.pop();
        match curve {
            Curve::Spans(mut vertices) if self.vertices.is_empty() => {
                std::mem::swap(&mut self.vertices, &mut vertices);
            }
            Curve::Spans(vertices) => self.vertices.extend(vertices),
            Curve::Ellipse(arc) => self.ellipse(&arc),
            Curve::Quad(q) => self.bezier(polynomial(&[q.p0, q.p1, q.p2])),
            Curve::Cubic(c) => self.bezier(polynomial(&[c.p0, c.p1, c.p2, c.p3])),
            Curve::Nurbs(nurbs) => {
                for (i, piece) in nurbs.pieces().into_iter().enumerate() {
                    if i > 0 {
                        self.vertices.pop();
                    }
                    self.bezier(piece);
                }
            }
        }
    }

    fn line_to(&mut self, at: Point) {
        self.vertices.push(Vertex { at, bulge: 0.0 });
    }

    /// Equal steps of the parameter: the middle of a step h is (1 - cos(h/2)) of a half diameter from its chord's.
    fn ellipse(&mut self, arc: &EllipseArc) {
        if let Some(arcs) = arc.as_arcs() {
            self.vertices.extend(arcs);
            return;
        }
        let reach = largest_half_axis(arc.u, arc.v) * self.mm_per_unit;
        let widest = 2.0 * (1.0 - self.tolerance_mm / reach).clamp(0.0, 1.0).acos();
        let count = (arc.sweep.abs() / widest).ceil().max(1.0);
        self.error_mm = self.error_mm.max(reach * (1.0 - (arc.sweep / count / 2.0).cos()));
        for i in 0..=count as usize {
            self.line_to(arc.at(arc.start + arc.sweep * (i as f64 / count)));
        }
    }

    /// Halves the curve until each piece is flat; pieces wait on a stack, the nearest on top.
    fn bezier(&mut self, curve: Vec<Homogeneous>) {
        self.line_to(project(curve[0]));
        let mut waiting = vec![(curve, 0)];
        while let Some((piece, depth)) = waiting.pop() {
            let distance_mm = chord_distance(&piece) * self.mm_per_unit;
            if distance_mm <= self.tolerance_mm || depth >= DEEPEST {
                self.error_mm = self.error_mm.max(distance_mm);
                self.line_to(project(piece[piece.len() - 1]));
            } else {
                let (front, back) = halves(piece);
                waiting.push((back, depth + 1));
                waiting.push((front, depth + 1));
            }
        }
    }
}

/// Halving so often leaves nothing that a double can tell apart.
const DEEPEST: usize = 52;

/// The largest singular value of the matrix with columns `u` and `v`: the half major axis.
fn largest_half_axis(u: Vec2, v: Vec2) -> f64 {
    let sum = u.hypot2() + v.hypot2();
    let difference = (u.hypot2() - v.hypot2()).hypot(2.0 * u.dot(v));
    ((sum + difference) / 2.0).sqrt()
}

fn polynomial(points: &[Point]) -> Vec<Homogeneous> {
    points.iter().map(|p| [p.x, p.y, 1.0]).collect()
}

/// The point of the plane that a homogeneous point stands for.
pub(super) fn project(h: Homogeneous) -> Point {
    Point::new(h[0] / h[2], h[1] / h[2])
}

/// An upper bound of the Fréchet distance between a Bézier piece of positive weights and its chord.
///
/// Where the control points advance along the chord so does the curve (variation diminishing), and the distance is
/// the largest across the chord, which the control points bound; for polynomials of degree n all but 2^(1-n) of it.
/// Elsewhere it is bounded by the distance of the control points from the start.
fn chord_distance(piece: &[Homogeneous]) -> f64 {
    let start = project(piece[0]);
    let chord = project(piece[piece.len() - 1]) - start;
    let arms = piece.iter().map(|&h| project(h) - start);
    let advances = arms.clone().map(|arm| arm.dot(chord)).is_sorted();
    if !advances || chord.hypot2() == 0.0 {
        return arms.map(Vec2::hypot).fold(0.0, f64::max);
    }
    let across = arms.map(|arm| arm.cross(chord).abs()).fold(0.0, f64::max) / chord.hypot();
    let even = piece.iter().all(|h| (h[2] - piece[0][2]).abs() == 0.0);
    let share = if even { 1.0 - 0.5_f64.powi(piece.len() as i32 - 2) } else { 1.0 };
    across * share
}

/// The two halves of a Bézier curve (de Casteljau).
fn halves(mut points: Vec<Homogeneous>) -> (Vec<Homogeneous>, Vec<Homogeneous>) {
    let count = points.len();
    let mut front = Vec::with_capacity(count);
    for left in (0..count).rev() {
        front.push(points[0]);
        for i in 0..left {
            points[i] = std::array::from_fn(|c| 0.5 * (points[i][c] + points[i + 1][c]));
        }
    }
    (front, points)
}
