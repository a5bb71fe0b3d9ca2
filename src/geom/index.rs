//! Many spans, searched by place.

use kurbo::Point;
use rstar::{AABB, PointDistance, RTree, RTreeObject};

use super::Span;

/// A fixed set of spans that answers how far a place is from the nearest of them.
pub struct SpanIndex {
    tree: RTree<Entry>,
}

struct Entry {
    span: Span,
    /// Its place in the order in which the spans were given.
    id: usize,
}

impl RTreeObject for Entry {
    type Envelope = AABB<[f64; 2]>;

    fn envelope(&self) -> Self::Envelope {
        let bbox = self.span.bbox();
        AABB::from_corners([bbox.x0, bbox.y0], [bbox.x1, bbox.y1])
    }
}

impl PointDistance for Entry {
    fn distance_2(&self, point: &[f64; 2]) -> f64 {
        let distance = self.span.nearest(Point::from((point[0], point[1]))).distance;
        distance * distance
    }
}

impl SpanIndex {
    /// The index of `spans`, which must be finite.
    pub fn new(spans: impl IntoIterator<Item = Span>) -> Self {
        let entries = spans.into_iter().enumerate().map(|(id, span)| Entry { span, id }).collect();
        Self { tree: RTree::bulk_load(entries) }
    }

    /// The span nearest to `p`, with its number in the order given; `None` when there are none.
    pub fn nearest(&self, p: Point) -> Option<(usize, Span)> {
        // The search for a single neighbour prunes by bounds that a box's rounding can undercut, and then misses the
        // nearest span altogether (seen: by millimetres); the search in order of distance does not.
        self.tree.nearest_neighbor_iter([p.x, p.y]).next().map(|entry| (entry.id, entry.span))
    }

    /// The distance from `p` to the nearest of the spans, in mm; infinite when there are none.
    pub fn distance(&self, p: Point) -> f64 {
        self.nearest(p).map_or(f64::INFINITY, |(_, span)| span.nearest(p).distance)
    }

    /// The spans whose upright boxes meet the box from `low` to `high`, in no particular order.
    pub fn meeting(&self, low: Point, high: Point) -> impl Iterator<Item = Span> + '_ {
        let area = AABB::from_corners([low.x, low.y], [high.x, high.y]);
        self.tree.locate_in_envelope_intersecting(area).map(|entry| entry.span)
    }

    /// An upper bound of the largest distance from a point of `span` to the set, with the place: as near to the true
    /// one as it takes to tell whether that is above `limit`, which is then met within a five-hundredth. Infinite
    /// when the set is empty.
    pub fn farthest(&self, span: &Span, limit: f64) -> (f64, Point) {
        let mut worst = (0.0, span.start);
        let mut pieces = vec![*span];
        while let Some(piece) = pieces.pop() {
            let middle = piece.at(0.5);
            let Some((_, near)) = self.nearest(middle) else { return (f64::INFINITY, middle) };
            let here = near.nearest(middle).distance;
            let bound = bound(&piece, &near, here);
            if here > limit {
                return (here, middle);
            }
            if bound <= limit || piece.length() <= limit / 250.0 {
                worst = if bound > worst.0 { (bound, middle) } else { worst };
            } else {
                pieces.extend([piece.part(0.0, 0.5), piece.part(0.5, 1.0)]);
            }
        }
        worst
    }
}

/// A bound of the distance from any point of `piece` to the span `near`, which is at the distance `here` from its
/// middle. Distance changes no faster than one moves; and distance to a straight span is convex along a straight one.
fn bound(piece: &Span, near: &Span, here: f64) -> f64 {
    let by_length = here + piece.length() / 2.0;
    if !near.is_line() {
        return by_length;
    }
    let ends = near.nearest(piece.start).distance.max(near.nearest(piece.end).distance);
    by_length.min(ends + piece.sagitta())
}
