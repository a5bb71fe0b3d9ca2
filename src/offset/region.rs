//! The region to keep: its outline with the waste on the left, and the questions asked of it.

use kurbo::{Point, Rect};
use rstar::AABB;
use rstar::primitives::{GeomWithData, Rectangle};

use crate::error::{Error, Kind};
use crate::geom::{ArcSpline, SpanIndex};

use super::chain::Fault;
use super::simple::{Drawn, Loop};
use super::{CentreLine, Side, undecided};

/// A span's box with the span's number.
pub(super) type Boxed = GeomWithData<Rectangle<[f64; 2]>, usize>;

/// The outline of a region, ready to be followed.
pub(super) struct Region {
    pub(super) loops: Vec<Loop>,
    /// The places where the drawn loops cross or touch themselves or each other.
    pub(super) contacts: Vec<Point>,
    /// Below this distance, in mm, two places are one: tangent contacts are known to half the digits only.
    pub(super) snap: f64,
    drawn: Drawn,
    outline: SpanIndex,
}

impl Region {
    /// The region that `loops` bound, ready to be followed at `radius`.
    pub(super) fn new(loops: &[ArcSpline], radius: f64, side: Side) -> Result<Self, Error> {
        for (i, chain) in loops.iter().enumerate() {
            check_loop(i, chain)?;
        }
        let bbox = loops.iter().filter_map(ArcSpline::bbox).reduce(|a, b| a.union(b)).unwrap_or_default();
        let scale = bbox.width().hypot(bbox.height()) + bbox.origin().to_vec2().hypot() + radius;
        let snap = f64::EPSILON.sqrt() * scale;
        let drawn = Drawn::new(loops, side);
        let (loops, contacts) = drawn.simple(snap).map_err(undecided)?;
        let outline = SpanIndex::new(loops.iter().flat_map(|l| l.path.spans()));
        Ok(Self { loops, contacts, snap, drawn, outline })
    }

    /// The distance from `p` to the outline, in mm; infinite when nothing bounds the region.
    pub(super) fn distance(&self, p: Point) -> f64 {
        self.outline.distance(p)
    }

    /// True when the outline has a joint within `reach` mm of `p`.
    pub(super) fn has_vertex_at(&self, p: Point, reach: f64) -> bool {
        let near = self.outline.nearest(p);
        near.is_some_and(|(_, span)| span.start.distance(p) <= reach || span.end.distance(p) <= reach)
    }

    /// A line of the cutter's centre must be on its side and nowhere closer than the radius.
    pub(super) fn verify(&self, line: &CentreLine, radius: f64) -> Result<(), Fault> {
        let first = line.path.vertices[0].at;
        if !self.drawn.is_waste(first) {
            return Err(Fault { at: first });
        }
        const SAMPLES: u32 = 4;
        for span in line.path.spans() {
            for k in 0..SAMPLES {
                let at = span.at(f64::from(k) / f64::from(SAMPLES));
                if self.distance(at) < radius - 4.0 * self.snap {
                    return Err(Fault { at });
                }
            }
        }
        Ok(())
    }
}

/// A box for the index.
pub(super) fn boxed(bbox: Rect, data: usize) -> Boxed {
    GeomWithData::new(Rectangle::from_corners([bbox.x0, bbox.y0], [bbox.x1, bbox.y1]), data)
}

/// A box to look up.
pub(super) fn envelope(bbox: Rect) -> AABB<[f64; 2]> {
    AABB::from_corners([bbox.x0, bbox.y0], [bbox.x1, bbox.y1])
}

fn check_loop(i: usize, chain: &ArcSpline) -> Result<(), Error> {
    let finite = chain.vertices.iter().all(|v| v.at.is_finite() && v.bulge.is_finite());
    if chain.closed && finite && chain.len() > 1 {
        return Ok(());
    }
    let at = chain.vertices.first().map_or(Point::ORIGIN, |v| v.at);
    let what = if chain.closed { "is a point" } else { "is open, and has no inside" };
    Err(Error::new(Kind::Refused, format!("outline {} at ({:.3}, {:.3}) {what}", i + 1, at.x, at.y))
        .remedy("close it in the drawing, join its ends with a larger --join, or cut it with --side on"))
}
