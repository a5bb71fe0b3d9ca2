//! All spans that the line of the cutter's centre can consist of: parallels, and arcs about corners.

use kurbo::{Point, Vec2};

use crate::geom::{ArcSpline, Span};

use super::region::Region;

/// A span that may be part of the line.
pub(super) struct Candidate {
    pub(super) span: Span,
    /// The loop it follows.
    pub(super) along: usize,
}

/// The candidates at `radius` to the left of every loop, without the stretches that are plainly too close to the
/// outline.
pub(super) fn lay_out(region: &Region, radius: f64) -> Vec<Candidate> {
    let mut kept = Vec::new();
    for (along, outline) in region.loops.iter().enumerate() {
        for span in parallels(&outline.path, radius).filter(|span| span.length() > region.snap) {
            let mut stretches = Vec::new();
            let room = Room { region, radius, span, length: span.length() };
            room.open_stretches(0.0, 1.0, &mut stretches);
            kept.extend(stretches.into_iter().map(|(t0, t1)| Candidate { span: span.part(t0, t1), along }));
        }
    }
    kept
}

/// The parallel of every span and the arc about every corner that juts into the waste, both at `radius`.
fn parallels(chain: &ArcSpline, radius: f64) -> impl Iterator<Item = Span> + '_ {
    (0..chain.len()).flat_map(move |i| {
        let before = chain.span(if i == 0 { chain.len() - 1 } else { i - 1 });
        let span = chain.span(i);
        [about_corner(&before, &span, radius), span.parallel(radius)].into_iter().flatten()
    })
}

/// The arc about the corner between two spans, where the outline turns right; left turns need none.
fn about_corner(before: &Span, after: &Span, radius: f64) -> Option<Span> {
    let (from, to) = (before.tangent(1.0), after.tangent(0.0));
    let turn = from.cross(to).atan2(from.dot(to));
    let at = |heading: Vec2| -> Point { after.start + Vec2::new(-heading.y, heading.x) * radius };
    (turn < 0.0).then(|| Span::arc(at(from), at(to), (turn / 4.0).tan()))
}

/// One candidate beside the outline that it may come too close to.
struct Room<'a> {
    region: &'a Region,
    radius: f64,
    span: Span,
    length: f64,
}

impl Room<'_> {
    /// Adds the stretches of `t0..t1` that may be far enough from the outline. The distance changes by no more than
    /// the way along the span, so one that is too small by more than half the stretch rules out all of it.
    fn open_stretches(&self, t0: f64, t1: f64, open: &mut Vec<(f64, f64)>) {
        let middle = (t0 + t1) / 2.0;
        let lack = self.radius - self.region.distance(self.span.at(middle));
        let half = (t1 - t0) * self.length / 2.0;
        // Finer than this saves no more crossings than it costs.
        const FINEST: f64 = 1.0 / 16.0;
        if lack > half + self.region.snap {
            return;
        }
        if lack > self.region.snap && half > self.radius * FINEST {
            self.open_stretches(t0, middle, open);
            self.open_stretches(middle, t1, open);
            return;
        }
        match open.last_mut() {
            Some(last) if last.1.total_cmp(&t0).is_eq() => last.1 = t1,
            _ => open.push((t0, t1)),
        }
    }
}
