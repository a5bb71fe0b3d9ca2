//! Drawn loops made simple: each with the waste on its left, none crossing itself or another.
//!
//! A point belongs to the region when an odd number of loops run round it at all. Where loops cross, the parts that
//! divide region from waste are chained anew.

use kurbo::{Point, Rect, Vec2};
use rstar::RTree;

use crate::geom::{ArcSpline, Span, crossings};

use super::Side;
use super::chain::{Fault, chain};
use super::pieces::Piece;
use super::region::{boxed, envelope};

/// A simple loop with the waste on its left.
#[derive(Clone, Debug)]
pub(super) struct Loop {
    pub(super) path: ArcSpline,
    /// The drawn loops that it follows.
    pub(super) along: Vec<usize>,
}

/// The drawn loops, with the question that they answer.
pub(super) struct Drawn {
    loops: Vec<(ArcSpline, Rect)>,
    side: Side,
}

impl Drawn {
    /// The drawn loops, less spans without length.
    pub(super) fn new(loops: &[ArcSpline], side: Side) -> Self {
        let prepare = |chain: &ArcSpline| {
            let chain = without_points(chain);
            let bbox = chain.bbox().unwrap_or_default();
            (chain, bbox)
        };
        Self { loops: loops.iter().map(prepare).collect(), side }
    }

    /// True for a point where the cutter's centre may be, as far as sides go.
    pub(super) fn is_waste(&self, p: Point) -> bool {
        let around = self.loops.iter().filter(|(chain, bbox)| bbox.contains(p) && chain.winding(p) != 0);
        let in_region = around.count() % 2 == 1;
        in_region == (self.side == Side::Inside)
    }

    /// The simple loops that divide region from waste, and the places where the drawn ones meet.
    pub(super) fn simple(&self, snap: f64) -> Result<(Vec<Loop>, Vec<Point>), Fault> {
        let contacts = self.contacts(snap);
        let mut simple = Vec::new();
        let mut pieces = Vec::new();
        for (i, ((path, _), contacts)) in self.loops.iter().zip(&contacts).enumerate() {
            if contacts.iter().all(Vec::is_empty) {
                let turned = self.turned(path.spans().collect(), snap);
                let paths = turned.into_iter().map(|spans| ArcSpline::from_spans(&spans, true));
                simple.extend(paths.map(|path| Loop { path, along: vec![i] }));
            } else {
                let runs = runs(path, contacts, snap).into_iter();
                let spans = runs.filter_map(|run| self.turned(run, snap)).flatten();
                let first = pieces.len();
                pieces.extend(spans.enumerate().map(|(k, span)| Piece {
                    span,
                    of: first + k,
                    t0: 0.0,
                    t1: 1.0,
                    along: i,
                }));
            }
        }
        simple
            .extend(chain(pieces, snap)?.into_iter().map(|line| Loop { path: line.path, along: line.along }));
        let mut places: Vec<Point> = contacts.into_iter().flatten().flatten().map(|c| c.1).collect();
        places.dedup_by(|a, b| a.distance(*b) <= 2.0 * snap);
        Ok((simple, places))
    }

    /// A run of spans turned so that the waste is on its left; none where both sides are alike.
    fn turned(&self, run: Vec<Span>, snap: f64) -> Option<Vec<Span>> {
        let longest = run.iter().max_by(|a, b| a.length().total_cmp(&b.length()))?;
        let tangent = longest.tangent(0.5);
        let aside = Vec2::new(-tangent.y, tangent.x) * (8.0 * snap);
        let left = self.is_waste(longest.at(0.5) + aside);
        let right = self.is_waste(longest.at(0.5) - aside);
        match (left, right) {
            (true, false) => Some(run),
            (false, true) => Some(run.iter().rev().map(Span::reversed).collect()),
            _ => None,
        }
    }

    /// For every span of every loop the places where it meets another span that is not its neighbour.
    fn contacts(&self, snap: f64) -> Vec<Vec<Vec<(f64, Point)>>> {
        let mut contacts: Vec<Vec<Vec<(f64, Point)>>> =
            self.loops.iter().map(|(path, _)| vec![Vec::new(); path.len()]).collect();
        let spans: Vec<(usize, usize, Span)> = (0..self.loops.len())
            .flat_map(|i| self.loops[i].0.spans().enumerate().map(move |(k, span)| (i, k, span)))
            .collect();
        let index = RTree::bulk_load(spans.iter().enumerate().map(|(n, s)| boxed(s.2.bbox(), n)).collect());
        for (n, &(i, k, span)) in spans.iter().enumerate() {
            let near = envelope(span.bbox().inflate(snap, snap));
            for m in index.locate_in_envelope_intersecting(near).map(|b| b.data).filter(|&m| m > n) {
                let (j, l, other) = spans[m];
                let shared = shared_joint(&spans[n], &spans[m], self.loops[i].0.len());
                for c in crossings(&span, &other, snap) {
                    if !shared.iter().flatten().any(|joint| joint.distance(c.at) <= 2.0 * snap) {
                        contacts[i][k].push((c.t, c.at));
                        contacts[j][l].push((c.u, c.at));
                    }
                }
            }
        }
        contacts
    }
}

/// The joints that two spans of one loop of `count` share.
fn shared_joint(
    &(i, k, a): &(usize, usize, Span),
    &(j, l, b): &(usize, usize, Span),
    count: usize,
) -> [Option<Point>; 2] {
    let follows = |k: usize, l: usize| i == j && (k + 1) % count == l;
    [follows(k, l).then_some(a.end), follows(l, k).then_some(b.end)]
}

/// A loop cut at its contacts: the runs of spans from one contact to the next.
fn runs(path: &ArcSpline, contacts: &[Vec<(f64, Point)>], snap: f64) -> Vec<Vec<Span>> {
    let mut runs: Vec<Vec<Span>> = vec![Vec::new()];
    for (span, contacts) in path.spans().zip(contacts) {
        let mut cuts = contacts.clone();
        cuts.sort_by(|a, b| a.0.total_cmp(&b.0));
        let (mut t, mut from) = (0.0, span.start);
        for (cut, at) in cuts {
            let part = span.part(t, cut);
            if part.length() > snap {
                runs.last_mut().into_iter().for_each(|run| run.push(Span { start: from, end: at, ..part }));
            }
            runs.push(Vec::new());
            (t, from) = (cut, at);
        }
        let rest = Span { start: from, ..span.part(t, 1.0) };
        if rest.length() > snap {
            runs.last_mut().into_iter().for_each(|run| run.push(rest));
        }
    }
    // The loop runs on from its end to its start: the last run and the first are one.
    let last = runs.pop().unwrap_or_default();
    match runs.first_mut() {
        Some(first) => first.splice(0..0, last).for_each(drop),
        None => runs.push(last),
    }
    runs
}

/// The chain without spans that have no length.
fn without_points(chain: &ArcSpline) -> ArcSpline {
    let spans: Vec<Span> = chain.spans().filter(|span| span.start != span.end).collect();
    ArcSpline::from_spans(&spans, true)
}
