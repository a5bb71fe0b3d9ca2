//! What a round cutter leaves standing: inside corners, narrow places, loops it does not fit into.

use kurbo::Point;

use crate::geom::{ArcSpline, SpanIndex};

use super::Compensated;

/// A stretch of an outline that the cutter does not reach.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Uncut {
    /// The loop, by its place in the input.
    pub along: usize,
    /// Where the most stays standing.
    pub at: Point,
    /// How far the outline is from the cutter's edge there, in mm; infinite where no line exists at all.
    pub gap_mm: f64,
    /// How long the stretch is, in mm.
    pub length_mm: f64,
}

/// The stretches of `loops` that are further than `tolerance` mm from the edge of a cutter of `radius` on its lines,
/// found to a tolerance of length, in the order of the loops.
pub fn uncut(loops: &[ArcSpline], compensated: &Compensated, radius: f64, tolerance: f64) -> Vec<Uncut> {
    let lines = SpanIndex::new(compensated.lines.iter().flat_map(|line| line.path.spans()));
    let gap = |p: Point| lines.distance(p) - radius;
    loops.iter().enumerate().flat_map(|(along, chain)| stretches(along, chain, tolerance, &gap)).collect()
}

/// The stretches of one loop, by walking along it in steps of the tolerance.
fn stretches(along: usize, chain: &ArcSpline, tolerance: f64, gap: &dyn Fn(Point) -> f64) -> Vec<Uncut> {
    let mut found: Vec<Uncut> = Vec::new();
    let (mut open, mut open_at_start) = (false, false);
    for (i, span) in chain.spans().enumerate() {
        let steps = (span.length() / tolerance).ceil().max(1.0);
        for k in 0..steps as usize {
            let at = span.at(k as f64 / steps);
            let gap_mm = gap(at);
            if gap_mm <= tolerance {
                open = false;
                continue;
            }
            if !open {
                found.push(Uncut { along, at, gap_mm, length_mm: 0.0 });
                open_at_start |= i == 0 && k == 0;
            }
            open = true;
            if let Some(stretch) = found.last_mut() {
                stretch.length_mm += span.length() / steps;
                if gap_mm > stretch.gap_mm {
                    (stretch.at, stretch.gap_mm) = (at, gap_mm);
                }
            }
        }
    }
    if open && open_at_start && found.len() > 1 {
        join_ends(&mut found);
    }
    found
}

/// The loop closes inside a stretch: the last and the first are one.
fn join_ends(found: &mut Vec<Uncut>) {
    if let Some(last) = found.pop() {
        found[0].length_mm += last.length_mm;
        if last.gap_mm > found[0].gap_mm {
            (found[0].at, found[0].gap_mm) = (last.at, last.gap_mm);
        }
    }
}
