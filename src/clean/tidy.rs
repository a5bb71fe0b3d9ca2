//! One contour by itself: repeated points, no length, spikes.

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

/// The places where a contour runs back over itself, to within `near_mm` and a hundredth of the shorter side.
pub(super) fn spikes(contour: &Contour, near_mm: f64) -> Vec<Flaw> {
    let path = &contour.path;
    let first = usize::from(!path.closed);
    (first..path.len())
        .filter_map(|tip| {
            let size = spike(path, tip, near_mm)?;
            let at = path.vertices[tip].at;
            Some(Flaw { kind: FlawKind::Spike, contour: contour.id, vertex: tip + 1, at, size, other: None })
        })
        .collect()
}

/// The length of the spike whose tip is this vertex, if it is one.
fn spike(path: &ArcSpline, tip: usize, near_mm: f64) -> Option<f64> {
    let before = path.span(if tip == 0 { path.len() - 1 } else { tip - 1 });
    let after = path.span(tip);
    if before.chord().dot(after.chord()) >= 0.0 {
        return None;
    }
    let (short, long) =
        if before.length() < after.length() { (before.reversed(), after) } else { (after, before) };
    let size = short.length();
    let near = near_mm.min(size / 100.0);
    let lies_on = [0.5, 1.0].iter().all(|&t| long.nearest(short.at(t)).distance <= near);
    lies_on.then(|| size.max(mirrored(path, tip)))
}

/// How far the vertices on both sides of a tip are the same places, in mm.
fn mirrored(path: &ArcSpline, tip: usize) -> f64 {
    let count = path.vertices.len();
    let reach = if path.closed { count / 2 } else { tip.min(count - 1 - tip) };
    let place = |k: usize| path.vertices[k % count].at;
    let same = (1..=reach).take_while(|&k| place(tip + count - k) == place(tip + k));
    same.map(|k| path.span((tip + k - 1) % count).length()).sum()
}
