//! Whole contours as fair curves from corner to corner.

use kurbo::{ParamCurve, ParamCurveArclen, Point};
use ribband::fair::{Effort, Outline, outline};
use ribband::geom::{ArcSpline, Vertex};
use ribband::num::Tolerance;

fn faired(contour: &ArcSpline, corners: &[usize], tolerance: f64) -> Outline {
    let tolerance = Tolerance::new(tolerance).expect("above zero");
    outline(contour, corners, tolerance, Effort::Full).expect("a fair outline")
}

/// A pulled wave: its ends at zero, its crests alternating about a line.
fn wave(from: Point, to: Point, height: f64) -> impl Iterator<Item = Point> {
    let across = kurbo::Vec2::new(from.y - to.y, to.x - from.x).normalize() * height;
    (0..60).map(move |k| {
        let noise = if k == 0 { 0.0 } else { f64::from(k % 3 - 1) };
        from.lerp(to, f64::from(k) / 60.0) + across * noise
    })
}

#[test]
fn corners_are_kept_to_and_what_lies_between_is_fair() {
    let corners = [(0.0, 0.0), (60.0, 0.0), (60.0, 40.0), (0.0, 40.0)].map(Point::from);
    let sides = (0..4).flat_map(|i| wave(corners[i], corners[(i + 1) % 4], 0.05));
    let contour = ArcSpline::polyline(sides, true);
    // Begun between two corners, as a trace is.
    let contour = contour.started_at(20);
    let faired = faired(&contour, &[40, 100, 160, 220], 0.1);
    assert_eq!(faired.runs.len(), 4);
    let ends: Vec<Point> = faired.runs.iter().map(|run| run.spline.places()[0]).collect();
    assert_eq!(ends, [1, 2, 3, 0].map(|i| corners[i]));
    let cubics: Vec<_> = faired.cubics().collect();
    assert!(cubics.windows(2).all(|pair| pair[0].p3 == pair[1].p0), "in one piece");
    assert_eq!((cubics[0].p0, cubics[cubics.len() - 1].p3), (corners[1], corners[1]));
    assert_eq!(cubics.len(), 4, "a straight side within the tolerance is one cubic");
    let length: f64 = cubics.iter().map(|cubic| cubic.arclen(1e-9)).sum();
    assert!((length - 200.0).abs() < 1e-3 && faired.energy() < 1e-9, "{length}");
    assert!(faired.deviation.mm <= 0.1 * 1.005);
}

/// A drawn circle of radius 10, which has two arcs and no corner, and an open contour: half of it.
#[test]
fn drawn_arcs_are_faired_too() {
    let half = |x: f64| Vertex { at: Point::new(x, 0.0), bulge: 1.0 };
    let circle = ArcSpline { vertices: vec![half(10.0), half(-10.0)], closed: true };
    let open = ArcSpline { vertices: vec![half(10.0), half(-10.0)], closed: false };
    for (contour, turns) in [(circle, 1.0), (open, 0.5)] {
        let faired = faired(&contour, &[], 0.05);
        assert!(faired.closed == contour.closed && faired.runs.len() == 1);
        let radii = faired.cubics().flat_map(|cubic| (0..8).map(move |k| cubic.eval(f64::from(k) / 8.0)));
        assert!(radii.map(|p| (p.to_vec2().hypot() - 10.0).abs()).all(|off| off <= 0.05));
        let length: f64 = faired.cubics().map(|cubic| cubic.arclen(1e-9)).sum();
        assert!((length / (turns * std::f64::consts::TAU * 10.0) - 1.0).abs() < 0.006, "{length}");
    }
}

#[test]
fn a_contour_without_length_has_none() {
    let nothing = ArcSpline::polyline([], true);
    assert!(outline(&nothing, &[], Tolerance::DEFAULT, Effort::Full).is_none());
}
