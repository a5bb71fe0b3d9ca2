//! How far one arc can go: the curvatures that keep every bead inside its band.

use kurbo::Point;

use super::state::State;
use super::trace::Bead;

/// The curvatures, in 1/mm, with which an arc that leaves a state passes all beads up to some bead.
#[derive(Clone, Copy, Debug)]
pub(super) struct Fan {
    pub(super) low: f64,
    pub(super) high: f64,
}

/// Share of the band that an arc may bend away from a straight stretch unseen.
const EXCESS: f64 = 0.02;
/// Most pieces that a stretch is cut into to bound the arcs along it.
const MOST_PIECES: f64 = 12.0;

impl Fan {
    const ALL: Self = Self { low: f64::NEG_INFINITY, high: f64::INFINITY };

    /// The fan narrowed to the curvatures that pass within `band` of the place (u, v) as seen from the start.
    ///
    /// A circle through the origin along u has signed distance from (u, v) within the band exactly for curvatures from
    /// 2 (v - e)/(u2 + v2 - e2) to 2 (v + e)/(u2 + v2 - e2); a place within the band of the start bounds nothing.
    fn narrowed(self, u: f64, v: f64, band: f64) -> Self {
        let power = u * u + v * v - band * band;
        if power <= 0.0 {
            return self;
        }
        let scale = 2.0 / power;
        Self { low: self.low.max(scale * (v - band)), high: self.high.min(scale * (v + band)) }
    }

    /// The fan narrowed so that its arcs keep to the straight stretch from `from` to `bead` too: where they may bend
    /// away from it between its ends, places on it bound them as well.
    fn narrowed_between(self, state: &State, from: Point, bead: &Bead) -> Self {
        let bend = self.high.abs().max(self.low.abs());
        let stretch = bead.at - from;
        let excess = bend * stretch.hypot2() / (8.0 * EXCESS * bead.band);
        if excess <= 1.0 {
            return self;
        }
        let pieces = excess.sqrt().ceil().min(MOST_PIECES);
        (1..pieces as usize).fold(self, |fan, k| {
            let (u, v) = state.local(from + stretch * (k as f64 / pieces));
            fan.narrowed(u, v, bead.band)
        })
    }

    /// True when an arc of the curvature passes every bead.
    pub(super) fn allows(self, curvature: f64) -> bool {
        (self.low..=self.high).contains(&curvature)
    }

    /// True while some curvature passes every bead.
    pub(super) fn is_open(self) -> bool {
        self.low <= self.high
    }
}

/// Fans to the beads after a state, as far as they stay open.
///
/// `fans` is filled with one fan for each bead from the one after the state's; the value returned is how far the
/// reach goes, in mm along the trace, with a share of the next stretch for a fan that closes only just.
pub(super) fn reach(state: &State, beads: &[Bead], fans: &mut Vec<Fan>) -> f64 {
    fans.clear();
    let mut fan = Fan::ALL;
    let mut before = beads[state.bead];
    let mut from = state.at;
    for bead in &beads[(state.bead + 1).min(beads.len())..] {
        let (u, v) = state.local(bead.at);
        let mut next = fan.narrowed(u, v, bead.band);
        if u < -bead.band {
            return before.along;
        }
        if next.is_open() {
            next = next.narrowed_between(state, from, bead);
        }
        if !next.is_open() {
            return before.along + almost(next, u, bead) * (bead.along - before.along);
        }
        fan = next;
        fans.push(fan);
        before = *bead;
        from = bead.at;
    }
    beads[beads.len() - 1].along
}

/// How nearly a closed fan is open: 1 when it just closes, towards 0 with the lateral miss at the bead.
fn almost(fan: Fan, u: f64, bead: &Bead) -> f64 {
    let miss = (fan.low - fan.high) * u * u / 2.0;
    bead.band / (bead.band + miss.max(0.0))
}
