//! Parametric cubic splines: twice continuously differentiable, least bending through their points.

use kurbo::{CubicBez, Point, Vec2};
use nalgebra::SMatrix;

use crate::num::BlockTridiagonal;

/// What holds at the ends of a spline.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Ends {
    /// Free ends: no second derivative there.
    Natural,
    /// The first derivative (length of the parameter's unit included) at the start and at the end.
    Clamped(Vec2, Vec2),
    /// Free directions, at the trace's own ends. For a spline through given points the same as natural.
    Pinned,
    /// A closed curve: the last point joins the first, which is not repeated.
    Periodic,
}

/// A parametric cubic spline in Hermite form: places and first derivatives at the knots.
#[derive(Clone, Debug, PartialEq)]
pub struct CubicSpline {
    knots: Vec<f64>,
    places: Vec<Point>,
    slopes: Vec<Vec2>,
    closed: bool,
}

/// A spline at one parameter.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Local {
    /// The place in mm.
    pub at: Point,
    /// The first derivative by the parameter.
    pub first: Vec2,
    /// The second derivative by the parameter.
    pub second: Vec2,
}

impl Local {
    /// Signed curvature in 1/mm, positive for a left turn; NaN where the spline stands still.
    pub fn curvature(&self) -> f64 {
        self.first.cross(self.second) / self.first.hypot().powi(3)
    }
}

impl CubicSpline {
    /// The spline through `points` at the parameters `knots`. A periodic spline takes one knot more than points: the
    /// parameter at which it is back at the first.
    ///
    /// `None` unless there are at least two points, the counts agree, everything is finite and the knots increase.
    pub fn through(knots: Vec<f64>, points: &[Point], ends: Ends) -> Option<Self> {
        let closed = ends == Ends::Periodic;
        let mut places = points.to_vec();
        places.extend(points.first().filter(|_| closed));
        let finite = places.iter().all(|p| p.is_finite()) && knots.iter().all(|t| t.is_finite());
        let increasing = knots.windows(2).all(|pair| pair[0] < pair[1]);
        if points.len() < 2 || knots.len() != places.len() || !finite || !increasing {
            return None;
        }
        let slopes = slopes(&knots, &places, ends)?;
        Some(Self { knots, places, slopes, closed })
    }

    /// True for a closed spline.
    pub fn is_closed(&self) -> bool {
        self.closed
    }

    /// The parameters at the knots; a closed spline's last is its period after its first.
    pub fn knots(&self) -> &[f64] {
        &self.knots
    }

    /// The places at the knots; a closed spline's last is its first again.
    pub fn places(&self) -> &[Point] {
        &self.places
    }

    /// The pieces between the knots, in order.
    pub fn cubics(&self) -> impl Iterator<Item = CubicBez> + '_ {
        let ends = self.places.windows(2).zip(self.slopes.windows(2)).zip(self.knots.windows(2));
        ends.map(|((at, slope), knots)| {
            let third = (knots[1] - knots[0]) / 3.0;
            CubicBez { p0: at[0], p1: at[0] + slope[0] * third, p2: at[1] - slope[1] * third, p3: at[1] }
        })
    }

    /// The spline at parameter `t`; beyond its ends the end pieces go on.
    pub fn local(&self, t: f64) -> Local {
        let after = self.knots.partition_point(|&knot| knot <= t);
        self.piece(after.clamp(1, self.knots.len() - 1) - 1).local(t)
    }

    /// The spline at each of the parameters `ts`, which must not decrease; faster than asking one by one.
    pub fn locals<'a>(&'a self, ts: &'a [f64]) -> impl Iterator<Item = Local> + 'a {
        let mut i = 0;
        let mut piece = self.piece(0);
        ts.iter().map(move |&t| {
            if t > piece.to && i + 2 < self.knots.len() {
                while t > self.knots[i + 1] && i + 2 < self.knots.len() {
                    i += 1;
                }
                piece = self.piece(i);
            }
            piece.local(t)
        })
    }

    /// The bending energy: the integral of the squared second derivative over the parameter, exactly.
    pub fn energy(&self) -> f64 {
        (0..self.knots.len() - 1).map(|i| self.piece(i).energy()).sum()
    }

    /// The piece between knot `i` and the next.
    pub(super) fn piece(&self, i: usize) -> Piece {
        let (from, to) = (self.knots[i], self.knots[i + 1]);
        let chord = (self.places[i + 1] - self.places[i]) / (to - from);
        let (m0, m1) = (self.slopes[i], self.slopes[i + 1]);
        let start = (6.0 * chord - 4.0 * m0 - 2.0 * m1) / (to - from);
        let end = (2.0 * m0 + 4.0 * m1 - 6.0 * chord) / (to - from);
        Piece {
            from,
            to,
            place: self.places[i],
            slope: m0,
            second: start,
            third: (end - start) / (to - from),
        }
    }
}

/// One cubic piece as its Taylor series at its start.
#[derive(Clone, Copy, Debug)]
pub(super) struct Piece {
    pub(super) from: f64,
    pub(super) to: f64,
    place: Point,
    slope: Vec2,
    pub(super) second: Vec2,
    pub(super) third: Vec2,
}

impl Piece {
    pub(super) fn local(&self, t: f64) -> Local {
        let s = t - self.from;
        Local {
            at: self.place + (self.slope + (self.second + self.third * (s / 3.0)) * (s / 2.0)) * s,
            first: self.slope + (self.second + self.third * (s / 2.0)) * s,
            second: self.second + self.third * s,
        }
    }

    /// The second derivative is linear, so that Simpson's rule is exact for its square.
    fn energy(&self) -> f64 {
        let width = self.to - self.from;
        let end = self.second + self.third * width;
        width / 3.0 * (self.second.hypot2() + self.second.dot(end) + end.hypot2())
    }
}

/// The first derivatives that make the second ones continuous (and hold the ends): a tridiagonal system.
fn slopes(knots: &[f64], places: &[Point], ends: Ends) -> Option<Vec<Vec2>> {
    let ring = ends == Ends::Periodic;
    let pieces = knots.len() - 1;
    let blocks = if ring { pieces } else { pieces + 1 };
    let mut matrix = BlockTridiagonal::<1>::zeros(blocks, ring);
    let mut rhs = vec![SMatrix::<f64, 1, 2>::zeros(); blocks];
    for i in 0..pieces {
        let width = knots[i + 1] - knots[i];
        let pull = (places[i + 1] - places[i]) * (3.0 / width / width);
        for j in [i, (i + 1) % blocks] {
            matrix.diagonal[j][0] += 2.0 / width;
            rhs[j] += SMatrix::from([[pull.x], [pull.y]]);
        }
        matrix.coupling[i][0] = 1.0 / width;
    }
    if let Ends::Clamped(start, end) = ends {
        let last = blocks - 1;
        for (held, slope, neighbour, coupling) in [(0, start, 1, 0), (last, end, last - 1, last - 1)] {
            let slope = SMatrix::from([[slope.x], [slope.y]]);
            rhs[neighbour] -= slope * matrix.coupling[coupling][0];
            matrix.diagonal[held][0] = 1.0;
            matrix.coupling[coupling][0] = 0.0;
            rhs[held] = slope;
        }
    }
    matrix.factor()?.solve(&mut rhs);
    let mut slopes: Vec<Vec2> = rhs.iter().map(|m| Vec2::new(m[0], m[1])).collect();
    slopes.extend(ring.then(|| slopes[0]));
    Some(slopes)
}
