//! Where the contours of a drawing cross or run over each other. Looked for only when asked: a trace that is cut on
//! its line may cross itself.

use std::collections::BTreeMap;
use std::f64::consts::TAU;

use kurbo::{Point, Vec2};
use rstar::RTree;
use rstar::primitives::{GeomWithData, Rectangle};

use crate::geom::{ArcSpline, Crossing, Span, crossings as meetings};
use crate::sketch::Contour;

use super::flaw::worst_first;
use super::{Flaw, FlawKind};

/// Spans touch within four units of the grid that coordinates are held on.
const TOUCH: f64 = 4.0 / (1_u64 << 20) as f64;

/// The places where contours cross themselves or each other, and the pairs of contours that run over each other with
/// the length they share; worst first. Contours that only touch are not listed, nor are spikes.
///
/// Time is n log n in the number of spans, and linear in the pairs of spans whose upright boxes meet.
pub fn crossings(contours: &[Contour]) -> Vec<Flaw> {
    let mut contacts: Vec<Contact> = Vec::new();
    let mut shared: BTreeMap<(usize, usize), Shared> = BTreeMap::new();
    for (a, b) in pairs(contours) {
        let (one, two) = (contours[a.contour].path.span(a.span), contours[b.contour].path.span(b.span));
        let found = meetings(&one, &two, TOUCH);
        if let Some(length) = shared_length(&one, &two, &found) {
            let joint = shared.entry((a.contour, b.contour)).or_insert(Shared {
                first: a,
                at: found[0].at,
                length: 0.0,
            });
            joint.length += length;
            continue;
        }
        contacts.extend(found.iter().filter_map(|meeting| Contact::of(contours, a, b, meeting)));
    }
    contacts.sort_by(|a, b| (a.one, a.two).cmp(&(b.one, b.two)).then(a.t.total_cmp(&b.t)));
    contacts.dedup_by(|b, a| (a.one, a.two) == (b.one, b.two) && a.at.distance(b.at) <= TOUCH);
    let crossing = contacts.iter().filter(|c| c.crosses(contours)).map(|c| c.flaw(contours));
    let overlaps = shared.iter().map(|((_, b), joint)| Flaw {
        kind: FlawKind::Overlap,
        contour: contours[joint.first.contour].id,
        vertex: joint.first.span + 1,
        at: joint.at,
        size: joint.length,
        other: Some(contours[*b].id),
    });
    let mut flaws: Vec<Flaw> = crossing.chain(overlaps).collect();
    worst_first(&mut flaws);
    flaws
}

/// One span of the drawing.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
struct Place {
    contour: usize,
    span: usize,
}

/// What two contours share.
struct Shared {
    first: Place,
    at: Point,
    length: f64,
}

/// The pairs of spans whose boxes meet, each once, in order; neighbours that run on only where they may meet twice.
fn pairs(contours: &[Contour]) -> Vec<(Place, Place)> {
    let places = contours.iter().enumerate().flat_map(|(contour, c)| {
        c.path.spans().enumerate().map(move |(span, s)| {
            let b = s.bbox().inflate(TOUCH, TOUCH);
            GeomWithData::new(Rectangle::from_corners([b.x0, b.y0], [b.x1, b.y1]), Place { contour, span })
        })
    });
    let tree = RTree::bulk_load(places.collect());
    let meeting = tree.intersection_candidates_with_other_tree(&tree).map(|(a, b)| (a.data, b.data));
    let mut pairs: Vec<(Place, Place)> = meeting
        .filter(|(a, b)| a < b && !(are_neighbours(contours, *a, *b) && both_lines(contours, *a, *b)))
        .collect();
    pairs.sort_unstable();
    pairs
}

fn are_neighbours(contours: &[Contour], a: Place, b: Place) -> bool {
    let path = &contours[a.contour].path;
    let wraps = path.closed && a.span == 0 && b.span + 1 == path.len();
    a.contour == b.contour && (a.span + 1 == b.span || wraps)
}

/// Two lines that share a vertex meet nowhere else, unless they are a spike.
fn both_lines(contours: &[Contour], a: Place, b: Place) -> bool {
    [a, b].iter().all(|p| contours[p.contour].path.vertices[p.span].bulge == 0.0)
}

/// The length of the part that two spans share, if they run along each other.
fn shared_length(a: &Span, b: &Span, found: &[Crossing]) -> Option<f64> {
    let &[one, two] = found else { return None };
    let part = a.part(one.t.min(two.t), one.t.max(two.t));
    let together = part.length() > TOUCH && b.nearest(part.at(0.5)).distance <= TOUCH;
    together.then(|| part.length())
}

/// A place on a contour: a vertex, or within a span.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
struct On {
    contour: usize,
    /// The span, or the vertex where it starts.
    index: usize,
    at_vertex: bool,
}

/// A place that two spans have in common.
struct Contact {
    one: On,
    two: On,
    t: f64,
    u: f64,
    at: Point,
}

impl Contact {
    /// The contact; none where two neighbours meet at the vertex between them.
    fn of(contours: &[Contour], a: Place, b: Place, meeting: &Crossing) -> Option<Self> {
        let one = On::of(&contours[a.contour].path, a, meeting.t, meeting.at);
        let two = On::of(&contours[b.contour].path, b, meeting.u, meeting.at);
        let (t, u, at) = (meeting.t, meeting.u, meeting.at);
        // A vertex may be met from four pairs of spans: the lower place first, so that they are one.
        let (one, two, t, u) = if one <= two { (one, two, t, u) } else { (two, one, u, t) };
        (one != two).then_some(Self { one, two, t, u, at })
    }

    /// True when the two contours change sides here: going round the place, their arms alternate.
    fn crosses(&self, contours: &[Contour]) -> bool {
        let arms = |on: On, t: f64| arms(&contours[on.contour].path, on, t);
        let (Some([back, forth]), Some(others)) = (arms(self.one, self.t), arms(self.two, self.u)) else {
            return false;
        };
        if others.iter().any(|&v| run_together(v, back) || run_together(v, forth)) {
            return false;
        }
        let turn = |v: Vec2| forth.cross(v).atan2(forth.dot(v)).rem_euclid(TAU);
        (turn(others[0]) < turn(back)) != (turn(others[1]) < turn(back))
    }

    fn flaw(&self, contours: &[Contour]) -> Flaw {
        Flaw {
            kind: FlawKind::Crossing,
            contour: contours[self.one.contour].id,
            vertex: self.one.index + 1,
            at: self.at,
            size: 0.0,
            other: Some(contours[self.two.contour].id),
        }
    }
}

impl On {
    fn of(path: &ArcSpline, place: Place, t: f64, at: Point) -> Self {
        let span = path.span(place.span);
        let Place { contour, span: index } = place;
        if span.end.distance(at) <= TOUCH && t > 0.5 {
            let next = if path.closed { (index + 1) % path.len() } else { index + 1 };
            Self { contour, index: next, at_vertex: true }
        } else {
            Self { contour, index, at_vertex: span.start.distance(at) <= TOUCH }
        }
    }
}

/// The ways a contour leaves a place on it, backwards and forwards, each as long as its span; none at the end of an
/// open one.
fn arms(path: &ArcSpline, on: On, t: f64) -> Option<[Vec2; 2]> {
    let way = |span: Span, t: f64| span.tangent(t) * span.length();
    if !on.at_vertex {
        let forth = way(path.span(on.index), t);
        return Some([-forth, forth]);
    }
    let ends = on.index == 0 || on.index == path.len();
    if !path.closed && ends {
        return None;
    }
    let before = if on.index == 0 { path.len() - 1 } else { on.index - 1 };
    Some([-way(path.span(before), 1.0), way(path.span(on.index % path.len()), 0.0)])
}

/// True when the shorter of two arms from one place stays within the touch of the other.
fn run_together(v: Vec2, w: Vec2) -> bool {
    v.dot(w) > 0.0 && v.cross(w).abs() <= TOUCH * v.hypot().max(w.hypot())
}
