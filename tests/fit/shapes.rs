//! Shapes whose arcs and lines are known come back as those.

use std::f64::consts::TAU;

use kurbo::Point;
use ribband::geom::ArcSpline;

use super::common::{LAST_PLACE, cost, fitted, furthest_apart, outlines, sampled};

fn polygon(points: &[(f64, f64)], closed: bool) -> ArcSpline {
    ArcSpline::polyline(points.iter().map(|&(x, y)| Point::new(x, y)), closed)
}

#[test]
fn a_circle_is_two_half_turns_of_its_radius() {
    let circle = sampled(|t| (40.0 + 25.0 * t.cos(), 30.0 + 25.0 * t.sin()), (0.0, TAU), 400, true);
    let fitted = fitted(&circle, 0.05);
    assert_eq!(fitted.path.len(), 2, "two spans");
    for span in fitted.path.spans() {
        assert!((span.radius() - 25.0).abs() < 1e-3, "radius {}", span.radius());
        let centre = span.centre().expect("an arc has a centre");
        assert!(centre.distance(Point::new(40.0, 30.0)) < 1e-3, "centre {centre:?}");
    }
}

#[test]
fn every_traced_circle_is_found_through_its_noise() {
    for outline in outlines().iter().filter(|o| o.id.starts_with("analytic/circle")) {
        assert_eq!(fitted(&outline.contours[0], outline.tolerance).path.len(), 2, "{}", outline.id);
    }
}

#[test]
fn a_rectangle_keeps_its_four_lines_and_corners() {
    let fitted = fitted(&polygon(&[(0.0, 0.0), (80.0, 0.0), (80.0, 50.0), (0.0, 50.0)], true), 0.1);
    assert_eq!(fitted.path.len(), 4, "four spans");
    assert_eq!(fitted.path.corners(LAST_PLACE).count(), 4, "four corners");
}

#[test]
fn a_straight_trace_is_one_span() {
    let jagged =
        ArcSpline::polyline((0..=200).map(|i| Point::new(f64::from(i), 0.03 * f64::from(i % 2))), false);
    assert_eq!(fitted(&jagged, 0.1).path.len(), 1, "one span");
}

#[test]
fn a_contour_without_length_comes_back_as_it_is() {
    let point = polygon(&[(3.0, 4.0), (3.0, 4.0)], false);
    assert_eq!(fitted(&point, 0.1).path, point);
    let nothing = ArcSpline::default();
    assert_eq!(fitted(&nothing, 0.1).path, nothing);
}

#[test]
fn exact_arcs_are_not_made_more() {
    let slot = polygon(&[(0.0, 0.0), (60.0, 0.0), (60.0, 10.0), (0.0, 10.0)], true);
    let mut slot = slot;
    slot.vertices[1].bulge = 1.0;
    slot.vertices[3].bulge = 1.0;
    let fitted = fitted(&slot, 0.05);
    assert!(cost(&fitted) <= 4, "{} spans and corners", cost(&fitted));
    assert!(furthest_apart(&fitted, &slot) <= 0.05, "within the tolerance");
}
