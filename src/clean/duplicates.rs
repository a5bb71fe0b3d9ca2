//! Lines and contours that were drawn twice.

use std::cmp::Ordering;
use std::collections::HashMap;
use std::f64::consts::PI;
use std::hash::{DefaultHasher, Hash, Hasher};

use kurbo::{Affine, Point, Rect};
use rstar::primitives::{GeomWithData, Rectangle};
use rstar::{AABB, RTree};

use crate::geom::{ArcSpline, Span};
use crate::sketch::Contour;

use super::chain::{by_place, settings};
use super::{Counts, Flaw, FlawKind};

/// Removes contours drawn again, whole or as a part of a longer line or arc, of the same layer and colour. Loose lines
/// and arcs count as lying on each other up to `near_mm`, and a thousandth of the shorter one's length.
pub(super) fn remove(
    contours: Vec<Contour>,
    near_mm: f64,
    counts: &mut Counts,
    flaws: &mut Vec<Flaw>,
) -> Vec<Contour> {
    let before = flaws.len();
    let contours = without_copies(contours, flaws);
    let contours = without_overlaps(contours, near_mm, flaws);
    counts.duplicates += flaws.len() - before;
    contours
}

/// A span as it lies, whichever way it was drawn: equal for equal spans.
type Lie = [u64; 5];

fn lie(span: Span) -> Lie {
    let forward = by_place(span.start, span.end).is_le();
    let Span { start, end, bulge } = if forward { span } else { span.reversed() };
    // The two zeros are one number here.
    [start.x, start.y, end.x, end.y, bulge].map(|v| (v + 0.0).to_bits())
}

/// A number that is equal for paths of equal spans, whatever their order.
fn digest(path: &ArcSpline) -> u64 {
    let hash = |span| {
        let mut hasher = DefaultHasher::new();
        lie(span).hash(&mut hasher);
        hasher.finish()
    };
    path.spans().map(hash).fold(0, u64::wrapping_add)
}

fn sorted_lies(path: &ArcSpline) -> Vec<Lie> {
    let mut lies: Vec<Lie> = path.spans().map(lie).collect();
    lies.sort_unstable();
    lies
}

/// Of contours made of the same spans only the first is kept.
fn without_copies(contours: Vec<Contour>, flaws: &mut Vec<Flaw>) -> Vec<Contour> {
    let mut seen: HashMap<(u64, usize), Vec<usize>> = HashMap::with_capacity(contours.len());
    let mut kept: Vec<Contour> = Vec::with_capacity(contours.len());
    for contour in contours {
        let alike = seen.entry((digest(&contour.path), contour.path.len())).or_default();
        let same = |&&i: &&usize| {
            settings(&kept[i]) == settings(&contour)
                && sorted_lies(&kept[i].path) == sorted_lies(&contour.path)
        };
        if let Some(&first) = alike.iter().find(same) {
            flaws.push(flaw(FlawKind::Duplicate, &contour, contour.path.length(), &kept[first]));
        } else {
            alike.push(kept.len());
            kept.push(contour);
        }
    }
    kept
}

fn flaw(kind: FlawKind, contour: &Contour, size: f64, over: &Contour) -> Flaw {
    let at = contour.path.vertices[0].at;
    Flaw { kind, contour: contour.id, vertex: 1, at, size, other: Some(over.id) }
}

/// Loose lines and arcs cut back to the part that no longer one covers.
fn without_overlaps(mut contours: Vec<Contour>, near_mm: f64, flaws: &mut Vec<Flaw>) -> Vec<Contour> {
    let loose: Vec<usize> = (0..contours.len()).filter(|&i| is_loose(&contours[i])).collect();
    let index = Index::of(&contours, &loose);
    let rests: Vec<(usize, Option<Span>)> =
        loose.iter().filter_map(|&i| Some((i, rest(&contours, i, &index, near_mm, flaws)?))).collect();
    for (i, rest) in rests {
        contours[i].path = rest.map_or_else(ArcSpline::default, |span| ArcSpline::from_spans(&[span], false));
    }
    contours.retain(|c| !c.path.is_empty());
    contours
}

fn is_loose(contour: &Contour) -> bool {
    !contour.path.closed && contour.path.len() == 1
}

/// What is left of loose contour `i`: `None` where all of it is, `Some(None)` where nothing is.
fn rest(
    contours: &[Contour],
    i: usize,
    index: &Index,
    near_mm: f64,
    flaws: &mut Vec<Flaw>,
) -> Option<Option<Span>> {
    let whole = contours[i].path.span(0);
    let near = near_mm.min(whole.length() * DRAWER / 5.0);
    let mut longer = index.beside(&whole, near);
    longer.retain(|&j| touches(&contours[j].path.span(0), &whole, near));
    longer.retain(|&j| longest_first(&contours[j], &contours[i]).is_lt());
    longer.retain(|&j| settings(&contours[j]) == settings(&contours[i]));
    longer.sort_by(|&j, &k| longest_first(&contours[j], &contours[k]));
    let mut left = whole;
    for j in longer {
        match uncovered(&left, &contours[j].path.span(0), near) {
            Cover::None => {}
            Cover::Part(span) => {
                let size = left.length() - span.length();
                flaws.push(flaw(FlawKind::PartDuplicate, &contours[i], size, &contours[j]));
                left = span;
            }
            Cover::All => {
                flaws.push(flaw(FlawKind::Duplicate, &contours[i], left.length(), &contours[j]));
                return Some(None);
            }
        }
    }
    (left != whole).then_some(Some(left))
}

/// True when an end of the shorter span lies on the longer one.
fn touches(longer: &Span, span: &Span, near: f64) -> bool {
    [span.start, span.end].iter().any(|&end| longer.nearest(end).distance <= near)
}

/// Longest first; of equals the one that lies lower, so that the order of the drawing decides nothing.
fn longest_first(a: &Contour, b: &Contour) -> Ordering {
    let (a, b) = (a.path.span(0), b.path.span(0));
    b.length().total_cmp(&a.length()).then_with(|| lie(a).cmp(&lie(b)))
}

/// How much of a span lies on another.
enum Cover {
    None,
    /// All but this part, which starts or ends exactly where the other does.
    Part(Span),
    All,
}

/// How much of `span` lies within `near` of `over`, which is at least as long.
fn uncovered(span: &Span, over: &Span, near: f64) -> Cover {
    let on = |p: Point| over.nearest(p).distance <= near;
    let all_on = |part: Span| [0.25, 0.5, 0.75].iter().all(|&t| on(part.at(t)));
    match (on(span.start), on(span.end)) {
        (true, true) if all_on(*span) => Cover::All,
        (true, false) => match end_upon(span, over, near) {
            Some((t, end)) if all_on(span.part(0.0, t)) => {
                Cover::Part(Span { start: end, ..span.part(t, 1.0) })
            }
            _ => Cover::None,
        },
        (false, true) => match uncovered(&span.reversed(), over, near) {
            Cover::Part(part) => Cover::Part(part.reversed()),
            _ => Cover::None,
        },
        _ => Cover::None,
    }
}

/// The end of `over` that lies within `span`, off its ends, with the fraction of `span` there.
fn end_upon(span: &Span, over: &Span, near: f64) -> Option<(f64, Point)> {
    let ends = [over.start, over.end].map(|end| (span.nearest(end), end));
    let inside = ends.into_iter().filter(|(foot, end)| {
        foot.distance <= near && end.distance(span.start) > near && end.distance(span.end) > near
    });
    inside.map(|(foot, end)| (foot.t, end)).max_by(|a, b| a.0.total_cmp(&b.0))
}

/// The width in radians of a drawer of directions: lines that lie on each other up to a thousandth of their length are
/// in the same drawer or in neighbours.
const DRAWER: f64 = 0.005;

type Tree = RTree<GeomWithData<Rectangle<[f64; 2]>, usize>>;

/// Finds loose spans beside another. Lines are sorted by direction, and each drawer is turned so that its lines lie
/// flat: else a hatch of slanting lines, each in the other's upright box, would take quadratic time.
struct Index {
    drawers: HashMap<i32, Tree>,
}

/// The drawer of arcs, which are not turned.
const ARCS: i32 = i32::MAX;

impl Index {
    fn of(contours: &[Contour], loose: &[usize]) -> Self {
        let mut contents: HashMap<i32, Vec<_>> = HashMap::new();
        for &i in loose {
            let span = contours[i].path.span(0);
            let (drawer, _) = drawers(&span);
            contents
                .entry(drawer)
                .or_default()
                .push(GeomWithData::new(rectangle(lying(&span, drawer, 0.0)), i));
        }
        Self { drawers: contents.into_iter().map(|(drawer, all)| (drawer, RTree::bulk_load(all))).collect() }
    }

    /// The spans whose boxes, in the frame of their drawer, come within `near` of that of `span`.
    fn beside(&self, span: &Span, near: f64) -> Vec<usize> {
        let (own, next) = drawers(span);
        let look = |drawer: i32| {
            let tree = self.drawers.get(&drawer);
            tree.into_iter().flat_map(move |tree| {
                let lower_upper = corners(lying(span, drawer, near));
                tree.locate_in_envelope_intersecting(AABB::from_corners(lower_upper.0, lower_upper.1))
                    .map(|item| item.data)
                    .collect::<Vec<_>>()
            })
        };
        let other = (next != own).then_some(next);
        look(own).chain(other.into_iter().flat_map(look)).collect()
    }
}

/// The drawer a span belongs to and the nearest other one.
fn drawers(span: &Span) -> (i32, i32) {
    if !span.is_line() {
        return (ARCS, ARCS);
    }
    let last = (PI / DRAWER).floor();
    let place = span.chord().atan2().rem_euclid(PI) / DRAWER;
    let own = place.floor().min(last);
    let next = if place - own < 0.5 { own - 1.0 } else { own + 1.0 };
    let around = |k: f64| {
        if k < 0.0 {
            last
        } else if k > last {
            0.0
        } else {
            k
        }
    };
    (own as i32, around(next) as i32)
}

/// The box of a span in the frame of a drawer, wider by `margin` on all sides.
fn lying(span: &Span, drawer: i32, margin: f64) -> Rect {
    let angle = if drawer == ARCS { 0.0 } else { (f64::from(drawer) + 0.5) * DRAWER };
    span.transformed(Affine::rotate(-angle)).bbox().inflate(margin, margin)
}

fn corners(r: Rect) -> ([f64; 2], [f64; 2]) {
    ([r.x0, r.y0], [r.x1, r.y1])
}

fn rectangle(r: Rect) -> Rectangle<[f64; 2]> {
    let (lower, upper) = corners(r);
    Rectangle::from_corners(lower, upper)
}
