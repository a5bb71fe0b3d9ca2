//! A whole contour as fair curves: one from each corner to the next.

use kurbo::{CubicBez, Point};
use rayon::prelude::*;

use super::{Effort, Ends, Fair, fair};
use crate::geom::{ArcSpline, Span};
use crate::num::{Deviation, Tolerance};

/// A contour as fair curves that meet at its corners; one closed curve where it has none.
#[derive(Clone, Debug)]
pub struct Outline {
    /// The curves in order; each starts where the one before it ends.
    pub runs: Vec<Fair>,
    /// True when the last ends where the first starts.
    pub closed: bool,
    /// A proven upper bound of the Fréchet distance to the contour.
    pub deviation: Deviation,
}

impl Outline {
    /// The cubics of all curves, in order.
    pub fn cubics(&self) -> impl Iterator<Item = CubicBez> + '_ {
        self.runs.iter().flat_map(|run| run.spline.cubics())
    }

    /// The bending energy: the integral of the squared second derivative along all curves, in 1/mm. Corners bend nothing.
    pub fn energy(&self) -> f64 {
        self.runs.iter().map(|run| run.energy).sum()
    }
}

/// What of the tolerance points on the contour's arcs may take: a fiftieth.
const SAMPLING: f64 = 1.0 / 50.0;

/// The least-bending curves within `tolerance` of `contour` from corner to corner; `corners` are the numbers of its
/// vertices at which the direction may break, in order. Curves keep to the corners, and to the ends of an open contour.
///
/// `None` for a contour without length.
pub fn outline(
    contour: &ArcSpline,
    corners: &[usize],
    tolerance: Tolerance,
    effort: Effort,
) -> Option<Outline> {
    if contour.is_empty() {
        return None;
    }
    let sagitta = tolerance.mm() * SAMPLING;
    let (points, places) = sampled(contour, sagitta);
    let curved = contour.spans().any(|span| !span.is_line());
    let sampling = if curved { sagitta } else { 0.0 };
    let within = tolerance.less(sampling)?;
    let whole = || {
        let ends = if contour.closed { Ends::Periodic } else { Ends::Pinned };
        Some(vec![fair(&points, ends, within, effort)?])
    };
    let runs = match runs(&points, corners.iter().map(|&corner| places[corner]), contour.closed) {
        runs if runs.is_empty() => whole()?,
        runs => runs.par_iter().filter_map(|run| fair(run, Ends::Pinned, within, effort)).collect(),
    };
    let worst = runs.iter().map(|run| run.deviation).reduce(|a, b| if b.mm > a.mm { b } else { a })?;
    let deviation = Deviation { mm: worst.mm + sampling, ..worst };
    Some(Outline { runs, closed: contour.closed, deviation })
}

/// The points of a contour from corner to corner, both ends included; none where there is no corner to cut it at.
fn runs(points: &[Point], corners: impl Iterator<Item = usize>, closed: bool) -> Vec<Vec<Point>> {
    let last = points.len() - 1;
    let mut cuts: Vec<usize> = corners.filter(|&at| closed || (at > 0 && at < last)).collect();
    let Some(&first) = cuts.first() else { return Vec::new() };
    let mut lap = points.to_vec();
    if closed {
        lap.rotate_left(first);
        lap.push(lap[0]);
        cuts.iter_mut().for_each(|at| *at -= first);
    } else {
        cuts.insert(0, 0);
    }
    cuts.push(lap.len() - 1);
    cuts.windows(2).map(|pair| lap[pair[0]..=pair[1]].to_vec()).collect()
}

/// The vertices of a contour with points between them on its arcs, no chord of which is more than `sagitta` mm from its
/// arc; and the number of each vertex among the points.
fn sampled(contour: &ArcSpline, sagitta: f64) -> (Vec<Point>, Vec<usize>) {
    let mut points = Vec::with_capacity(contour.vertices.len());
    let mut places = Vec::with_capacity(contour.vertices.len());
    let span = |i: usize| (i < contour.len()).then(|| contour.span(i));
    for (i, vertex) in contour.vertices.iter().enumerate() {
        places.push(points.len());
        points.push(vertex.at);
        let arc: Option<Span> = span(i).filter(|span| !span.is_line());
        if let Some(arc) = arc {
            let step = 2.0 * (1.0 - sagitta / arc.radius()).max(0.0).acos();
            let pieces = (arc.sweep().abs() / step).ceil().max(1.0);
            points.extend((1..pieces as usize).map(|k| arc.at(k as f64 / pieces)));
        }
    }
    (points, places)
}
