//! Where things lie in space, seen from above: object coordinate systems, and blocks put in place.

use kurbo::{Affine, Point};
use nalgebra::{Matrix3, Vector3};

use super::groups::Record;
use crate::error::Error;

/// An affine map of space: from a block's coordinates to the drawing's.
#[derive(Clone, Copy, Debug)]
pub(super) struct Placement {
    linear: Matrix3<f64>,
    shift: Vector3<f64>,
}

impl Placement {
    /// The drawing's own coordinates.
    pub(super) fn identity() -> Self {
        Self { linear: Matrix3::identity(), shift: Vector3::zeros() }
    }

    /// The image of `p` as seen from above.
    pub(super) fn seen(&self, p: &Vector3<f64>) -> Point {
        let image = self.linear * p + self.shift;
        Point::new(image.x, image.y)
    }

    /// The image of the direction `v`.
    pub(super) fn direction(&self, v: &Vector3<f64>) -> Vector3<f64> {
        self.linear * v
    }

    /// The map from the plane at `elevation` in the object coordinates of `axes` to the drawing from above.
    pub(super) fn plane(&self, axes: &Matrix3<f64>, elevation: f64) -> Affine {
        let linear = self.linear * axes;
        let shift = linear * Vector3::new(0.0, 0.0, elevation) + self.shift;
        Affine::new([linear.m11, linear.m21, linear.m12, linear.m22, shift.x, shift.y])
    }

    /// The placement of what is placed by `inner` first.
    fn of(&self, inner: &Self) -> Self {
        Self { linear: self.linear * inner.linear, shift: self.linear * inner.shift + self.shift }
    }
}

/// The point of groups `code`, `code + 10` and `code + 20`; what is left out is 0.
pub(super) fn point(record: &Record, code: i32) -> Result<Vector3<f64>, Error> {
    let coordinate = |axis| record.real_or(code + 10 * axis, 0.0);
    Ok(Vector3::new(coordinate(0)?, coordinate(1)?, coordinate(2)?))
}

/// The extrusion direction of a record (group 210), of length 1; straight up when it is left out or has no
/// length.
pub(super) fn normal(record: &Record) -> Result<Vector3<f64>, Error> {
    if record.first(210).is_none() && record.first(230).is_none() {
        return Ok(Vector3::z());
    }
    Ok(point(record, 210)?.try_normalize(0.0).unwrap_or_else(Vector3::z))
}

/// The axes of the object coordinate system with the unit normal `n`, as columns (DXF reference, arbitrary
/// axis algorithm).
pub(super) fn object_axes(n: &Vector3<f64>) -> Matrix3<f64> {
    const NEARLY_UPRIGHT: f64 = 1.0 / 64.0;
    let upright = n.x.abs() < NEARLY_UPRIGHT && n.y.abs() < NEARLY_UPRIGHT;
    let reference = if upright { Vector3::y() } else { Vector3::z() };
    let x = reference.cross(n).normalize();
    Matrix3::from_columns(&[x, n.cross(&x).normalize(), *n])
}

/// How an INSERT places its block: one placement for each cell of its grid.
pub(super) struct Grid {
    outer: Placement,
    inner: Placement,
    spacing: [f64; 2],
    /// Columns and rows, each at least 1.
    pub(super) counts: [i64; 2],
}

impl Grid {
    /// The grid of an INSERT record whose block has its base point at `base`, placed by `outer`.
    pub(super) fn new(insert: &Record, base: &Vector3<f64>, outer: &Placement) -> Result<Self, Error> {
        let axes = object_axes(&normal(insert)?);
        let (sin, cos) = sin_cos_degrees(insert.real_or(50, 0.0)?);
        let turn = Matrix3::new(cos, -sin, 0.0, sin, cos, 0.0, 0.0, 0.0, 1.0);
        let turned = Placement { linear: axes * turn, shift: axes * point(insert, 10)? };
        let scale = [insert.real_or(41, 1.0)?, insert.real_or(42, 1.0)?, insert.real_or(43, 1.0)?];
        let scaled = Matrix3::from_diagonal(&Vector3::from(scale));
        Ok(Self {
            outer: outer.of(&turned),
            inner: Placement { linear: scaled, shift: scaled * -base },
            spacing: [insert.real_or(44, 0.0)?, insert.real_or(45, 0.0)?],
            counts: [insert.whole_or(70, 1)?.max(1), insert.whole_or(71, 1)?.max(1)],
        })
    }

    /// The placement of the block in one cell. The spacing is turned with the block, but not scaled.
    pub(super) fn cell(&self, column: i64, row: i64) -> Placement {
        let step = Vector3::new(column as f64 * self.spacing[0], row as f64 * self.spacing[1], 0.0);
        let moved = Placement { linear: self.inner.linear, shift: self.inner.shift + step };
        self.outer.of(&moved)
    }
}

/// Sine and cosine of an angle in degrees, exact at whole quarter turns.
fn sin_cos_degrees(degrees: f64) -> (f64, f64) {
    let quarters = (degrees / 90.0).round();
    let (sin, cos) = (degrees - 90.0 * quarters).to_radians().sin_cos();
    match quarters.rem_euclid(4.0) as u8 {
        0 => (sin, cos),
        1 => (cos, -sin),
        2 => (-sin, -cos),
        _ => (-cos, sin),
    }
}
