//! One order of vertices for one contour, wherever it starts and whichever way it runs.

use kurbo::Point;

use crate::geom::ArcSpline;

/// The contour in canonical order, and whether that is against its own: a closed contour runs counter-clockwise from its
/// lowest vertex (least x, then least y), an open one from its lower end.
pub(super) fn canonical(contour: &ArcSpline) -> (ArcSpline, bool) {
    let vertices = &contour.vertices;
    let (Some(first), Some(last)) = (vertices.first(), vertices.last()) else {
        return (contour.clone(), false);
    };
    if !contour.closed {
        let against = order(last.at, first.at).is_lt();
        return (if against { contour.reversed() } else { contour.clone() }, against);
    }
    let lowest = (0..vertices.len()).min_by(|&a, &b| order(vertices[a].at, vertices[b].at)).unwrap_or(0);
    let turned = contour.started_at(lowest);
    let against = turned.area() < 0.0;
    (if against { turned.reversed() } else { turned }, against)
}

fn order(a: Point, b: Point) -> std::cmp::Ordering {
    a.x.total_cmp(&b.x).then(a.y.total_cmp(&b.y))
}
