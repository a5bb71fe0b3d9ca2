//! Small drawings, built in memory.

use kurbo::Point;
use ribband::geom::ArcSpline;
use ribband::sketch::{Contour, Place, Sketch, snap};

/// A point on the grid that coordinates are held on.
pub(crate) fn at(x: f64, y: f64) -> Point {
    Point::new(snap(x), snap(y))
}

/// A drawing of the given paths, numbered from 1.
pub(crate) fn sketch(paths: impl IntoIterator<Item = ArcSpline>) -> Sketch {
    let contours = (1..).zip(paths).map(|(id, path)| Contour {
        id,
        layer: String::new(),
        colour: String::new(),
        place: Place::default(),
        path,
    });
    Sketch {
        contours: contours.collect(),
        mm_per_unit: 1.0,
        scale_from: "the test".into(),
        ..Sketch::default()
    }
}

/// An open chain of straight lines.
pub(crate) fn open(points: &[(f64, f64)]) -> ArcSpline {
    ArcSpline::polyline(points.iter().map(|&(x, y)| at(x, y)), false)
}

/// A ring of straight lines; the first point is not repeated.
pub(crate) fn ring(points: &[(f64, f64)]) -> ArcSpline {
    ArcSpline::polyline(points.iter().map(|&(x, y)| at(x, y)), true)
}

/// Numbers without a pattern, the same in every run (a 64-bit linear congruential generator, constants from memory).
pub(crate) struct Dice(pub(crate) u64);

impl Dice {
    /// From 0 up to, not including, `n`.
    pub(crate) fn below(&mut self, n: usize) -> usize {
        (self.unit() * n as f64) as usize
    }

    /// From 0 up to, not including, 1.
    pub(crate) fn unit(&mut self) -> f64 {
        self.0 = self.0.wrapping_mul(6364136223846793005).wrapping_add(1442695040888963407);
        (self.0 >> 11) as f64 / (1_u64 << 53) as f64
    }

    /// Normal, mean 0 and deviation 1 (the sum of twelve uniform numbers less six).
    pub(crate) fn normal(&mut self) -> f64 {
        (0..12).map(|_| self.unit()).sum::<f64>() - 6.0
    }

    /// The items in another order.
    pub(crate) fn shuffle<T>(&mut self, items: &mut [T]) {
        for i in (1..items.len()).rev() {
            items.swap(i, self.below(i + 1));
        }
    }
}
