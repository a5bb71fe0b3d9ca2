//! A Bézier cubic as arcs: each starts and ends on it, and the distance between the two is proven.

use std::collections::VecDeque;

use kurbo::{CubicBez, ParamCurve, Point, Vec2};

use super::Span;

/// Halving so often leaves nothing that a double can tell apart.
const DEEPEST: u32 = 40;

/// Arcs and lines from the start of `cubic` to its end, within `within` mm of it in the Fréchet sense.
///
/// They run through places of the cubic; their tangents differ at the joints by as little as the distance allows. Their
/// number grows with the cube root of the size over `within`. A cubic with numbers so large that doubles cannot tell
/// places `within` apart is only approached as far as they can.
pub fn arcs_of(cubic: CubicBez, within: f64) -> Vec<Span> {
    let mut spans = Vec::new();
    let mut waiting = VecDeque::from([(cubic, 0)]);
    while let Some((piece, depth)) = waiting.pop_front() {
        match arc_of(&piece, within) {
            Some(span) => spans.push(span),
            None if depth >= DEEPEST => spans.push(Span::line(piece.p0, piece.p3)),
            None => {
                let (front, back) = piece.subdivide();
                waiting.push_front((back, depth + 1));
                waiting.push_front((front, depth + 1));
            }
        }
    }
    spans
}

/// The arc through both ends and the middle of a cubic, or the line through its ends where that is as good; `None` where
/// it is not proven to be near enough.
fn arc_of(piece: &CubicBez, within: f64) -> Option<Span> {
    let legs = [piece.p1 - piece.p0, piece.p2 - piece.p1, piece.p3 - piece.p2];
    let length: f64 = legs.iter().map(|leg| leg.hypot()).sum();
    let line = Span::line(piece.p0, piece.p3);
    // Both lie within a circle of that diameter.
    if length <= within {
        return Some(line);
    }
    let middle = piece.eval(0.5);
    let (to, from) = (middle - piece.p0, piece.p3 - middle);
    // The angle at the middle is half the sweep (inscribed angle).
    let bulge = (to.cross(from).atan2(to.dot(from)) / 2.0).tan();
    let arc = Span::arc(piece.p0, piece.p3, bulge);
    let span = if arc.sagitta() <= within / 8.0 { line } else { arc };
    // A curve that went round more than once would be longer.
    let fits = bulge.abs() <= 1.0 && length <= 1.5 * span.length() && is_near(piece, &span, within);
    fits.then_some(span)
}

/// True when the cubic is proven to be within `within` of the span, in order.
///
/// With d the way from the span's start, n the unit normal there and k the curvature, g = k d²/2 - n d vanishes on the
/// span's circle, and the distance x from the circle satisfies |g| = |x| |1 + k x / 2|. The direction of the circle at a place is
/// the unit tangent at the start plus k times d turned left: where the cubic never moves against it, its places and those of the
/// arc in the same direction from the centre follow each other in order. Both are polynomials, and bounded by their
/// Bernstein coefficients.
fn is_near(piece: &CubicBez, span: &Span, within: f64) -> bool {
    let (bend, heading) = (span.curvature(), span.tangent(0.0));
    let normal = left(heading);
    let from_start = [piece.p0, piece.p1, piece.p2, piece.p3].map(|p| p - span.start);
    let square = dot(&from_start, &from_start);
    let across = dot(&from_start, &[normal; 4]);
    let g = square.iter().zip(across).map(|(square, across)| (bend * square / 2.0 - across).abs());
    let g = g.fold(0.0, f64::max);
    // The smaller root of the equation for x, where the circle's centre is far enough.
    let root = 1.0 - 2.0 * g * bend.abs();
    if root.is_nan() || root < 0.5 || 2.0 * g / (1.0 + root.sqrt()) > within {
        return false;
    }
    let along = from_start.map(|d| heading + left(d) * bend);
    dot(&along, &derivative(piece)).into_iter().all(|progress| progress >= 0.0)
}

/// The derivative by the parameter as a cubic.
fn derivative(piece: &CubicBez) -> [Vec2; 4] {
    let ways = |a: Point, b: Point| (b - a) * 3.0;
    let (first, second, third) =
        (ways(piece.p0, piece.p1), ways(piece.p1, piece.p2), ways(piece.p2, piece.p3));
    [first, (first + second * 2.0) / 3.0, (second * 2.0 + third) / 3.0, third]
}

/// The Bernstein coefficients of the scalar product of two cubics.
fn dot(a: &[Vec2; 4], b: &[Vec2; 4]) -> [f64; 7] {
    const OF_THREE: [f64; 4] = [1.0, 3.0, 3.0, 1.0];
    const OF_SIX: [f64; 7] = [1.0, 6.0, 15.0, 20.0, 15.0, 6.0, 1.0];
    let mut product = [0.0; 7];
    for (i, a) in a.iter().enumerate() {
        for (j, b) in b.iter().enumerate() {
            product[i + j] += OF_THREE[i] * OF_THREE[j] * a.dot(*b) / OF_SIX[i + j];
        }
    }
    product
}

fn left(v: Vec2) -> Vec2 {
    Vec2::new(-v.y, v.x)
}
