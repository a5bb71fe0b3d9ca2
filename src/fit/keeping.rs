//! Whether one span keeps to its stretch of the trace, both ways and in order.

use kurbo::{Point, Vec2};

use crate::geom::Span;

use super::state::State;
use super::trace::Bead;

/// Where between two beads the distance is looked at, as shares.
const BETWEEN: [f64; 3] = [0.25, 0.5, 0.75];

/// The place on the trace beside `p`, after bead `i` and not beyond the next.
fn beside(beads: &[Bead], i: usize, p: Point) -> Point {
    match beads.get(i + 1) {
        Some(next) => Span::line(beads[i].at, next.at).nearest(p).at,
        None => beads[i].at,
    }
}

/// True when `span` stays within the band of the trace from beside its start, past the beads after `first` up to
/// `last`, to beside its end.
///
/// Every bead is matched to its foot on the span, the feet made monotone by the least change (the mean of the running
/// maximum and the running minimum from behind); matched places must lie within the band, and so must three places
/// between them, where the distance is the line between those at the ends less the arc's height over its chord.
pub(super) fn keeps(span: &Span, beads: &[Bead], first: usize, last: usize) -> bool {
    let start = Matched { foot: 0.0, bead: Bead { at: beside(beads, first, span.start), ..beads[first] } };
    let end =
        Matched { foot: span.length(), bead: Bead { at: beside(beads, last, span.end), ..beads[last] } };
    if first == last && goes_back(beads, first, start.bead.at, end.bead.at) {
        return false;
    }
    let mut matched = Vec::with_capacity(last - first + 2);
    matched.push(start);
    let leaving = State::leaving(span);
    let curvature = span.curvature();
    matched.extend(beads[first + 1..=last].iter().map(|&bead| {
        let foot = leaving.foot(curvature, bead.at).clamp(0.0, end.foot);
        Matched { foot, bead }
    }));
    matched.push(end);
    make_monotone(&mut matched);
    let arc = Arc { span, length: end.foot };
    let mut before = (start, start.bead.at - span.start);
    before.1.hypot() <= start.bead.band
        && matched[1..].iter().all(|&here| {
            let apart = here.bead.at - arc.at(here.foot);
            let fits = apart.hypot() <= here.bead.band && arc.keeps_between(before, (here, apart));
            before = (here, apart);
            fits
        })
}

/// True when, on the stretch after bead `i`, `to` lies before `from`.
fn goes_back(beads: &[Bead], i: usize, from: Point, to: Point) -> bool {
    beads.get(i + 1).is_some_and(|next| (to - from).dot(next.at - beads[i].at) < 0.0)
}

/// A place on the trace and the length along the span that it is matched to.
#[derive(Clone, Copy)]
struct Matched {
    foot: f64,
    bead: Bead,
}

fn make_monotone(matched: &mut [Matched]) {
    let mut most = 0.0_f64;
    let ahead: Vec<f64> = matched
        .iter()
        .map(|m| {
            most = most.max(m.foot);
            most
        })
        .collect();
    let mut least = f64::INFINITY;
    for (m, ahead) in matched.iter_mut().zip(ahead).rev() {
        least = least.min(m.foot);
        m.foot = (ahead + least) / 2.0;
    }
}

struct Arc<'a> {
    span: &'a Span,
    length: f64,
}

impl Arc<'_> {
    fn at(&self, foot: f64) -> Point {
        self.span.at(foot / self.length)
    }

    /// True when the straight stretch between two matched places keeps to the arc between theirs.
    fn keeps_between(&self, from: (Matched, Vec2), to: (Matched, Vec2)) -> bool {
        let band = from.0.bead.band.min(to.0.bead.band);
        let (a, b) = (from.0.foot, to.0.foot);
        let height = self.span.curvature().abs() * (b - a) * (b - a) / 8.0;
        if from.1.hypot().max(to.1.hypot()) + height <= band {
            return true;
        }
        let chord = self.at(a).midpoint(self.at(b));
        let sagitta = self.at((a + b) / 2.0) - chord;
        BETWEEN.iter().all(|&t| {
            let apart = from.1.lerp(to.1, t) - sagitta * (4.0 * t * (1.0 - t));
            apart.hypot() <= band
        })
    }
}
