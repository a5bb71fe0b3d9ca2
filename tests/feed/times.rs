//! Closed forms of motion under constant acceleration, and shapes whose time follows from them.

use std::f64::consts::{FRAC_PI_2, PI, TAU};

use approx::assert_relative_eq;
use kurbo::Point;
use ribband::feed::{Limits, Times, time};
use ribband::geom::{ArcSpline, Span};
use ribband::toolpath::{Move, Position, Toolpath};

use super::{cut, limits, polyline, wavy};

/// Rest to rest over `length`: L/v + v/a, or 2 sqrt(L/a) where the speed is not reached.
fn rest_to_rest(length: f64, speed: f64, acceleration: f64) -> f64 {
    if length >= speed * speed / acceleration {
        length / speed + speed / acceleration
    } else {
        2.0 * (length / acceleration).sqrt()
    }
}

/// From the speed `inner` to `speed` and back over `length`.
fn between_corners(length: f64, inner: f64, speed: f64, acceleration: f64) -> f64 {
    let ramp = (speed * speed - inner * inner) / (2.0 * acceleration);
    assert!(2.0 * ramp <= length, "the speed is reached");
    (length - 2.0 * ramp) / speed + 2.0 * (speed - inner) / acceleration
}

#[test]
fn straight_from_rest_to_rest() {
    let rows = [
        (100.0, 50.0, 500.0, 2.1),
        (4.0, 50.0, 500.0, 0.178885438199983),
        (5.0, 50.0, 500.0, 0.2),
        (1000.0, 100.0, 400.0, 10.25),
    ];
    for (length, speed, acceleration, want) in rows {
        let times = time(&cut(&polyline(&[(0.0, 0.0), (length, 0.0)]), 1e9), &limits(speed, acceleration));
        assert_relative_eq!(times.time_s, want, epsilon = 1e-12);
        assert_relative_eq!(times.time_s, rest_to_rest(length, speed, acceleration), epsilon = 1e-12);
        let fed =
            time(&cut(&polyline(&[(0.0, 0.0), (0.0, length)]), speed * 60.0), &limits(1e6, acceleration));
        assert_relative_eq!(fed.time_s, want, epsilon = 1e-9);
    }
}

/// One axis from 10 to 20 mm/s along 100 mm, 2.05 s: the middle of three moves that only change the feed.
#[test]
fn straight_from_speed_to_speed() {
    let mut toolpath = cut(&polyline(&[(0.0, 0.0), (50.0, 0.0), (150.0, 0.0), (250.0, 0.0)]), 600.0);
    toolpath.moves[1].feed = Some(3000.0);
    toolpath.moves[2].feed = Some(1200.0);
    let whole = time(&toolpath, &limits(1e6, 500.0)).time_s;
    let before = 50.0 / 10.0 + 10.0 / 500.0 / 2.0;
    let after = 100.0 / 20.0 + 20.0 / 500.0 / 2.0;
    // From 10 up to 50, along, down to 20: the trapezoid that gives 2.1 s from rest less what the ends save.
    let (up, down) = ((2500.0 - 100.0) / 1000.0, (2500.0 - 400.0) / 1000.0);
    let middle = 40.0 / 500.0 + 30.0 / 500.0 + (100.0 - up - down) / 50.0;
    assert_relative_eq!(whole, before + middle + after, epsilon = 1e-9);
}

/// On a diagonal every axis may do its best: sqrt 2 times the limits.
#[test]
fn diagonals_use_both_axes() {
    let side = 100.0 / 2_f64.sqrt();
    let times = time(&cut(&polyline(&[(0.0, 0.0), (side, side)]), 1e9), &limits(50.0, 500.0));
    let root = 2_f64.sqrt();
    assert_relative_eq!(times.time_s, rest_to_rest(100.0, 50.0 * root, 500.0 * root), epsilon = 1e-9);
}

#[test]
fn square_that_stops_in_its_corners() {
    let square = polyline(&[(0.0, 0.0), (100.0, 0.0), (100.0, 100.0), (0.0, 100.0), (0.0, 0.0)]);
    assert_relative_eq!(time(&cut(&square, 3000.0), &limits(1e3, 500.0)).time_s, 8.4, epsilon = 1e-9);
}

/// Corners passed within an allowance: R = d cos(p/2) / (1 - cos(p/2)), v = sqrt(a R). The corner of a square turns
/// the velocity along a diagonal, where both axes share the acceleration.
#[test]
fn square_that_rounds_its_corners() {
    let square = polyline(&[(0.0, 0.0), (100.0, 0.0), (100.0, 100.0), (0.0, 100.0), (0.0, 0.0)]);
    let rounding = Limits { junction: 0.05, ..limits(1e3, 500.0) };
    let half = (PI / 4.0).cos();
    let corner = (500.0 * 2_f64.sqrt() * 0.05 * half / (1.0 - half)).sqrt();
    let end_side = 100.0 / 50.0 + (50.0 - corner) / 500.0 + 50.0 / 500.0
        - (2500.0 - corner * corner) / 1000.0 / 50.0
        - 2.5 / 50.0;
    let want = 2.0 * end_side + 2.0 * between_corners(100.0, corner, 50.0, 500.0);
    assert_relative_eq!(time(&cut(&square, 3000.0), &rounding).time_s, want, epsilon = 1e-9);
}

/// The rounding of a corner has to fit into its sides: zigzags of short blocks gain nothing from an allowance that
/// is larger than they are.
#[test]
fn roundings_fit_into_the_sides() {
    let side = 0.1;
    let stairs: Vec<(f64, f64)> =
        (0..40).map(|i| (side * f64::from((i + 1) / 2), side * f64::from(i / 2))).collect();
    let generous = Limits { junction: 10.0, ..limits(1e3, 500.0) };
    let speed = (500.0 * 2_f64.sqrt() * side / 2.0).sqrt();
    let times = time(&cut(&polyline(&stairs), 3000.0), &generous);
    assert!(times.mean_mm_min <= 60.0 * between_speed(speed, side), "{times:?}");
}

/// The largest mean speed over a block between two corners.
fn between_speed(corner: f64, side: f64) -> f64 {
    let peak = (corner * corner + 500.0 * side).sqrt();
    (corner + peak) / 2.0
}

/// v = sqrt(a r) on circles between tangent lines, at radii where it is under the feed and where it is over.
#[test]
fn circle_at_its_centripetal_speed() {
    for (radius, acceleration, mm_min) in [
        (0.5, 500.0, 949.0),
        (1.0, 500.0, 1342.0),
        (2.5, 500.0, 2121.0),
        (5.0, 500.0, 3000.0),
        (10.0, 500.0, 4243.0),
        (0.5, 200.0, 600.0),
        (10.0, 200.0, 2683.0),
    ] {
        let circle = Span::arc(Point::new(60.0, 0.0), Point::new(60.0, 2.0 * radius), 1.0);
        let back = Span::arc(circle.end, circle.start, 1.0);
        let lead = [Span::line(Point::ZERO, circle.start), circle, back];
        let path = ArcSpline::from_spans(
            &[&lead[..], &[Span::line(circle.start, Point::new(120.0, 0.0))]].concat(),
            false,
        );
        let speed = (acceleration * radius).sqrt();
        assert_relative_eq!(speed * 60.0, mm_min, epsilon = 0.5);
        let feed = 50.0_f64;
        let around = speed.min(feed);
        let ramp = (feed * feed - around * around) / (2.0 * acceleration);
        let start = feed * feed / (2.0 * acceleration);
        let line = feed / acceleration + (feed - around) / acceleration + (60.0 - start - ramp) / feed;
        let want = 2.0 * line + TAU * radius / around;
        let toolpath = at_centripetal_feed(cut(&path, feed * 60.0), acceleration);
        assert_relative_eq!(time(&toolpath, &limits(1e3, acceleration)).time_s, want, epsilon = 1e-9);
    }
}

/// Arcs at sqrt(a r), which every direction of an arc sustains; between the axes more would be possible.
fn at_centripetal_feed(mut toolpath: Toolpath, acceleration: f64) -> Toolpath {
    for m in &mut toolpath.moves {
        m.feed = m.feed.map(|feed| feed.min(60.0 * (acceleration * m.span().radius()).sqrt()));
    }
    toolpath
}

/// Sides at the feed, corners at sqrt(a r), ramps between.
#[test]
fn rounded_rectangle() {
    let (a, r) = (500.0, 4.0_f64);
    let corner = Span::arc(Point::new(96.0, 0.0), Point::new(100.0, 4.0), (FRAC_PI_2 / 4.0).tan());
    let turned = |k: u32, span: Span| {
        span.transformed(kurbo::Affine::rotate_about(f64::from(k) * FRAC_PI_2, Point::new(50.0, 50.0)))
    };
    let side = Span::line(Point::new(4.0, 0.0), Point::new(96.0, 0.0));
    let mut spans: Vec<Span> = (0..4).flat_map(|k| [turned(k, side), turned(k, corner)]).collect();
    // Starts and ends in the middle of a side, at rest.
    let middle = Point::new(50.0, 0.0);
    spans[0].start = middle;
    spans.push(Span::line(Point::new(4.0, 0.0), middle));
    let path = ArcSpline::from_spans(&spans, false);
    let around = (a * r).sqrt();
    let half_side =
        50.0 / a + (50.0 - around) / a + (46.0 - 2.5 - (2500.0 - around * around) / (2.0 * a)) / 50.0;
    let want = 4.0 * FRAC_PI_2 * r / around + 3.0 * between_corners(92.0, around, 50.0, a) + 2.0 * half_side;
    let times = time(&at_centripetal_feed(cut(&path, 3000.0), a), &limits(1e3, a));
    assert_relative_eq!(times.time_s, want, epsilon = 1e-6);
}

/// Stopping at every vertex: the mean speeds of blocks of 0.1, 0.5, 1 and 5 mm at 50 mm/s and 500 mm/s2.
#[test]
fn short_blocks_crawl() {
    for (side, want) in [(0.1, 3.54), (0.5, 7.91), (1.0, 11.18), (5.0, 25.0)] {
        let stairs: Vec<(f64, f64)> =
            (0..41).map(|i| (side * f64::from((i + 1) / 2), side * f64::from(i / 2))).collect();
        let times = time(&cut(&polyline(&stairs), 3000.0), &limits(1e3, 500.0));
        assert_relative_eq!(times.mean_mm_min / 60.0, want, epsilon = 0.005);
        assert_relative_eq!(times.time_s, 40.0 * rest_to_rest(side, 50.0, 500.0), epsilon = 1e-9);
        assert_eq!(times.crawls.len(), usize::from(side < 5.0));
        assert!(times.crawls.iter().all(|crawl| crawl.at == Point::ZERO));
    }
}

/// A controller that sees m blocks must be able to stop inside them: v^2 <= 2 a m L.
#[test]
fn look_ahead_bounds_the_speed() {
    let line: Vec<(f64, f64)> = (0..=4000).map(|i| (f64::from(i) * 0.1, 0.0)).collect();
    let toolpath = cut(&polyline(&line), 6000.0);
    for seen in [2_usize, 8, 20] {
        let times = time(&toolpath, &Limits { queue: seen, ..limits(1e3, 500.0) });
        // At the start of a block it can stop at the end of the last one seen: within one block it gains and loses.
        let length = 0.1 * seen as f64;
        let fastest = (2.0 * 500.0 * length).sqrt();
        assert!(times.mean_mm_min <= fastest * 60.0);
        assert!(times.mean_mm_min >= 0.85 * (2.0 * 500.0 * (length - 0.1)).sqrt() * 60.0, "{seen} {times:?}");
    }
}

/// Blocks shorter than the feed lasts between two readings: the queue runs dry and the machine waits for it.
#[test]
fn a_starved_machine_runs_at_the_reading_rate() {
    let slow = Limits { queue: 8, blocks_per_second: 50.0, junction: 0.02, ..limits(50.0, 200.0) };
    let short = time(&cut(&wavy(3000, 40.0), 3000.0), &slow);
    assert!(short.starved_blocks > 2900, "{}", short.starved_blocks);
    assert_relative_eq!(short.time_s, 3000.0 / 50.0, max_relative = 0.01);
    let long = time(&cut(&wavy(100, 40.0), 3000.0), &slow);
    assert_eq!(long.starved_blocks, 0);
}

#[test]
fn vertical_moves_and_rapids_keep_their_own_limits() {
    let at = |x: f64, z: f64| Position { xy: Point::new(x, 0.0), z };
    let mv = |from, to, feed| Move { from, to, bulge: 0.0, feed, spindle_rpm: 0.0, line: 0 };
    let moves = vec![
        mv(at(0.0, 5.0), at(100.0, 5.0), None),
        mv(at(100.0, 5.0), at(100.0, -5.0), Some(300.0)),
        mv(at(100.0, -5.0), at(100.0, 5.0), None),
    ];
    let machine = Limits {
        feed: [50.0, 50.0, 10.0],
        rapid: [80.0, 80.0, 20.0],
        acceleration: [500.0, 500.0, 100.0],
        ..limits(0.0, 0.0)
    };
    let times = time(&Toolpath { moves }, &machine);
    let want =
        rest_to_rest(100.0, 80.0, 500.0) + rest_to_rest(10.0, 5.0, 100.0) + rest_to_rest(10.0, 20.0, 100.0);
    assert_relative_eq!(times.time_s, want, epsilon = 1e-9);
    assert_relative_eq!(times.cut_time_s, 0.0);
}

#[test]
fn nothing_takes_no_time() {
    assert_eq!(time(&Toolpath::default(), &limits(50.0, 500.0)), Times::default());
    let still = cut(&polyline(&[(1.0, 1.0), (1.0, 1.0)]), 600.0);
    assert_relative_eq!(time(&still, &limits(50.0, 500.0)).time_s, 0.0);
}
