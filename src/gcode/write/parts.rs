//! Programs for a controller that holds little: cut between contours into parts that are complete by
//! themselves.

use std::ops::Range;

use super::decimal::Grid;
use super::header::{Curve, Header, Mark};
use super::lift::ends_lift;
use super::{Written, write_lines};
use crate::error::{Error, Kind};
use crate::machine::Machine;
use crate::toolpath::Toolpath;

/// One program of several.
#[derive(Clone, Debug, PartialEq)]
pub struct Part {
    /// Its text.
    pub text: String,
    /// The line, from 1, of each of its moves' first block.
    pub lines: Vec<usize>,
    /// The moves of the toolpath that it makes.
    pub moves: Range<usize>,
}

/// The programs that move the cutter along `toolpath`, each within the controller's memory: one where that
/// is enough, else as few as can be cut between contours, or, inside a contour that is too long by itself,
/// at a retract, or at a [`lift`](super::lift()).
///
/// # Errors
/// Those of [`write`](super::write()); and [`Kind::Refused`] when what lies between two retracts is longer than the memory.
pub fn write_parts(toolpath: &Toolpath, header: &Header, machine: &Machine) -> Result<Vec<Part>, Error> {
    let Written { text: whole, lines } = write_lines(toolpath, header, machine)?;
    let memory = machine.controller.memory_bytes.map_or(usize::MAX, |bytes| bytes as usize);
    if whole.len() <= memory {
        return Ok(vec![Part { text: whole, lines, moves: 0..toolpath.moves.len() }]);
    }
    let cutter = Cutter { toolpath, header, machine, memory };
    let ranges = cutter.ranges()?;
    let of = ranges.len();
    let write_part = |(k, moves): (usize, Range<usize>)| {
        let Written { text, lines } = cutter.part(moves.clone(), &format!("part {} of {of}", k + 1))?;
        if text.len() > memory { Err(cutter.too_long(moves.start)) } else { Ok(Part { text, lines, moves }) }
    };
    ranges.into_iter().enumerate().map(write_part).collect()
}

/// Cuts one toolpath for one machine.
pub(super) struct Cutter<'a> {
    pub(super) toolpath: &'a Toolpath,
    pub(super) header: &'a Header,
    pub(super) machine: &'a Machine,
    pub(super) memory: usize,
}

impl Cutter<'_> {
    /// The moves of each part: every time as many as fit.
    fn ranges(&self) -> Result<Vec<Range<usize>>, Error> {
        let mut ranges = Vec::new();
        let mut start = 0;
        while start < self.toolpath.moves.len() {
            let end = self.part_end(start).ok_or_else(|| self.too_long(start))?;
            ranges.push(start..end);
            start = end;
        }
        Ok(ranges)
    }

    /// Where the part from `start` ends: as far as fits; `None` where that is nowhere.
    pub(super) fn part_end(&self, start: usize) -> Option<usize> {
        let furthest = |between_contours| self.furthest(start, &self.places(start, between_contours));
        furthest(true).or_else(|| furthest(false))
    }

    /// The first place after `start` where a part may end.
    pub(super) fn next_retract(&self, start: usize) -> usize {
        self.places(start, false)[0]
    }

    /// Where a part from `start` may end: before a rapid at the clearance height or above it, one that goes across
    /// where it is to be `between_contours`, else also amid a lift; and at the end.
    fn places(&self, start: usize, between_contours: bool) -> Vec<usize> {
        let moves = &self.toolpath.moves;
        let grid = Grid::of(self.machine);
        let clearance = grid.count(self.header.clearance);
        let up = |i: usize| moves[i].is_rapid() && grid.count(moves[i].from.z) >= clearance;
        let across = |i: usize| moves[i].from.xy != moves[i].to.xy;
        let lifted = |i: usize| ends_lift(moves, i, self.header.clearance, grid);
        let ends = |i: &usize| if between_contours { up(*i) && across(*i) } else { up(*i) || lifted(*i) };
        (start + 1..moves.len()).filter(ends).chain([moves.len()]).collect()
    }

    /// The last of `places` that a part from `start` can end at.
    fn furthest(&self, start: usize, places: &[usize]) -> Option<usize> {
        let fits = |end: &usize| {
            let text = self.part(start..*end, "part 000 of 000");
            text.is_ok_and(|written| written.text.len() <= self.memory)
        };
        let mut bound = 1;
        while bound < places.len() && fits(&places[bound - 1]) {
            bound *= 2;
        }
        let places = &places[..bound.min(places.len())];
        places.partition_point(fits).checked_sub(1).map(|last| places[last])
    }

    /// True when `part`, whose first move is move `start` of the toolpath, fits the memory.
    pub(super) fn fits(&self, part: &Toolpath, start: usize) -> bool {
        let text = self.text(part, start, "part 000 of 000");
        text.is_ok_and(|written| written.text.len() <= self.memory)
    }

    /// The program of some of the moves.
    fn part(&self, moves: Range<usize>, name: &str) -> Result<Written, Error> {
        let start = moves.start;
        self.text(&Toolpath { moves: self.toolpath.moves[moves].to_vec() }, start, name)
    }

    /// The program of `part`, whose first move is move `start` of the toolpath.
    fn text(&self, part: &Toolpath, start: usize, name: &str) -> Result<Written, Error> {
        let moves = start..start + part.moves.len();
        let marks = self.header.marks.iter().filter(|mark| moves.contains(&mark.before));
        let marks = marks.map(|mark| Mark { before: mark.before - moves.start, text: mark.text.clone() });
        // Parts are cut at rapids, which no curve goes across.
        let within = |curve: &&Curve| moves.start <= curve.moves.start && curve.moves.end <= moves.end;
        let curves = self.header.curves.iter().filter(within).map(|curve| Curve {
            moves: curve.moves.start - moves.start..curve.moves.end - moves.start,
            control: curve.control,
        });
        let mut header = self.header.clone();
        header.marks = marks.collect();
        header.curves = curves.collect();
        header.title = format!("{}, {name}", header.title);
        write_lines(part, &header, self.machine)
    }

    /// The refusal of the moves from `start` on, up to the next retract.
    pub(super) fn too_long(&self, start: usize) -> Error {
        let at = self.toolpath.moves[start].to.xy;
        let memory = self.memory;
        let what = format!(
            "what is cut in one go from X {:.1} Y {:.1} mm is longer than the controller's {memory} bytes",
            at.x, at.y
        );
        Error::new(Kind::Refused, what).remedy("a wider tolerance gives fewer blocks")
    }
}
