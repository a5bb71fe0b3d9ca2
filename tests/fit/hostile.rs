//! Traces built for trouble: the tolerance is held, and nothing hangs.

use kurbo::Point;
use proptest::prelude::*;
use ribband::geom::ArcSpline;

use super::common::{fitted, furthest_apart};

/// One step of a trace: a usual one, none, one of an ulp, a spike out and back, a far jump.
fn steps() -> impl Strategy<Value = Vec<(f64, f64)>> {
    let step = prop_oneof![
        4 => (-2.0..2.0, -2.0..2.0),
        1 => Just((0.0, 0.0)),
        1 => Just((f64::EPSILON, 0.0)),
        1 => (-30.0..30.0, -0.01..0.01),
        1 => (-100.0..100.0, -100.0..100.0),
    ];
    prop::collection::vec(step, 1..40)
}

fn walked(steps: &[(f64, f64)], scale: f64, closed: bool) -> ArcSpline {
    let mut at = Point::new(5.0, 5.0);
    let places = steps.iter().flat_map(|&(dx, dy)| {
        let before = at;
        at += kurbo::Vec2::new(dx, dy) * scale;
        // Every seventh step or so comes back on itself.
        if dx > 1.7 { vec![at, before] } else { vec![at] }
    });
    ArcSpline::polyline(places.collect::<Vec<_>>(), closed)
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(48))]

    #[test]
    fn the_tolerance_is_held(steps in steps(), closed: bool, scale in prop_oneof![Just(1.0), Just(1e-4), Just(1e2)]) {
        let contour = walked(&steps, scale, closed);
        let tolerance = 0.1 * scale.min(10.0);
        let fitted = fitted(&contour, tolerance);
        prop_assert!(fitted.path.vertices.iter().all(|v| v.at.is_finite() && v.bulge.abs() <= 1.0));
        prop_assert!(fitted.deviation.mm <= tolerance, "deviation {}", fitted.deviation.mm);
        if !contour.is_empty() {
            prop_assert!(furthest_apart(&fitted, &contour) <= tolerance);
        }
    }
}

#[test]
fn a_spiral_and_a_near_circle_end() {
    let spiral = |k: i32| {
        Point::new(
            0.05 * f64::from(k) * (0.2 * f64::from(k)).cos(),
            0.05 * f64::from(k) * (0.2 * f64::from(k)).sin(),
        )
    };
    let contour = ArcSpline::polyline((0..600).map(spiral), false);
    assert!(fitted(&contour, 0.1).deviation.mm <= 0.1, "spiral");
    let gap = |k: i32| Point::new(20.0 * (0.0125 * f64::from(k)).cos(), 20.0 * (0.0125 * f64::from(k)).sin());
    let contour = ArcSpline::polyline((0..500).map(gap), false);
    assert!(fitted(&contour, 0.1).deviation.mm <= 0.1, "near circle");
}
