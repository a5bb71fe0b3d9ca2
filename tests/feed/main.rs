//! The feed room: time against closed forms and an independent planner, limits sampled, queues recomputed.

use kurbo::Point;
use ribband::feed::Limits;
use ribband::geom::{ArcSpline, Span};
use ribband::toolpath::{Move, Position, Toolpath};

mod motion;
mod schedules;
mod times;

/// The same limits on every axis, a queue that never matters, corners that stop.
fn limits(speed: f64, acceleration: f64) -> Limits {
    Limits {
        feed: [speed; 3],
        rapid: [speed; 3],
        acceleration: [acceleration; 3],
        junction: 0.0,
        queue: 1_000_000,
        blocks_per_second: 1e9,
    }
}

/// The chain cut in one plane at one feed, in mm/min.
fn cut(path: &ArcSpline, feed: f64) -> Toolpath {
    let move_along = |span: Span| {
        let at = |xy: Point| Position { xy, z: -1.0 };
        let (from, to) = (at(span.start), at(span.end));
        Move { from, to, bulge: span.bulge, feed: Some(feed), spindle_rpm: 18000.0, line: 0 }
    };
    let halves = path.spans().flat_map(|span| {
        let parts = if span.bulge.abs() > 1.0 { 2 } else { 1 };
        (0..parts)
            .map(move |k| span.part(f64::from(k) / f64::from(parts), f64::from(k + 1) / f64::from(parts)))
    });
    Toolpath { moves: halves.map(move_along).collect() }
}

fn polyline(points: &[(f64, f64)]) -> ArcSpline {
    ArcSpline::polyline(points.iter().map(|&p| Point::from(p)), false)
}

/// A wavy closed outline of `n` chords.
fn wavy(n: usize, radius: f64) -> ArcSpline {
    let place = |i: usize| {
        let a = std::f64::consts::TAU * i as f64 / n as f64;
        Point::ORIGIN + kurbo::Vec2::from_angle(a) * radius * (1.0 + 0.15 * (5.0 * a).sin())
    };
    ArcSpline::polyline((0..n).map(place), true)
}
