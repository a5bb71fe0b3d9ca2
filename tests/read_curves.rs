//! Free curves and ellipses to lines and arcs: the bound that is kept, and the exact cases.

use std::f64::consts::TAU;

use kurbo::{Affine, CubicBez, ParamCurve, ParamCurveNearest, Point, QuadBez, Vec2};
use ribband::geom::{ArcSpline, Span};
use ribband::read::{Chain, Curve, Drawing, Element, EllipseArc, Nurbs, Scale, Unit, to_sketch};
use ribband::sketch::{Place, Sketch};

fn sketch(chain: Chain) -> Sketch {
    let element = Element { chain, layer: String::new(), colour: String::new(), place: Place::default() };
    let drawing = Drawing { elements: vec![element], ..Drawing::default() };
    let mm = Scale { drawing_unit: Some(Unit::Mm), ..Scale::default() };
    to_sketch(drawing, &mm).expect("a good drawing")
}

fn sampled(curve: Curve) -> (ArcSpline, f64) {
    let mut sketch = sketch(Chain::of(curve, false));
    (sketch.contours.remove(0).path, sketch.sampling_mm)
}

/// The largest distance from points of the curve, in order, to the polyline.
fn farthest(path: &ArcSpline, curve: impl Fn(f64) -> Point) -> f64 {
    let spans: Vec<Span> = path.spans().collect();
    (0..=2000)
        .map(|i| curve(f64::from(i) / 2000.0))
        .map(|p| spans.iter().map(|s| s.nearest(p).distance).fold(f64::INFINITY, f64::min))
        .fold(0.0, f64::max)
}

/// One unit of the grid that coordinates snap to moves a point by at most its half diagonal.
const SNAP: f64 = 0.75 / (1 << 20) as f64;

proptest::proptest! {
    #![proptest_config(proptest::prelude::ProptestConfig::with_cases(64))]

    /// Cubics of every shape, loops, cusps and repeated control points among them.
    #[test]
    fn cubics_keep_their_bound(c in proptest::array::uniform8(-4..=4_i8), size in 0.1..30.0_f64) {
        let at = |i: usize| Point::new(f64::from(c[i]) * size, f64::from(c[i + 1]) * size);
        let cubic = CubicBez::new(at(0), at(2), at(4), at(6));
        proptest::prop_assume!(c[0..2] != c[2..4] || c[2..4] != c[4..6] || c[4..6] != c[6..8]);
        let (path, error_mm) = sampled(Curve::Cubic(cubic));
        proptest::prop_assert!(error_mm <= 0.0005, "sampled to {error_mm}");
        let far = farthest(&path, |t| cubic.eval(t));
        proptest::prop_assert!(far <= error_mm + SNAP, "{far} beyond {error_mm}");
        for v in &path.vertices {
            let off = cubic.nearest(v.at, 1e-9).distance_sq.sqrt();
            proptest::prop_assert!(off <= 1e-5, "a vertex is {off} off the curve");
        }
    }

    /// Turned and skewed ellipse pieces.
    #[test]
    fn ellipses_keep_their_bound(
        ux in -50.0..50.0_f64, uy in -50.0..50.0_f64, vx in -50.0..50.0_f64, vy in -50.0..50.0_f64,
        start in -7.0..7.0_f64, sweep in 0.01..6.3_f64, backwards: bool,
    ) {
        let sweep = if backwards { -sweep } else { sweep };
        let centre = Point::new(3.0, -4.0);
        let arc = EllipseArc { centre, u: Vec2::new(ux, uy), v: Vec2::new(vx, vy), start, sweep };
        let (path, error_mm) = sampled(Curve::Ellipse(arc));
        proptest::prop_assert!(error_mm <= 0.0005, "sampled to {error_mm}");
        let far = farthest(&path, |t| arc.at(start + t * sweep));
        proptest::prop_assert!(far <= error_mm + SNAP, "{far} beyond {error_mm}");
    }

    /// The box of a curve holds its points and touches them.
    #[test]
    fn ellipse_boxes_are_tight(
        ux in -5.0..5.0_f64, uy in -5.0..5.0_f64, vx in -5.0..5.0_f64, vy in -5.0..5.0_f64,
        start in -7.0..7.0_f64, sweep in -6.3..6.3_f64,
    ) {
        let arc = EllipseArc { centre: Point::ORIGIN, u: Vec2::new(ux, uy), v: Vec2::new(vx, vy), start, sweep };
        let found = Curve::Ellipse(arc).bbox().expect("a box");
        let points = (0..=4000).map(|i| arc.at(start + sweep * f64::from(i) / 4000.0));
        let dense = points.map(|p| kurbo::Rect::from_points(p, p)).reduce(|a, b| a.union(b)).expect("points");
        for (f, d) in [(found.x0, dense.x0), (found.y0, dense.y0), (found.x1, dense.x1), (found.y1, dense.y1)] {
            proptest::prop_assert!((f - d).abs() < 1e-4, "{found:?} against {dense:?}");
        }
    }
}

#[test]
fn a_curve_that_is_a_line_takes_one_chord() {
    let p = |x: f64| Point::new(x, 2.0 * x);
    let (path, error_mm) = sampled(Curve::Cubic(CubicBez::new(p(0.0), p(1.0), p(7.0), p(9.0))));
    assert_eq!((path.len(), error_mm > 1e-12), (1, false));
    // Out beyond its end and back: not one chord.
    let (path, _) = sampled(Curve::Quad(QuadBez::new(p(0.0), p(9.0), p(1.0))));
    let reach = path.vertices.iter().map(|v| v.at.x).fold(0.0, f64::max);
    assert!((reach - 81.0 / 17.0).abs() < 0.001, "the turning point is {reach}, not 81/17");
}

/// The nine-point rational circle (Piegl and Tiller, The NURBS Book, 7.5): every point is on the circle.
#[test]
fn a_rational_circle_is_round() {
    let corner = std::f64::consts::FRAC_1_SQRT_2;
    let points = [(1, 0), (1, 1), (0, 1), (-1, 1), (-1, 0), (-1, -1), (0, -1), (1, -1), (1, 0)];
    let points = points.map(|(x, y)| Point::new(f64::from(x) * 20.0, f64::from(y) * 20.0)).to_vec();
    let weights = [1.0, corner, 1.0, corner, 1.0, corner, 1.0, corner, 1.0].map(|w| 3.0 * w).to_vec();
    let knots = [0, 0, 0, 1, 1, 2, 2, 3, 3, 4, 4, 4].map(f64::from).to_vec();
    let circle = Nurbs::new(2, knots, points, weights).expect("a good spline");
    let (path, error_mm) = sampled(Curve::Nurbs(circle));
    assert!(error_mm <= 0.0005, "sampled to {error_mm}");
    for v in &path.vertices {
        assert!((v.at.to_vec2().hypot() - 20.0).abs() < 2e-6, "{:?} is off the circle", v.at);
    }
    assert!((path.length() - TAU * 20.0).abs() < 0.01, "length {}", path.length());
}

/// One B-spline of no clamped knots against de Boor's recursion written out, and a clamped one against its Bezier form.
#[test]
fn splines_of_any_knots() {
    let points: Vec<Point> =
        [(0.0, 0.0), (10.0, 20.0), (30.0, 25.0), (40.0, -5.0), (60.0, 0.0), (70.0, 15.0)]
            .map(|(x, y)| Point::new(x, y))
            .to_vec();
    let knots: Vec<f64> = [0.0, 1.0, 2.5, 3.0, 4.0, 4.0, 5.5, 6.0, 7.0, 9.0].to_vec();
    let free = Nurbs::new(3, knots.clone(), points.clone(), Vec::new()).expect("a good spline");
    let (path, error_mm) = sampled(Curve::Nurbs(free));
    assert!(error_mm <= 0.0005, "sampled to {error_mm}");
    let (from, to) = (knots[3], knots[6]);
    let far = farthest(&path, |t| basis_sum(&knots, &points, 3, (from + t * (to - from)).min(to - 1e-12)));
    assert!(far <= error_mm + SNAP, "{far} beyond {error_mm}");

    let bezier = [0.0, 0.0, 0.0, 0.0, 2.0, 2.0, 2.0, 2.0].to_vec();
    let clamped = Nurbs::new(3, bezier, points[..4].to_vec(), Vec::new()).expect("a good spline");
    let cubic = CubicBez::new(points[0], points[1], points[2], points[3]);
    assert_eq!(sampled(Curve::Nurbs(clamped)).0, sampled(Curve::Cubic(cubic)).0);
}

/// The spline by its definition: basis functions by the Cox-de Boor recursion.
fn basis_sum(knots: &[f64], points: &[Point], degree: usize, t: f64) -> Point {
    fn basis(knots: &[f64], i: usize, degree: usize, t: f64) -> f64 {
        if degree == 0 {
            return f64::from(u8::from(knots[i] <= t && t < knots[i + 1]));
        }
        let share = |a: f64, b: f64| if b == 0.0 { 0.0 } else { a / b };
        let rise = share(t - knots[i], knots[i + degree] - knots[i]);
        let fall = share(knots[i + degree + 1] - t, knots[i + degree + 1] - knots[i + 1]);
        rise * basis(knots, i, degree - 1, t) + fall * basis(knots, i + 1, degree - 1, t)
    }
    let sum = |sum: Vec2, (i, p): (usize, &Point)| sum + p.to_vec2() * basis(knots, i, degree, t);
    points.iter().enumerate().fold(Vec2::ZERO, sum).to_point()
}

#[test]
fn parts_that_make_no_spline_are_told() {
    let points = vec![Point::ORIGIN, Point::new(1.0, 0.0), Point::new(2.0, 1.0)];
    let good = vec![0.0, 0.0, 0.0, 1.0, 1.0, 1.0];
    let rows = [
        (0, good.clone(), vec![], "degree 0 with 3 control points"),
        (3, good.clone(), vec![], "degree 3 with 3 control points"),
        (2, vec![0.0, 1.0], vec![], "2 knots where 6 are needed"),
        (2, vec![0.0, 0.0, 0.0, 1.0, 0.5, 1.0], vec![], "knots that do not rise"),
        (2, vec![1.0; 6], vec![], "knots that do not rise"),
        (2, vec![0.0, 0.0, 0.0, 1.0, 1.0, f64::NAN], vec![], "knots that do not rise"),
        (2, good.clone(), vec![1.0, 1.0], "2 weights for 3 control points"),
        (2, good.clone(), vec![1.0, 0.0, 1.0], "a weight that is not above zero"),
        (2, good.clone(), vec![1.0, f64::INFINITY, 1.0], "a weight that is not above zero"),
        (2, good, vec![1.0, 1e-30, 1.0], "weights so far apart that the curve has no accuracy"),
    ];
    for (degree, knots, weights, what) in rows {
        assert_eq!(Nurbs::new(degree, knots, points.clone(), weights).expect_err(what), what);
    }
}

#[test]
fn arcs_keep_their_shape_under_similarities_and_become_ellipses_under_other_maps() {
    let half = Curve::Spans(
        [(0.0, 0.0, 1.0), (10.0, 0.0, 0.0), (20.0, 5.0, 0.0)]
            .map(|(x, y, bulge)| ribband::geom::Vertex { at: Point::new(x, y), bulge })
            .to_vec(),
    );
    let chain = || Chain::of(half.clone(), false);
    let turned = sketch(chain().transformed(Affine::rotate(0.3) * Affine::scale(2.0)));
    assert!(turned.sampling_mm <= 0.0, "a turn keeps arcs");
    assert!((turned.contours[0].path.vertices[0].bulge - 1.0).abs() < 1e-15, "and their sense");
    let mirrored = sketch(chain().transformed(Affine::FLIP_Y));
    assert!((mirrored.contours[0].path.vertices[0].bulge + 1.0).abs() < 1e-15, "a mirror turns it over");

    let stretch = Affine::scale_non_uniform(1.0, 3.0);
    let stretched = sketch(chain().transformed(stretch));
    let circle =
        |t: f64| stretch * (Point::new(5.0, 0.0) + 5.0 * Vec2::from_angle(std::f64::consts::PI * (1.0 + t)));
    let far = farthest(&stretched.contours[0].path, circle);
    assert!(far <= stretched.sampling_mm + SNAP && far > 0.0, "{far} beyond {}", stretched.sampling_mm);
}

#[test]
fn beyond_fifty_metres_sampling_coarsens_with_the_size() {
    let cubic = |size: f64| {
        let p = |x: f64, y: f64| Point::new(x * size, y * size);
        sampled(Curve::Cubic(CubicBez::new(p(0.0, 0.0), p(0.0, 1.0), p(1.0, 1.0), p(1.0, 0.0))))
    };
    let (near, far) = (cubic(1e4), cubic(5e6));
    assert!(near.1 <= 0.0005, "10 m: {}", near.1);
    assert!(far.1 > 0.0005 && far.1 <= 0.05, "5 km: {}", far.1);
    assert!(far.0.len() < 20_000, "{} chords", far.0.len());
}
