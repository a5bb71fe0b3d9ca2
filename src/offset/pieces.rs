//! The candidates cut where they cross each other, and which of the pieces count.

use kurbo::Point;
use rstar::RTree;

use crate::geom::{Span, crossings};

use super::candidates::Candidate;
use super::region::{Region, boxed, envelope};

/// A stretch of one candidate between two neighbouring crossings.
#[derive(Clone, Copy, Debug)]
pub(super) struct Piece {
    pub(super) span: Span,
    /// The candidate it is part of, and from where to where.
    pub(super) of: usize,
    pub(super) t0: f64,
    pub(super) t1: f64,
    /// The loop it follows.
    pub(super) along: usize,
}

/// A place where a candidate is cut.
type Cut = (f64, Point);

/// The pieces that nothing of the outline comes closer to than `radius`.
pub(super) fn valid(region: &Region, radius: f64, candidates: &[Candidate]) -> Vec<Piece> {
    let cuts = cuts(candidates, region.snap);
    let mut pieces = Vec::new();
    for (of, (candidate, cuts)) in candidates.iter().zip(cuts).enumerate() {
        for pair in cuts.windows(2) {
            let [(t0, from), (t1, to)] = [pair[0], pair[1]];
            let part = candidate.span.part(t0, t1);
            let span = Span { start: from, end: to, bulge: part.bulge };
            // The distance at the middle of a good piece is off by rounding only; half the digits of a snap are more.
            let slack = region.snap / 64.0;
            if part.length() > region.snap && region.distance(part.at(0.5)) >= radius - slack {
                pieces.push(Piece { span, of, t0, t1, along: candidate.along });
            }
        }
    }
    pieces
}

/// For every candidate the places where it is cut, its ends included, in order.
fn cuts(candidates: &[Candidate], snap: f64) -> Vec<Vec<Cut>> {
    let index =
        RTree::bulk_load(candidates.iter().enumerate().map(|(i, c)| boxed(c.span.bbox(), i)).collect());
    let mut cuts: Vec<Vec<Cut>> =
        candidates.iter().map(|c| vec![(0.0, c.span.start), (1.0, c.span.end)]).collect();
    for (i, candidate) in candidates.iter().enumerate() {
        let near = envelope(candidate.span.bbox().inflate(snap, snap));
        for j in index.locate_in_envelope_intersecting(near).map(|b| b.data).filter(|&j| j > i) {
            for c in crossings(&candidate.span, &candidates[j].span, snap) {
                cuts[i].push((c.t, c.at));
                cuts[j].push((c.u, c.at));
            }
        }
    }
    for places in &mut cuts {
        places.sort_by(|a, b| a.0.total_cmp(&b.0));
    }
    cuts
}
