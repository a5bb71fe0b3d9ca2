//! Loose pieces chained into contours, whatever their order and direction.
//!
//! Ends that meet exactly are joined first: two by two, then chains whose two ends are at one point, then the
//! straightest pairs. The ends still free are joined over gaps, the smallest gap first. Each rule looks at where the
//! ends are, never at the order in which the pieces were drawn.

use std::cmp::Ordering;

use kurbo::{Point, Vec2};
use rstar::RTree;
use rstar::primitives::GeomWithData;

use crate::geom::{ArcSpline, Vertex};
use crate::sketch::Contour;

use super::{Counts, Flaw, FlawKind};

/// A closed contour is worth a word only when its gap is at most this part of its length.
const NEARLY: f64 = 0.05;

/// A gap is closed only when the chain that it closes is at least this many times as long: a short straight line
/// has its own ends near each other, and is no ring.
const RING: f64 = 3.0;

/// How many of the free ends near another are weighed as its partner.
const PARTNERS: usize = 8;

/// Chains the open contours among `contours`, closing gaps of up to `join_mm`; the closed ones pass through.
pub(super) fn chain(
    contours: Vec<Contour>,
    join_mm: f64,
    counts: &mut Counts,
    flaws: &mut Vec<Flaw>,
) -> Vec<Contour> {
    let (mut done, mut pieces): (Vec<_>, Vec<_>) = contours.into_iter().partition(|c| c.path.closed);
    pieces.sort_by(|a, b| settings(a).cmp(&settings(b)));
    let mut links = Links::new(&pieces);
    links.join_exact(flaws);
    counts.joints = links.joined;
    links.join_gaps(join_mm, flaws);
    counts.gaps_closed = links.joined - counts.joints;
    let chains = links.chains();
    counts.chained = pieces.len() - chains.len();
    done.extend(chains.iter().map(|members| assemble(&pieces, members)));
    done.sort_by_key(|c| c.id);
    done
}

/// The flaw of a contour that is open by little.
pub(super) fn nearly_closed(contour: &Contour) -> Option<Flaw> {
    let path = &contour.path;
    let (first, last) = (path.vertices.first()?.at, path.vertices.last()?.at);
    let gap = first.distance(last);
    let open = !path.closed && gap <= NEARLY * path.length();
    open.then_some(Flaw {
        kind: FlawKind::NearlyClosed,
        contour: contour.id,
        vertex: path.vertices.len(),
        at: last,
        size: gap,
        other: None,
    })
}

/// What two pieces must share to be parts of one contour.
pub(super) fn settings(contour: &Contour) -> (&str, &str) {
    (&contour.layer, &contour.colour)
}

/// End `2 i` is the start of piece `i`, end `2 i + 1` its finish.
type End = usize;

/// Which ends are joined.
struct Links<'a> {
    pieces: &'a [Contour],
    /// The number of the settings of each piece: equal for pieces that may be joined.
    group: Vec<usize>,
    /// The end that each end is joined to.
    mate: Vec<Option<End>>,
    /// For the free end of a chain, its other free end.
    far: Vec<End>,
    /// For the free end of a chain, the chain's length in mm.
    length: Vec<f64>,
    joined: usize,
}

impl<'a> Links<'a> {
    fn new(pieces: &'a [Contour]) -> Self {
        let mut group = vec![0; pieces.len()];
        for i in 1..pieces.len() {
            group[i] = group[i - 1] + usize::from(settings(&pieces[i]) != settings(&pieces[i - 1]));
        }
        let ends = 2 * pieces.len();
        let length = pieces.iter().flat_map(|c| [c.path.length(); 2]).collect();
        Self {
            pieces,
            group,
            mate: vec![None; ends],
            far: (0..ends).map(|e| e ^ 1).collect(),
            length,
            joined: 0,
        }
    }

    fn at(&self, end: End) -> Point {
        let vertices = &self.pieces[end / 2].path.vertices;
        if end.is_multiple_of(2) { vertices[0].at } else { vertices[vertices.len() - 1].at }
    }

    /// The unit vector from an end into its piece.
    fn inward(&self, end: End) -> Vec2 {
        let path = &self.pieces[end / 2].path;
        if end.is_multiple_of(2) {
            path.span(0).tangent(0.0)
        } else {
            -path.span(path.len() - 1).tangent(1.0)
        }
    }

    fn is_free(&self, end: End) -> bool {
        self.mate[end].is_none()
    }

    fn link(&mut self, a: End, b: End) {
        self.mate[a] = Some(b);
        self.mate[b] = Some(a);
        let (far_a, far_b) = (self.far[a], self.far[b]);
        let length = self.length[a] + self.length[b];
        self.far[far_a] = far_b;
        self.far[far_b] = far_a;
        self.length[far_a] = length;
        self.length[far_b] = length;
        self.joined += 1;
    }

    /// By settings, then by place.
    fn order(&self, a: End, b: End) -> Ordering {
        self.group[a / 2].cmp(&self.group[b / 2]).then(by_place(self.at(a), self.at(b)))
    }

    /// Joins ends that meet exactly.
    fn join_exact(&mut self, flaws: &mut Vec<Flaw>) {
        let mut ends: Vec<End> = (0..self.mate.len()).collect();
        ends.sort_unstable_by(|&a, &b| self.order(a, b));
        let mut nodes: Vec<&[End]> = ends.chunk_by(|&a, &b| self.order(a, b).is_eq()).collect();
        for node in &nodes {
            if let &[a, b] = *node {
                self.link(a, b);
            }
        }
        nodes.retain(|node| node.len() > 2);
        nodes.iter().for_each(|node| self.close_loops(node));
        nodes.iter().for_each(|node| self.join_straightest(node));
        // Chains grown longer may be loops now.
        nodes.iter().for_each(|node| self.close_loops(node));
        flaws.extend(nodes.iter().map(|node| self.junction(node)));
    }

    /// Closes the chains that both start and finish at this node.
    fn close_loops(&mut self, node: &[End]) {
        for &end in node {
            let far = self.far[end];
            if self.is_free(end) && self.order(end, far).is_eq() && far != end {
                self.link(end, far);
            }
        }
    }

    /// Joins the free ends at a node in pairs that bend by less than a right angle, the straightest first.
    fn join_straightest(&mut self, node: &[End]) {
        let mut free: Vec<(End, Vec2)> =
            node.iter().filter(|&&e| self.is_free(e)).map(|&e| (e, self.inward(e))).collect();
        free.sort_by(|a, b| by_place(a.1.to_point(), b.1.to_point()));
        let mut pairs: Vec<(f64, End, End)> = Vec::new();
        for (i, (a, u)) in free.iter().enumerate() {
            pairs.extend(free[i + 1..].iter().map(|(b, v)| (u.dot(*v), *a, *b)).filter(|p| p.0 < 0.0));
        }
        pairs.sort_by(|p, q| p.0.total_cmp(&q.0));
        for (_, a, b) in pairs {
            if self.is_free(a) && self.is_free(b) {
                self.link(a, b);
            }
        }
    }

    fn junction(&self, node: &[End]) -> Flaw {
        let end = node.iter().copied().min_by_key(|e| self.pieces[e / 2].id).unwrap_or(node[0]);
        self.flaw(FlawKind::Junction, end, node.len() as f64, None)
    }

    fn flaw(&self, kind: FlawKind, end: End, size: f64, other: Option<End>) -> Flaw {
        let piece = &self.pieces[end / 2];
        let vertex = if end.is_multiple_of(2) { 1 } else { piece.path.vertices.len() };
        let other = other.map(|e| self.pieces[e / 2].id);
        Flaw { kind, contour: piece.id, vertex, at: self.at(end), size, other }
    }

    /// Joins ends that are apart by at most `join_mm`, nearest first.
    fn join_gaps(&mut self, join_mm: f64, flaws: &mut Vec<Flaw>) {
        for (gap, a, b) in self.gaps(join_mm) {
            let ring = self.far[a] == b;
            if !self.is_free(a) || !self.is_free(b) || (ring && RING * gap > self.length[a]) {
                continue;
            }
            self.link(a, b);
            let (low, high) = if self.pieces[a / 2].id <= self.pieces[b / 2].id { (a, b) } else { (b, a) };
            flaws.push(self.flaw(FlawKind::Gap, low, gap, Some(high)));
        }
    }

    /// The pairs of free ends at most `join_mm` apart with their distance, nearest first.
    fn gaps(&self, join_mm: f64) -> Vec<(f64, End, End)> {
        let free = (0..self.mate.len()).filter(|&e| self.is_free(e));
        let tree = RTree::bulk_load(
            free.map(|e| GeomWithData::new([self.at(e).x, self.at(e).y], e)).collect::<Vec<_>>(),
        );
        let mut pairs = Vec::new();
        for end in tree.iter() {
            let near = tree
                .nearest_neighbor_iter_with_distance_2(*end.geom())
                .take_while(|(_, squared)| *squared <= join_mm * join_mm)
                // What meets exactly was settled before.
                .filter(|(_, squared)| *squared > 0.0)
                .take(PARTNERS)
                .filter(|(other, _)| self.group[other.data / 2] == self.group[end.data / 2]);
            pairs.extend(near.map(|(other, squared)| {
                (squared.sqrt(), end.data.min(other.data), end.data.max(other.data))
            }));
        }
        let places = |&(_, a, b): &(f64, End, End)| {
            let (p, q) = (self.at(a), self.at(b));
            if by_place(p, q).is_le() { (p, q) } else { (q, p) }
        };
        pairs.sort_by(|x, y| {
            let (p, q) = (places(x), places(y));
            let bend = |pair: &(f64, End, End)| self.inward(pair.1).dot(self.inward(pair.2));
            let place = by_place(p.0, q.0).then(by_place(p.1, q.1));
            x.0.total_cmp(&y.0).then(place).then_with(|| bend(x).total_cmp(&bend(y)))
        });
        pairs
    }

    /// The ends at which the pieces of each chain are entered, in order.
    fn chains(&self) -> Vec<Chain> {
        let mut seen = vec![false; self.pieces.len()];
        let free = (0..self.mate.len()).filter(|&e| self.is_free(e));
        // Free ends first, so that an open chain is walked from one of them; what is left is rings.
        let mut chains = Vec::new();
        for start in free.chain((0..self.pieces.len()).map(|i| 2 * i)) {
            if seen[start / 2] {
                continue;
            }
            chains.push(self.walk(start, &mut seen));
        }
        chains
    }

    fn walk(&self, start: End, seen: &mut [bool]) -> Chain {
        let mut chain = Chain { entries: vec![start], closed: false };
        seen[start / 2] = true;
        let mut end = start;
        while let Some(next) = self.mate[end ^ 1] {
            if next == start {
                chain.closed = true;
                break;
            }
            seen[next / 2] = true;
            chain.entries.push(next);
            end = next;
        }
        chain
    }
}

/// Pieces in the order they follow each other, each by the end at which it is entered.
struct Chain {
    entries: Vec<End>,
    closed: bool,
}

/// The contour that a chain of pieces makes. One of several pieces starts at its lowest place and runs
/// counter-clockwise if closed, so that neither the order nor the direction of the pieces is seen in it.
fn assemble(pieces: &[Contour], chain: &Chain) -> Contour {
    let members = || chain.entries.iter().map(|&end| &pieces[end / 2]);
    let lowest = members().min_by_key(|c| c.id).unwrap_or(&pieces[chain.entries[0] / 2]);
    let mut path = ArcSpline { vertices: Vec::new(), closed: chain.closed };
    for &end in &chain.entries {
        let piece = &pieces[end / 2].path;
        if end.is_multiple_of(2) {
            append(&mut path.vertices, piece)
        } else {
            append(&mut path.vertices, &piece.reversed())
        }
    }
    if path.closed && path.vertices.first().map(|v| v.at) == path.vertices.last().map(|v| v.at) {
        path.vertices.pop();
    }
    let path = if chain.entries.len() > 1 { canonical(path) } else { path };
    Contour { path, ..super::contour_without_path(lowest) }
}

/// Adds an open piece; where it does not start at the last vertex, a straight line bridges the gap.
fn append(vertices: &mut Vec<Vertex>, piece: &ArcSpline) {
    if vertices.last().map(|v| v.at) == piece.vertices.first().map(|v| v.at) {
        vertices.pop();
    }
    vertices.extend_from_slice(&piece.vertices);
}

/// The same path from its lowest place, a ring counter-clockwise; a ring that encloses nothing goes to its lower
/// neighbour first.
fn canonical(path: ArcSpline) -> ArcSpline {
    let last = path.vertices.len() - 1;
    let at = |path: &ArcSpline, k: usize| path.vertices[k].at;
    if !path.closed {
        return if by_place(at(&path, last), at(&path, 0)).is_lt() { path.reversed() } else { path };
    }
    let lowest = (0..=last).min_by(|&i, &j| by_place(at(&path, i), at(&path, j)));
    let path = path.started_at(lowest.unwrap_or(0));
    let area = path.area();
    let encloses = area.abs() > f64::EPSILON * path.length().powi(2);
    let forward =
        if encloses { area > 0.0 } else { by_place(at(&path, 1 % (last + 1)), at(&path, last)).is_le() };
    if forward { path } else { path.reversed() }
}

/// By X, then by Y; the two zeros are equal.
pub(super) fn by_place(a: Point, b: Point) -> Ordering {
    (a.x + 0.0).total_cmp(&(b.x + 0.0)).then((a.y + 0.0).total_cmp(&(b.y + 0.0)))
}
