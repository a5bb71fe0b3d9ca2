//! The knots that a fair curve needs: those where it touches the tolerance.

use super::bending::Station;
use super::trace::Trace;
use super::{CubicSpline, Ends, Fair, judged};
use crate::num::Tolerance;

/// A place this far from its disc's centre, in parts of its radius, counts as touching the rim.
const TOUCHING: f64 = 0.97;

/// How often knots are put back where the curve strays without them.
const ROUNDS: usize = 8;

/// The same curve, but for a hair, with knots at its contacts only: between two of them the least-bending curve is one
/// cubic. As it was where that does not keep the tolerance.
pub(super) fn lean(fair: Fair, trace: &Trace, ends: Ends, tolerance: Tolerance) -> Fair {
    let closed = fair.spline.is_closed();
    let places = fair.spline.places();
    let all: Vec<Station> = fair.spline.knots().iter().map(|&t| trace.at(t)).collect();
    let last = all.len() - 1;
    let count = if closed { last } else { all.len() };
    let touches = |i: usize| places[i].distance(all[i].at) >= TOUCHING * tolerance.mm();
    // The parameter begins at the first, and an open curve ends at the last.
    let mut kept: Vec<bool> = (0..count).map(|i| i == 0 || i == last || touches(i)).collect();
    if closed && kept.iter().filter(|kept| **kept).count() < 3 {
        [count / 3, 2 * count / 3].into_iter().for_each(|i| kept[i] = true);
    }
    for _ in 0..ROUNDS {
        let chosen: Vec<usize> = (0..count).filter(|&i| kept[i]).collect();
        let stations: Vec<Station> = chosen.iter().map(|&i| all[i]).collect();
        let through: Vec<_> = chosen.iter().map(|&i| places[i]).collect();
        let Some((lean, strays)) = judged(trace, &stations, (&through, ends), tolerance) else { break };
        if strays.is_empty() {
            return Fair { steps: fair.steps, capped: fair.capped, ..lean };
        }
        if !put_back(&mut kept, &lean.spline, &all, &strays) {
            break;
        }
    }
    fair
}

/// Puts back all knots of the gaps in which the curve strays; false when none was missing there.
fn put_back(kept: &mut [bool], spline: &CubicSpline, all: &[Station], strays: &[Station]) -> bool {
    let knots = spline.knots();
    let mut any = false;
    for stray in strays {
        let after = knots.partition_point(|&t| t <= stray.t).clamp(1, knots.len() - 1);
        for (kept, station) in kept.iter_mut().zip(all) {
            let missing = !*kept && station.t > knots[after - 1] && station.t < knots[after];
            *kept |= missing;
            any |= missing;
        }
    }
    any
}
