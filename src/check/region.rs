//! The region that the drawing encloses, by even and odd, and how far places are from its border.

use kurbo::Point;

use crate::geom::{Span, SpanIndex};

/// A region with an indexed border.
pub(super) struct Region {
    spans: Vec<Span>,
    index: SpanIndex,
}

impl Region {
    /// The region bounded by `spans`, in any order and direction.
    pub(super) fn new(spans: Vec<Span>) -> Self {
        Self { index: SpanIndex::new(spans.iter().copied()), spans }
    }

    /// The spans of the border, in the order given.
    pub(super) fn spans(&self) -> &[Span] {
        &self.spans
    }

    /// The distance from `p` to the border; infinite when there is none.
    pub(super) fn distance(&self, p: Point) -> f64 {
        self.index.nearest(p).map_or(f64::INFINITY, |(_, span)| span.nearest(p).distance)
    }

    /// True when a ray from `p` crosses the border an odd number of times.
    pub(super) fn contains(&self, p: Point) -> bool {
        let ray = self.index.meeting(p, Point::new(f64::MAX, p.y));
        ray.filter(|span| span.crosses_level_ray(p)).count() % 2 == 1
    }
}
