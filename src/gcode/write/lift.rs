//! Lifts within a cut that is longer than the controller's memory, so that a part can end there.

use super::decimal::Grid;
use super::header::Header;
use super::parts::Cutter;
use crate::error::Error;
use crate::machine::Machine;
use crate::toolpath::{Move, Position, Toolpath};

/// Lets the cutter go up and down again at the same place, wherever what is cut in one go is longer than the
/// controller's memory. It comes down at the feed it plunged with, into the hole that it left. Returns the places, none
/// where the memory holds every cut, in which case nothing changes.
///
/// # Errors
/// Those of [`write_parts`](super::write_parts()): one place after the other must fit.
pub fn lift(toolpath: &mut Toolpath, header: &mut Header, machine: &Machine) -> Result<Vec<Position>, Error> {
    let mut places = Vec::new();
    let Some(memory) = machine.controller.memory_bytes.map(|bytes| bytes as usize) else { return Ok(places) };
    let mut start = 0;
    while start < toolpath.moves.len() {
        let cutter = Cutter { toolpath, header, machine, memory };
        if let Some(end) = cutter.part_end(start) {
            start = end;
            continue;
        }
        let Some(lift) = Lift::latest(&cutter, start) else { return Err(cutter.too_long(start)) };
        places.push(lift.at());
        start = lift.before + 1;
        lift.insert(toolpath, header);
    }
    Ok(places)
}

/// Up and down again before a move.
struct Lift {
    before: usize,
    moves: [Move; 2],
}

impl Lift {
    /// The last one that a part from `start` can end with.
    fn latest(cutter: &Cutter, start: usize) -> Option<Self> {
        let moves = &cutter.toolpath.moves;
        let end = cutter.next_retract(start);
        let inside: Vec<usize> = (start + 1..end).filter(|&i| may_lift(moves, i, cutter.header)).collect();
        let fits = |before: &usize| {
            Self::before(cutter, *before).is_some_and(|lift| {
                let up = lift.moves[0];
                let part = moves[start..*before].iter().copied().chain([up]).collect();
                cutter.fits(&Toolpath { moves: part }, start)
            })
        };
        let last = inside.partition_point(fits).checked_sub(1)?;
        Self::before(cutter, inside[last])
    }

    fn before(cutter: &Cutter, before: usize) -> Option<Self> {
        let moves = &cutter.toolpath.moves;
        let straight_down = |m: &&Move| m.from.xy == m.to.xy && m.to.z < m.from.z;
        let plunge = moves[..before].iter().rev().filter(straight_down).find_map(|m| m.feed)?;
        let low = moves[before].from;
        let high = Position { z: cutter.header.clearance, ..low };
        let straight = Move { from: low, to: high, bulge: 0.0, feed: None, ..moves[before] };
        Some(Self { before, moves: [straight, Move { from: high, to: low, feed: Some(plunge), ..straight }] })
    }

    fn at(&self) -> Position {
        self.moves[0].from
    }

    fn insert(self, toolpath: &mut Toolpath, header: &mut Header) {
        toolpath.moves.splice(self.before..self.before, self.moves);
        header.marks.iter_mut().filter(|mark| mark.before > self.before).for_each(|mark| mark.before += 2);
        for curve in header.curves.iter_mut().filter(|curve| curve.moves.start >= self.before) {
            curve.moves = curve.moves.start + 2..curve.moves.end + 2;
        }
    }
}

/// True where two cuts meet below the clearance height that keep their height, or change it along the way; not within a
/// curve.
fn may_lift(moves: &[Move], i: usize, header: &Header) -> bool {
    let along = |m: &Move| !m.is_rapid() && m.from.xy != m.to.xy;
    let marked = header.marks.iter().any(|mark| mark.before == i);
    let in_curve = header.curves.iter().any(|curve| curve.moves.start < i && i < curve.moves.end);
    along(&moves[i - 1]) && along(&moves[i]) && moves[i].from.z < header.clearance && !marked && !in_curve
}

/// True for the move down that ends a lift: straight down from the clearance height, where the move before it came up.
pub(super) fn ends_lift(moves: &[Move], i: usize, clearance: f64, grid: Grid) -> bool {
    let (up, down) = (&moves[i - 1], &moves[i]);
    up.is_rapid()
        && !down.is_rapid()
        && up.from == down.to
        && up.to == down.from
        && grid.count(down.from.z) >= grid.count(clearance)
}
