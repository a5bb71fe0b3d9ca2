//! The certified distance: closed forms, and a brute-force discrete Fréchet distance on fine samples.

use std::f64::consts::{PI, TAU};

use kurbo::{Affine, Point, Vec2};
use proptest::prelude::*;
use ribband::geom::{ArcSpline, Span, SpanIndex, Vertex, frechet};

fn polyline(points: &[(f64, f64)], closed: bool) -> ArcSpline {
    ArcSpline::polyline(points.iter().map(|&p| Point::from(p)), closed)
}

fn circle(radius: f64, turn: f64) -> ArcSpline {
    let at = |angle: f64| Vertex { at: Point::ZERO + Vec2::from_angle(angle) * radius, bulge: 1.0 };
    ArcSpline { vertices: vec![at(turn), at(turn + PI)], closed: true }
}

fn polygon(radius: f64, corners: usize, turn: f64) -> ArcSpline {
    let at = |k: usize| Point::ZERO + Vec2::from_angle(turn + TAU * k as f64 / corners as f64) * radius;
    ArcSpline::polyline((0..corners).map(at), true)
}

/// Every vertex and enough places between that no two neighbours are further apart than `step`.
fn samples(chain: &ArcSpline, step: f64) -> Vec<Point> {
    let mut points = vec![chain.vertices[0].at];
    for span in chain.spans() {
        let pieces = (span.length() / step).ceil().max(1.0);
        points.extend((1..=pieces as usize).map(|k| span.at(k as f64 / pieces)));
    }
    points
}

/// The discrete Fréchet distance by dynamic programming (Eiter and Mannila 1994): at most the true one plus the
/// sample step, at least the true one less it.
fn discrete(p: &[Point], q: &[Point]) -> f64 {
    let mut row = vec![f64::INFINITY; q.len()];
    for (i, a) in p.iter().enumerate() {
        let mut diagonal = if i == 0 { 0.0 } else { f64::INFINITY };
        let mut left = f64::INFINITY;
        for (j, b) in q.iter().enumerate() {
            let here = a.distance(*b).max(diagonal.min(left).min(row[j]));
            diagonal = row[j];
            row[j] = here;
            left = here;
        }
    }
    row[q.len() - 1]
}

/// The same for closed chains: from any start, in either direction. Both lists repeat their first sample.
fn discrete_closed(p: &[Point], q: &[Point]) -> f64 {
    let lap = &q[1..];
    let mut turned = lap.to_vec();
    let mut best = f64::INFINITY;
    for _ in 0..2 {
        for k in 0..turned.len() {
            let mut around = turned[k..].to_vec();
            around.extend_from_slice(&turned[..=k]);
            best = best.min(discrete(p, &around));
        }
        turned.reverse();
    }
    best
}

/// The bound holds, and is at most 5 % above the truth; `truth` is known within `slack`.
#[track_caller]
fn assert_bounds(path: &ArcSpline, contour: &ArcSpline, truth: f64, slack: f64) {
    for (a, b) in [(path, contour), (contour, path)] {
        let deviation = frechet(a, b);
        assert!(deviation.certified, "an upper bound is always proven");
        assert!(deviation.mm >= truth - slack, "bound {} below the truth {truth}", deviation.mm);
        assert!(deviation.mm <= 1.05 * (truth + slack), "bound {} loose for {truth}", deviation.mm);
    }
}

#[test]
fn two_circles_are_their_radii_apart() {
    for gap in [1.0, 0.1, 0.01, 0.001] {
        assert_bounds(&circle(50.0 + gap, 0.3), &circle(50.0, 2.0), gap, 1e-12);
        assert_bounds(&circle(50.0 + gap, 0.3).reversed(), &circle(50.0, 2.0), gap, 1e-12);
    }
}

#[test]
fn a_circle_and_its_polygon_are_one_chord_error_apart() {
    for corners in [7, 50, 400] {
        let sagitta = 80.0 * (1.0 - (PI / f64::from(corners)).cos());
        assert_bounds(&circle(80.0, 0.1), &polygon(80.0, corners as usize, 1.7), sagitta, 1e-12);
    }
}

#[test]
fn a_chain_is_at_no_distance_from_itself() {
    let square = polyline(&[(0.0, 0.0), (10.0, 0.0), (10.0, 10.0), (0.0, 10.0)], true);
    assert!(frechet(&square, &square).mm <= 0.0, "a chain is on itself");
    for turned in [square.started_at(2), square.reversed(), square.reversed().started_at(1)] {
        assert!(frechet(&square, &turned).mm < 1e-13, "the start and direction of a closed chain are free");
    }
    let open = polyline(&[(0.0, 0.0), (10.0, 3.0), (20.0, 0.0)], false);
    assert!(frechet(&open, &open.reversed()).mm < 1e-13, "an open chain may be reversed");
}

#[test]
fn an_arc_and_its_chord() {
    // Up to half a turn the farthest place is the top of the arc.
    for bulge in [1.0, 0.5, 0.1, 1e-3] {
        let arc = ArcSpline::from_spans(&[Span::arc(Point::ZERO, Point::new(20.0, 0.0), bulge)], false);
        let chord = polyline(&[(0.0, 0.0), (20.0, 0.0)], false);
        assert_bounds(&arc, &chord, 10.0 * bulge, 1e-12);
    }
}

#[test]
fn overlapping_sets_may_still_be_far_apart_in_order() {
    // Back and forth over the same line: as sets they agree, in order they are half the way back apart.
    let straight = polyline(&[(0.0, 0.0), (30.0, 0.0)], false);
    let folded = polyline(&[(0.0, 0.0), (20.0, 0.0), (12.0, 0.0), (30.0, 0.0)], false);
    assert_bounds(&straight, &folded, 4.0, 1e-12);
    // Two pulls that overlap: the second one decides.
    let twice =
        polyline(&[(0.0, 0.0), (20.0, 0.0), (12.0, 0.0), (25.0, 0.0), (11.0, 0.0), (30.0, 0.0)], false);
    assert_bounds(&straight, &twice, 7.0, 1e-12);
}

#[test]
fn a_spike_between_the_vertices_of_the_other_chain_is_seen() {
    let contour = polyline(&[(0.0, 0.0), (50.0, 0.0), (100.0, 0.0)], false);
    let spiked = polyline(&[(0.0, 0.0), (30.0, 0.0), (30.001, 2.5), (30.002, 0.0), (100.0, 0.0)], false);
    assert_bounds(&spiked, &contour, 2.5, 1e-12);
    let deviation = frechet(&spiked, &contour);
    assert!(deviation.at.distance(Point::new(30.0, 0.0)) < 0.1, "found at {:?}", deviation.at);
}

#[test]
fn a_staircase_and_its_diagonal() {
    for (rise, run) in [(1.0, 1.0), (1.0, 3.0), (1.0, 17.0)] {
        let mut steps = vec![(0.0, 0.0)];
        for k in 0..40 {
            let k = f64::from(k);
            steps.push(((k + 1.0) * run, k * rise));
            steps.push(((k + 1.0) * run, (k + 1.0) * rise));
        }
        let diagonal = polyline(&[(0.0, 0.0), (40.0 * run, 40.0 * rise)], false);
        let truth = rise * run / rise.hypot(run);
        assert_bounds(&diagonal, &polyline(&steps, false), truth, 1e-12);
    }
}

#[test]
fn passes_that_nearly_touch_are_not_mistaken_for_each_other() {
    // Twelve lanes 0.02 apart, walked to and fro, against the same lanes moved by 0.05 along themselves.
    let lanes = |shift: f64| {
        let mut points = Vec::new();
        for lane in 0..12 {
            let y = 0.02 * f64::from(lane);
            let across = (0..=40).map(|k| f64::from(k) * 0.5);
            let xs: Vec<f64> = if lane % 2 == 0 { across.collect() } else { across.rev().collect() };
            points.extend(xs.into_iter().map(|x| (x + shift, y)));
        }
        points
    };
    let (p, q) = (polyline(&lanes(0.0), false), polyline(&lanes(0.05), false));
    assert_bounds(&p, &q, 0.05, 1e-9);
    // Dropping a whole lane pair leaves every point near some lane, and the order wrong by half a lane's length.
    let mut short = lanes(0.0);
    short.drain(41 * 4..41 * 6);
    let missing = frechet(&polyline(&short, false), &p);
    assert!(missing.mm > 5.0, "a lost lane pair is worth {}", missing.mm);
}

#[test]
fn closed_passes_that_nearly_touch() {
    // A slot 0.01 wide and 40 long, its start in the slot: the nearest place is not the right one.
    let slot = [(20.0, 0.005), (0.0, 0.005), (0.0, 30.0), (-10.0, 30.0), (-10.0, -30.0), (0.0, -30.0)];
    let rest = [(0.0, -0.005), (40.0, -0.005), (40.0, 0.005)];
    let points: Vec<_> = slot.iter().chain(&rest).copied().collect();
    let contour = polyline(&points, true);
    let path = contour.transformed(Affine::translate((0.0, 0.02)));
    assert_bounds(&path, &contour, 0.02, 1e-9);
}

#[test]
fn repeated_points_and_points_an_ulp_apart_change_nothing() {
    let plain = polygon(25.0, 90, 0.0);
    let mut doubled = Vec::new();
    for (k, v) in plain.vertices.iter().enumerate() {
        doubled.push(v.at);
        doubled.push(if k % 2 == 0 { v.at } else { Point::new(v.at.x.next_up(), v.at.y.next_down()) });
    }
    let mm = frechet(&ArcSpline::polyline(doubled, true), &plain).mm;
    assert!(mm < 1e-12, "an ulp is no deviation, {mm} is");
}

#[test]
fn points_and_empty_chains_are_no_special_case() {
    let point = polyline(&[(3.0, 4.0)], false);
    let line = polyline(&[(0.0, 0.0), (3.0, 0.0)], false);
    assert_bounds(&point, &line, 5.0, 1e-12);
    assert_bounds(&polyline(&[(3.0, 4.0)], true), &polyline(&[(0.0, 0.0)], true), 5.0, 1e-12);
    assert!(frechet(&ArcSpline::default(), &line).mm.is_infinite(), "nothing is near an empty chain");
    let broken = polyline(&[(0.0, f64::NAN), (1.0, 0.0)], false);
    assert!(frechet(&broken, &line).mm.is_infinite(), "nothing is near NaN");
    let huge = polyline(&[(0.0, 0.0), (1e300, 0.0)], false);
    assert!(frechet(&huge, &line).mm.is_infinite(), "squares must stay finite");
}

#[test]
fn a_closed_chain_drawn_open_is_opened_beside_the_start() {
    let closed = polygon(30.0, 60, 0.0);
    let mut around: Vec<Point> = closed.vertices.iter().map(|v| v.at).collect();
    around.rotate_left(17);
    around.push(around[0]);
    assert!(frechet(&closed, &ArcSpline::polyline(around, false)).mm < 1e-12, "the same ring");
}

#[test]
fn chains_that_have_nothing_in_common_are_bounded_in_reasonable_time() {
    let far = polygon(400.0, 3000, 0.0).transformed(Affine::translate((900.0, 0.0)));
    let near = polygon(5.0, 3000, 0.0);
    let mm = frechet(&far, &near).mm;
    assert!((895.0..1800.0).contains(&mm), "bound {mm}");
}

#[test]
fn the_index_finds_the_nearest_span_of_chains_on_a_grid() {
    // Corners on a grid of thousandths, where many distances tie but for rounding.
    let grid = |v: f64| (v * 1000.0).round() / 1000.0;
    let ring =
        |k: usize| Point::new(50.0, 50.0) + Vec2::from_angle(0.01 * k as f64) * (30.0 + (k % 3) as f64 * 0.2);
    let mut chain = ArcSpline::polyline((0..628).map(|k| Point::new(grid(ring(k).x), grid(ring(k).y))), true);
    for (k, v) in chain.vertices.iter_mut().enumerate() {
        v.bulge = [0.0, -0.002, 0.3][k % 3];
    }
    let index = SpanIndex::new(chain.spans());
    for k in 0..2000 {
        let p =
            Point::new(50.0, 50.0) + Vec2::from_angle(0.37 * f64::from(k)) * (25.0 + 0.006 * f64::from(k));
        let (_, found) = index.nearest(p).expect("there are spans");
        let least = chain.spans().map(|span| span.nearest(p).distance).fold(f64::INFINITY, f64::min);
        assert!(
            found.nearest(p).distance <= least * (1.0 + 1e-12),
            "{} for {least}",
            found.nearest(p).distance
        );
    }
}

/// A wavy chain of `n` points with spikes and backward steps, and its generator's seed numbers.
fn wavy() -> impl Strategy<Value = Vec<(f64, f64)>> {
    let step = (0.05..1.5_f64, -0.6..0.6_f64, 0..12_u8);
    prop::collection::vec(step, 5..40).prop_map(|steps| {
        let mut x = 0.0;
        let point = |(dx, y, kind): (f64, f64, u8)| {
            x += if kind == 0 { -0.5 * dx } else { dx };
            (x, if kind == 1 { 4.0 * y } else { y })
        };
        steps.into_iter().map(point).collect()
    })
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 60, ..ProptestConfig::default() })]

    #[test]
    fn open_chains_match_the_brute_force(points in wavy(), noise in prop::collection::vec((-0.3..0.3_f64, -0.3..0.3_f64, -0.4..0.4_f64), 40)) {
        let contour = polyline(&points, false);
        let moved = points.iter().zip(&noise).map(|(p, n)| Vertex { at: Point::new(p.0 + n.0, p.1 + n.1), bulge: n.2 });
        let path = ArcSpline { vertices: moved.collect(), closed: false };
        let step = 0.04;
        let (p, q) = (samples(&path, step), samples(&contour, step));
        let back: Vec<Point> = q.iter().rev().copied().collect();
        let truth = discrete(&p, &q).min(discrete(&p, &back));
        assert_bounds(&path, &contour, truth - step / 2.0, step / 2.0);
    }

    #[test]
    fn closed_chains_match_the_brute_force(radii in prop::collection::vec((8.0..12.0_f64, -0.4..0.4_f64, -0.3..0.3_f64), 6..14), start in 0..6_usize, back in any::<bool>()) {
        let n = radii.len();
        let place = |k: usize, r: f64| Point::ZERO + Vec2::from_angle(TAU * k as f64 / n as f64) * r;
        let contour = ArcSpline::polyline((0..n).map(|k| place(k, radii[k].0)), true);
        let path = ArcSpline {
            vertices: (0..n).map(|k| Vertex { at: place(k, radii[k].0 + radii[k].1), bulge: radii[k].2 }).collect(),
            closed: true,
        };
        let path = if back { path.reversed() } else { path }.started_at(start);
        let step = 0.6;
        let truth = discrete_closed(&samples(&path, step), &samples(&contour, step));
        let deviation = frechet(&path, &contour).mm;
        prop_assert!(deviation >= truth - step, "bound {} below {}", deviation, truth);
        prop_assert!(deviation <= 1.05 * truth + 1e-9, "bound {} loose for {}", deviation, truth);
    }
}
