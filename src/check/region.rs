//! The region that the drawing encloses, by even and odd, and how far places are from its border.

use kurbo::Point;

use crate::geom::{Span, SpanIndex};

/// A region with an indexed border.
pub(super) struct Region {
    spans: Vec<Span>,
    index: SpanIndex,
    /// The border by how much further than usual the cutter keeps off.
    by_extra: Vec<(f64, SpanIndex)>,
}

impl Region {
    /// The region bounded by `spans`, in any order and direction; `extra` is, for each, how much further than usual
    /// the cutter keeps off it, in mm.
    pub(super) fn new(spans: Vec<Span>, extra: &[f64]) -> Self {
        let mut steps = extra.to_vec();
        steps.sort_by(f64::total_cmp);
        steps.dedup();
        let with = |step: f64| {
            let own = spans.iter().zip(extra).filter(move |(_, own)| own.total_cmp(&step).is_eq());
            (step, SpanIndex::new(own.map(|(&span, _)| span)))
        };
        let by_extra = steps.into_iter().map(with).collect();
        Self { index: SpanIndex::new(spans.iter().copied()), by_extra, spans }
    }

    /// The spans of the border, in the order given.
    pub(super) fn spans(&self) -> &[Span] {
        &self.spans
    }

    /// The distance from `p` to the border, less what the cutter keeps off it further than usual; infinite when there
    /// is no border.
    pub(super) fn distance(&self, p: Point) -> f64 {
        let to = |(extra, index): &(f64, SpanIndex)| index.distance(p) - extra;
        self.by_extra.iter().map(to).fold(f64::INFINITY, f64::min)
    }

    /// The place in the order given of the span nearest to `p`; `None` when there is none.
    pub(super) fn nearest(&self, p: Point) -> Option<usize> {
        self.index.nearest(p).map(|(k, _)| k)
    }

    /// True when a ray from `p` crosses the border an odd number of times.
    pub(super) fn contains(&self, p: Point) -> bool {
        let ray = self.index.meeting(p, Point::new(f64::MAX, p.y));
        ray.filter(|span| span.crosses_level_ray(p)).count() % 2 == 1
    }
}
