//! One line or circular arc, held as two ends and a bulge.

use std::f64::consts::{FRAC_PI_2, PI, TAU};

use kurbo::{Affine, Point, Rect, Vec2};

/// A line or arc from `start` to `end`; `bulge` = tan(sweep/4), positive counter-clockwise, 0 for a line.
///
/// Ends and bulge cannot contradict each other, and nearly straight arcs need no special case. Centre and radius
/// are derived where they are used. A span whose ends coincide is a point, whatever its bulge.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Span {
    /// Where the span starts, in mm.
    pub start: Point,
    /// Where the span ends, in mm.
    pub end: Point,
    /// tan(sweep/4).
    pub bulge: f64,
}

/// The place on a span that is nearest to a point.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Nearest {
    /// Fraction of the span's length, 0 at its start and 1 at its end.
    pub t: f64,
    /// The place itself.
    pub at: Point,
    /// Its distance from the point asked for, in mm.
    pub distance: f64,
}

impl Span {
    /// The straight span between two points.
    pub fn line(start: Point, end: Point) -> Self {
        Self { start, end, bulge: 0.0 }
    }

    /// The span from `start` to `end` with the given bulge.
    pub fn arc(start: Point, end: Point, bulge: f64) -> Self {
        Self { start, end, bulge }
    }

    /// The span that leaves `start` along the unit vector `heading` and ends at `end`.
    ///
    /// The sweep is twice the angle between heading and chord (tangent-chord theorem), so it is below a full turn.
    pub fn leaving(start: Point, heading: Vec2, end: Point) -> Self {
        let chord = end - start;
        let half_sweep = heading.cross(chord).atan2(heading.dot(chord));
        Self { start, end, bulge: (half_sweep / 2.0).tan() }
    }

    /// True for a straight span.
    pub fn is_line(&self) -> bool {
        self.bulge == 0.0
    }

    /// The vector from start to end.
    pub fn chord(&self) -> Vec2 {
        self.end - self.start
    }

    /// The signed angle swept, in radians, in (-2 pi, 2 pi); positive counter-clockwise.
    pub fn sweep(&self) -> f64 {
        4.0 * self.bulge.atan()
    }

    /// Signed curvature in 1/mm, positive for a left turn; 0 for a line.
    pub fn curvature(&self) -> f64 {
        let chord = self.chord().hypot();
        if chord == 0.0 { 0.0 } else { 4.0 * self.bulge / (chord * (1.0 + self.bulge * self.bulge)) }
    }

    /// The radius in mm; infinite for a line.
    pub fn radius(&self) -> f64 {
        self.curvature().recip().abs()
    }

    /// The arc's centre; `None` for a line.
    pub fn centre(&self) -> Option<Point> {
        if self.is_line() {
            return None;
        }
        let b = self.bulge;
        let chord = self.chord();
        let left = Vec2::new(-chord.y, chord.x);
        Some(self.start.midpoint(self.end) + left * ((1.0 - b * b) / (4.0 * b)))
    }

    /// The largest distance between the span and its chord, in mm, unsigned.
    pub fn sagitta(&self) -> f64 {
        self.bulge.abs() * self.chord().hypot() / 2.0
    }

    /// Length in mm.
    pub fn length(&self) -> f64 {
        self.chord().hypot() / self.chord_ratio()
    }

    /// Chord over length: sin(x)/x at half the sweep.
    fn chord_ratio(&self) -> f64 {
        let half = self.sweep() / 2.0;
        if half == 0.0 { 1.0 } else { half.sin() / half }
    }

    /// The point at the fraction `t` of the length.
    pub fn at(&self, t: f64) -> Point {
        if t - 1.0 == 0.0 {
            return self.end;
        }
        let half = self.sweep() / 2.0;
        let chord = self.chord();
        if half == 0.0 {
            return self.start + chord * t;
        }
        let reach = (half * t).sin() / half.sin();
        self.start + rotate(chord, -half * (1.0 - t)) * reach
    }

    /// The unit tangent at the fraction `t` of the length; NaN for a point.
    pub fn tangent(&self, t: f64) -> Vec2 {
        let sweep = self.sweep();
        rotate(self.chord().normalize(), sweep * (t - 0.5))
    }

    /// The part of the span between two fractions of its length; `t1 < t0` gives the reversed part.
    pub fn part(&self, t0: f64, t1: f64) -> Self {
        let bulge = if self.is_line() { 0.0 } else { (self.bulge.atan() * (t1 - t0)).tan() };
        Self { start: self.at(t0), end: self.at(t1), bulge }
    }

    /// The same span walked the other way.
    pub fn reversed(&self) -> Self {
        Self { start: self.end, end: self.start, bulge: -self.bulge }
    }

    /// The place on the span nearest to `p`, exactly.
    pub fn nearest(&self, p: Point) -> Nearest {
        let t = if self.is_line() {
            let chord = self.chord();
            let t = (p - self.start).dot(chord) / chord.hypot2();
            if t.is_nan() { 0.0 } else { t.clamp(0.0, 1.0) }
        } else {
            self.nearest_on_arc(p)
        };
        let at = self.at(t);
        Nearest { t, at, distance: at.distance(p) }
    }

    /// The fraction of the arc's length nearest to `p`: the foot of `p` where the arc reaches it, else an end.
    ///
    /// Seen from the start along its tangent, so that the centre of a nearly straight arc, far out, plays no part.
    fn nearest_on_arc(&self, p: Point) -> f64 {
        let (sweep, curvature) = (self.sweep(), self.curvature());
        let (heading, d) = (self.tangent(0.0), p - self.start);
        let turn = (curvature * heading.dot(d)).atan2(1.0 - curvature * heading.cross(d));
        let mut turn = turn * sweep.signum();
        // Measured from the middle of the arc, so that the far side splits evenly between the two ends.
        let middle = sweep.abs() / 2.0;
        if turn - middle < -PI {
            turn += TAU;
        }
        let t = turn / sweep.abs();
        if t.is_nan() { 0.0 } else { t.clamp(0.0, 1.0) }
    }

    /// The smallest upright box around the span.
    pub fn bbox(&self) -> Rect {
        let ends = Rect::from_points(self.start, self.end);
        if self.is_line() || self.start == self.end {
            return ends;
        }
        let sweep = self.sweep();
        let heading = self.tangent(0.0).atan2();
        // An arc is extreme where its tangent is upright or level.
        (0..4).map(|k| f64::from(k) * FRAC_PI_2).fold(ends, |bbox, angle| {
            let turn = ((angle - heading) * sweep.signum()).rem_euclid(TAU);
            if turn < sweep.abs() { bbox.union_pt(self.at(turn / sweep.abs())) } else { bbox }
        })
    }

    /// Twice the signed area between the span and the origin (Green's theorem); sums over a closed chain to twice
    /// its area, positive counter-clockwise.
    pub fn double_area(&self) -> f64 {
        let triangle = self.start.to_vec2().cross(self.end.to_vec2());
        triangle + self.chord().hypot2() * segment_share(self.sweep())
    }

    /// The parallel span at `distance` to the left (negative: to the right), exactly; `None` where an arc would
    /// shrink through its centre.
    pub fn parallel(&self, distance: f64) -> Option<Self> {
        if 1.0 - self.curvature() * distance <= 0.0 {
            return None;
        }
        let left = |t| {
            let tangent = self.tangent(t);
            Vec2::new(-tangent.y, tangent.x) * distance
        };
        Some(Self { start: self.start + left(0.0), end: self.end + left(1.0), bulge: self.bulge })
    }

    /// The image under a similarity (equal scale both ways, mirroring allowed).
    pub fn transformed(&self, similarity: Affine) -> Self {
        let bulge = if similarity.determinant() < 0.0 { -self.bulge } else { self.bulge };
        Self { start: similarity * self.start, end: similarity * self.end, bulge }
    }
}

/// `v` turned counter-clockwise by `angle` radians.
fn rotate(v: Vec2, angle: f64) -> Vec2 {
    let (sin, cos) = angle.sin_cos();
    Vec2::new(v.x * cos - v.y * sin, v.x * sin + v.y * cos)
}

/// Twice the area between an arc of the given sweep and its chord, over the chord's square.
///
/// Near zero the closed form loses its digits; its series is (s/6)(1 + s2/30) there, to s4 in relative terms.
fn segment_share(sweep: f64) -> f64 {
    if sweep.abs() < 1e-3 {
        return sweep / 6.0 * (1.0 + sweep * sweep / 30.0);
    }
    (sweep - sweep.sin()) / (4.0 * (sweep / 2.0).sin().powi(2))
}
