//! One contour by itself: repeated points, no length.

use crate::geom::{ArcSpline, Vertex};
use crate::sketch::Contour;

use super::{Flaw, FlawKind};

/// The path without the vertices that stand where the next one stands, and how many those were.
pub(super) fn without_repeats(path: &ArcSpline) -> (ArcSpline, usize) {
    let all = &path.vertices;
    let mut vertices: Vec<Vertex> = Vec::with_capacity(all.len());
    for (i, vertex) in all.iter().enumerate() {
        let next = if i + 1 < all.len() { Some(&all[i + 1]) } else { all.first().filter(|_| path.closed) };
        if next.is_none_or(|next| next.at != vertex.at) {
            vertices.push(*vertex);
        }
    }
    let dropped = all.len() - vertices.len();
    (ArcSpline { vertices, closed: path.closed }, dropped)
}

/// The flaw of a contour that is only a point; none for a contour without any vertex.
pub(super) fn without_length(contour: &Contour) -> Option<Flaw> {
    let at = contour.path.vertices.first()?.at;
    Some(Flaw { kind: FlawKind::NoLength, contour: contour.id, vertex: 1, at, size: 0.0, other: None })
}
