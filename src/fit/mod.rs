//! From a contour to the fewest tangent arcs and lines inside the tolerance.
//!
//! The search walks the trace in levels of equal cost. A state is a place near the trace with an exact heading; one
//! arc leads on to the next. An arc costs 1 and so does a corner, so corners appear only where they save arcs. The
//! theory of how few arcs there can be, and the published relatives: Drysdale, Rote and Sturm 2008; Maier 2014.

mod beam;
mod circle;
mod closing;
mod keeping;
mod narrowing;
mod pinned;
mod reach;
mod refine;
mod seeds;
mod simplify;
mod state;
mod trace;

use crate::geom::{ArcSpline, frechet_within};
use crate::num::{Deviation, Tolerance};
use trace::Trace;

pub use pinned::fit_pinned;
pub use simplify::simplify;

/// A contour replaced by tangent arcs and lines.
#[derive(Clone, Debug)]
pub struct Fitted {
    /// The path, in the contour's own direction.
    pub path: ArcSpline,
    /// The certified distance between path and contour.
    pub deviation: Deviation,
}

impl Fitted {
    fn new(path: ArcSpline, contour: &ArcSpline, tolerance: Tolerance) -> Self {
        let deviation = frechet_within(&path, contour, tolerance.mm());
        Self { path, deviation }
    }

    /// Spans plus corners.
    fn cost(&self) -> usize {
        self.path.len() + self.path.corners(LAST_PLACE).count()
    }
}

/// Replaces `contour` with the fewest tangent arcs and lines that stay within `tolerance` of it, both ways and in order.
///
/// The result does not depend on the vertex a closed contour starts at, nor on the direction. A contour without
/// length comes back as it is. The deviation returned is at most `tolerance`.
pub fn fit(contour: &ArcSpline, tolerance: Tolerance) -> Fitted {
    let Some(trace) = Trace::new(contour, tolerance) else {
        return Fitted::new(contour.clone(), contour, tolerance);
    };
    let ways = match circle::whole(&trace) {
        Some(circle) => vec![circle],
        None => vec![narrowing::within(trace, tolerance, searched), simplify(contour, tolerance)],
    };
    least(ways, contour, tolerance)
}

fn searched(trace: &Trace) -> beam::Run {
    if trace.closed() { closing::closed(trace) } else { beam::open(trace) }
}

/// The way of least cost that holds the tolerance; the contour itself where none does.
fn least(ways: Vec<ArcSpline>, contour: &ArcSpline, tolerance: Tolerance) -> Fitted {
    let as_drawn = Fitted::new(contour.clone(), contour, tolerance);
    let fitted = ways.into_iter().map(|path| Fitted::new(path, contour, tolerance));
    let held = fitted.filter(|f| f.deviation.mm <= tolerance.mm());
    held.fold(as_drawn, |best, other| if other.cost() < best.cost() { other } else { best })
}

/// The last place that programs are written to, in mm: a smaller break of tangent is not a corner.
const LAST_PLACE: f64 = 0.001;
