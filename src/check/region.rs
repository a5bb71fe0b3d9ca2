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
        ray.filter(|span| crosses(span, p)).count() % 2 == 1
    }
}

/// True when the ray from `p` towards larger x crosses the span an odd number of times: once for the chord, and once
/// more when `p` lies between chord and arc.
fn crosses(span: &Span, p: Point) -> bool {
    let (a, b) = (span.start, span.end);
    let spanned = (a.y > p.y) != (b.y > p.y);
    // Ends as high as `p` count as lower; so a place on a level chord counts as a hair above it.
    let across = (b - a).cross(p - a);
    let left_of = across > 0.0 || (across == 0.0 && b.x > a.x);
    let chord = spanned && (left_of == (b.y > a.y));
    let between = span.centre().is_some_and(|centre| {
        let on_arc_side = left_of != (span.bulge > 0.0);
        on_arc_side && p.distance(centre) < span.radius()
    });
    chord != between
}
