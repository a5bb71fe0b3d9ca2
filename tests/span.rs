//! One span: exact places, also where an arc is nearly straight.

use kurbo::{Point, Vec2};
use ribband::geom::{ArcSpline, Span, frechet};

/// Bulges from a half turn down to what rounding leaves of a line.
const BULGES: [f64; 8] = [1.0, 0.3, 1e-3, 1e-6, 1e-9, 1e-13, 1e-17, 1e-300];

#[test]
fn the_nearest_place_is_the_one_the_point_was_set_off_from() {
    for bulge in BULGES.into_iter().flat_map(|b| [b, -b]) {
        let span = Span::arc(Point::new(10.0, -4.0), Point::new(190.0, 31.0), bulge);
        for (t, off) in [(0.0, 0.3), (0.25, -0.2), (0.5, 0.7), (0.9, 0.1), (1.0, -0.4)] {
            let tangent = span.tangent(t);
            let p = span.at(t) + Vec2::new(-tangent.y, tangent.x) * off;
            let nearest = span.nearest(p);
            assert!((nearest.t - t).abs() < 1e-9, "bulge {bulge}: {} for {t}", nearest.t);
            assert!((nearest.distance - f64::abs(off)).abs() < 1e-9, "bulge {bulge}: {}", nearest.distance);
        }
    }
}

#[test]
fn a_point_beyond_an_end_is_nearest_to_that_end() {
    for bulge in BULGES {
        let span = Span::arc(Point::new(0.0, 0.0), Point::new(20.0, 0.0), bulge);
        assert_eq!(span.nearest(Point::new(-3.0, 0.5)).at, span.start, "bulge {bulge}");
        assert_eq!(span.nearest(Point::new(23.0, 0.5)).at, span.end, "bulge {bulge}");
    }
}

#[test]
fn places_beside_nearly_straight_arcs_are_on_their_side() {
    // A square of 40 whose sides bulge out, or in, by 20 times the bulge.
    let corners = [(0.0, 0.0), (40.0, 0.0), (40.0, 40.0), (0.0, 40.0)].map(Point::from);
    for bulge in BULGES.into_iter().filter(|&b| b < 0.5).flat_map(|b| [b, -b]) {
        let mut square = ArcSpline::polyline(corners, true);
        square.vertices.iter_mut().for_each(|v| v.bulge = bulge);
        let sagitta = 20.0 * bulge;
        for off in [1e-9, 1e-3, 1.0, 4.0] {
            for (p, within) in
                [(Point::new(40.0 + sagitta - off, 20.0), 1), (Point::new(40.0 + sagitta + off, 20.0), 0)]
            {
                assert_eq!(square.winding(p), within, "bulge {bulge}, {off} mm off");
                let crossed = square.spans().filter(|span| span.crosses_level_ray(p)).count();
                assert_eq!(crossed % 2, within as usize, "bulge {bulge}, {off} mm off, by a ray");
            }
        }
    }
}

#[test]
fn boxes_and_areas_of_arcs_tend_to_those_of_the_line() {
    for bulge in BULGES {
        let span = Span::arc(Point::new(0.0, 0.0), Point::new(20.0, 0.0), bulge);
        assert!((span.bbox().y0 + 10.0 * bulge).abs() < 1e-12, "bulge {bulge}: {:?}", span.bbox());
        // The parabola's two thirds of chord and sagitta for a flat arc; the half disc for a half turn.
        let flat = 20.0 * 10.0 * bulge * 2.0 / 3.0;
        let area = ArcSpline::from_spans(&[span, Span::line(span.end, span.start)], true).area();
        let expected = if bulge > 0.9 { 50.0 * std::f64::consts::PI } else { flat };
        let share = if bulge > 0.1 { 0.05 } else { 1e-5 };
        assert!((area / expected - 1.0).abs() < share, "bulge {bulge}: {area} for {expected}");
    }
}

#[test]
fn a_box_holds_every_place_of_the_arc_and_touches_it() {
    for k in 0..60 {
        let start = Point::new(3.0, 1.0) + Vec2::from_angle(f64::from(k) * 0.37) * 5.0;
        let span = Span::arc(start, Point::new(3.0, 1.0), 0.05 * f64::from(k + 1) - 1.52);
        let bbox = span.bbox();
        let places = (0..=2000).map(|i| span.at(f64::from(i) / 2000.0));
        let (mut low, mut high) = (f64::INFINITY, f64::NEG_INFINITY);
        for p in places {
            assert!(bbox.inflate(1e-9, 1e-9).contains(p), "{p:?} outside {bbox:?}");
            (low, high) = (low.min(p.x), high.max(p.x));
        }
        assert!((low - bbox.x0).abs() < 1e-4 && (high - bbox.x1).abs() < 1e-4, "{bbox:?} is too wide");
    }
}

/// Sagitta R - sqrt(R2 - c2/4) of a chord c: the versed sine that handbooks of machining table (closed form, computed
/// apart from this project with independent libraries).
#[test]
fn sagittas_are_those_of_the_chord_table() {
    for (radius, chord, sagitta) in [
        (10.0, 1.0, 0.012507822),
        (10.0, 5.0, 0.317541634),
        (25.0, 1.0, 0.005000500),
        (100.0, 5.0, 0.031254884),
    ] {
        let half = f64::asin(chord / (2.0 * radius));
        let span = Span::arc(Point::new(2.0, 3.0), Point::new(2.0 + chord, 3.0), (half / 2.0).tan());
        assert!((span.sagitta() - sagitta).abs() < 5e-10, "R {radius} c {chord}: {}", span.sagitta());
        assert!((span.radius() - radius).abs() < 1e-9 * radius, "R {radius} c {chord}: {}", span.radius());
    }
}

/// How many chords a circle takes at a chord error, N = ceil(pi / acos(1 - e/R)): rows of the same table.
#[test]
fn circles_take_as_many_chords_as_the_table_says() {
    let rows = [
        (1.0, [(0.001, 71), (0.01, 23), (0.1, 7)]),
        (10.0, [(0.001, 223), (0.01, 71), (0.1, 23)]),
        (25.0, [(0.005, 158), (0.02, 79), (0.1, 36)]),
        (100.0, [(0.001, 703), (0.02, 158), (0.1, 71)]),
    ];
    for (radius, columns) in rows {
        let at = |k: usize, n: usize| {
            (Vec2::from_angle(std::f64::consts::TAU * k as f64 / n as f64) * radius).to_point()
        };
        let circle = ArcSpline::from_spans(
            &[Span::arc(at(0, 2), at(1, 2), 1.0), Span::arc(at(1, 2), at(0, 2), 1.0)],
            true,
        );
        let error = |n: usize| frechet(&ArcSpline::polyline((0..n).map(|k| at(k, n)), true), &circle).mm;
        for (e, n) in columns {
            assert!(error(n) <= 1.03 * e, "R {radius} e {e}: {n} chords err by {}", error(n));
            assert!(error(n - 1) > e, "R {radius} e {e}: {} chords err by {}", n - 1, error(n - 1));
        }
    }
}
