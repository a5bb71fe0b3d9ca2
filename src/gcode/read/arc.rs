//! Arcs as a program gives them: by centre or by radius, in one of three planes (NISTIR 6556, 3.5.3).

use std::f64::consts::{PI, TAU};

use kurbo::{Point, Vec2};

use super::block::wrong;
use crate::error::Error;

/// An arc in its plane, in mm.
#[derive(Clone, Copy, Debug)]
pub(super) struct Arc {
    pub(super) from: Point,
    pub(super) to: Point,
    centre: Point,
    /// Signed, counter-clockwise positive, up to a whole turn.
    sweep: f64,
    /// The difference between the radii at the two ends, in mm.
    pub(super) mismatch: f64,
}

impl Arc {
    /// About `centre`; a whole turn when the ends coincide.
    pub(super) fn by_centre(from: Point, to: Point, centre: Point, clockwise: bool) -> Result<Self, Error> {
        let (start, end) = (from - centre, to - centre);
        if start == Vec2::ZERO {
            return Err(wrong("the arc's centre is its start"));
        }
        // Sums of increments come back to where they started but for rounding.
        let scale = from.to_vec2().hypot().max(start.hypot());
        let closed = from.distance(to) <= 8.0 * f64::EPSILON * scale;
        let turn = if closed { 0.0 } else { start.cross(end).atan2(start.dot(end)) };
        let sweep = match (closed, clockwise) {
            (true, _) => TAU,
            (false, true) => (-turn).rem_euclid(TAU),
            (false, false) => turn.rem_euclid(TAU),
        };
        let mismatch = (start.hypot() - end.hypot()).abs();
        Ok(Self { from, to, centre, sweep: if clockwise { -sweep } else { sweep }, mismatch })
    }

    /// With a radius: by at most half a turn when it is positive, by more when it is negative.
    pub(super) fn by_radius(from: Point, to: Point, radius: f64, clockwise: bool) -> Result<Self, Error> {
        let chord = to - from;
        let half = chord.hypot() / 2.0;
        if half == 0.0 {
            return Err(wrong(
                "an arc by radius ends where it starts: every circle of that radius would fit",
            ));
        }
        let squared = radius * radius - half * half;
        if squared < -8.0 * f64::EPSILON * half * half {
            let (radius, chord) = (radius.abs(), 2.0 * half);
            return Err(wrong(format!("a radius of {radius:.4} mm does not reach across {chord:.4} mm")));
        }
        let height = squared.max(0.0).sqrt();
        let left = Vec2::new(-chord.y, chord.x) / chord.hypot();
        let to_left = clockwise != (radius > 0.0);
        let centre = from.midpoint(to) + left * if to_left { height } else { -height };
        let minor = 2.0 * half.atan2(height);
        let sweep = if radius > 0.0 { minor } else { TAU - minor };
        Ok(Self { from, to, centre, sweep: if clockwise { -sweep } else { sweep }, mismatch: 0.0 })
    }

    /// Length in the plane, in mm, with the mean of the two radii.
    pub(super) fn length(&self) -> f64 {
        self.radius(0.5) * self.sweep.abs()
    }

    /// The ends of its parts of at most half a turn, each with its fraction of the length, and the bulge
    /// they share.
    pub(super) fn halves(&self) -> (f64, impl Iterator<Item = (f64, Point)>) {
        let parts = if self.sweep.abs() > PI { 2 } else { 1 };
        let arc = *self;
        let ends = (1..=parts).map(move |k| {
            let t = f64::from(k) / f64::from(parts);
            (t, arc.at(t))
        });
        ((self.sweep / (4.0 * f64::from(parts))).tan(), ends)
    }

    /// The ends of chords that stay within `within` mm of the arc, each with its fraction of the length.
    pub(super) fn chords(&self, within: f64) -> impl Iterator<Item = (f64, Point)> {
        let step = 2.0 * (1.0 - (within / self.radius(0.5)).min(1.0)).acos();
        let parts = (self.sweep.abs() / step).ceil().max(2.0) as u32;
        let arc = *self;
        (1..=parts).map(move |k| {
            let t = f64::from(k) / f64::from(parts);
            (t, arc.at(t))
        })
    }

    /// The radius at the fraction `t`, between those at the ends.
    fn radius(&self, t: f64) -> f64 {
        let (start, end) = (self.from.distance(self.centre), self.to.distance(self.centre));
        start + (end - start) * t
    }

    /// The point at the fraction `t`.
    fn at(&self, t: f64) -> Point {
        if t >= 1.0 {
            return self.to;
        }
        let (sin, cos) = (self.sweep * t).sin_cos();
        let start = (self.from - self.centre).normalize() * self.radius(t);
        self.centre + Vec2::new(start.x * cos - start.y * sin, start.x * sin + start.y * cos)
    }
}
