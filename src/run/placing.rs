//! Where the drawing and its copies lie in the program's coordinates.

use kurbo::{Affine, Rect, Vec2};

use super::prepare::Prepared;
use crate::check;
use crate::error::{Error, Kind};
use crate::job::{Job, Layout, Origin};
use crate::machine::Machine;
use crate::sketch::Contour;

/// The drawing laid out.
#[derive(Clone, Debug)]
pub(super) struct Placing {
    /// From the drawing's coordinates to the program's, for each copy: the lower left one first, then along its row.
    pub(super) copies: Vec<Affine>,
    /// Where the drawing's zero lies in the lower left copy.
    pub(super) drawing_at: Vec2,
    /// The box around the finished parts of all copies.
    pub(super) parts: Rect,
}

impl Placing {
    /// Lays the drawing out as the job asks.
    ///
    /// # Errors
    /// [`Kind::Refused`] when the parts are larger than the machine's travel.
    pub(super) fn of(job: &Job, prepared: &Prepared) -> Result<Self, Error> {
        let contours = (&prepared.sketch.contours[..], &prepared.cleaned.contours[..]);
        let placing = Self::new(&job.layout, job.stock.origin(), contours);
        placing.fits_machine(&job.machine)?;
        Ok(placing)
    }

    /// Copies are a gap apart from box to box of the drawing as it was read; the finished parts are those that are
    /// cut.
    pub(super) fn new(layout: &Layout, origin: Origin, (read, cut): (&[Contour], &[Contour])) -> Self {
        let turning = turning(layout);
        let around = |contours: &[Contour]| {
            let boxes = contours.iter().filter_map(|c| c.path.transformed(turning).bbox());
            boxes.reduce(|a, b| a.union(b)).unwrap_or(Rect::ZERO)
        };
        let cell = around(read);
        let step = Vec2::new(cell.width() + layout.gap_mm, cell.height() + layout.gap_mm);
        let shift = |column: usize, row: usize| Vec2::new(column as f64 * step.x, row as f64 * step.y);
        let grid = layout.copies;
        let first = around(cut);
        let parts = first.union(first + shift(grid.columns - 1, grid.rows - 1));
        let drawing_at = match origin {
            Origin::LowerLeft => -parts.origin().to_vec2(),
            Origin::Centre => -parts.center().to_vec2(),
            Origin::Drawing => Vec2::ZERO,
        };
        let cells = (0..grid.rows).flat_map(|row| (0..grid.columns).map(move |column| (column, row)));
        let copies =
            cells.map(|(column, row)| Affine::translate(drawing_at + shift(column, row)) * turning).collect();
        Self { copies, drawing_at, parts: parts + drawing_at }
    }

    /// Something of each contour, for each copy of it.
    pub(super) fn place<'a, C: 'a, T: 'a>(
        &'a self,
        contours: &'a [C],
        placed: impl Fn(&C, Affine) -> T + Copy + 'a,
    ) -> impl Iterator<Item = T> + 'a {
        self.copies.iter().flat_map(move |&place| contours.iter().map(move |contour| placed(contour, place)))
    }

    /// The contours as they are drawn, in the program's coordinates, copy by copy.
    pub(super) fn drawn(&self, contours: &[Contour]) -> Vec<Contour> {
        let moved =
            |contour: &Contour, place| Contour { path: contour.path.transformed(place), ..contour.clone() };
        self.place(contours, moved).collect()
    }

    /// Refuses parts that are larger than the machine's travel.
    fn fits_machine(&self, machine: &Machine) -> Result<(), Error> {
        let (parts, travel) = (self.parts, &machine.travel);
        if parts.width() <= travel.x && parts.height() <= travel.y {
            return Ok(());
        }
        let (what, remedy) = match self.copies.len() {
            1 => ("the part is".into(), "look at the drawing's unit and scale, or turn it with --turn"),
            count => (format!("{count} copies take"), "ask for fewer --copies or a smaller --gap"),
        };
        let what = format!(
            "{what} {:.1} x {:.1} mm, and {} travels {:.0} x {:.0} mm",
            parts.width(),
            parts.height(),
            machine.name,
            travel.x,
            travel.y
        );
        Err(Error::new(Kind::Refused, what)
            .remedy(format!("{remedy}, or name a larger machine with --machine")))
    }
}

/// Mirrored, then turned, about the drawing's zero; quarter turns exactly.
fn turning(layout: &Layout) -> Affine {
    let quarters = layout.turn_deg / 90.0;
    let (sin, cos) = if quarters.fract() == 0.0 {
        [(0.0, 1.0), (1.0, 0.0), (0.0, -1.0), (-1.0, 0.0)][quarters.rem_euclid(4.0) as usize]
    } else {
        layout.turn_deg.to_radians().sin_cos()
    };
    let turn = Affine::new([cos, sin, -sin, cos, 0.0, 0.0]);
    if layout.mirror { turn * Affine::new([-1.0, 0.0, 0.0, 1.0, 0.0, 0.0]) } else { turn }
}

/// The layout in the check's words; where it puts the copies, the check works out by itself.
pub(super) fn for_check(layout: &Layout) -> check::Layout {
    check::Layout {
        mirror: layout.mirror,
        turn_deg: layout.turn_deg,
        columns: layout.copies.columns,
        rows: layout.copies.rows,
        gap: layout.gap_mm,
    }
}
