//! Pictures of a program before it runs: a still in real size, a page to look around in, a sheet for the machine.
//!
//! Everything shown is what the text says that was written and checked, beside the drawing it is for. Coordinates are
//! the program's own, in mm; y points up in them and down on the page.

mod chord;
mod curvature;
mod data;
mod figures;
mod layers;
mod markup;
mod pace;
mod page;
mod palette;
mod setting;
mod sheet;
mod still;
mod terminal;
mod tour;

use kurbo::{Point, Rect};

use crate::check::Verdict;
use crate::feed::Limits;
use crate::gcode::read::Program;
use crate::report::Report;
use crate::sketch::Contour;

pub use chord::{Chord, Lap, Station};
pub use curvature::Bend;
pub(crate) use markup::escaped;
pub use page::{MOST_MOVES, page};
pub use sheet::setup_sheet;
pub use still::still;
pub use terminal::terminal;
pub use tour::{Kind, Stage};

/// What a picture shows.
#[derive(Clone, Debug)]
pub struct Scene<'a> {
    /// The job's figures.
    pub report: &'a Report,
    /// The program's text.
    pub text: &'a str,
    /// What it says, read back.
    pub program: &'a Program,
    /// The contours as they are drawn, in the program's coordinates, copy by copy.
    pub drawn: &'a [Contour],
    /// What the program was checked for.
    pub verdict: &'a Verdict,
    /// The machine's limits.
    pub limits: Limits,
    /// The diameters of the cutters of all the job's programs, in mm, in the order in which they are run.
    pub cutters_mm: Vec<f64>,
    /// Which of these programs it is, from 0.
    pub number: usize,
    /// The height of the stock's top.
    pub stock_top: f64,
    /// How the fair curves bend, where they are shown; else none.
    pub fair: Vec<Bend>,
}

impl Scene<'_> {
    /// The box around the finished parts as they are drawn.
    pub fn part(&self) -> Rect {
        let boxes = self.drawn.iter().filter_map(|contour| contour.path.bbox());
        boxes.reduce(|a, b| a.union(b)).unwrap_or(Rect::ZERO)
    }

    /// The box around all that is drawn and all that the cutter sweeps, zero included.
    fn extent(&self) -> Rect {
        let radius = self.report.setup.cutter_mm / 2.0;
        let moves = self.program.toolpath.moves.iter().map(|m| m.span().bbox().inflate(radius, radius));
        moves.fold(self.part().union_pt(Point::ORIGIN), |all, one| all.union(one))
    }

    /// All that is shown from above: what the cutter does, the stock, and the clamps.
    fn whole(&self) -> Rect {
        let setup = &self.report.setup;
        let boxes = setup.stock.iter().map(|stock| stock.box_mm).chain(setup.clamps.iter().map(|c| c.box_mm));
        boxes.map(setting::rect).fold(self.extent(), |all, one| all.union(one))
    }

    /// Where the deviation is largest, in the program's coordinates.
    fn worst(&self) -> Option<Point> {
        self.verdict.deviation.map(|deviation| deviation.at)
    }
}
