//! The two numbers the whole program turns on: what is allowed, and what was measured.

use kurbo::Point;

/// The largest distance allowed between the cut path and the drawn contour, in mm.
///
/// Bounds the Fréchet distance: both ways and in order along the contour. Always finite and above zero.
#[derive(Clone, Copy, Debug, PartialEq, PartialOrd)]
pub struct Tolerance(f64);

impl Tolerance {
    /// The tolerance where none is asked for: a tenth of a millimetre.
    pub const DEFAULT: Self = Self(0.1);

    /// A tolerance of `mm`; `None` unless it is finite and above zero.
    pub fn new(mm: f64) -> Option<Self> {
        (mm.is_finite() && mm > 0.0).then_some(Self(mm))
    }

    /// The tolerance in mm.
    pub fn mm(self) -> f64 {
        self.0
    }

    /// What is left of the tolerance after `mm` of it is spent elsewhere; `None` when nothing is left.
    pub fn less(self, mm: f64) -> Option<Self> {
        Self::new(self.0 - mm)
    }
}

/// A distance that was measured between two paths, in mm, with the place where it is largest.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Deviation {
    /// The distance in mm.
    pub mm: f64,
    /// Where on the drawn contour it was found.
    pub at: Point,
    /// True when `mm` is a proven upper bound, false when it is a sampled or estimated value.
    pub certified: bool,
}
