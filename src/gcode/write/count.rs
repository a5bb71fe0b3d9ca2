//! How many blocks the moves of a toolpath become.

use super::arc::{Bend, Rounder};
use super::decimal::Grid;
use super::header::Header;
use crate::machine::Machine;
use crate::toolpath::{Move, Toolpath};

/// How many blocks [`write`](super::write()) makes of each move: none of one that rounding leaves where it is, several
/// of an arc that the machine cannot take in one, or of a rapid that goes up and across. A whole circle in one
/// block counts as its two halves.
pub fn blocks_of(toolpath: &Toolpath, header: &Header, machine: &Machine) -> Vec<usize> {
    let grid = Grid::of(machine);
    let rounder = Rounder::new(machine, header.chord_error);
    let mut blocks = Vec::new();
    let mut count = |m: &Move| {
        let (from, to) = (grid.place(m.from), grid.place(m.to));
        if m.is_rapid() {
            return usize::from(from.z != to.z) + usize::from(!from.same_xy(to));
        }
        blocks.clear();
        rounder.blocks(m, from, &mut blocks);
        let mut at = from;
        let moves = blocks.iter().filter(|block| {
            let stays = block.to == at && block.bend == Bend::Straight;
            at = block.to;
            !stays
        });
        moves.count()
    };
    toolpath.moves.iter().map(&mut count).collect()
}
