//! A place that the path has reached, with its heading.

use std::f64::consts::FRAC_PI_2;

use kurbo::{Point, Vec2};

use crate::geom::Span;

/// The shortest span, in mm: ten units of the last place that programs are written to, so that no arc's rounded end
/// is its start.
pub(super) const SHORTEST: f64 = 0.01;

/// The end of the path so far: every bead up to `bead` is behind it.
#[derive(Clone, Copy, Debug)]
pub(super) struct State {
    pub(super) at: Point,
    /// Unit vector.
    pub(super) heading: Vec2,
    /// The last bead that the path has passed.
    pub(super) bead: usize,
    /// Bulge of the span that led here.
    pub(super) bulge: f64,
    /// Where in the list of states the path came from; itself for a start.
    pub(super) parent: usize,
    /// True when the span that led here left its start with a new heading.
    pub(super) corner: bool,
    /// How much of the path so far is straight, in mm.
    pub(super) straight: f64,
}

impl State {
    /// The start of `span`, with no bead behind it.
    pub(super) fn leaving(span: &Span) -> Self {
        let heading = span.tangent(0.0);
        Self { at: span.start, heading, bead: 0, bulge: 0.0, parent: 0, corner: false, straight: 0.0 }
    }

    /// A start of the path, or a turn on the spot, with a heading.
    pub(super) fn turned(self, heading: Vec2) -> Self {
        Self { heading, ..self }
    }

    /// The place of `p` seen from the state: along the heading, and to the left of it.
    pub(super) fn local(&self, p: Point) -> (f64, f64) {
        let d = p - self.at;
        (self.heading.dot(d), self.heading.cross(d))
    }

    /// How far along the arc of the given curvature the foot of `p` lies, in mm; negative behind the state.
    pub(super) fn foot(&self, curvature: f64, p: Point) -> f64 {
        let (u, v) = self.local(p);
        if curvature == 0.0 { u } else { (curvature * u).atan2(1.0 - curvature * v) / curvature }
    }

    /// The state at the end of an arc of `length` mm that passes the beads up to `bead`; `None` if it is shorter than
    /// [`SHORTEST`] or more than a half turn.
    pub(super) fn moved(&self, curvature: f64, length: f64, bead: usize) -> Option<Self> {
        let half = curvature * length / 2.0;
        if length.is_nan() || length < SHORTEST || half.abs() > FRAC_PI_2 {
            return None;
        }
        let (sin, cos) = half.sin_cos();
        let chord = if half == 0.0 { length } else { length * sin / half };
        let along = rotated(self.heading, sin, cos);
        Some(Self {
            at: self.at + along * chord,
            heading: rotated(along, sin, cos).normalize(),
            bead,
            bulge: sin / (1.0 + cos),
            parent: self.parent,
            corner: false,
            straight: self.straight + if curvature == 0.0 { length } else { 0.0 },
        })
    }

    /// The span that led from `before` to this state.
    pub(super) fn span_from(&self, before: &Self) -> Span {
        Span::arc(before.at, self.at, self.bulge)
    }
}

/// `v` turned by the angle of the given sine and cosine.
fn rotated(v: Vec2, sin: f64, cos: f64) -> Vec2 {
    Vec2::new(v.x * cos - v.y * sin, v.x * sin + v.y * cos)
}
