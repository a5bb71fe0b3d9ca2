//! Where the drawing lies in the program's coordinates, when nobody says.

use kurbo::{Rect, Vec2};

use super::cuts::Cuts;
use crate::sketch::Sketch;

/// The usual place that fits the cuts best: the drawing's own zero, its lower left or its centre at the program's.
///
/// Only these three are tried, exactly: a program that is off by a little is off, not placed elsewhere.
pub(super) fn find(cuts: &Cuts, sketch: &Sketch) -> Vec2 {
    let (Some(cut), Some(drawn)) = (cuts.bbox(), sketch.bbox()) else { return Vec2::ZERO };
    let lower_left = -drawn.origin().to_vec2();
    let centre = -drawn.center().to_vec2();
    let misfit = |at: &Vec2| between(cut, drawn + *at);
    let usual = [Vec2::ZERO, lower_left, centre];
    usual.into_iter().min_by(|a, b| misfit(a).total_cmp(&misfit(b))).unwrap_or(Vec2::ZERO)
}

/// How far two boxes are from being one, by the centres: a side leaves them the same centre.
fn between(a: Rect, b: Rect) -> f64 {
    a.center().distance(b.center())
}
