//! Where the drawing lies in the program's coordinates.

use kurbo::{Affine, Rect, Vec2};

use crate::geom::ArcSpline;
use crate::job::Origin;

/// The step that takes the drawing's coordinates to the program's.
pub(super) fn shift(origin: Origin, part: Rect) -> Vec2 {
    match origin {
        Origin::LowerLeft => -part.origin().to_vec2(),
        Origin::Centre => -part.center().to_vec2(),
        Origin::Drawing => Vec2::ZERO,
    }
}

/// The path moved by `shift`.
pub(super) fn moved(path: &ArcSpline, shift: Vec2) -> ArcSpline {
    path.transformed(Affine::translate(shift))
}
