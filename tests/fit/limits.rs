//! Clean curves against the least number of tangent arcs there can be.
//!
//! For a smooth run of curvature k(s), I = integral |dk/ds|^(1/3) ds, and tangent arcs with free ends reach a tolerance e
//! with no fewer than I / (72 sqrt(3) e)^(1/3) of them: derived from the error c |k'| h^3 with c = 1/(72 sqrt 3) of
//! the best spline of arcs; the published empirical constant is near it (Levien and Uguray 2024, section 5).

use std::f64::consts::TAU;

use kurbo::{Point, Vec2};
use ribband::geom::ArcSpline;

use super::common::{cost, fitted, sampled};

const STEPS: usize = 2000;

/// I of the curve, and whether one arc more than the limit is allowed at the finer tolerance.
struct Row {
    name: &'static str,
    integral: f64,
    contour: ArcSpline,
    one_more: [bool; 2],
}

fn clothoid() -> ArcSpline {
    let step = 100.0 / (STEPS * 20) as f64;
    let mut at = Point::ZERO;
    let mut points = vec![at];
    for i in 0..STEPS * 20 {
        let along = (i as f64 + 0.5) * step;
        at += Vec2::from_angle(0.0002 * along * along) * step;
        if (i + 1) % 20 == 0 {
            points.push(Point::new((at.x * 1e5).round() / 1e5, (at.y * 1e5).round() / 1e5));
        }
    }
    ArcSpline::polyline(points, false)
}

fn rows() -> Vec<Row> {
    let row = |name, integral, contour, one_more| Row { name, integral, contour, one_more };
    let involute = |t: f64| (10.0 * (t.cos() + t * t.sin()), 10.0 * (t.sin() - t * t.cos()));
    let spiral = |t: f64| (5.0 * (0.2 * t).exp() * t.cos(), 5.0 * (0.2 * t).exp() * t.sin());
    let ellipse = |t: f64| (50.0 * t.cos(), 30.0 * t.sin());
    let sine = |t: f64| (t, 10.0 * (TAU * t / 100.0).sin());
    vec![
        row("ellipse", 20.00759, sampled(ellipse, (0.0, TAU), STEPS, true), [true, true]),
        row("involute", 12.92661, sampled(involute, (1.0, 7.0), STEPS, false), [false, false]),
        row("spiral", 7.85503, sampled(spiral, (0.0, TAU), STEPS, false), [false, false]),
        row("parabola", 6.84910, sampled(|t| (t, t * t / 20.0), (0.0, 40.0), STEPS, false), [false, false]),
        row("sine", 24.30712, sampled(sine, (0.0, 200.0), STEPS, false), [false, true]),
        row("clothoid", 7.36806, clothoid(), [false, false]),
    ]
}

#[test]
fn clean_curves_take_hardly_more_arcs_than_there_must_be() {
    for row in rows() {
        for (e, one_more) in [0.1, 0.01].into_iter().zip(row.one_more) {
            let limit = row.integral / (72.0 * 3.0_f64.sqrt() * e).cbrt();
            let allowed = (1.05 * limit).ceil() as usize + usize::from(one_more);
            let fitted = fitted(&row.contour, e);
            let cost = cost(&fitted);
            println!("{} at {e}: limit {limit:.2}, allowed {allowed}, reached {cost}", row.name);
            assert!(cost <= allowed, "{} at {e}: {cost} spans where {allowed} are allowed", row.name);
            assert!(fitted.deviation.mm <= e, "{} at {e} deviates by {}", row.name, fitted.deviation.mm);
        }
    }
}
