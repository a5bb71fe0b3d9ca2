//! Polyline to the least-bending cubic spline inside the tolerance: the fitter's starting guess.

mod spline;

pub use spline::{CubicSpline, Ends, Local};

use kurbo::Point;

/// The chord-length parameter of each point, in mm from the first; around a ring one more, back at the first.
pub fn chord_lengths(points: &[Point], ring: bool) -> Vec<f64> {
    let mut along = 0.0;
    let mut lengths = Vec::with_capacity(points.len() + 1);
    lengths.extend(points.first().map(|_| along));
    let closing = points.last().zip(points.first()).filter(|_| ring);
    let chords = points.windows(2).map(|pair| pair[0].distance(pair[1]));
    lengths.extend(chords.chain(closing.map(|(last, first)| last.distance(*first))).map(|chord| {
        along += chord;
        along
    }));
    lengths
}
