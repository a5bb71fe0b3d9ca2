//! A tour made shorter: two of its legs replaced by two others, as long as that helps.

use kurbo::Point;

/// A part of the tour that stays whole: where the cutter comes to it and where it leaves.
#[derive(Clone, Copy, Debug)]
pub(super) struct Leg {
    pub(super) number: usize,
    pub(super) into: Point,
    pub(super) out: Point,
}

/// So many reversals are weighed at most, in a fraction of a second: a drawing of some thousand parts keeps the rest of
/// its detours.
const MOST_WEIGHED: usize = 200_000_000;

/// The legs in an order that no reversal of a run of them shortens, or as far as that goes, from and to `park`.
pub(super) fn shortened(mut legs: Vec<Leg>, park: Point) -> Vec<Leg> {
    let rounds = MOST_WEIGHED / (legs.len() * legs.len()).max(1);
    for _ in 0..rounds {
        let Some((i, j)) = best_reversal(&legs, park) else { break };
        legs[i..=j].reverse();
    }
    legs
}

/// The run of legs whose reversal shortens the tour most.
fn best_reversal(legs: &[Leg], park: Point) -> Option<(usize, usize)> {
    // The way from the first leg to each, forwards, and from each to the first, backwards.
    let along = |gap: fn(&Leg, &Leg) -> f64| {
        let gaps = legs.windows(2).map(move |pair| gap(&pair[0], &pair[1]));
        let mut sums = vec![0.0];
        sums.extend(gaps.scan(0.0, |sum, gap| {
            *sum += gap;
            Some(*sum)
        }));
        sums
    };
    let forwards = along(|a, b| a.out.distance(b.into));
    let backwards = along(|a, b| b.out.distance(a.into));
    let total = forwards.last().copied().unwrap_or(0.0);
    // A gain must be more than rounding of the whole tour.
    let mut best = (64.0 * f64::EPSILON * (total + 1.0), None);
    for i in 0..legs.len() {
        let before = if i == 0 { park } else { legs[i - 1].out };
        for j in i + 1..legs.len() {
            let after = legs.get(j + 1).map_or(park, |leg| leg.into);
            let now = before.distance(legs[i].into) + forwards[j] - forwards[i] + legs[j].out.distance(after);
            let then =
                before.distance(legs[j].into) + backwards[j] - backwards[i] + legs[i].out.distance(after);
            if now - then > best.0 {
                best = (now - then, Some((i, j)));
            }
        }
    }
    best.1
}
