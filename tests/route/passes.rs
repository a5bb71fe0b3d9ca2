//! Passes, entries and the order of the moves, on the line.

use kurbo::Point;
use proptest::prelude::*;
use ribband::geom::{ArcSpline, Vertex};
use ribband::route::{Cut, Routed, Setup, Thickness, Work, Zero, route};

use crate::{assert_safe, contour, cut, rectangle};

#[test]
fn passes_are_equal_and_none_is_deeper_than_asked() {
    let depths = |depth_mm, pass_mm| Cut { depth_mm, pass_mm, ..cut() }.passes();
    assert_eq!(depths(6.0, 2.0), [2.0, 4.0, 6.0]);
    assert_eq!(depths(6.0, 4.0), [3.0, 6.0]);
    assert_eq!(depths(1.0, 4.0), [1.0]);
    // 0.3 / 0.1 is a little over 3 in binary; a fourth pass would be wrong.
    assert_eq!(depths(0.3, 0.1).len(), 3);
    assert_eq!(depths(6.1, 2.0).len(), 4);
}

#[test]
fn a_square_is_cut_round_and_round_from_a_corner() {
    let setup = Setup::default();
    let routing = route(&[rectangle(7, (10.0, 10.0), (20.0, 20.0))], &setup).expect("a square routes");
    assert_safe(&routing.toolpath, &setup);
    assert_eq!(routing.order, [7]);
    let moves = &routing.toolpath.moves;
    // Across, then three times down and four sides, up, and home.
    assert_eq!(moves.len(), 1 + 3 * 5 + 2);
    assert_eq!(moves[0].to.xy, Point::new(10.0, 10.0));
    let depths: Vec<f64> = moves.iter().filter(|m| m.from.xy == m.to.xy).map(|m| m.to.z).collect();
    assert_eq!(depths, [-2.0, -4.0, -6.0, 5.0]);
    let plunges = moves.iter().filter(|m| m.to.z < m.from.z);
    assert!(plunges.clone().all(|m| m.feed == Some(600.0)), "a plunge has the plunge feed");
    let level = moves.iter().filter(|m| m.to.z == m.from.z && !m.is_rapid());
    assert!(level.clone().all(|m| m.feed == Some(1800.0)), "a level cut has the contour's feed");
}

#[test]
fn an_open_contour_is_cut_to_and_fro() {
    let setup = Setup::default();
    let routing = route(&[contour(1, &[(50.0, 0.0), (10.0, 0.0)], false)], &setup).expect("a line routes");
    assert_safe(&routing.toolpath, &setup);
    let ends: Vec<f64> =
        routing.toolpath.moves.iter().filter(|m| m.feed == Some(1800.0)).map(|m| m.to.xy.x).collect();
    assert_eq!(ends, [50.0, 10.0, 50.0], "entered at the nearer end");
}

#[test]
fn a_closed_contour_is_entered_at_its_corner() {
    // A drop: one half circle and two lines that meet in a corner at (0, 30).
    let vertex = |x, y, bulge| Vertex { at: Point::new(x, y), bulge };
    let (x, y) = (10.0 * (8.0_f64 / 9.0).sqrt(), 10.0 / 3.0);
    let bulge = ((std::f64::consts::PI + 2.0 * (1.0_f64 / 3.0).asin()) / 4.0).tan();
    let vertices = vec![vertex(-x, y, bulge), vertex(x, y, 0.0), vertex(0.0, 30.0, 0.0)];
    let path = ArcSpline { vertices, closed: true };
    let routing = route(&[Routed { id: 1, path, cut: cut(), ..Routed::default() }], &Setup::default())
        .expect("a drop routes");
    assert_eq!(routing.toolpath.moves[0].to.xy, Point::new(0.0, 30.0));
    assert_safe(&routing.toolpath, &Setup::default());
}

#[test]
fn the_bed_as_zero_lifts_everything_by_the_thickest_stock() {
    let thickness = Some(Thickness { thinnest: 11.5, thickest: 12.0 });
    let setup = Setup { zero: Zero::Bed, thickness, ..Setup::default() };
    let routing = route(&[rectangle(1, (0.0, 0.0), (9.0, 9.0))], &setup).expect("a square routes");
    assert_safe(&routing.toolpath, &setup);
    let lowest = routing.toolpath.moves.iter().map(|m| m.to.z).fold(f64::INFINITY, f64::min);
    assert_eq!((setup.heights().clearance, lowest), (17.0, 6.0));
}

#[test]
fn the_tour_goes_on_to_the_nearest_contour() {
    let row: Vec<Routed> =
        [40.0, 0.0, 20.0].iter().zip(1..).map(|(&x, id)| rectangle(id, (x, 5.0), (8.0, 8.0))).collect();
    assert_eq!(route(&row, &Setup::default()).expect("a row routes").order, [2, 3, 1]);
}

/// The shortest way from the origin through all points and back, by trying all orders.
fn shortest(at: Point, left: &[Point]) -> f64 {
    let on = |i: usize| {
        let rest: Vec<Point> = left.iter().enumerate().filter(|&(j, _)| j != i).map(|(_, p)| *p).collect();
        at.distance(left[i]) + shortest(left[i], &rest)
    };
    (0..left.len()).map(on).reduce(f64::min).unwrap_or(at.distance(Point::ORIGIN))
}

#[test]
fn settings_out_of_bounds_are_named() {
    let square = rectangle(1, (0.0, 0.0), (9.0, 9.0));
    let message = |setup: Setup, cut: Cut| {
        let error = route(&[Routed { cut, ..square.clone() }], &setup).expect_err("refused");
        error.to_string()
    };
    let nan = Cut { depth_mm: f64::NAN, ..cut() };
    assert_eq!(message(Setup::default(), nan), "depth is NaN, and must be above zero\n  correct --depth");
    let bed = Setup { zero: Zero::Bed, ..Setup::default() };
    assert!(message(bed, cut()).contains("thickness is not known"));
    let empty = Routed { path: ArcSpline::default(), ..square.clone() };
    assert!(route(&[empty], &Setup::default()).is_err(), "a contour without length is refused");
}

proptest! {
    /// Reversals alone leave a tour of few places close to the shortest.
    #[test]
    fn the_tour_is_short(places in prop::collection::vec((0.0..300.0_f64, 0.0..300.0_f64), 2..7)) {
        let holes: Vec<Routed> = places.iter().zip(1..).map(|(&(x, y), id)| Routed {
            work: Work::Drill,
            ..rectangle(id, (x - 0.5, y - 0.5), (1.0, 1.0))
        }).collect();
        let toolpath = route(&holes, &Setup::default()).expect("holes route").toolpath;
        let travelled: f64 = toolpath.moves.iter().map(|m| m.span().length()).sum();
        let best = shortest(Point::ORIGIN, &places.iter().map(|&p| p.into()).collect::<Vec<Point>>());
        prop_assert!(travelled >= best - 1e-6 && travelled <= 1.2 * best, "{} for {}", travelled, best);
    }

    #[test]
    fn every_toolpath_is_safe(places in prop::collection::vec((0.0..300.0, 0.0..300.0, any::<bool>()), 1..20)) {
        let contours: Vec<Routed> = places.iter().zip(1..).map(|(&(x, y, closed), id)| {
            contour(id, &[(x, y), (x + 3.0, y + 1.0), (x + 2.0, y + 5.0)], closed)
        }).collect();
        let setup = Setup::default();
        let routing = route(&contours, &setup).expect("triangles route");
        assert_safe(&routing.toolpath, &setup);
        let mut order = routing.order;
        order.sort_unstable();
        prop_assert_eq!(order, (1..=contours.len()).collect::<Vec<_>>());
    }
}
