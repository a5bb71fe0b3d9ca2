//! Open contours whose ends must stay where they are.

use crate::geom::ArcSpline;
use crate::num::Tolerance;

use super::trace::Trace;
use super::{Fitted, closing, least};

/// Replaces the open `contour` as [`fit`](super::fit) does, but from its very first point to its very last.
///
/// For a stretch of something longer, which must go on where it went on before.
pub fn fit_pinned(contour: &ArcSpline, tolerance: Tolerance) -> Fitted {
    let Some(trace) = Trace::new(contour, tolerance).filter(|trace| !trace.closed()) else {
        return Fitted::as_drawn(contour);
    };
    least(&trace, contour, tolerance, closing::pinned)
}
