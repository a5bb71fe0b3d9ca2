//! A stretch of a move over which the direction hardly changes: how fast it may be run, and how fast its speed may
//! change.
//!
//! Speeds appear squared: under constant tangential acceleration the squared speed is linear in the length.

use std::f64::consts::{FRAC_PI_2, TAU};

use kurbo::Vec2;

use super::Limits;
use crate::geom::Span;
use crate::toolpath::Move;

/// The largest turn of one stretch. The acceleration that the axes leave is the least over its directions.
const TURN: f64 = TAU / 256.0;

/// A stretch of constant curvature, all of one move.
#[derive(Clone, Copy, Debug)]
pub(super) struct Stretch {
    /// Which move of the toolpath it belongs to.
    pub(super) of: usize,
    /// Where it starts, in mm along the move.
    pub(super) from: f64,
    /// Its length in mm.
    pub(super) length: f64,
    /// The largest squared speed: feed, axis speeds, and the centripetal limit in all its directions.
    pub(super) cap: f64,
    /// What the axes leave for gaining speed.
    gain: Bound,
    /// What they leave for losing it: for gaining it the other way round.
    loss: Bound,
}

/// How a stretch is run: gaining speed, at a steady speed, losing speed, one of them perhaps for no length at all.
pub(super) struct Run {
    /// The squared speed of the steady part.
    pub(super) peak: f64,
    /// The lengths of the three parts in mm.
    pub(super) lengths: [f64; 3],
}

impl Stretch {
    /// The largest squared speed at its end after `start` at its beginning.
    pub(super) fn reach(&self, start: f64) -> f64 {
        self.gain.reach(start, self.length, self.cap)
    }

    /// The largest squared speed at its beginning that still comes down to `end` at its end.
    pub(super) fn reach_back(&self, end: f64) -> f64 {
        self.loss.reach(end, self.length, self.cap)
    }

    /// The squared speed that can be lost along it from whatever speed it may be run at.
    pub(super) fn sure_loss(&self) -> f64 {
        2.0 * self.length * self.loss.over(0.0, self.cap)
    }

    /// The fastest run between two squared speeds that are within reach of each other.
    pub(super) fn run(&self, start: f64, end: f64) -> Run {
        let parts = |peak: f64| {
            let gaining = ramp(start, peak, self.gain.over(start, peak));
            let losing = ramp(end, peak, self.loss.over(peak, end));
            (gaining, losing)
        };
        let excess = |peak: f64| {
            let (gaining, losing) = parts(peak);
            gaining + losing - self.length
        };
        let least = start.max(end);
        let peak = if self.gain.bend == 0.0 && self.gain.steady > 0.0 {
            (self.gain.steady * self.length + (start + end) / 2.0).clamp(least, self.cap.max(least))
        } else {
            largest(least, self.cap.max(least), excess)
        };
        let (gaining, losing) = parts(peak);
        // Rounding, or a joint that only just comes into reach, must not make the parts longer than the whole.
        let shrink = (self.length / (gaining + losing)).min(1.0);
        let (gaining, losing) = (gaining * shrink, losing * shrink);
        Run { peak, lengths: [gaining, (self.length - gaining - losing).max(0.0), losing] }
    }
}

/// The length over which the squared speed changes from `low` to `high`; 0 where they differ by rounding only, even
/// where no change were possible.
fn ramp(low: f64, high: f64, acceleration: f64) -> f64 {
    if high - low > 16.0 * f64::EPSILON * high { (high - low) / (2.0 * acceleration) } else { 0.0 }
}

/// The largest number from `least` to `most` at which `excess` is not above zero, by false position (the Illinois
/// variant, Dowell and Jarratt 1971); `excess` must not come back once above zero.
fn largest(least: f64, most: f64, excess: impl Fn(f64) -> f64) -> f64 {
    let (mut inside, mut below) = (least, excess(least));
    let (mut outside, mut above) = (most, excess(most));
    if above <= 0.0 || below >= 0.0 {
        return if above <= 0.0 { most } else { least };
    }
    let mut moved_inside = None;
    while outside - inside > 4.0 * f64::EPSILON * most {
        let aim = outside - above * (outside - inside) / (above - below);
        let middle = if aim > inside && aim < outside { aim } else { f64::midpoint(inside, outside) };
        let there = excess(middle);
        if middle <= inside || middle >= outside {
            break;
        }
        // An end that stays twice has its value halved, so that the next aim falls beyond the root.
        if there <= 0.0 {
            (inside, below) = (middle, there);
            above /= if moved_inside == Some(true) { 2.0 } else { 1.0 };
        } else {
            (outside, above) = (middle, there);
            below /= if moved_inside == Some(false) { 2.0 } else { 1.0 };
        }
        moved_inside = Some(there <= 0.0);
    }
    inside
}

/// What the axes leave for tangential acceleration along a stretch.
#[derive(Clone, Copy, Debug)]
struct Bound {
    /// Whatever the speed: from Z, and on a straight stretch from X and Y as well.
    steady: f64,
    /// Centripetal over squared speed, in the plane and along it; 0 on a straight stretch.
    bend: f64,
    /// X and Y on a bent stretch.
    plane: [Axis; 2],
}

/// One axis on a bent stretch: its acceleration per unit of path in the plane, and its part of the directions at both
/// ends.
#[derive(Clone, Copy, Debug)]
struct Axis {
    limit: f64,
    start: Slant,
    end: Slant,
}

/// The components along one axis of the unit tangent and of the unit normal towards the centre.
#[derive(Clone, Copy, Debug)]
struct Slant {
    tangent: f64,
    normal: f64,
}

impl Bound {
    /// The tangential acceleration left at the squared speed `w`: concave in `w`, as the least of linear functions.
    fn at(&self, w: f64) -> f64 {
        if self.bend == 0.0 {
            return self.steady;
        }
        let left = |axis: &Axis| axis.left(self.bend * w);
        self.steady.min(left(&self.plane[0])).min(left(&self.plane[1])).max(0.0)
    }

    /// The tangential acceleration left at every squared speed between two: by concavity, at the ends.
    fn over(&self, w0: f64, w1: f64) -> f64 {
        if self.bend == 0.0 { self.steady } else { self.at(w0).min(self.at(w1)) }
    }

    /// The largest squared speed up to `cap` that is reached from `start` over `length`.
    fn reach(&self, start: f64, length: f64, cap: f64) -> f64 {
        if self.bend == 0.0 {
            return (start + 2.0 * self.steady * length).min(cap);
        }
        let here = self.at(start);
        largest(start.min(cap), cap, |end| end - start - 2.0 * length * here.min(self.at(end)))
    }

    /// The bound on losing speed that belongs to this one on gaining it.
    fn reversed(self) -> Self {
        let turned = |axis: Axis| Axis { start: axis.end.reversed(), end: axis.start.reversed(), ..axis };
        Self { plane: self.plane.map(turned), ..self }
    }
}

impl Axis {
    /// The tangential acceleration that the axis leaves beside the centripetal one, in every direction between the
    /// ends: the least of (limit - s c n)/|u| for tangent u, s its sign, and normal n. As the direction turns, u' = n
    /// and n' = -u, so that its slope has the sign of c - s limit n, and its least is the root of limit^2 - c^2.
    fn left(&self, centripetal: f64) -> f64 {
        let [before, after] = [self.start.sign(self.start.normal), self.end.sign(-self.end.normal)];
        let value =
            |slant: Slant, sign: f64| (self.limit - sign * centripetal * slant.normal) / slant.tangent.abs();
        let slope = |slant: Slant, sign: f64| centripetal - sign * self.limit * slant.normal;
        let (falls, rises) = (slope(self.start, before) < 0.0, slope(self.end, after) > 0.0);
        let inside = if before * after < 0.0 { falls || rises } else { falls && rises };
        let ends = value(self.start, before).min(value(self.end, after));
        if inside {
            ends.min((self.limit * self.limit - centripetal * centripetal).max(0.0).sqrt())
        } else {
            ends
        }
    }
}

impl Slant {
    /// Along axis 0 or 1, for the unit tangent and the side of the turn (1 left, -1 right).
    fn of(axis: usize, tangent: Vec2, side: f64) -> Self {
        let normal = Vec2::new(-tangent.y, tangent.x) * side;
        if axis == 0 {
            Self { tangent: tangent.x, normal: normal.x }
        } else {
            Self { tangent: tangent.y, normal: normal.y }
        }
    }

    /// The sign of the tangent's component; where it is zero, of the side it comes from or goes to.
    fn sign(self, beside: f64) -> f64 {
        1.0_f64.copysign(if self.tangent == 0.0 { beside } else { self.tangent })
    }

    fn reversed(self) -> Self {
        Self { tangent: -self.tangent, normal: self.normal }
    }
}

/// A move's shape in numbers.
struct Shape {
    span: Span,
    length: f64,
    /// Length in the plane over length.
    level: f64,
    /// Rise over length, signed.
    slope: f64,
    sweep: f64,
}

impl Shape {
    fn of(m: &Move) -> Self {
        let (span, length) = (m.span(), m.length());
        let level = span.length() / length;
        let sweep = if level > 0.0 { span.sweep() } else { 0.0 };
        Self { span, length, level, slope: (m.to.z - m.from.z) / length, sweep }
    }

    /// The largest sizes of the components of the unit tangent between two fractions of the move.
    fn largest_tangent(&self, t0: f64, t1: f64) -> [f64; 3] {
        let (start, end) = (self.tangent(t0), self.tangent(t1));
        let passes = |axis: f64| {
            let ahead = |k: f64| ((axis + k - start.atan2()) * self.sweep.signum()).rem_euclid(TAU);
            ahead(0.0).min(ahead(TAU / 2.0)) < self.sweep.abs() * (t1 - t0)
        };
        let along = |axis: f64, a: f64, b: f64| if passes(axis) { 1.0 } else { a.abs().max(b.abs()) };
        let (x, y) = (along(0.0, start.x, end.x), along(FRAC_PI_2, start.y, end.y));
        [x * self.level, y * self.level, self.slope.abs()]
    }

    /// The unit tangent in the plane at a fraction of the move; zero where it goes straight up or down.
    fn tangent(&self, t: f64) -> Vec2 {
        if self.level > 0.0 { self.span.tangent(t) } else { Vec2::ZERO }
    }

    /// The largest squared speed that may be held between two fractions of the move.
    fn cap(&self, (t0, t1): (f64, f64), m: &Move, limits: &Limits) -> f64 {
        let [x, y, z] = self.largest_tangent(t0, t1);
        let axes = if m.is_rapid() { limits.rapid } else { limits.feed };
        let speed = least([x, y, z], axes).min(m.feed.map_or(f64::INFINITY, |feed| feed / 60.0));
        // The normal is the tangent turned by a right angle, so that X and Y change places.
        let bend = self.span.curvature().abs() * self.level;
        (speed * speed).min(least([y * bend, x * bend, 0.0], limits.acceleration))
    }
}

/// The highest speed along the whole of a move, in mm/s: feed, axis speeds, centripetal limit. The move has length.
pub(super) fn speed_cap(m: &Move, limits: &Limits) -> f64 {
    Shape::of(m).cap((0.0, 1.0), m, limits).sqrt()
}

/// The largest size of a vector of which no component passes its axis' limit; `along` holds its direction.
pub(super) fn least(along: [f64; 3], limits: [f64; 3]) -> f64 {
    let on_axis = |i: usize| if along[i] == 0.0 { f64::INFINITY } else { limits[i] / along[i].abs() };
    on_axis(0).min(on_axis(1)).min(on_axis(2))
}

/// The stretches of move `of`, in order; none for a move without length.
pub(super) fn stretches(of: usize, m: &Move, limits: &Limits) -> impl Iterator<Item = Stretch> + use<> {
    let shape = Shape::of(m);
    let parts = if shape.length > 0.0 { (shape.sweep.abs() / TURN).ceil().max(1.0) } else { 0.0 };
    let part = move |k: u32| f64::from(k) / parts;
    let caps: Vec<f64> = (0..parts as u32).map(|k| shape.cap((part(k), part(k + 1)), m, limits)).collect();
    let acceleration = limits.acceleration;
    let bend = if shape.sweep == 0.0 { 0.0 } else { shape.span.curvature().abs() * shape.level };
    caps.into_iter().zip(0..).map(move |(cap, k)| {
        let ends = [k, k + 1].map(|k| shape.tangent(part(k)));
        let flat = if bend == 0.0 { ends[0] * shape.level } else { Vec2::ZERO };
        let steady = least([flat.x, flat.y, shape.slope], acceleration);
        let plane = [0, 1].map(|axis| {
            let [start, end] = ends.map(|tangent| Slant::of(axis, tangent, shape.sweep.signum()));
            Axis { limit: acceleration[axis] / shape.level, start, end }
        });
        let gain = Bound { steady, bend, plane };
        let (from, length) = (shape.length * part(k), shape.length / parts);
        Stretch { of, from, length, cap, gain, loss: gain.reversed() }
    })
}
