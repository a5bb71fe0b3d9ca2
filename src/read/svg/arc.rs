//! Elliptical arcs from end points to centre and parameters (SVG 2, implementation notes, "Elliptical arc
//! implementation notes"; SVG 1.1, F.6).

use std::f64::consts::TAU;

use kurbo::{Point, Vec2};

use super::super::curve::EllipseArc;

/// What an arc command says besides its ends.
#[derive(Clone, Copy, Debug)]
pub(super) struct Arc {
    /// Half axes; signs mean nothing, and radii too small for the ends are enlarged.
    pub(super) radii: Vec2,
    /// The turn of the first axis from x, in radians.
    pub(super) turn: f64,
    /// The large-arc flag.
    pub(super) large: bool,
    /// The sweep flag: towards growing angles.
    pub(super) positive: bool,
}

/// The arc as a piece of an ellipse; `None` where the ends coincide or a radius is zero.
pub(super) fn arc_to(from: Point, arc: &Arc, to: Point) -> Option<EllipseArc> {
    let (rx, ry) = (arc.radii.x.abs(), arc.radii.y.abs());
    if from == to || rx == 0.0 || ry == 0.0 {
        return None;
    }
    let (sin, cos) = arc.turn.sin_cos();
    let half = (from - to) / 2.0;
    // The start seen from the middle of the chord, in a frame where the ellipse is the unit circle (eq. 5.1).
    let unit = Vec2::new((cos * half.x + sin * half.y) / rx, (cos * half.y - sin * half.x) / ry);
    let lambda = unit.hypot2();
    let grow = lambda.sqrt().max(1.0);
    let (unit, rx, ry) = (unit / grow, rx * grow, ry * grow);
    // The centre stands off the chord by what the chord leaves of the radius (eq. 5.2).
    let side = if arc.large == arc.positive { -1.0 } else { 1.0 };
    let off = (1.0 / unit.hypot2() - 1.0).max(0.0).sqrt() * side;
    let centre = Vec2::new(unit.y, -unit.x) * off;
    let (first, last) = (unit - centre, -unit - centre);
    let start = first.atan2();
    let mut sweep = first.cross(last).atan2(first.dot(last));
    if arc.positive && sweep < 0.0 {
        sweep += TAU;
    } else if !arc.positive && sweep > 0.0 {
        sweep -= TAU;
    }
    let u = Vec2::new(cos, sin) * rx;
    let v = Vec2::new(-sin, cos) * ry;
    let centre = from.midpoint(to) + u * centre.x + v * centre.y;
    let ellipse = EllipseArc { centre, u, v, start, sweep };
    (sweep != 0.0).then_some(ellipse)
}
