//! Path grammar and elliptical arcs: the corner cases of SVG 2, "The grammar for path data", and its implementation
//! notes on arcs.

use std::f64::consts::PI;

use approx::assert_abs_diff_eq;
use kurbo::Point;

use super::{circles, contours, corners, length, only};

fn path(d: &str) -> String {
    format!("<path d=\"{d}\"/>")
}

#[test]
fn every_command_of_straight_lines() {
    let rows: [(&str, &[(f64, f64)]); 21] = [
        ("M10 20L30 40", &[(10.0, 20.0), (30.0, 40.0)]),
        ("m10 20l30 40", &[(10.0, 20.0), (40.0, 60.0)]),
        ("M10 20 30 40 50 60", &[(10.0, 20.0), (30.0, 40.0), (50.0, 60.0)]),
        ("m10 20 30 40 50 60", &[(10.0, 20.0), (40.0, 60.0), (90.0, 120.0)]),
        ("M0 0H10V10", &[(0.0, 0.0), (10.0, 0.0), (10.0, 10.0)]),
        ("M5 5h10 10v10 10", &[(5.0, 5.0), (15.0, 5.0), (25.0, 5.0), (25.0, 15.0), (25.0, 25.0)]),
        ("M 0.6.5 1 1", &[(0.6, 0.5), (1.0, 1.0)]),
        ("M 100-200 1 1", &[(100.0, -200.0), (1.0, 1.0)]),
        ("M1e1 2E+1L3e-1,.4e2", &[(10.0, 20.0), (0.3, 40.0)]),
        ("M+1,+2-3-4", &[(1.0, 2.0), (-3.0, -4.0)]),
        ("M 23. 1. 5.5 5.5", &[(23.0, 1.0), (5.5, 5.5)]),
        ("\tM\n1\t2\nL\r\n3 4 ", &[(1.0, 2.0), (3.0, 4.0)]),
        ("M1,2,3,4", &[(1.0, 2.0), (3.0, 4.0)]),
        ("M1 , 2 , 3 , 4", &[(1.0, 2.0), (3.0, 4.0)]),
        ("M0 0L1 0 1 1", &[(0.0, 0.0), (1.0, 0.0), (1.0, 1.0)]),
        ("M0 0 1 0Z", &[(0.0, 0.0), (1.0, 0.0)]),
        ("M0 0A0 5 0 0 1 10 0", &[(0.0, 0.0), (10.0, 0.0)]),
        ("M0 0A5 0 0 0 1 10 0", &[(0.0, 0.0), (10.0, 0.0)]),
        ("M0 0A5 5 0 0 1 0 0L1 1", &[(0.0, 0.0), (1.0, 1.0)]),
        ("M0 0C0 0 10 0 10 0", &[(0.0, 0.0), (10.0, 0.0)]),
        ("M0 0Q5 0 10 0", &[(0.0, 0.0), (10.0, 0.0)]),
    ];
    for (d, wanted) in rows {
        let found = only(&path(d));
        assert_eq!(found.len(), wanted.len(), "{d}: {found:?}");
        for (f, w) in found.iter().zip(wanted) {
            assert_abs_diff_eq!(f.0, w.0, epsilon = 1e-6);
            assert_abs_diff_eq!(f.1, w.1, epsilon = 1e-6);
        }
    }
}

#[test]
fn a_closed_subpath_goes_on_from_its_start() {
    let found = contours(&path("M10 10h5v5zl1 1"));
    assert_eq!(found.len(), 2);
    assert!(found[0].closed && !found[1].closed, "only the first is closed");
    assert_eq!(corners(&found[0]), [(10.0, 10.0), (15.0, 10.0), (15.0, 15.0)]);
    assert_eq!(corners(&found[1]), [(10.0, 10.0), (11.0, 11.0)]);

    let moved = contours(&path("m10 10h5v5zm20 0h1"));
    assert_eq!(corners(&moved[1]), [(30.0, 10.0), (31.0, 10.0)]);
}

#[test]
fn returning_to_the_start_does_not_close() {
    let found = contours(&path("M0 0h5v5L0 0"));
    assert!(!found[0].closed, "only Z closes");
    let closed = contours(&path("M0 0h5v5L0 0Z"));
    assert!(closed[0].closed && closed[0].vertices.len() == 3, "the repeated start is not kept");
}

#[test]
fn smooth_commands_reflect_only_after_their_own_kind() {
    // Lengths by the explicit commands they stand for.
    let rows = [
        ("M0 0C0 10 10 10 10 0S20-10 20 0", "M0 0C0 10 10 10 10 0C10-10 20-10 20 0"),
        ("M0 0c0 10 10 10 10 0s10-10 10 0", "M0 0C0 10 10 10 10 0C10-10 20-10 20 0"),
        (
            "M0 0C0 10 10 10 10 0s10-10 10 0 10 10 10 0",
            "M0 0C0 10 10 10 10 0C10-10 20-10 20 0C20 10 30 10 30 0",
        ),
        ("M0 0L10 0S20-10 20 0", "M0 0L10 0C10 0 20-10 20 0"),
        ("M0 0Q5 10 10 0T20 0", "M0 0Q5 10 10 0Q15-10 20 0"),
        ("M0 0Q5 10 10 0T20 0T30 0", "M0 0Q5 10 10 0Q15-10 20 0Q25 10 30 0"),
        ("M0 0L10 0T20 5", "M0 0L10 0L20 5"),
        ("M0 0C0 10 10 10 10 0T20 5", "M0 0C0 10 10 10 10 0L20 5"),
        ("M0 0Q5 10 10 0S20-10 20 0", "M0 0Q5 10 10 0C10 0 20-10 20 0"),
        ("M0 0C0 10 10 10 10 0L20 0S30-10 30 0", "M0 0C0 10 10 10 10 0L20 0C20 0 30-10 30 0"),
    ];
    for (short, long) in rows {
        let (short_path, long_path) = (contours(&path(short)), contours(&path(long)));
        assert_eq!(short_path.len(), 1, "{short}");
        let ends = |c: &[ribband::geom::ArcSpline]| *corners(&c[0]).last().expect("a vertex");
        assert_eq!(ends(&short_path), ends(&long_path), "{short}");
        assert_abs_diff_eq!(length(&path(short)), length(&path(long)), epsilon = 1e-6);
    }
}

#[test]
fn packed_flags_are_single_characters() {
    for d in ["M0 0A5 5 0 0110 0", "M0 0A5 5 0 0 1 10 0", "M0 0A5,5,0,0,1,10,0", "M0 0a5 5 0 01 10 0"] {
        assert_half_circle(d);
    }
}

/// From (0,0) to (10,0) about (5,0): length 15.707963268.
fn assert_half_circle(d: &str) {
    let arc = &contours(&path(d))[0];
    let [(centre, radius)] = circles(arc)[..] else { panic!("{d} is not one arc: {arc:?}") };
    assert!(centre.distance(Point::new(5.0, 0.0)) < 1e-9 && (radius - 5.0).abs() < 1e-9, "{d}: {centre:?}");
    assert_abs_diff_eq!(arc.length(), 5.0 * PI, epsilon = 1e-9);
}

/// Worked figures: radii enlarged to reach, and the four arcs of the standard's own figure.
#[test]
fn arcs_as_the_implementation_notes_work_them() {
    for d in ["M0 0A1 1 0 0 1 10 0", "M0 0A-5 5 0 0 1 10 0", "M0 0A5 -5 0 0 1 10 0"] {
        assert_half_circle(d);
    }

    // Ellipses are sampled: chords are shorter than the arc by about 8/3 (0.0005 / chord)^2 of it.
    let rows =
        [("0,0", 121.105602757), ("0,1", 121.105602757), ("1,0", 363.316808271), ("1,1", 363.316808271)];
    for (flags, wanted) in rows {
        let found = length(&path(&format!("M125,75 a100,50 0 {flags} 100,50")));
        assert_abs_diff_eq!(found, wanted, epsilon = 2e-3);
    }
}

#[test]
fn the_centre_side_follows_the_flags() {
    // Boxes of the four arcs of the standard's figure, from their centres (225,75) and (125,125), semi-axes 100, 50.
    let rows = [
        ("0,0", [125.0, 75.0, 225.0, 125.0]),
        ("0,1", [125.0, 75.0, 225.0, 125.0]),
        ("1,0", [25.0, 75.0, 225.0, 175.0]),
        ("1,1", [125.0, 25.0, 325.0, 125.0]),
    ];
    for (flags, [x0, y0, x1, y1]) in rows {
        let path = &contours(&path(&format!("M125,75 a100,50 0 {flags} 100,50")))[0];
        let found = path.bbox().expect("a box");
        for (found, wanted) in [(found.x0, x0), (-found.y1, y0), (found.x1, x1), (-found.y0, y1)] {
            assert_abs_diff_eq!(found, wanted, epsilon = 1e-3);
        }
    }
}

#[test]
fn sweep_1_turns_clockwise_on_the_page() {
    // In a drawing with y up, growing angles of a page with y down run clockwise: a negative bulge.
    let sweep = |d: &str| contours(&path(d))[0].vertices[0].bulge.signum();
    assert_eq!(sweep("M0 0A5 5 0 0 1 10 0"), -1.0);
    assert_eq!(sweep("M0 0A5 5 0 0 0 10 0"), 1.0);
    let mirrored = contours("<path transform='scale(-1 1)' d='M0 0A5 5 0 0 1 10 0'/>");
    assert_eq!(mirrored[0].vertices[0].bulge.signum(), 1.0);
}

#[test]
fn a_circles_arc_ends_exactly_where_it_is_written() {
    let path = &contours(&path("M0.125 0.25A7 7 0 1 1 3.5 0.75L9 9"))[0];
    let ends = [path.vertices.first(), path.vertices.last()].map(|v| v.expect("a vertex").at);
    assert_eq!(ends, [Point::new(0.125, -0.25), Point::new(9.0, -9.0)]);
    let n = path.vertices.len();
    assert_eq!(path.vertices[n - 2].at, Point::new(3.5, -0.75));
    assert!(path.vertices.iter().all(|v| v.bulge.abs() <= 1.0), "no span is more than half a turn");
}

#[test]
fn path_data_may_stand_in_a_style() {
    assert_eq!(only("<path style='d: path(\"M1 2L3 4\")'/>"), [(1.0, 2.0), (3.0, 4.0)]);
}

proptest::proptest! {
    /// Arcs through their ends, on an ellipse of the radii asked for (or enlarged), whatever the numbers.
    #[test]
    fn arcs_run_from_end_to_end(
        x in -50.0..50.0_f64, y in -50.0..50.0_f64, rx in 0.1..80.0_f64, ry in 0.1..80.0_f64,
        turn in 0.0..360.0_f64, large: bool, sweep: bool,
    ) {
        let flags = format!("{} {}", u8::from(large), u8::from(sweep));
        let arc = contours(&path(&format!("M0 0A{rx} {ry} {turn} {flags} {x} {y}")));
        let ends = corners(&arc[0]);
        let last = ends[ends.len() - 1];
        proptest::prop_assert!(ends[0] == (0.0, 0.0), "starts at {:?}", ends[0]);
        proptest::prop_assert!((last.0 - x).abs() < 2e-6 && (last.1 - y).abs() < 2e-6, "ends at {last:?}");
        // Every point is on one ellipse: in its frame, all are equally far from one centre. Taken here from three.
        let (sin, cos) = turn.to_radians().sin_cos();
        let lambda = {
            let (hx, hy) = (-x / 2.0, -y / 2.0);
            ((cos * hx + sin * hy) / rx).hypot((cos * hy - sin * hx) / ry).max(1.0)
        };
        let unit = |p: &(f64, f64)| Point::new(
            (cos * p.0 + sin * p.1) / (rx * lambda),
            (cos * p.1 - sin * p.0) / (ry * lambda),
        );
        if arc[0].vertices.len() > 4 && arc[0].vertices.iter().all(|v| v.bulge == 0.0) {
            let found: Vec<Point> = ends.iter().map(unit).collect();
            let (a, b, c) = (found[0], found[found.len() / 2], found[found.len() - 1]);
            let circle = circle_through(a, b, c);
            // A short arc does not fix its circle: judge only one of some width.
            if (b - a).cross(c - a).abs() > 1e-2 {
                proptest::prop_assert!((circle.1 - 1.0).abs() < 1e-3, "unit radius is {}", circle.1);
            }
        }
    }
}

fn circle_through(a: Point, b: Point, c: Point) -> (Point, f64) {
    let (u, v) = (b - a, c - a);
    let d = 2.0 * u.cross(v);
    let offset =
        kurbo::Vec2::new(v.y * u.hypot2() - u.y * v.hypot2(), u.x * v.hypot2() - v.x * u.hypot2()) / d;
    (a + offset, offset.hypot())
}
