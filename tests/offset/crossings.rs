//! Where two spans meet: closed forms, and a comparison with fine sampling.

use approx::assert_abs_diff_eq;
use kurbo::{Point, Vec2};
use proptest::prelude::*;
use ribband::geom::{Span, crossings};

const TOUCH: f64 = 1e-7;

fn line(x0: f64, y0: f64, x1: f64, y1: f64) -> Span {
    Span::line(Point::new(x0, y0), Point::new(x1, y1))
}

/// The arc about the origin from one angle to another, in degrees.
fn arc(radius: f64, from: f64, to: f64) -> Span {
    let at = |degrees: f64| Point::ORIGIN + Vec2::from_angle(degrees.to_radians()) * radius;
    Span::arc(at(from), at(to), ((to - from).to_radians() / 4.0).tan())
}

/// The places where two spans meet, from left to right.
fn places(a: &Span, b: &Span) -> Vec<(f64, f64)> {
    let mut at: Vec<(f64, f64)> = crossings(a, b, TOUCH).iter().map(|c| (c.at.x, c.at.y)).collect();
    at.sort_by(|p, q| p.partial_cmp(q).expect("places are numbers"));
    at
}

#[test]
fn spans_meet_where_geometry_says() {
    type Row = (&'static str, Span, Span, &'static [(f64, f64)]);
    let rows: [Row; 14] = [
        ("crossing lines", line(0.0, 0.0, 4.0, 4.0), line(0.0, 4.0, 4.0, 0.0), &[(2.0, 2.0)]),
        ("lines apart", line(0.0, 0.0, 1.0, 1.0), line(0.0, 4.0, 4.0, 0.0), &[]),
        ("parallel lines", line(0.0, 0.0, 4.0, 0.0), line(0.0, 1.0, 4.0, 1.0), &[]),
        (
            "lines that share a part",
            line(0.0, 0.0, 4.0, 0.0),
            line(3.0, 0.0, 1.0, 0.0),
            &[(1.0, 0.0), (3.0, 0.0)],
        ),
        ("a chain of lines", line(0.0, 0.0, 4.0, 0.0), line(4.0, 0.0, 5.0, 0.0), &[(4.0, 0.0)]),
        ("a tee", line(0.0, 0.0, 4.0, 0.0), line(1.0, 0.0, 1.0, 3.0), &[(1.0, 0.0)]),
        ("a chord", arc(5.0, 0.0, 180.0), line(-9.0, 3.0, 9.0, 3.0), &[(-4.0, 3.0), (4.0, 3.0)]),
        ("half a chord", arc(5.0, 0.0, 90.0), line(-9.0, 3.0, 9.0, 3.0), &[(4.0, 3.0)]),
        ("a tangent", arc(5.0, 0.0, 180.0), line(-9.0, 5.0, 9.0, 5.0), &[(0.0, 5.0)]),
        ("a line past an arc", arc(5.0, 0.0, 180.0), line(-9.0, 6.0, 9.0, 6.0), &[]),
        ("a fillet", arc(5.0, -90.0, 0.0), line(5.0, 0.0, 5.0, 9.0), &[(5.0, 0.0)]),
        ("arcs that share a part", arc(5.0, 0.0, 90.0), arc(5.0, 180.0, 0.0), &[(0.0, 5.0), (5.0, 0.0)]),
        ("concentric arcs", arc(5.0, 0.0, 90.0), arc(4.0, 0.0, 90.0), &[]),
        (
            "more than a half turn",
            arc(5.0, -100.0, 190.0),
            line(-9.0, 0.0, 9.0, 0.0),
            &[(-5.0, 0.0), (5.0, 0.0)],
        ),
    ];
    for (name, a, b, expected) in rows {
        for (a, b) in [(a, b), (b, a), (a.reversed(), b), (b, a.reversed())] {
            let found = places(&a, &b);
            assert_eq!(found.len(), expected.len(), "{name}: {found:?}");
            for (&(x, y), &(ex, ey)) in found.iter().zip(expected) {
                assert_abs_diff_eq!(x, ex, epsilon = 1e-7);
                assert_abs_diff_eq!(y, ey, epsilon = 1e-7);
            }
        }
    }
}

#[test]
fn circles_meet_on_their_common_chord() {
    let unit = arc(5.0, -170.0, 170.0);
    let shift = kurbo::Affine::translate((6.0, 0.0));
    let found = crossings(&unit, &unit.transformed(shift * kurbo::Affine::rotate(3.0)), TOUCH);
    assert_eq!(found.len(), 2, "{found:?}");
    for c in found {
        assert_abs_diff_eq!(c.at.x, 3.0, epsilon = 1e-12);
        assert_abs_diff_eq!(c.at.y.abs(), 4.0, epsilon = 1e-12);
    }
}

#[test]
fn nearly_straight_arcs_cross_as_exactly_as_lines() {
    for exponent in 2..14 {
        let bulge = 10.0_f64.powi(-exponent);
        let flat = Span::arc(Point::ORIGIN, Point::new(20.0, 0.0), bulge);
        let found = crossings(&flat, &line(10.0, -5.0, 10.0, 5.0), TOUCH);
        assert_eq!(found.len(), 1, "bulge {bulge}");
        assert_abs_diff_eq!(found[0].at.y, -bulge * 10.0, epsilon = 1e-12);
    }
}

fn any_span() -> impl Strategy<Value = Span> {
    let point = || (0.0..20.0_f64, 0.0..20.0_f64).prop_map(Point::from);
    (point(), point(), prop_oneof![Just(0.0), -1.0..1.0_f64, -1e-6..1e-6_f64])
        .prop_map(|(start, end, bulge)| Span::arc(start, end, bulge))
}

proptest! {
    /// Between two crossings with a line, a span stays on one side of it: no sampled change of side may lack
    /// its crossing.
    #[test]
    fn no_crossing_is_missed(a in any_span(), b in any_span()) {
        let found = crossings(&a, &b, TOUCH);
        for c in &found {
            prop_assert!(a.at(c.t).distance(c.at) < 2.0 * TOUCH && b.at(c.u).distance(c.at) < 2.0 * TOUCH);
        }
        let chord = Span::line(b.start, b.end);
        let on_line = crossings(&a, &chord, TOUCH);
        let side = |t: f64| chord.chord().cross(a.at(t) - chord.start);
        for k in 0..400 {
            let (t0, t1) = (f64::from(k) / 400.0, f64::from(k + 1) / 400.0);
            let crosses = side(t0) * side(t1) < 0.0;
            let at = a.at((t0 + t1) / 2.0);
            let inside = chord.nearest(at).t > 0.05 && chord.nearest(at).t < 0.95;
            if crosses && inside {
                let known = on_line.iter().any(|c| c.t >= t0 - 1e-9 && c.t <= t1 + 1e-9);
                prop_assert!(known, "a crossing near {at:?} is missed");
            }
        }
    }
}
