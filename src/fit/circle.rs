//! A contour that is one whole circle.

use kurbo::{Point, Vec2};
use nalgebra::{Matrix3, Vector3};

use crate::geom::{ArcSpline, Vertex};

use super::trace::{Bead, Trace};

/// How often the circle is fitted again with the beads that lie furthest out weighing more.
const ROUNDS: usize = 30;

/// The circle that passes every bead of a closed trace within its band, as two half turns; `None` if there is none.
pub(super) fn whole(trace: &Trace) -> Option<ArcSpline> {
    let lap = &trace.beads()[..trace.lap()];
    if lap.len() < 3 {
        return None;
    }
    let mut weights = vec![1.0; lap.len()];
    for _ in 0..ROUNDS {
        let (centre, radius) = least_squares(lap, &weights)?;
        let miss = |b: &Bead| (b.at.distance(centre) - radius).abs() / b.band;
        let worst = lap.iter().map(miss).fold(0.0, f64::max);
        if worst <= 1.0 {
            return winds_once(lap, centre).then(|| halves(lap[0].at, centre, radius));
        }
        if worst > 3.0 {
            return None;
        }
        // Lawson's reweighting leads from the least-squares circle towards the one of least largest miss.
        lap.iter().zip(&mut weights).for_each(|(b, w)| *w *= 0.1 + miss(b));
        let sum: f64 = weights.iter().sum();
        weights.iter_mut().for_each(|w| *w *= lap.len() as f64 / sum);
    }
    None
}

/// Centre and radius of the circle with least weighted algebraic misfit (Kasa's linear equations).
fn least_squares(beads: &[Bead], weights: &[f64]) -> Option<(Point, f64)> {
    let origin = beads[0].at;
    let (mut a, mut b) = (Matrix3::zeros(), Vector3::zeros());
    for (bead, &weight) in beads.iter().zip(weights) {
        let d = bead.at - origin;
        let row = Vector3::new(d.x, d.y, 1.0);
        a += row * row.transpose() * weight;
        b += row * (d.hypot2() * weight);
    }
    let solved = a.lu().solve(&b)?;
    let centre = Vec2::new(solved.x, solved.y) / 2.0;
    let radius = (solved.z + centre.hypot2()).sqrt();
    radius.is_finite().then_some((origin + centre, radius))
}

/// True when the beads turn about the centre once, without going back by more than a quarter turn.
fn winds_once(beads: &[Bead], centre: Point) -> bool {
    let turn = |a: Point, b: Point| {
        let (a, b) = (a - centre, b - centre);
        a.cross(b).atan2(a.dot(b))
    };
    let next = beads.iter().cycle().skip(1);
    let total: f64 = beads.iter().zip(next).map(|(a, b)| turn(a.at, b.at)).sum();
    (total - std::f64::consts::TAU).abs() < 1.0
}

/// The circle counter-clockwise as two half turns, from the place nearest to `start`.
fn halves(start: Point, centre: Point, radius: f64) -> ArcSpline {
    let out = (start - centre).normalize() * radius;
    let vertices = [centre + out, centre - out].map(|at| Vertex { at, bulge: 1.0 });
    ArcSpline { vertices: vertices.to_vec(), closed: true }
}
