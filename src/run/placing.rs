//! Where the drawing and its copies lie in the program's coordinates.

use kurbo::{Affine, Rect, Vec2};

use super::prepare::Prepared;
use crate::check;
use crate::error::{Error, Kind};
use crate::job::{Job, Layout, Origin, Stock};
use crate::machine::Machine;
use crate::sketch::Contour;
use crate::toolpath::Toolpath;

/// The drawing laid out.
#[derive(Clone, Debug)]
pub(super) struct Placing {
    /// From the drawing's coordinates to the program's, for each copy: the lower left one first, then along its row.
    pub(super) copies: Vec<Affine>,
    /// Where the drawing's zero lies in the lower left copy.
    pub(super) drawing_at: Vec2,
    /// The box around the finished parts of all copies.
    pub(super) parts: Rect,
    /// The stock from above, where it is given.
    pub(super) stock: Option<Rect>,
    /// The program's zero on the machine, from the lower left end of its travel, where the stock's place there is given.
    pub(super) zero_at: Option<Vec2>,
}

impl Placing {
    /// Lays the drawing out as the job asks.
    ///
    /// # Errors
    /// [`Kind::Refused`] when the parts are larger than the machine's travel, or do not lie on the stock.
    pub(super) fn of(job: &Job, prepared: &Prepared) -> Result<Self, Error> {
        let contours = (&prepared.sketch.contours[..], &prepared.cleaned.contours[..]);
        let placing = Self::new(&job.layout, &job.stock, contours);
        placing.fits_machine(&job.machine)?;
        placing.fits_stock()?;
        Ok(placing)
    }

    /// Copies are a gap apart from box to box of the drawing as it was read; the finished parts are those that are
    /// cut.
    pub(super) fn new(layout: &Layout, stock: &Stock, (read, cut): (&[Contour], &[Contour])) -> Self {
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
        let sheet = stock.sheet.map(|sheet| {
            let middle = (sheet.size - parts.size()).to_vec2() / 2.0;
            Rect::from_origin_size(parts.origin() - sheet.parts_at.unwrap_or(middle), sheet.size)
        });
        let drawing_at = match stock.origin() {
            Origin::Stock => -sheet.unwrap_or(parts).origin().to_vec2(),
            Origin::LowerLeft => -parts.origin().to_vec2(),
            Origin::Centre => -parts.center().to_vec2(),
            Origin::Drawing => Vec2::ZERO,
        };
        let cells = (0..grid.rows).flat_map(|row| (0..grid.columns).map(move |column| (column, row)));
        let copies =
            cells.map(|(column, row)| Affine::translate(drawing_at + shift(column, row)) * turning).collect();
        let on_machine = stock.sheet.and_then(|sheet| sheet.at);
        let sheet = sheet.map(|sheet| sheet + drawing_at);
        let zero_at = on_machine.zip(sheet).map(|(at, sheet)| at - sheet.origin().to_vec2());
        Self { copies, drawing_at, parts: parts + drawing_at, stock: sheet, zero_at }
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

    /// Refuses parts that do not lie on the stock.
    pub(super) fn fits_stock(&self) -> Result<(), Error> {
        let Some(stock) = self.stock else { return Ok(()) };
        // A sum of lengths has a last bit of its own.
        let hair = f64::EPSILON * 8.0 * (stock.width() + stock.height());
        if stock.inflate(hair, hair).contains_rect(self.parts) {
            return Ok(());
        }
        let (parts, size) = (self.parts - stock.origin().to_vec2(), stock.size());
        let fits = parts.width() <= size.width && parts.height() <= size.height;
        let (what, remedy) = if fits {
            let (who, _) = self.who();
            let reach = format!(
                "{who} would lie at X {:.1} to {:.1} and Y {:.1} to {:.1}",
                parts.x0, parts.x1, parts.y0, parts.y1
            );
            (reach, "correct --parts-at")
        } else {
            let remedy = match self.copies.len() {
                1 => "take larger stock, look at the drawing's scale, or turn it with --turn",
                _ => "take larger stock, or ask for fewer --copies",
            };
            (self.size(), remedy)
        };
        let what = format!("{what}, and the stock is {:.1} x {:.1} mm", size.width, size.height);
        Err(Error::new(Kind::Refused, what).remedy(remedy))
    }

    /// Refuses moves that leave the machine's travel, where the stock's place on the machine is given.
    pub(super) fn stays_on_machine(&self, toolpath: &Toolpath, machine: &Machine) -> Result<(), Error> {
        let boxes = toolpath.moves.iter().map(|m| m.span().bbox());
        let (Some(zero_at), Some(path)) = (self.zero_at, boxes.reduce(|a, b| a.union(b))) else {
            return Ok(());
        };
        let path = path + zero_at;
        let axes = [("X", path.x0, path.x1, machine.travel.x), ("Y", path.y0, path.y1, machine.travel.y)];
        let Some((axis, low, high, travel)) = axes.into_iter().find(|axis| axis.1 < 0.0 || axis.2 > axis.3)
        else {
            return Ok(());
        };
        let what = format!(
            "the cutter would go from {axis} {low:.1} to {high:.1} mm on the machine, and {} travels from 0 to {travel:.0}",
            machine.name
        );
        Err(Error::new(Kind::Refused, what)
            .remedy("move the stock, with --stock-at, or the parts on it, with --parts-at"))
    }

    /// What of the cut goes over the edge of the stock, in a sentence.
    pub(super) fn over_the_edge(&self, toolpath: &Toolpath, cutter_mm: f64) -> Option<String> {
        let stock = self.stock?;
        let cuts = toolpath.moves.iter().filter(|m| !m.is_rapid()).map(|m| m.span().bbox());
        let swept = cuts.reduce(|a, b| a.union(b))?.inflate(cutter_mm / 2.0, cutter_mm / 2.0);
        let sides = [stock.x0 - swept.x0, stock.y0 - swept.y0, swept.x1 - stock.x1, swept.y1 - stock.y1];
        let over = sides.into_iter().fold(0.0, f64::max);
        (over > 0.05).then(|| format!("the cutter runs up to {over:.1} mm over the edge of the stock"))
    }

    /// The parts in words, with the verb for their size.
    fn who(&self) -> (String, &'static str) {
        match self.copies.len() {
            1 => ("the part".into(), "is"),
            count => (format!("{count} copies"), "take"),
        }
    }

    /// The size of the parts in words.
    fn size(&self) -> String {
        let (who, verb) = self.who();
        format!("{who} {verb} {:.1} x {:.1} mm", self.parts.width(), self.parts.height())
    }

    /// Refuses parts that are larger than the machine's travel.
    fn fits_machine(&self, machine: &Machine) -> Result<(), Error> {
        let (parts, travel) = (self.parts, &machine.travel);
        if parts.width() <= travel.x && parts.height() <= travel.y {
            return Ok(());
        }
        let remedy = match self.copies.len() {
            1 => "look at the drawing's unit and scale, or turn it with --turn",
            _ => "ask for fewer --copies or a smaller --gap",
        };
        let what =
            format!("{}, and {} travels {:.0} x {:.0} mm", self.size(), machine.name, travel.x, travel.y);
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
