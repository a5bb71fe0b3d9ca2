//! The check: what a program says, against the drawing and the machine.
//!
//! An outsider by design. It starts from the program's text as read back, and shares nothing with the stages that
//! make programs. What it holds is held by proven bounds; what no program can check is listed beside it.

mod claim;
mod cuts;
mod dry;
mod motion;
mod place;
mod region;
mod relief;
mod rings;
mod shape;
mod side;
mod start_end;
mod steps;

use std::collections::{BTreeMap, BTreeSet};

use kurbo::{Point, Rect, Vec2};

use crate::gcode::read::Program;
use crate::machine::Machine;
use crate::num::{Deviation, Tolerance};
use crate::sketch::Sketch;

use place::Placed;
use side::Beside;

pub use claim::{Claim, Spot, State};
pub use dry::{around, check_dry, check_resumed, raised};
pub use place::Layout;

/// What a program is checked for. Lengths in mm; heights and places in the program's own coordinates.
#[derive(Clone, Debug)]
pub struct Asked {
    /// How far the cut may be from the drawing.
    pub tolerance: Tolerance,
    /// The side of closed contours that the cutter runs on; open ones are cut on the line.
    pub side: Side,
    /// The ids of closed contours that are cut on the line all the same.
    pub on_line: BTreeSet<usize>,
    /// The ids of the contours that the program must cut, where others are left to other programs: off those it must
    /// keep all the same. `None` for all.
    pub only: Option<BTreeSet<usize>>,
    /// The ids of contours whose inside corners the cutter may relieve: go straight into, as far as the corner itself.
    pub relieved: BTreeSet<usize>,
    /// How much further than its radius the cutter's centre keeps from the edge; negative for a looser fit.
    pub allowance: f64,
    /// True when the cut beside the edge is never on the side that is kept, and within the tolerance on the other.
    pub waste: bool,
    /// The same for single contours, by their ids.
    pub allowance_of_contour: BTreeMap<usize, f64>,
    /// What the passes leave beside the edge for a last one at full depth.
    pub leave: f64,
    /// How the drawing is laid on the stock.
    pub layout: Layout,
    /// Where the drawing's zero lies in the program's coordinates, in the lower left copy; `None` to find it among the
    /// usual places: the drawing's own zero, the lower left of all copies at the program's zero, or their centre there.
    pub drawing_at: Option<Vec2>,
    /// Where the program's zero lies on the machine, from the lower left end of its travel; `None` where that was not
    /// said: travel is then judged by size.
    pub zero_at: Option<Vec2>,
    /// The height of the stock's top.
    pub stock_top: f64,
    /// The height below which nothing goes by rapid; `None` for the stock's top.
    pub clearance: Option<f64>,
    /// The height that every contour is cut down to; `None` where it was not said.
    pub lowest: Option<f64>,
    /// The height that single contours are cut down to instead, by their ids.
    pub lowest_of_contour: BTreeMap<usize, f64>,
    /// The deepest that one pass may take; `None` where it was not said.
    pub pass: Option<f64>,
    /// The largest feed in mm/min along a contour and straight down; `None` for what the machine can do.
    pub feeds: Option<Feeds>,
    /// Diameter of the cutter; a side needs it.
    pub cutter: f64,
    /// What the cutter must keep clear of.
    pub keep_out: Vec<KeepOut>,
}

/// Which side of the closed contours the cutter runs on. The region they enclose goes by even and odd, so that a
/// contour within another is a hole.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Default)]
pub enum Side {
    /// Its centre runs on the line.
    #[default]
    On,
    /// Within the region: the region is a hole or a pocket.
    Inside,
    /// Outside the region: the region is the part.
    Outside,
}

/// A stretch of the drawing that no cutter of the diameter reaches, or that needs one a little smaller.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Uncut {
    /// The contour's id in the drawing.
    pub contour: usize,
    /// The copy's number, from 0: the lower left one first, then along its row.
    pub copy: usize,
    /// How long all its stretches are, in mm.
    pub length: f64,
    /// The place that the cutter is furthest from, in the drawing's coordinates.
    pub at: Point,
    /// How far the edge of the cut is from there, in mm.
    pub gap: f64,
}

/// An inside corner that the cutter goes into, so that a sharp one seats there.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Relieved {
    /// The corner, in the program's coordinates.
    pub at: Point,
    /// How far the cut goes into the sides beside it, in mm.
    pub into: f64,
}

impl Relieved {
    /// All of them in one sentence; `None` where there are none.
    pub fn told(all: &[Self]) -> Option<String> {
        let deepest = all.iter().map(|relieved| relieved.into).reduce(f64::max)?;
        let corners = if all.len() == 1 { "inside corner" } else { "inside corners" };
        Some(format!(
            "relief cuts in {} {corners}, up to {deepest:.2} mm into the sides beside them",
            all.len()
        ))
    }
}

/// The largest feeds that were asked for, in mm/min.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Feeds {
    /// Along a contour.
    pub cutting: f64,
    /// Straight down.
    pub plunge: f64,
}

/// A clamp or another thing on the table.
#[derive(Clone, Debug, PartialEq)]
pub struct KeepOut {
    /// What it is called.
    pub name: String,
    /// Its outline from above.
    pub outline: Rect,
    /// The height of its top.
    pub top: f64,
}

impl Asked {
    /// True for a contour that the program must cut.
    fn wants(&self, contour: usize) -> bool {
        self.only.as_ref().is_none_or(|only| only.contains(&contour))
    }

    /// How much further than usual the cutter keeps off a contour.
    fn extra(&self, contour: usize) -> f64 {
        self.allowance_of_contour.get(&contour).map_or(0.0, |own| own - self.allowance)
    }

    /// The height that a contour is cut down to; `None` where it was not said.
    fn lowest_of(&self, contour: usize) -> Option<f64> {
        self.lowest_of_contour.get(&contour).copied().or(self.lowest)
    }

    /// The height below which nothing may go; `None` where it was not said.
    fn lowest_of_all(&self) -> Option<f64> {
        self.lowest.map(|lowest| self.lowest_of_contour.values().copied().fold(lowest, f64::min))
    }

    /// A cut on the line within `tolerance`, zero on the stock's top, nothing else said.
    pub fn new(tolerance: Tolerance) -> Self {
        Self {
            tolerance,
            side: Side::On,
            on_line: BTreeSet::new(),
            only: None,
            relieved: BTreeSet::new(),
            allowance: 0.0,
            waste: false,
            allowance_of_contour: BTreeMap::new(),
            leave: 0.0,
            layout: Layout::default(),
            drawing_at: None,
            zero_at: None,
            stock_top: 0.0,
            clearance: None,
            lowest: None,
            lowest_of_contour: BTreeMap::new(),
            pass: None,
            feeds: None,
            cutter: 0.0,
            keep_out: Vec::new(),
        }
    }
}

/// What the check came to.
#[derive(Clone, Debug)]
pub struct Verdict {
    /// True when no claim fails.
    pub holds: bool,
    /// The worst deviation between what the program cuts and the drawing, in the program's coordinates: on the line
    /// between the cutter's centre and the contour, else between the cutter's edge and what it can reach of the
    /// contour. `None` when nothing that is cut could be matched to the drawing.
    pub deviation: Option<Deviation>,
    /// The claims, one by one.
    pub claims: Vec<Claim>,
    /// What the cutter cannot reach, by contour.
    pub uncut: Vec<Uncut>,
    /// The inside corners that are relieved.
    pub relieved: Vec<Relieved>,
    /// What no program can check, and what was taken for granted, one sentence each.
    pub not_checked: Vec<String>,
}

/// Checks `program` against the drawing and the machine.
///
/// Contours are judged as they were read: each must be cut, in order from end to end, within the tolerance, and
/// nothing may be cut elsewhere. Costs time in proportion to the program and the drawing.
pub fn check(program: &Program, sketch: &Sketch, machine: &Machine, asked: &Asked) -> Verdict {
    let cuts = cuts::Cuts::of(program, asked.stock_top);
    let placed = Placed::new(sketch, &asked.layout, asked.drawing_at, &cuts);
    let Beside { shape, uncut, relieved } = match asked.side {
        Side::On => {
            let wanted = placed.contours.iter().filter(|drawn| asked.wants(drawn.id)).cloned().collect();
            let shape = shape::judge(&cuts, wanted, true, machine, asked).0;
            Beside { shape, uncut: Vec::new(), relieved: Vec::new() }
        }
        side => side::judge(&cuts, &placed, side, machine, asked),
    };
    let mut claims = shape.claims;
    claims.extend(check_moves(program, machine, asked));
    let holds = claims.iter().all(|claim| claim.state != State::Fails);
    let mut not_checked: Vec<String> = NEVER_CHECKED.iter().map(|&said| said.to_string()).collect();
    not_checked.extend(motion::under_the_approach(program, asked));
    not_checked.extend(program.assumed.iter().map(|said| format!("taken for granted: {said}")));
    if sketch.sampling_mm > 0.0 {
        not_checked.push(format!(
            "the drawing's free curves: they were read to within {:.4} mm, and the check starts from there",
            sketch.sampling_mm
        ));
    }
    let in_drawing = |u: Uncut| Uncut { at: placed.in_drawing(u.copy, u.at), ..u };
    let uncut = uncut.into_iter().map(in_drawing).collect();
    Verdict { holds, deviation: shape.deviation, claims, uncut, relieved, not_checked }
}

/// Checks what holds of a program whatever it cuts: its moves, its start and its end. For a part of a longer program.
pub fn check_moves(program: &Program, machine: &Machine, asked: &Asked) -> Vec<Claim> {
    let mut claims = motion::judge(program, machine, asked);
    claims.extend(start_end::judge(program, machine, asked));
    claims
}

/// What no program can tell.
const NEVER_CHECKED: [&str; 7] = [
    "that zero is set where the program expects it",
    "that the stock is held, lies flat and is as thick as said",
    "that nothing is in the way that was not declared: clamps, screws, the vacuum hose",
    "that the cutter in the spindle is the one stated, sharp and tight",
    "that the machine keeps its steps and follows the path it is told",
    "that the controller reads the program as the published language says",
    "that the material bears the feed, the depth and the speed",
];
