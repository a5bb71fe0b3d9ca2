//! Polyline to the least-bending cubic spline inside the tolerance.
//!
//! The problem: among all curves over the chord length of the trace that stay, at every parameter, within the
//! tolerance of the trace's point at that parameter, the one of least integral of the squared second derivative. Its
//! solution is a cubic spline with knots only where it touches the tolerance, so that few vertices of a dense trace
//! matter: solve for a few stations, look where the result strays, add those places, and solve again. Each round's
//! solution bends less than the answer does, and the last one is the answer.

mod bending;
mod lean;
mod outline;
mod spline;
mod trace;

pub use outline::{Outline, outline};
pub use spline::{CubicSpline, Ends, Local};

use kurbo::Point;

use crate::num::{Deviation, Tolerance};
use bending::{Station, least_bending};
use lean::lean;
use trace::Trace;

/// A fair curve and how good it is.
#[derive(Clone, Debug)]
pub struct Fair {
    /// The curve over the chord length of the trace, in mm from its first point.
    pub spline: CubicSpline,
    /// A proven upper bound of the distance at like parameters, and so of the Fréchet distance, to the trace.
    pub deviation: Deviation,
    /// The integral of the squared second derivative, in 1/mm.
    pub energy: f64,
    /// By how much the energy may exceed the least possible: no curve that keeps the tolerance has less than `energy`
    /// less `excess`. Measured on the spline, by the complementarity of its contacts.
    pub excess: f64,
    /// How many steps of the solver it took, a banded system each.
    pub steps: usize,
    /// True when the effort, or the precision of the numbers, ran out before every place of the trace was within the
    /// tolerance.
    pub capped: bool,
}

/// How much work to spend.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Effort {
    /// Until the tolerance holds and the energy is within about 0.1 % of the least.
    Full,
    /// Two rounds: a start for other methods, near the least-bending curve and mostly within the tolerance.
    Start,
}

/// The fraction of the tolerance kept back while solving, so that places just beside a contact do not break it.
const MARGIN: f64 = 2e-4;

/// Rounds of full effort. Each at least halves the gaps where the curve strays.
const ROUNDS: usize = 40;

/// The least-bending cubic spline within `tolerance` of the trace through `points`, at like chord length. For
/// [`Ends::Periodic`] the last point joins the first, which is not repeated.
///
/// The time is proportional to the points for every round; the stations that matter are far fewer. `None` unless at
/// least two points differ and every coordinate is finite.
pub fn fair(points: &[Point], ends: Ends, tolerance: Tolerance, effort: Effort) -> Option<Fair> {
    let trace = Trace::new(points, ends == Ends::Periodic)?;
    let radius = tolerance.mm() * (1.0 - MARGIN);
    let (rounds, fine) = match effort {
        Effort::Full => (ROUNDS, 1e-3),
        Effort::Start => (2, 1e-1),
    };
    let mut stations = trace.first_stations(tolerance);
    let (mut best, mut accuracy, mut steps) = (None, 1e-1, 0);
    for _ in 0..rounds {
        // Stations too close for the numbers end the work: what is there already is the answer then.
        let Some((places, taken)) = least_bending(&stations, (ends, trace.length()), radius, accuracy) else {
            break;
        };
        let Some((next, strays)) = judged(&trace, &stations, (&places, ends), tolerance) else { break };
        steps += taken;
        let done = strays.is_empty() && accuracy <= fine;
        best = Some(Fair { steps, capped: !strays.is_empty(), ..next });
        if done {
            break;
        }
        if strays.len() * 20 < stations.len() {
            accuracy = fine;
        }
        stations = merged(&stations, &strays);
    }
    if effort == Effort::Full {
        best = best.map(|fair| lean(fair, &trace, ends, tolerance));
    }
    best.or_else(|| {
        let centres: Vec<Point> = stations.iter().map(|station| station.at).collect();
        judged(&trace, &stations, (&centres, ends), tolerance).map(|(through, _)| through)
    })
}

/// The spline through `places` at the stations' parameters, measured, and the places where it strays.
fn judged(
    trace: &Trace,
    stations: &[Station],
    (places, ends): (&[Point], Ends),
    tolerance: Tolerance,
) -> Option<(Fair, Vec<Station>)> {
    let closing = (ends == Ends::Periodic).then_some(trace.length());
    let knots = stations.iter().map(|s| s.t).chain(closing).collect();
    let spline = CubicSpline::through(knots, places, ends)?;
    let strays = trace.strays(&spline, tolerance);
    let (energy, excess) = (spline.energy(), excess(&spline, stations, ends, tolerance));
    Some((
        Fair { spline, deviation: strays.deviation, energy, excess, steps: 0, capped: true },
        strays.stations,
    ))
}

/// By how much the spline's energy may exceed the least, by convexity: the energy's derivative by the place of a
/// station is twice the jump of the third derivative there, and no place inside its disc gains more than that derivative
/// times the distance to the rim. Pinned ends cannot move.
fn excess(spline: &CubicSpline, stations: &[Station], ends: Ends, tolerance: Tolerance) -> f64 {
    let pieces = stations.len() - usize::from(!spline.is_closed());
    let third = |i: usize| if i < pieces { spline.piece(i).third } else { kurbo::Vec2::ZERO };
    let mut before = if spline.is_closed() { third(pieces - 1) } else { kurbo::Vec2::ZERO };
    let mut excess = 0.0;
    for (i, station) in stations.iter().enumerate() {
        let after = third(i);
        let force = after - before;
        before = after;
        if ends == Ends::Pinned && (i == 0 || i + 1 == stations.len()) {
            continue;
        }
        excess += 2.0 * (force.hypot() * tolerance.mm() + force.dot(spline.places()[i] - station.at));
    }
    excess
}

/// Two ordered lists of stations as one.
fn merged(a: &[Station], b: &[Station]) -> Vec<Station> {
    let mut all: Vec<Station> = a.iter().chain(b).copied().collect();
    all.sort_by(|a, b| a.t.total_cmp(&b.t));
    all
}

/// The chord-length parameter of each point, in mm from the first; around a ring one more, back at the first.
pub fn chord_lengths(points: &[Point], ring: bool) -> Vec<f64> {
    let mut along = 0.0;
    let mut lengths = Vec::with_capacity(points.len() + 1);
    lengths.extend(points.first().map(|_| along));
    let closing = points.last().zip(points.first()).filter(|_| ring);
    let chords = points.windows(2).map(|pair| pair[0].distance_squared(pair[1]));
    lengths.extend(chords.chain(closing.map(|(last, first)| last.distance_squared(*first))).map(|squared| {
        along += squared.sqrt();
        along
    }));
    lengths
}
