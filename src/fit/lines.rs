//! Where the trace is straight: the lines that a path should follow there.

use kurbo::{Point, Vec2};
use nalgebra::{Matrix3, Vector3};

use super::state::State;
use super::trace::Bead;

/// Shortest straight run, in bands.
const SHORTEST_RUN: f64 = 20.0;
/// Share of a run's ends that is left out when its line is fitted, since curves run into it there.
const ENDS_LEFT_OUT: f64 = 0.1;
/// Largest sagitta of the best parabola through a straight run, in bands.
const STRAIGHT: f64 = 0.15;

/// A straight run of the trace.
#[derive(Clone, Copy, Debug)]
pub(super) struct Line {
    /// The beads it lies between.
    pub(super) first: usize,
    pub(super) last: usize,
    /// A place on the line of least squares, and its unit direction.
    at: Point,
    along: Vec2,
}

/// The straight runs of `beads`, in order.
pub(super) fn lines(beads: &[Bead]) -> Vec<Line> {
    let mut found = Vec::new();
    let mut first = 0;
    while first + 1 < beads.len() {
        let last = run_from(beads, first);
        if beads[last].along - beads[first].along >= SHORTEST_RUN * beads[first].band {
            found.extend(fitted(beads, first, last));
        }
        first = last.max(first + 1);
    }
    found
}

/// The last bead that some straight line from bead `first` reaches within the band of all between.
fn run_from(beads: &[Bead], first: usize) -> usize {
    let from = beads[first].at;
    let Some(next) = beads[first + 1..].iter().find(|b| b.at.distance(from) > 2.0 * b.band) else {
        return beads.len() - 1;
    };
    let along = (next.at - from).normalize();
    let (mut low, mut high) = (f64::NEG_INFINITY, f64::INFINITY);
    for (i, bead) in beads.iter().enumerate().skip(first + 1) {
        let (u, v) = (along.dot(bead.at - from), along.cross(bead.at - from));
        if u > bead.band {
            (low, high) = (low.max((v - bead.band) / u), high.min((v + bead.band) / u));
        }
        if low > high || u < -bead.band {
            return i - 1;
        }
    }
    beads.len() - 1
}

/// The line of least squares through the inner part of a run; `None` if the run bends.
fn fitted(beads: &[Bead], first: usize, last: usize) -> Option<Line> {
    let length = beads[last].along - beads[first].along;
    let (from, to) =
        (beads[first].along + ENDS_LEFT_OUT * length, beads[last].along - ENDS_LEFT_OUT * length);
    let inner = || beads[first..=last].iter().filter(|b| (from..=to).contains(&b.along));
    let (start, end) = (inner().next()?, inner().next_back()?);
    let chord = end.at - start.at;
    let along = chord.normalize();
    let half = chord.hypot() / 2.0;
    let middle = start.at.midpoint(end.at);
    // Least squares for v = c0 + c1 t + c2 t2, with t from -1 to 1 along the chord.
    let (mut a, mut b) = (Matrix3::zeros(), Vector3::zeros());
    for bead in inner() {
        let t = along.dot(bead.at - middle) / half;
        let row = Vector3::new(1.0, t, t * t);
        a += row * row.transpose();
        b += row * along.cross(bead.at - middle);
    }
    let c = a.lu().solve(&b)?;
    let bends = c.z.is_nan() || c.z.abs() > STRAIGHT * beads[first].band;
    if bends {
        return None;
    }
    let left = Vec2::new(-along.y, along.x);
    let tilted = (along * half + left * c.y).normalize();
    Some(Line { first, last, at: middle + left * (c.x + c.z / 3.0), along: tilted })
}

impl Line {
    /// The same run from bead `first` to bead `last`.
    pub(super) fn between(self, first: usize, last: usize) -> Self {
        Self { first, last, ..self }
    }

    /// The curvature and length of the arc that leaves `state` and runs into the line; `None` where none does.
    ///
    /// The tangents of an arc at its ends meet at equal distances from them.
    pub(super) fn joined_from(&self, state: &State) -> Option<(f64, f64)> {
        let turn = state.heading.cross(self.along);
        let meeting = (self.at - state.at).cross(self.along) / turn;
        if !(meeting.is_finite() && meeting > 0.0) {
            return None;
        }
        let meets = state.at + state.heading * meeting;
        let touch = meets + self.along * meeting;
        let half = (touch - state.at).hypot() / 2.0;
        let angle = turn.atan2(state.heading.dot(self.along));
        let curvature = (angle / 2.0).sin() / half;
        let length = angle / curvature;
        (curvature.is_finite() && length.is_finite() && angle.abs() < 3.0).then_some((curvature, length))
    }
}
