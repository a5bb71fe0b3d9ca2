//! The drawing laid on the stock: turned, mirrored, and as often as wanted.

use kurbo::{Affine, Vec2};

use crate::error::Error;

use super::Outline;
use super::setup::settings;

/// How outlines are laid on the stock.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Placement {
    /// Turned by this angle, in degrees, counter-clockwise.
    pub turn_deg: f64,
    /// Mirrored left to right, before it is turned: for a part that is cut from its back.
    pub mirror: bool,
    /// Copies side by side.
    pub columns: usize,
    /// Copies above each other.
    pub rows: usize,
    /// The gap between the boxes of two copies, in mm. A cutter outside needs its diameter at least.
    pub gap_mm: f64,
}

impl Default for Placement {
    /// As drawn, once.
    fn default() -> Self {
        Self { turn_deg: 0.0, mirror: false, columns: 1, rows: 1, gap_mm: 0.0 }
    }
}

impl Placement {
    /// The outlines as placed: the copies of the first row from left to right, then the rows above it. A copy keeps
    /// its contour's id.
    ///
    /// # Errors
    /// A wrong setting for no copies, or a gap or an angle that is no number.
    pub fn place(&self, outlines: &[Outline]) -> Result<Vec<Outline>, Error> {
        if self.columns == 0 || self.rows == 0 {
            return Err(settings("0 copies are nothing to cut", "ask for 1 column and 1 row, or more"));
        }
        if !(self.gap_mm.is_finite() && self.gap_mm >= 0.0 && self.turn_deg.is_finite()) {
            return Err(settings(
                "the gap or the angle of the copies is no number",
                "correct --gap or --turn",
            ));
        }
        let turned: Vec<Outline> = outlines.iter().map(|o| o.transformed(self.turning())).collect();
        let bbox = turned.iter().filter_map(|o| o.path.bbox()).reduce(|a, b| a.union(b)).unwrap_or_default();
        let step = Vec2::new(bbox.width() + self.gap_mm, bbox.height() + self.gap_mm);
        let cells = (0..self.rows).flat_map(|row| (0..self.columns).map(move |column| (column, row)));
        let shift = |(column, row)| Vec2::new(column as f64 * step.x, row as f64 * step.y);
        Ok(cells
            .flat_map(|cell| turned.iter().map(move |o| o.transformed(Affine::translate(shift(cell)))))
            .collect())
    }

    /// Mirrored and turned about the origin; quarter turns exactly.
    fn turning(&self) -> Affine {
        let quarters = self.turn_deg / 90.0;
        let (sin, cos) = if quarters.fract() == 0.0 {
            [(0.0, 1.0), (1.0, 0.0), (0.0, -1.0), (-1.0, 0.0)][quarters.rem_euclid(4.0) as usize]
        } else {
            self.turn_deg.to_radians().sin_cos()
        };
        let turn = Affine::new([cos, sin, -sin, cos, 0.0, 0.0]);
        if self.mirror { turn * Affine::new([-1.0, 0.0, 0.0, 1.0, 0.0, 0.0]) } else { turn }
    }
}

impl Outline {
    /// The outline moved by a similarity.
    fn transformed(&self, similarity: Affine) -> Self {
        Self { path: self.path.transformed(similarity), ..self.clone() }
    }
}
