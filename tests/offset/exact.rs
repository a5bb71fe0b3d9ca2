//! Parallels whose length and area are known in closed form.

use std::f64::consts::{PI, TAU};

use approx::assert_abs_diff_eq;
use kurbo::{Point, Vec2};
use proptest::prelude::*;
use ribband::geom::{ArcSpline, Vertex};
use ribband::offset::{CentreLine, Compensated, Corners, Side, compensate, uncut};

fn vertex(x: f64, y: f64, bulge: f64) -> Vertex {
    Vertex { at: Point::new(x, y), bulge }
}

fn circle(x: f64, y: f64, radius: f64) -> ArcSpline {
    ArcSpline { vertices: vec![vertex(x - radius, y, 1.0), vertex(x + radius, y, 1.0)], closed: true }
}

fn polygon(points: &[(f64, f64)]) -> ArcSpline {
    ArcSpline::polyline(points.iter().map(|&p| Point::from(p)), true)
}

fn square(x: f64, y: f64, side: f64) -> ArcSpline {
    polygon(&[(x, y), (x + side, y), (x + side, y + side), (x, y + side)])
}

fn outside(loops: &[ArcSpline], radius: f64) -> Compensated {
    compensate(loops, radius, Side::Outside, Corners::Round).expect("there is a line outside")
}

fn inside(loops: &[ArcSpline], radius: f64) -> Compensated {
    compensate(loops, radius, Side::Inside, Corners::Round).expect("there is a line inside, or none")
}

/// Lengths and unsigned areas of all lines, largest first.
fn measures(lines: &Compensated) -> Vec<(f64, f64)> {
    let mut all: Vec<(f64, f64)> =
        lines.lines.iter().map(|line| (line.path.length(), line.path.area().abs())).collect();
    all.sort_by(|a, b| b.1.total_cmp(&a.1));
    all
}

fn assert_one(lines: &Compensated, length: f64, area: f64) {
    let [(l, a)] = measures(lines)[..] else { panic!("one line expected: {lines:?}") };
    assert_abs_diff_eq!(l, length, epsilon = 1e-9 * length.max(1.0));
    assert_abs_diff_eq!(a, area, epsilon = 1e-9 * area.max(1.0));
}

/// NISTIR 6556, tables 12 and 13: a contour of lines and tangent arcs, and the path of a cutter of 1 inch about it.
#[test]
fn nist_tables_12_and_13() {
    let (quarter, half) = ((PI / 8.0).tan(), |sweep: f64| (sweep.to_radians() / 4.0).tan());
    let edge = [
        vertex(2.0, 3.0, -quarter),
        vertex(3.0, 2.0, 0.0),
        vertex(3.0, -1.0, -quarter),
        vertex(2.0, -2.0, 0.0),
        vertex(-2.0, -2.0, -half(143.130_102_354_156)),
        vertex(-2.6, -0.2, 0.0),
        vertex(1.4, 2.8, -half(36.869_897_645_844)),
    ];
    let table_13 = [(2.0, 3.5), (3.5, 2.0), (3.5, -1.0), (2.0, -2.5), (-2.0, -2.5), (-2.9, 0.2), (1.1, 3.2)]
        .map(Point::from);
    let edge = ArcSpline { vertices: edge.to_vec(), closed: true };
    let lines = outside(std::slice::from_ref(&edge), 0.5);
    assert_one(&lines, 12.0 + 3.0 * PI, 24.0 + 9.0 * PI / 4.0);
    let path = &lines.lines[0].path;
    assert_eq!(path.len(), table_13.len());
    for expected in table_13 {
        let nearest = path.vertices.iter().map(|v| v.at.distance(expected)).fold(f64::INFINITY, f64::min);
        assert!(nearest < 1e-9, "{expected:?} is missing by {nearest}");
    }
    // And back again: the inner parallel of table 13's path is table 12's edge.
    assert_one(&inside(std::slice::from_ref(path), 0.5), 12.0 + 2.0 * PI, 18.0 + PI);
}

/// Steiner: outside a convex shape by r, length grows by 2 pi r and area by L r + pi r^2.
#[test]
fn convex_shapes_follow_steiner() {
    let triangle = polygon(&[(0.0, 0.0), (9.0, 1.0), (4.0, 7.0)]);
    for shape in [square(0.0, 0.0, 10.0), circle(1.0, 2.0, 5.0), triangle] {
        let (length, area) = (shape.length(), shape.area());
        for radius in [1e-3, 0.5, 2.0, 40.0] {
            for shape in [shape.clone(), shape.reversed()] {
                assert_one(
                    &outside(&[shape], radius),
                    length + TAU * radius,
                    area + length * radius + PI * radius * radius,
                );
            }
        }
    }
}

/// What rounding leaves of a line, an arc with its centre light years away, has its sides all the same.
#[test]
fn sides_that_are_straight_but_for_rounding_are_followed() {
    for bulge in [1e-12, 3e-15, 2.142e-16, 4e-17, 1e-300].into_iter().flat_map(|b| [b, -b]) {
        for turn in 0..8 {
            let across = Vec2::from_angle(0.3 + f64::from(turn)) * 13.0;
            let corner = |x: f64, y: f64| {
                let at = Point::new(37.0, 9.9) + across * x + Vec2::new(-across.y, across.x) * y;
                vertex(at.x, at.y, bulge)
            };
            let vertices = vec![corner(0.0, 0.0), corner(1.0, 0.0), corner(1.0, 1.0), corner(0.0, 1.0)];
            let square = [ArcSpline { vertices, closed: true }];
            assert_one(&outside(&square, 0.5), 52.0 + PI, 169.0 + 26.0 + PI / 4.0);
            assert_one(&inside(&square, 0.5), 48.0, 144.0);
        }
    }
}

#[test]
fn lines_run_with_the_outline_on_their_right() {
    let turns = |lines: &Compensated| lines.lines.iter().map(|l| l.path.area() > 0.0).collect::<Vec<_>>();
    assert_eq!(turns(&outside(&[square(0.0, 0.0, 10.0)], 2.0)), [false], "clockwise about a part");
    assert_eq!(turns(&inside(&[square(0.0, 0.0, 10.0)], 2.0)), [true], "counter-clockwise in a hole");
}

#[test]
fn inside_a_square_corners_stay_sharp() {
    assert_one(&inside(&[square(0.0, 0.0, 10.0)], 2.0), 24.0, 36.0);
    assert_one(&inside(&[circle(0.0, 0.0, 5.0)], 2.0), 6.0 * PI, 9.0 * PI);
}

#[test]
fn what_is_too_small_vanishes_and_is_told() {
    let two = [square(0.0, 0.0, 10.0), square(20.0, 0.0, 3.0)];
    let lines = inside(&two, 2.0);
    assert_one(&lines, 24.0, 36.0);
    assert_eq!(lines.vanished, [1]);
    // Exactly the cutter's width: no room to spare is no room.
    assert_eq!(inside(&[square(0.0, 0.0, 4.0)], 2.0).vanished, [0]);
    assert_eq!(inside(&[circle(0.0, 0.0, 2.0)], 2.0).vanished, [0]);
}

#[test]
fn a_neck_splits_the_line_in_two() {
    // Two squares of 10 joined by a channel 3 wide: a cutter of 4 does not pass.
    let dumbbell = polygon(&[
        (0.0, 0.0),
        (10.0, 0.0),
        (10.0, 3.5),
        (20.0, 3.5),
        (20.0, 0.0),
        (30.0, 0.0),
        (30.0, 10.0),
        (20.0, 10.0),
        (20.0, 6.5),
        (10.0, 6.5),
        (10.0, 10.0),
        (0.0, 10.0),
    ]);
    // Each line: a square of 6 and a beak of less than 4 by 2 towards the channel.
    let lines = inside(std::slice::from_ref(&dumbbell), 2.0);
    let found = measures(&lines);
    assert_eq!(found.len(), 2);
    for (_, area) in &found {
        assert!(*area > 36.0 && *area < 36.0 + 4.0 * 2.0, "{area}");
    }
    assert_eq!(lines.lines[0].along, [0]);
    // A channel as wide as the cutter does not join them either; one a little wider does.
    assert_eq!(inside(std::slice::from_ref(&dumbbell), 1.5).lines.len(), 2);
    assert_eq!(inside(&[dumbbell], 1.499).lines.len(), 1);
}

#[test]
fn a_part_with_holes_and_an_island_is_one_region() {
    let part = [square(0.0, 0.0, 100.0), circle(50.0, 50.0, 30.0), square(40.0, 40.0, 20.0)];
    let found = measures(&outside(&part, 3.0));
    let areas: Vec<f64> = found.iter().map(|m| m.1).collect();
    assert_eq!(areas.len(), 3);
    assert_abs_diff_eq!(areas[0], 100.0 * 100.0 + 400.0 * 3.0 + 9.0 * PI, epsilon = 1e-7);
    assert_abs_diff_eq!(areas[1], 27.0 * 27.0 * PI, epsilon = 1e-7);
    assert_abs_diff_eq!(areas[2], 400.0 + 80.0 * 3.0 + 9.0 * PI, epsilon = 1e-7);
}

#[test]
fn parts_closer_than_the_cutter_share_one_line() {
    let near = outside(&[square(0.0, 0.0, 10.0), square(13.0, 0.0, 10.0)], 2.0);
    assert_eq!(near.lines.len(), 1);
    assert_eq!(near.lines[0].along, [0, 1]);
    assert_eq!(outside(&[square(0.0, 0.0, 10.0), square(15.0, 0.0, 10.0)], 2.0).lines.len(), 2);
    // Exactly as far apart as the cutter is wide: nothing passes between.
    assert_eq!(outside(&[square(0.0, 0.0, 10.0), square(14.0, 0.0, 10.0)], 2.0).lines.len(), 1);
}

#[test]
fn an_outline_that_crosses_itself_bounds_all_it_runs_round() {
    // A bow tie of two triangles that share the corner (5, 5): the line goes about both.
    let bow_tie = polygon(&[(0.0, 0.0), (10.0, 10.0), (10.0, 0.0), (0.0, 10.0)]);
    let lines = outside(std::slice::from_ref(&bow_tie), 1.0);
    assert_eq!(lines.contacts, [Point::new(5.0, 5.0)]);
    // Each waist is a right angle that the cutter touches at both sides, sqrt 2 from the crossing.
    let length = 2.0 * 10.0 + 4.0 * (50.0_f64.sqrt() - 1.0) + 4.0 * 3.0 * PI / 4.0;
    let [(found, _)] = measures(&lines)[..] else { panic!("one line expected: {lines:?}") };
    assert_abs_diff_eq!(found, length, epsilon = 1e-9);
    let triangles = measures(&inside(&[bow_tie], 1.0));
    assert_eq!(triangles.len(), 2);
    // A right isosceles triangle with legs sqrt 50 and inscribed radius r0, shrunk by 1: similar, by (r0 - 1) / r0.
    let r0 = 2.0 * 25.0 / (10.0 + 2.0 * 50.0_f64.sqrt());
    for (_, area) in triangles {
        assert_abs_diff_eq!(area, 25.0 * (1.0 - 1.0 / r0).powi(2), epsilon = 1e-9);
    }
    // Two squares that overlap: the square they share is in neither by even and odd.
    let overlapping = [square(0.0, 0.0, 10.0), square(6.0, 6.0, 10.0)];
    assert_eq!(inside(&overlapping, 0.5).lines.len(), 2);
    assert_eq!(outside(&overlapping, 0.5).lines.len(), 2, "about the two, and within what they share");
}

#[test]
fn an_outline_without_an_inside_is_refused() {
    let open = ArcSpline::polyline([(0.0, 0.0), (5.0, 0.0), (5.0, 5.0)].map(Point::from), false);
    let error =
        compensate(&[open], 1.0, Side::Inside, Corners::Round).expect_err("an open chain has no inside");
    assert!(error.to_string().contains("is open"), "{error}");
    assert!(compensate(&[square(0.0, 0.0, 1.0)], f64::NAN, Side::Inside, Corners::Round).is_err());
}

#[test]
fn sharp_corners_run_straight_past() {
    let sharp = |loops: &[ArcSpline], radius| {
        compensate(loops, radius, Side::Outside, Corners::Sharp).expect("there is a line outside")
    };
    let lines = sharp(&[square(0.0, 0.0, 10.0)], 2.0);
    assert_one(&lines, 56.0, 196.0);
    assert_eq!(lines.lines[0].path.len(), 4, "each side is one line");
    // Sharper than a right angle: round. A triangle of 3, 4, 5 has one right angle only, and two arcs stay.
    let lines = sharp(&[polygon(&[(0.0, 0.0), (4.0, 0.0), (0.0, 3.0)])], 1.0);
    assert_eq!(lines.lines[0].path.spans().filter(|s| !s.is_line()).count(), 2);
    assert_one(&lines, 12.0 + TAU + 2.0 - PI / 2.0, 6.0 + 12.0 + PI + 1.0 - PI / 4.0);
    // A wall stands where the corner's point would be: that corner stays round.
    let walled = [square(0.0, 0.0, 10.0), square(13.9, 11.9, 10.0)];
    let arcs = |l: &CentreLine| l.path.spans().filter(|s| !s.is_line()).count();
    assert_eq!(sharp(&walled, 2.0).lines.iter().map(arcs).collect::<Vec<_>>(), [1, 1]);
}

#[test]
fn inside_corners_are_listed_with_what_stays() {
    let shape = [square(0.0, 0.0, 10.0)];
    let found = uncut(&shape, &inside(&shape, 2.0), 2.0, 0.01);
    assert_eq!(found.len(), 4);
    for corner in found {
        // A cutter of radius 2 misses the corner by 2 (sqrt 2 - 1), and leaves the sides 2 mm before it, less the
        // tolerance: where 2 - sqrt(4 - s^2) = 0.01.
        assert_abs_diff_eq!(corner.gap_mm, 2.0 * (2.0_f64.sqrt() - 1.0), epsilon = 1e-9);
        let side = 2.0 - (2.01_f64 * 2.01 - 4.0).sqrt();
        assert_abs_diff_eq!(corner.length_mm, 2.0 * side, epsilon = 0.04);
        assert!(corner.at.x % 10.0 == 0.0 && corner.at.y % 10.0 == 0.0, "at the corner itself");
    }
    assert!(uncut(&shape, &outside(&shape, 2.0), 2.0, 0.01).is_empty(), "outside nothing stays");
    let small = [square(0.0, 0.0, 3.0)];
    let found = uncut(&small, &inside(&small, 2.0), 2.0, 0.01);
    assert_eq!(found.len(), 1);
    assert!(found[0].gap_mm.is_infinite(), "nothing of it is cut");
}

proptest! {
    #[test]
    fn random_convex_shapes_follow_steiner(
        angles in prop::collection::vec(0.0..TAU, 3..30), radius in 0.01..30.0_f64,
    ) {
        // Points of an ellipse in order of angle are a convex polygon.
        let mut angles = angles;
        angles.sort_by(f64::total_cmp);
        angles.dedup_by(|a, b| (*a - *b).abs() < 1e-3);
        prop_assume!(angles.len() > 2);
        let points = angles.iter().map(|&t| Point::ORIGIN + Vec2::new(20.0 * t.cos(), 12.0 * t.sin()));
        let shape = ArcSpline::polyline(points, true);
        let (length, area) = (shape.length(), shape.area());
        let found = measures(&outside(&[shape], radius));
        prop_assert_eq!(found.len(), 1);
        prop_assert!((found[0].0 - length - TAU * radius).abs() < 1e-6);
        let expected = area + length * radius + PI * radius * radius;
        prop_assert!((found[0].1 - expected).abs() < 1e-7 * expected);
    }
}
