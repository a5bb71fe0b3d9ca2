//! What limits the cutter: the tightest curve of a contour, and the largest disc that fits inside.

use std::cmp::Ordering;
use std::collections::BinaryHeap;

use kurbo::{Point, Rect};
use rstar::{AABB, PointDistance, RTree, RTreeObject};

use crate::geom::{ArcSpline, Span};
use crate::sketch::Contour;

use super::corners::Bends;
use super::nesting::Ray;
use super::{CornerPlace, Roughness, Texture};

/// The smallest radius of a contour's curves in mm, its corners left out; `None` where nothing is curved.
///
/// Exact where the contour holds arcs. Of a trace it is an estimate: the least radius of the circles through a vertex
/// and the points an arm before and after it, with the shortest arms on which noise changes it by
/// less than a quarter at one vertex; under noise, within a half.
pub fn smallest_radius(path: &ArcSpline, roughness: &Roughness, corners: &[CornerPlace]) -> Option<f64> {
    let arcs = path.spans().filter(|s| !s.is_line()).map(|s| s.radius());
    if let Some(radius) = arcs.min_by(f64::total_cmp) {
        return Some(radius);
    }
    if roughness.texture == Texture::Drawn {
        return None;
    }
    Bends::of(path, roughness.sigma_mm).smallest_radius(corners)
}

/// No cutter is thinner.
const THINNEST_MM: f64 = 0.1;
/// A gap this small a part of the contour's box is not searched.
const FINEST_PART: f64 = 1e-5;

/// The diameter in mm of the largest disc inside a closed contour, whatever lies inside it: the largest cutter that
/// goes in at all. Within one part in two hundred of the true one; `None` for an open contour, or where no disc of a
/// tenth of a millimetre, or of a hundred-thousandth of the contour's size, goes in.
///
/// Boxes that cover the inside are halved, the most promising first: no place of a box is further from the contour
/// than its centre is, plus half its diagonal. The search ends when no box can better the best by that part.
pub fn largest_disc(contour: &Contour) -> Option<f64> {
    let path = &contour.path;
    let bbox = path.bbox().filter(|_| path.closed)?;
    let inside = Inside::of(contour);
    let mut boxes = BinaryHeap::from([inside.weigh(bbox)]);
    let mut best = 0.0_f64;
    let finest = THINNEST_MM.max(bbox.width().hypot(bbox.height()) * FINEST_PART) / 2.0;
    while let Some(most) = boxes.pop() {
        if most.bound <= finest.max(best * (1.0 + 1.0 / 200.0)) {
            break;
        }
        for quarter in quarters(most.area) {
            let weighed = inside.weigh(quarter);
            best = best.max(weighed.radius);
            boxes.push(weighed);
        }
    }
    (best > finest).then_some(2.0 * best)
}

/// A contour that can be asked how far a place is inside it.
struct Inside<'a> {
    contour: &'a Contour,
    edges: RTree<Edge>,
    ray: Ray,
}

impl<'a> Inside<'a> {
    fn of(contour: &'a Contour) -> Self {
        let edges = RTree::bulk_load(contour.path.spans().map(Edge).collect());
        Self { contour, edges, ray: Ray::tree(std::slice::from_ref(contour)) }
    }

    fn weigh(&self, area: Rect) -> Weighed {
        let centre = area.center();
        // Not `nearest_neighbor`, whose bounds rounding can undercut: it then misses the nearest span.
        let nearest = self.edges.nearest_neighbor_iter([centre.x, centre.y]).next();
        let distance = nearest.map_or(0.0, |edge| edge.0.nearest(centre).distance);
        let inside = !self.ray.holders(std::slice::from_ref(self.contour), centre).is_empty();
        let radius = if inside { distance } else { -distance };
        Weighed { area, radius, bound: radius + area.width().hypot(area.height()) / 2.0 }
    }
}

/// A box, how far its centre is inside, and how far any of its places can be.
struct Weighed {
    area: Rect,
    radius: f64,
    bound: f64,
}

impl Ord for Weighed {
    fn cmp(&self, other: &Self) -> Ordering {
        self.bound.total_cmp(&other.bound)
    }
}

impl PartialOrd for Weighed {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl PartialEq for Weighed {
    fn eq(&self, other: &Self) -> bool {
        self.cmp(other).is_eq()
    }
}

impl Eq for Weighed {}

fn quarters(area: Rect) -> [Rect; 4] {
    let centre = area.center();
    let corners = [(area.x0, area.y0), (area.x1, area.y0), (area.x0, area.y1), (area.x1, area.y1)];
    corners.map(|corner| Rect::from_points(centre, corner))
}

/// A span that a spatial index can hold.
struct Edge(Span);

impl RTreeObject for Edge {
    type Envelope = AABB<[f64; 2]>;

    fn envelope(&self) -> Self::Envelope {
        let b = self.0.bbox();
        AABB::from_corners([b.x0, b.y0], [b.x1, b.y1])
    }
}

impl PointDistance for Edge {
    fn distance_2(&self, point: &[f64; 2]) -> f64 {
        self.0.nearest(Point::new(point[0], point[1])).distance.powi(2)
    }
}
