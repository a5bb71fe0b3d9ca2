//! A run of cuts amid a program that exists already.

use super::arc::{Bend, Block, Rounder};
use super::decimal::{self, Grid, Place};
use crate::machine::{ArcStyle, Machine};
use crate::toolpath::Move;

/// How the program stands where the run begins.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Amid {
    /// True when axis words are distances from where the cutter stands (G91).
    pub incremental: bool,
    /// The motion word in force: 1, 2 or 3; `None` when the first block must state its own.
    pub word: Option<u8>,
    /// What an arc that the machine cannot take may lose as straight blocks, in mm.
    pub chord_error: f64,
}

/// The blocks that cut along `moves`, each a line of words without its end; feed and speed are left as they are.
///
/// Numbers are in the unit and with the decimals of `machine`, arcs in its style. What starts on the grid of the decimals
/// stays within 1.5 units of the last place of the moves.
pub fn run(moves: &[Move], machine: &Machine, amid: Amid) -> Vec<String> {
    let Some(first) = moves.first() else { return Vec::new() };
    let grid = Grid::of(machine);
    let rounder = Rounder::new(machine, amid.chord_error);
    let mut scribe = Scribe { machine, grid, amid, at: grid.place(first.from), lines: Vec::new() };
    let mut blocks = Vec::new();
    for m in moves {
        rounder.blocks(m, scribe.at, &mut blocks);
        blocks.drain(..).for_each(|block| scribe.put(block));
    }
    scribe.lines
}

/// Lines under way, and where they have led to.
struct Scribe<'a> {
    machine: &'a Machine,
    grid: Grid,
    amid: Amid,
    at: Place,
    lines: Vec<String>,
}

impl Scribe<'_> {
    fn put(&mut self, block: Block) {
        let (from, to) = (self.at, block.to);
        if from == to {
            return;
        }
        let mut line = String::new();
        let word = match block.bend {
            Bend::Straight => 1,
            Bend::Centre { clockwise, .. } | Bend::Radius { clockwise, .. } => 3 - u8::from(clockwise),
        };
        if self.amid.word.replace(word) != Some(word) {
            self.word(&mut line, 'G', i64::from(word), 0);
        }
        let decimals = self.grid.decimals;
        for (letter, from, to) in [('X', from.x, to.x), ('Y', from.y, to.y), ('Z', from.z, to.z)] {
            if from != to {
                let told = if self.amid.incremental { to - from } else { to };
                self.word(&mut line, letter, told, decimals);
            }
        }
        match block.bend {
            Bend::Straight => {}
            Bend::Radius { radius, .. } => self.word(&mut line, 'R', radius, decimals),
            Bend::Centre { i, j, .. } => {
                let absolute = self.machine.arcs.style == ArcStyle::CentreAbsolute;
                let start = if absolute { (from.x, from.y) } else { (0, 0) };
                self.word(&mut line, 'I', i + start.0, decimals);
                self.word(&mut line, 'J', j + start.1, decimals);
            }
        }
        self.lines.push(line);
        self.at = to;
    }

    fn word(&self, line: &mut String, letter: char, count: i64, decimals: u32) {
        if self.machine.program.spaces && !line.is_empty() {
            line.push(' ');
        }
        line.push(letter);
        decimal::push(line, count, decimals);
    }
}
