//! Where exactly an arc should end: its end and curvature moved until the next arc goes as far as it can.
//!
//! Where a line runs into an arc, the heading at the joint must be right to a band's width over the length of the
//! line; no grid of places and headings is that fine.

use super::reach::{Fan, reach};
use super::state::State;
use super::trace::Bead;

/// An arc that leaves `from`, and how far the arc after it can go.
pub(super) struct Refining<'a> {
    pub(super) from: State,
    pub(super) beads: &'a [Bead],
    /// The fans of `from`.
    pub(super) fans: &'a [Fan],
}

/// An end of the arc under refinement.
#[derive(Clone, Copy)]
pub(super) struct End {
    pub(super) state: State,
    curvature: f64,
    length: f64,
    /// How far the next arc can go, in mm along the trace.
    pub(super) reach: f64,
}

impl Refining<'_> {
    /// The best end near that of `to`, by steps along the arc and in its curvature that are halved when none helps.
    pub(super) fn best_near(&self, to: &State, halvings: usize, scratch: &mut Vec<Fan>) -> Option<End> {
        let span = to.span_from(&self.from);
        let length = span.length();
        let mut best = self.end(span.curvature(), length, to.bead, scratch)?;
        let mut along = length / 8.0;
        let mut bend = 0.5 * self.beads[to.bead].band / (length * length);
        for _ in 0..halvings {
            let steps =
                [(along, 0.0), (-along, 0.0), (0.0, bend), (0.0, -bend), (along, bend), (-along, -bend)];
            let tried = steps.iter().filter_map(|&(ds, dk)| {
                self.end(best.curvature + dk, best.length + ds, best.state.bead, scratch)
            });
            match tried.max_by(|a, b| a.reach.total_cmp(&b.reach)) {
                Some(end) if end.reach > best.reach => best = end,
                _ => {
                    along /= 3.0;
                    bend /= 3.0;
                }
            }
        }
        Some(best)
    }

    /// The end of the arc with this curvature and length; `None` where the beads passed do not allow it.
    pub(super) fn end(
        &self,
        curvature: f64,
        length: f64,
        near: usize,
        scratch: &mut Vec<Fan>,
    ) -> Option<End> {
        if length <= 0.0 {
            return None;
        }
        let bead = self.last_passed(curvature, length, near);
        let fan = self.fans.get(bead.checked_sub(self.from.bead + 1)?)?;
        if !fan.allows(curvature) {
            return None;
        }
        let state = self.from.moved(curvature, length, bead)?;
        let reach = reach(&state, self.beads, scratch);
        Some(End { state, curvature, length, reach })
    }

    /// The last bead whose foot on the arc lies before its end, looked for from `near`.
    pub(super) fn last_passed(&self, curvature: f64, length: f64, near: usize) -> usize {
        let passed = |i: usize| self.from.foot(curvature, self.beads[i].at) <= length;
        let mut bead = near;
        while bead + 1 < self.beads.len() && bead < self.from.bead + self.fans.len() && passed(bead + 1) {
            bead += 1;
        }
        while bead > self.from.bead && !passed(bead) {
            bead -= 1;
        }
        bead
    }
}
