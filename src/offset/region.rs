//! The region to keep: its outline with the waste on the left, and the questions asked of it.

use kurbo::{Point, Rect};
use rstar::primitives::{GeomWithData, Rectangle};
use rstar::{AABB, RTree};

use crate::error::{Error, Kind};
use crate::geom::{ArcSpline, Span, crossings};

use super::chain::Fault;
use super::{CentreLine, Side};

/// A span's box with the span's number.
pub(super) type Boxed = GeomWithData<Rectangle<[f64; 2]>, usize>;

/// The loops of an outline, each with the waste on its left.
pub(super) struct Region {
    pub(super) loops: Vec<ArcSpline>,
    /// Below this distance, in mm, two places are one: tangent contacts are known to half the digits only.
    pub(super) snap: f64,
    side: Side,
    spans: Vec<Span>,
    index: RTree<Boxed>,
}

impl Region {
    /// The region that `loops` bound, ready to be followed at `radius`.
    pub(super) fn new(loops: &[ArcSpline], radius: f64, side: Side) -> Result<Self, Error> {
        for (i, chain) in loops.iter().enumerate() {
            check_loop(i, chain)?;
        }
        let bbox = loops.iter().filter_map(ArcSpline::bbox).reduce(|a, b| a.union(b)).unwrap_or_default();
        let scale = bbox.width().hypot(bbox.height()) + bbox.origin().to_vec2().hypot() + radius;
        let loops = oriented(loops, side);
        let spans: Vec<Span> = loops.iter().flat_map(ArcSpline::spans).collect();
        let index = RTree::bulk_load(spans.iter().enumerate().map(|(i, s)| boxed(s.bbox(), i)).collect());
        let region = Self { loops, snap: f64::EPSILON.sqrt() * scale, side, spans, index };
        region.refuse_self_crossings()?;
        Ok(region)
    }

    /// The distance from `p` to the outline, in mm.
    pub(super) fn distance(&self, p: Point) -> f64 {
        let mut best = f64::INFINITY;
        for (boxed, lower_squared) in self.index.nearest_neighbor_iter_with_distance_2([p.x, p.y]) {
            if lower_squared >= best * best {
                break;
            }
            best = best.min(self.spans[boxed.data].nearest(p).distance);
        }
        best
    }

    /// True for a point on the side that the cutter stays on.
    fn on_side(&self, p: Point) -> bool {
        let inside = self.loops.iter().map(|chain| chain.winding(p)).sum::<i32>() != 0;
        inside == (self.side == Side::Inside)
    }

    /// A line of the cutter's centre must be on its side and nowhere closer than the radius.
    pub(super) fn verify(&self, line: &CentreLine, radius: f64) -> Result<(), Fault> {
        let first = line.path.vertices[0].at;
        if !self.on_side(first) {
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

    /// An outline that crosses itself has no side that could be followed.
    fn refuse_self_crossings(&self) -> Result<(), Error> {
        for (i, span) in self.spans.iter().enumerate() {
            let bbox = envelope(span.bbox());
            for other in self.index.locate_in_envelope_intersecting(bbox).map(|b| b.data).filter(|&j| j > i) {
                let cross = |c: &crate::geom::Crossing| crosses(span, &self.spans[other], c, self.snap);
                if let Some(c) = crossings(span, &self.spans[other], self.snap).iter().find(|c| cross(c)) {
                    return Err(self_crossing(c.at));
                }
            }
        }
        Ok(())
    }
}

/// True where two spans pass through each other, clear of their ends: a touch leaves the sides as they are.
fn crosses(a: &Span, b: &Span, c: &crate::geom::Crossing, snap: f64) -> bool {
    let clear = |span: &Span, t: f64| (t * span.length()).min((1.0 - t) * span.length()) > snap;
    let angle = a.tangent(c.t).cross(b.tangent(c.u));
    // Flatter than this, the two are within a snap of each other for a thousand snaps: a touch.
    clear(a, c.t) && clear(b, c.u) && angle.abs() > 1e-3
}

/// A box for the index.
pub(super) fn boxed(bbox: Rect, data: usize) -> Boxed {
    GeomWithData::new(Rectangle::from_corners([bbox.x0, bbox.y0], [bbox.x1, bbox.y1]), data)
}

/// A box to look up.
pub(super) fn envelope(bbox: Rect) -> AABB<[f64; 2]> {
    AABB::from_corners([bbox.x0, bbox.y0], [bbox.x1, bbox.y1])
}

/// The loops turned so that the waste is on their left: by the number of loops around each, even and odd.
fn oriented(loops: &[ArcSpline], side: Side) -> Vec<ArcSpline> {
    let boxes: Vec<Rect> = loops.iter().map(|chain| chain.bbox().unwrap_or_default()).collect();
    let turned = |(i, chain): (usize, &ArcSpline)| {
        let at = chain.span(0).at(0.5);
        let around = |j: usize| j != i && boxes[j].contains(at) && loops[j].winding(at) != 0;
        let is_hole = (0..loops.len()).filter(|&j| around(j)).count() % 2 == 1;
        // The region is left of a counter-clockwise outer loop and of a clockwise hole.
        let region_left = (chain.area() > 0.0) != is_hole;
        if region_left == (side == Side::Inside) { chain.clone() } else { chain.reversed() }
    };
    loops.iter().enumerate().map(turned).map(without_points).collect()
}

/// The chain without spans that have no length.
fn without_points(mut chain: ArcSpline) -> ArcSpline {
    let mut spans = chain.spans().collect::<Vec<_>>().into_iter();
    chain.vertices.retain(|_| spans.next().is_some_and(|s| s.start != s.end));
    chain
}

fn check_loop(i: usize, chain: &ArcSpline) -> Result<(), Error> {
    let finite = chain.vertices.iter().all(|v| v.at.is_finite() && v.bulge.is_finite());
    if chain.closed && finite && chain.area() != 0.0 {
        return Ok(());
    }
    let at = chain.vertices.first().map_or(Point::ORIGIN, |v| v.at);
    let what = if chain.closed { "encloses no area" } else { "is open, and has no inside" };
    Err(Error::new(Kind::Refused, format!("outline {} at ({:.3}, {:.3}) {what}", i + 1, at.x, at.y))
        .remedy("close it in the drawing, join its ends with a larger --join, or cut it with --side on"))
}

fn self_crossing(at: Point) -> Error {
    Error::new(
        Kind::Refused,
        format!("the outline crosses itself at ({:.3}, {:.3}): which side is waste is not known", at.x, at.y),
    )
    .remedy("part the lines in the drawing, or cut it with --side on")
}
