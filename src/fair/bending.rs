//! The least-bending spline whose places at given parameters stay inside discs, by a primal-dual interior-point
//! method.
//!
//! Unknown are each station's offset from the centre of its disc and its first derivative; a beam's stiffness matrix
//! couples neighbours only, so that a step costs time proportional to the stations. Steps are a predictor and a
//! second-order corrector (Mehrotra 1992, for the quadratic constraints of discs).

use std::ops::Range;

use kurbo::{Point, Vec2};
use nalgebra::{Matrix2, SMatrix, Vector4};

use super::Ends;
use crate::num::{BlockTridiagonal, Factored};

/// A place of the trace that the spline has to pass within the radius.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Station {
    /// The parameter.
    pub(super) t: f64,
    /// The centre of the disc.
    pub(super) at: Point,
}

/// How close to the radius a step may bring a slack or a pressure to zero: this fraction of the way.
const REACH: f64 = 0.99;

/// After so many steps something is amiss; well-posed problems take 8 to 25.
const STEPS: usize = 60;

/// The problem in its own units: the radius for lengths, the mean spacing of the stations for the parameter.
struct Beam {
    widths: Vec<f64>,
    chords: Vec<Vec2>,
    ends: Ends,
}

/// Where the method stands: a value per station.
#[derive(Clone, Default)]
struct State {
    offset: Vec<Vec2>,
    slope: Vec<Vec2>,
    /// How hard the disc's rim presses.
    pressure: Vec<f64>,
    /// Half the squared radius less half the squared offset, once feasible.
    slack: Vec<f64>,
}

/// What is missing from the conditions of an optimum.
struct Residual {
    force: Vec<Vector4<f64>>,
    slack: Vec<f64>,
    product: Vec<f64>,
}

impl Residual {
    /// How much energy may still be gained: the sum of the products, and what the unbalanced forces could do on the way
    /// across a disc.
    fn work(&self) -> f64 {
        let products = self.product.iter().map(|product| product.abs());
        products.chain(self.force.iter().map(|force| force.norm())).sum()
    }

    /// The largest error of a slack.
    fn rim(&self) -> f64 {
        self.slack.iter().fold(0.0, |largest, slack| slack.abs().max(largest))
    }
}

/// Where the least-bending spline passes the stations, and how many steps that took. Its energy exceeds the least by at
/// most about the fraction `accuracy`. A closed curve comes back to the first station after `period`.
///
/// `None` when the numbers do not allow a solution (stations closer than rounding can tell apart).
pub(super) fn least_bending(
    stations: &[Station],
    (ends, period): (Ends, f64),
    radius: f64,
    accuracy: f64,
) -> Option<(Vec<Point>, usize)> {
    let (first, last) = (stations.first()?, stations.last()?);
    let ring = ends == Ends::Periodic;
    let span = if ring { period } else { last.t - first.t };
    let unit = span / (stations.len() - usize::from(!ring)) as f64;
    let mut widths: Vec<f64> = stations.windows(2).map(|s| (s[1].t - s[0].t) / unit).collect();
    let mut chords: Vec<Vec2> = stations.windows(2).map(|s| (s[1].at - s[0].at) / radius).collect();
    if ring {
        widths.push((first.t + period - last.t) / unit);
        chords.push((first.at - last.at) / radius);
    }
    let ends = match ends {
        Ends::Clamped(start, end) => Ends::Clamped(start * (unit / radius), end * (unit / radius)),
        free => free,
    };
    let beam = Beam { widths, chords, ends };
    let (state, steps) = beam.relax(stations.len(), accuracy)?;
    // The last bit of the way into the disc is straight, so that no station strays.
    let inside = |offset: Vec2| offset / offset.hypot().max(1.0);
    let places = stations.iter().zip(&state.offset).map(|(station, &u)| station.at + inside(u) * radius);
    Some((places.collect(), steps))
}

impl Beam {
    /// Walks from the centres of the discs to the optimum.
    fn relax(&self, stations: usize, accuracy: f64) -> Option<(State, usize)> {
        let mut state = self.start(stations);
        for step in 0..STEPS {
            let residual = self.residual(&state);
            let enough = (accuracy * self.energy(&state)).max(accuracy.powi(3) * stations as f64);
            if residual.work() <= enough && residual.rim() <= accuracy * accuracy {
                return Some((state, step));
            }
            self.advance(&mut state, residual)?;
        }
        Some((state, STEPS))
    }

    fn start(&self, stations: usize) -> State {
        let mut slope = vec![Vec2::ZERO; stations];
        for (i, (chord, width)) in self.chords.iter().zip(&self.widths).enumerate() {
            slope[i] += *chord / *width / 2.0;
            slope[(i + 1) % stations] += *chord / *width / 2.0;
        }
        if let Ends::Clamped(start, end) = self.ends {
            slope[0] = start;
            slope[stations - 1] = end;
        }
        let offset = vec![Vec2::ZERO; stations];
        let mut state = State { offset, slope, pressure: vec![0.0; stations], slack: vec![0.5; stations] };
        let forces: f64 = self.residual(&state).force.iter().map(|force| force.norm()).sum();
        state.pressure.fill(1.0 + forces / stations as f64);
        state
    }

    /// Half the integral of the squared second derivative.
    fn energy(&self, state: &State) -> f64 {
        let piece = |i: usize| {
            let (start, end) = self.seconds(state, i);
            self.widths[i] / 6.0 * (start.hypot2() + start.dot(end) + end.hypot2())
        };
        (0..self.widths.len()).map(piece).sum()
    }

    /// The second derivative at both ends of piece `i`.
    fn seconds(&self, state: &State, i: usize) -> (Vec2, Vec2) {
        let j = (i + 1) % state.offset.len();
        let width = self.widths[i];
        let chord = (self.chords[i] + state.offset[j] - state.offset[i]) / width;
        let (m0, m1) = (state.slope[i], state.slope[j]);
        ((6.0 * chord - 4.0 * m0 - 2.0 * m1) / width, (2.0 * m0 + 4.0 * m1 - 6.0 * chord) / width)
    }

    /// One predictor and corrector step towards the optimum.
    fn advance(&self, state: &mut State, mut residual: Residual) -> Option<()> {
        let factored = self.matrix(state).factor()?;
        let mean = -residual.product.iter().sum::<f64>() / residual.product.len() as f64;
        let predictor = state.direction(&factored, &residual);
        let reach = state.reach(&predictor).min(1.0);
        let ahead = state.after(&predictor, reach);
        let ahead: f64 = ahead.pressure.iter().zip(&ahead.slack).map(|(l, s)| l * s).sum();
        let aim = mean * (ahead / state.pressure.len() as f64 / mean).powi(3);
        for i in 0..state.offset.len() {
            let (turn, press) = (predictor.offset[i] * reach, predictor.pressure[i] * reach);
            residual.slack[i] -= turn.hypot2() / 2.0;
            residual.product[i] += aim - press * predictor.slack[i] * reach;
            residual.force[i][0] += press * turn.x;
            residual.force[i][1] += press * turn.y;
        }
        let step = state.direction(&factored, &residual);
        let reach = (REACH * state.reach(&step)).min(1.0);
        *state = state.after(&step, reach);
        Some(())
    }

    /// The beam's stiffness, with every disc's share on the diagonal, in the stations' own frames.
    fn matrix(&self, state: &State) -> BlockTridiagonal<4> {
        let stations = state.offset.len();
        let mut matrix = BlockTridiagonal::<4>::zeros(stations, self.ends == Ends::Periodic);
        for i in 0..stations {
            let press = state.pressure[i];
            matrix.diagonal[i][(0, 0)] = press + press / state.slack[i] * state.offset[i].hypot2();
            matrix.diagonal[i][(1, 1)] = press;
        }
        for (i, &width) in self.widths.iter().enumerate() {
            let j = (i + 1) % stations;
            let (shear, lean, turn) = (12.0 / width.powi(3), 6.0 / (width * width), 2.0 / width);
            let same = Vec2::new(1.0, 0.0);
            let (here, next) = (frame(state.offset[i]), frame(state.offset[j]));
            matrix.diagonal[i] += block([shear, lean, lean, 2.0 * turn], same);
            matrix.diagonal[j] += block([shear, -lean, -lean, 2.0 * turn], same);
            matrix.coupling[i] += block([-shear, -lean, lean, turn], into_frame(next, here));
        }
        if let Some(rows) = self.held() {
            hold(&mut matrix, 0, rows.clone());
            hold(&mut matrix, stations - 1, rows);
        }
        matrix
    }

    /// The unknowns that are prescribed at both ends: the place or the slope.
    fn held(&self) -> Option<Range<usize>> {
        match self.ends {
            Ends::Pinned => Some(0..2),
            Ends::Clamped(..) => Some(2..4),
            Ends::Natural | Ends::Periodic => None,
        }
    }

    /// What is missing from the balance of forces, from the discs' equations and from the products of pressure and slack.
    fn residual(&self, state: &State) -> Residual {
        let push = |i: usize| state.offset[i] * state.pressure[i];
        let mut force: Vec<_> =
            (0..state.offset.len()).map(|i| Vector4::new(push(i).x, push(i).y, 0.0, 0.0)).collect();
        for (i, &width) in self.widths.iter().enumerate() {
            let (start, end) = self.seconds(state, i);
            let third = (end - start) / width;
            let j = (i + 1) % state.offset.len();
            force[i] += Vector4::new(third.x, third.y, -start.x, -start.y);
            force[j] += Vector4::new(-third.x, -third.y, end.x, end.y);
        }
        if let (Some(rows), [first, .., last]) = (self.held(), &mut force[..]) {
            for end in [first, last] {
                end.rows_mut(rows.start, rows.len()).fill(0.0);
            }
        }
        Residual {
            force,
            slack: state.rim().zip(&state.slack).map(|(rim, slack)| rim - slack).collect(),
            product: state.pressure.iter().zip(&state.slack).map(|(l, s)| -l * s).collect(),
        }
    }
}

/// The first axis of a station's own frame: outwards, so that the rim's stiffness, large beside all others near the
/// optimum, stands in one entry of the matrix and costs no precision elsewhere.
fn frame(offset: Vec2) -> Vec2 {
    let outwards = offset / offset.hypot();
    if outwards.is_finite() { outwards } else { Vec2::new(1.0, 0.0) }
}

/// The vector `v` in the frame of first axis `axis`.
fn into_frame(axis: Vec2, v: Vec2) -> Vec2 {
    Vec2::new(axis.dot(v), axis.cross(v))
}

/// The vector whose components in the frame of first axis `axis` are `v`.
fn out_of_frame(axis: Vec2, v: Vec2) -> Vec2 {
    axis * v.x + Vec2::new(-axis.y, axis.x) * v.y
}

/// The entries for both axes of a frame, turned so that the first axis comes to `axis`: place on place, place on
/// slope, slope on place, slope on slope.
fn block(entries: [f64; 4], axis: Vec2) -> SMatrix<f64, 4, 4> {
    let turned = Matrix2::new(axis.x, -axis.y, axis.y, axis.x);
    let mut block = SMatrix::<f64, 4, 4>::zeros();
    for (entry, corner) in entries.into_iter().zip([(0, 0), (0, 2), (2, 0), (2, 2)]) {
        block.fixed_view_mut::<2, 2>(corner.0, corner.1).copy_from(&(turned * entry));
    }
    block
}

/// Takes what is prescribed at a station out of the unknowns: its rows and columns become those of the identity.
fn hold(matrix: &mut BlockTridiagonal<4>, station: usize, rows: Range<usize>) {
    for row in rows {
        matrix.diagonal[station].row_mut(row).fill(0.0);
        matrix.diagonal[station].column_mut(row).fill(0.0);
        matrix.diagonal[station][(row, row)] = 1.0;
        matrix.coupling[station].column_mut(row).fill(0.0);
        if station > 0 {
            matrix.coupling[station - 1].row_mut(row).fill(0.0);
        }
    }
}

impl State {
    /// Half the squared radius less half the squared offset of each station.
    fn rim(&self) -> impl Iterator<Item = f64> + '_ {
        self.offset.iter().map(|u| (1.0 - u.hypot2()) / 2.0)
    }

    /// The change that makes good what is missing, to first order.
    fn direction(&self, factored: &Factored<4>, missing: &Residual) -> Self {
        let stations = self.offset.len();
        let push = |i: usize| (missing.product[i] - self.pressure[i] * missing.slack[i]) / self.slack[i];
        let axes: Vec<Vec2> = self.offset.iter().copied().map(frame).collect();
        let mut rhs: Vec<Vector4<f64>> = Vec::with_capacity(stations);
        for (i, (force, &axis)) in missing.force.iter().zip(&axes).enumerate() {
            let force = -force;
            let pull = into_frame(axis, Vec2::new(force[0], force[1]));
            let turn = into_frame(axis, Vec2::new(force[2], force[3]));
            rhs.push(Vector4::new(pull.x - push(i) * self.offset[i].hypot(), pull.y, turn.x, turn.y));
        }
        factored.solve(&mut rhs);
        let solved = |k: usize| {
            let pairs = rhs.iter().map(move |r| Vec2::new(r[k], r[k + 1]));
            pairs.zip(&axes).map(|(v, &axis)| out_of_frame(axis, v)).collect::<Vec<Vec2>>()
        };
        let (offset, slope) = (solved(0), solved(2));
        let slack: Vec<f64> =
            (0..stations).map(|i| missing.slack[i] - self.offset[i].dot(offset[i])).collect();
        let pressure = (0..stations)
            .map(|i| (missing.product[i] - self.pressure[i] * slack[i]) / self.slack[i])
            .collect();
        Self { offset, slope, pressure, slack }
    }

    /// How many times the step fits before a pressure or a slack is used up.
    fn reach(&self, step: &Self) -> f64 {
        let here = self.pressure.iter().chain(&self.slack);
        let change = step.pressure.iter().chain(&step.slack);
        here.zip(change)
            .filter(|(_, change)| **change < 0.0)
            .map(|(x, dx)| -x / dx)
            .fold(f64::INFINITY, f64::min)
    }

    /// The state after `reach` times the step.
    fn after(&self, step: &Self, reach: f64) -> Self {
        let move_by = |a: &[f64], b: &[f64]| a.iter().zip(b).map(|(x, dx)| x + reach * dx).collect();
        let turn_by = |a: &[Vec2], b: &[Vec2]| a.iter().zip(b).map(|(&x, &dx)| x + reach * dx).collect();
        Self {
            offset: turn_by(&self.offset, &step.offset),
            slope: turn_by(&self.slope, &step.slope),
            pressure: move_by(&self.pressure, &step.pressure),
            slack: move_by(&self.slack, &step.slack),
        }
    }
}
