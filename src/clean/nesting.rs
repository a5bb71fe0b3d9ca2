//! Which contour lies inside which: outlines, holes, islands.

use std::collections::BTreeMap;

use kurbo::Point;
use rstar::primitives::{GeomWithData, Rectangle};
use rstar::{AABB, RTree};

use crate::sketch::Contour;

/// What a contour bounds.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Role {
    /// Nothing: the contour is open.
    Open,
    /// A part, from outside.
    Outer,
    /// A hole in a part.
    Hole,
    /// A part inside a hole.
    Island,
}

impl Role {
    /// The role's name in tables and reports.
    pub fn name(self) -> &'static str {
        match self {
            Self::Open => "open",
            Self::Outer => "outer",
            Self::Hole => "hole",
            Self::Island => "island",
        }
    }
}

/// Where a contour stands among the others.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Nest {
    /// What it bounds.
    pub role: Role,
    /// How many closed contours it lies in.
    pub depth: usize,
    /// The index of the closest contour around it.
    pub parent: Option<usize>,
}

/// For each contour where it stands, in the same order.
///
/// A contour lies in another if two of three places along it do, so that contours which share an edge lie beside each
/// other. Contours that cross have no sound answer: look for crossings first. Time is n log n in the spans, and for
/// each contour the spans that one level line meets.
pub fn nesting(contours: &[Contour]) -> Vec<Nest> {
    let tree = Ray::tree(contours);
    let areas: Vec<f64> = contours.iter().map(|c| c.path.area().abs()).collect();
    let nest = |i: usize| {
        if !contours[i].path.closed {
            return Nest { role: Role::Open, depth: 0, parent: None };
        }
        let mut around = containers(contours, i, &tree);
        around.retain(|&j| areas[j] > areas[i]);
        let parent = around.iter().copied().min_by(|&j, &k| areas[j].total_cmp(&areas[k]));
        let role = match around.len() {
            0 => Role::Outer,
            odd if odd % 2 == 1 => Role::Hole,
            _ => Role::Island,
        };
        Nest { role, depth: around.len(), parent }
    };
    (0..contours.len()).map(nest).collect()
}

/// The closed contours that hold at least two of three places of contour `i`.
fn containers(contours: &[Contour], i: usize, ray: &Ray) -> Vec<usize> {
    let path = &contours[i].path;
    let mut votes: BTreeMap<usize, usize> = BTreeMap::new();
    for (k, t) in [0.3, 0.5, 0.7].into_iter().enumerate() {
        let probe = path.span(k * path.len() / 3).at(t);
        for j in ray.holders(contours, probe) {
            *votes.entry(j).or_default() += 1;
        }
    }
    votes.into_iter().filter(|&(j, count)| j != i && count >= 2).map(|(j, _)| j).collect()
}

/// The box of a span, with its contour and its number there.
type Boxed = GeomWithData<Rectangle<[f64; 2]>, (usize, usize)>;

/// All spans of the closed contours, to be met by level rays.
pub(super) struct Ray {
    tree: RTree<Boxed>,
    right: f64,
}

impl Ray {
    pub(super) fn tree(contours: &[Contour]) -> Self {
        let closed = contours.iter().enumerate().filter(|(_, c)| c.path.closed);
        let spans = closed.flat_map(|(i, c)| {
            c.path.spans().enumerate().map(move |(k, span)| {
                let b = span.bbox();
                GeomWithData::new(Rectangle::from_corners([b.x0, b.y0], [b.x1, b.y1]), (i, k))
            })
        });
        let right =
            contours.iter().filter_map(|c| c.path.bbox()).map(|b| b.x1).fold(f64::NEG_INFINITY, f64::max);
        Self { tree: RTree::bulk_load(spans.collect()), right }
    }

    /// The contours with `p` inside: those whose spans a ray to the right meets an odd number of times.
    pub(super) fn holders(&self, contours: &[Contour], p: Point) -> Vec<usize> {
        let ray = AABB::from_corners([p.x, p.y], [self.right.max(p.x), p.y]);
        let mut odd: BTreeMap<usize, bool> = BTreeMap::new();
        for item in self.tree.locate_in_envelope_intersecting(ray) {
            let (i, k) = item.data;
            if contours[i].path.span(k).crosses_level_ray(p) {
                *odd.entry(i).or_default() ^= true;
            }
        }
        odd.into_iter().filter(|&(_, odd)| odd).map(|(i, _)| i).collect()
    }
}
