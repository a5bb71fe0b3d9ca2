//! The drawing as it should lie in the program's coordinates: mirrored, turned, in copies, and moved.

use kurbo::{Affine, Point, Rect, Vec2};

use super::cuts::Cuts;
use crate::geom::ArcSpline;
use crate::sketch::Sketch;

/// How the drawing is laid on the stock.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Layout {
    /// Mirrored left to right about the drawing's zero, before it is turned.
    pub mirror: bool,
    /// Turned about the drawing's zero by so many degrees, counter-clockwise.
    pub turn_deg: f64,
    /// Copies side by side; 1 at least.
    pub columns: usize,
    /// Copies above each other; 1 at least.
    pub rows: usize,
    /// The gap between the boxes of two copies, in mm: the boxes around the drawing as it was read, once turned.
    pub gap: f64,
}

impl Default for Layout {
    /// As drawn, once.
    fn default() -> Self {
        Self { mirror: false, turn_deg: 0.0, columns: 1, rows: 1, gap: 0.0 }
    }
}

/// One contour of one copy, in the program's coordinates.
#[derive(Clone, Debug)]
pub(super) struct Drawn {
    /// The contour's id in the drawing.
    pub(super) id: usize,
    /// The copy's number, from 0: the lower left one first, then along its row.
    pub(super) copy: usize,
    pub(super) path: ArcSpline,
}

/// All copies of the drawing.
pub(super) struct Placed {
    pub(super) contours: Vec<Drawn>,
    /// From the program's coordinates back to the drawing's, for each copy.
    back: Vec<Affine>,
}

impl Placed {
    /// The drawing laid out, its zero in the lower left copy at `at`; where that is not said, at the usual place that
    /// fits the cuts best.
    pub(super) fn new(sketch: &Sketch, layout: &Layout, at: Option<Vec2>, cuts: &Cuts) -> Self {
        let turn = turn(layout);
        let turned: Vec<(usize, ArcSpline)> =
            sketch.contours.iter().map(|c| (c.id, c.path.transformed(turn))).collect();
        let boxes = turned.iter().filter_map(|(_, path)| path.bbox());
        let cell = boxes.reduce(|a, b| a.union(b)).unwrap_or(Rect::ZERO);
        let step = Vec2::new(cell.width() + layout.gap, cell.height() + layout.gap);
        let (columns, rows) = (layout.columns.max(1), layout.rows.max(1));
        let shift =
            |copy: usize| Vec2::new((copy % columns) as f64 * step.x, (copy / columns) as f64 * step.y);
        let copies = columns * rows;
        let all = cell.union(cell + shift(copies - 1));
        let at = at.unwrap_or_else(|| find(cuts, all));
        let moved = |copy: usize| {
            let place = Affine::translate(at + shift(copy));
            turned.iter().map(move |(id, path)| Drawn { id: *id, copy, path: path.transformed(place) })
        };
        Self {
            contours: (0..copies).flat_map(moved).collect(),
            back: (0..copies).map(|copy| (Affine::translate(at + shift(copy)) * turn).inverse()).collect(),
        }
    }

    /// A place on a copy, in the drawing's coordinates.
    pub(super) fn in_drawing(&self, copy: usize, at: Point) -> Point {
        self.back[copy] * at
    }
}

/// Mirrored and turned about zero. A quarter turn has whole numbers for its sine and cosine.
fn turn(layout: &Layout) -> Affine {
    let (mut sin, mut cos) = layout.turn_deg.to_radians().sin_cos();
    if layout.turn_deg % 90.0 == 0.0 {
        (sin, cos) = (sin.round(), cos.round());
    }
    let across = if layout.mirror { -1.0 } else { 1.0 };
    Affine::new([across * cos, across * sin, -sin, cos, 0.0, 0.0])
}

/// The usual place that fits the cuts best: the drawing's own zero, the lower left or the centre of all copies at the
/// program's.
///
/// Only these three are tried, exactly: a program that is off by a little is off, not placed elsewhere.
fn find(cuts: &Cuts, drawn: Rect) -> Vec2 {
    let Some(cut) = cuts.bbox() else { return Vec2::ZERO };
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
