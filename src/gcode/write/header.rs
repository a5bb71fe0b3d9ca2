//! What a program says about itself before it moves.

use std::ops::Range;

use kurbo::{Point, Rect};

use super::decimal::{self, Grid};
use crate::machine::{Machine, RetractBy, Unit};
use crate::toolpath::{Move, Toolpath};

/// What a program's opening comments state, and what the writer keeps to.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Header {
    /// What the program makes: its first line.
    pub title: String,
    /// Where X and Y are zero, in words ("lower left of the finished parts").
    pub xy_zero: String,
    /// Where Z is zero, in words ("top of the stock").
    pub z_zero: String,
    /// The cutter, in words ("6 mm, 2 flutes").
    pub cutter: String,
    /// The clearance height in mm: the cutter goes up to it first, and no rapid goes across or down below it.
    pub clearance: f64,
    /// What an arc that the machine cannot take may lose as straight blocks, in mm; half a unit of the last
    /// place is always allowed.
    pub chord_error: f64,
    /// Further lines: side, tolerance, cautions, digest.
    pub notes: Vec<String>,
    /// Comments on the way, in the order of their moves.
    pub marks: Vec<Mark>,
    /// Moves that are one cubic together, in their order; for a machine with a word for it.
    pub curves: Vec<Curve>,
}

/// Moves that follow a cubic in the plane from its start to its end, all at one height, feed and speed. They are written
/// as one block.
#[derive(Clone, Debug, PartialEq)]
pub struct Curve {
    /// Indices of the moves in the toolpath, from 0.
    pub moves: Range<usize>,
    /// The first and the second control point, in mm.
    pub control: [Point; 2],
}

/// A comment that stands before a move.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Mark {
    /// Index of the move in the toolpath, from 0.
    pub before: usize,
    /// The comment.
    pub text: String,
}

impl Header {
    /// The opening comments for `toolpath` on `machine`.
    pub(super) fn comments(&self, toolpath: &Toolpath, machine: &Machine) -> Vec<String> {
        let unit = match machine.unit {
            Unit::Mm => "mm",
            Unit::Inch => "inches",
        };
        let show = |mm: f64| in_unit(mm, machine);
        let moves = &toolpath.moves;
        let plane = moves.iter().map(|m| m.span().bbox()).reduce(|a, b| a.union(b)).unwrap_or(Rect::ZERO);
        let heights = moves.iter().flat_map(|m| [m.from.z, m.to.z]);
        let lowest = heights.fold(f64::INFINITY, f64::min);
        let (x, y) = ((show(plane.x0), show(plane.x1)), (show(plane.y0), show(plane.y1)));
        let clearance = show(self.clearance);
        let start = match machine.retract.by {
            RetractBy::StartHeight => {
                format!("start with the cutter where it can go to Z {clearance} and across")
            }
            RetractBy::MachineCoordinate => format!("starts by machine coordinate, then at Z {clearance}"),
        };
        let mut all = vec![
            self.title.clone(),
            format!("machine {}, numbers in {unit}", machine.name),
            format!("X and Y zero: {}", self.xy_zero),
            format!("Z zero: {}", self.z_zero),
            format!("cutter's path from zero: X {} to {}, Y {} to {}", x.0, x.1, y.0, y.1),
            format!("lowest Z {}", show(lowest)),
            format!("cutter {}, {}", self.cutter, speeds(moves, machine)),
            start,
        ];
        all.extend(self.notes.iter().cloned());
        all
    }
}

/// `mm` as a number of the program.
fn in_unit(mm: f64, machine: &Machine) -> String {
    let grid = Grid::of(machine);
    let mut text = String::new();
    decimal::push(&mut text, grid.count(mm), grid.decimals);
    text
}

/// Feed, plunge and spindle speed that the moves have.
fn speeds(moves: &[Move], machine: &Machine) -> String {
    let unit = machine.unit.symbol();
    let feed = |plunge: bool| {
        let fitting = moves.iter().filter(|m| plunge == (m.from.xy == m.to.xy));
        let largest = fitting.filter_map(|m| m.feed).reduce(f64::max);
        largest.map_or_else(|| "none".to_string(), |feed| format!("{} {unit}/min", in_unit(feed, machine)))
    };
    let rpm = moves.iter().map(|m| m.spindle_rpm).fold(0.0, f64::max);
    format!("feed {}, plunge {}, spindle {rpm:.0} rev/min", feed(false), feed(true))
}
