//! From a run of straight blocks to fewer blocks, if there are any.

use std::collections::HashMap;

use rayon::prelude::*;

use super::follow::{Followed, Seen, decimals};
use super::judge;
use super::runs::Run;
use crate::fit;
use crate::gcode::Dialect;
use crate::gcode::read::Text;
use crate::gcode::write::{self, Amid};
use crate::geom::ArcSpline;
use crate::machine::{ArcStyle, Machine, Unit};
use crate::num::{Deviation, Tolerance};
use crate::toolpath::{Move, Position};

/// A run with the blocks that take its place.
#[derive(Clone, Debug)]
pub(super) struct Replaced {
    pub(super) run: Run,
    /// The lines, without their ends.
    pub(super) lines: Vec<String>,
    /// The motion word that the last of them leaves in force, times ten.
    pub(super) word: Option<u16>,
    /// How far they lead from the run, as read back.
    pub(super) deviation: Deviation,
}

/// How much of the tolerance is for the way seen from above where a run slopes; the rest is for its heights.
const SLOPING: f64 = 0.8;

/// Works on one program.
pub(super) struct Fitter<'a> {
    pub(super) text: &'a Text<'a>,
    /// The text's lines with their ends.
    pub(super) lines: &'a [&'a str],
    pub(super) followed: &'a Followed,
    pub(super) machine: &'a Machine,
    pub(super) tolerance: Tolerance,
}

impl Fitter<'_> {
    /// The runs that can be cut in fewer blocks, in order. Runs of the same shape are worked on once.
    pub(super) fn replaced(&self, runs: Vec<Run>) -> Vec<Replaced> {
        let shape = |run: &Run| -> Vec<[u64; 2]> {
            run.points.iter().map(|p| [p.x.to_bits(), p.y.to_bits()]).collect()
        };
        let mut known = HashMap::new();
        let mut shapes: Vec<&Run> = Vec::new();
        let of: Vec<usize> = runs
            .iter()
            .map(|run| {
                *known.entry((shape(run), run.slopes())).or_insert_with(|| {
                    shapes.push(run);
                    shapes.len() - 1
                })
            })
            .collect();
        let fitted: Vec<Option<ArcSpline>> = shapes.par_iter().map(|run| self.fitted(run)).collect();
        let pairs: Vec<(Run, usize)> = runs.into_iter().zip(of).collect();
        pairs.into_par_iter().filter_map(|(run, of)| self.written(run, fitted[of].as_ref()?)).collect()
    }

    /// The way in fewer spans, if there is one.
    fn fitted(&self, run: &Run) -> Option<ArcSpline> {
        let path = run.path();
        let machine = self.machine_at(run);
        let share = if run.slopes() { SLOPING * self.tolerance.mm() } else { self.tolerance.mm() };
        let left = Tolerance::new(share - 1.5 * machine.last_place())?;
        let fitted = match machine.arcs.style {
            ArcStyle::None => fit::simplify(&path, left),
            _ => fit::fit_pinned(&path, left).path,
        };
        (fitted.len() < run.blocks.len()).then_some(fitted)
    }

    /// The run with the lines for `path`, if they are fewer and hold.
    fn written(&self, run: Run, path: &ArcSpline) -> Option<Replaced> {
        let machine = self.machine_at(&run);
        let amid = Amid {
            incremental: self.first(&run).before.incremental,
            word: None,
            chord_error: self.tolerance.mm() / 4.0,
        };
        let mut lines = write::run(&moves(path, &run), &machine, amid);
        let word = lines.iter().rev().find_map(|line| motion_word(line));
        if lines.len() >= run.blocks.len() {
            return None;
        }
        self.dress(&run, &mut lines, &machine);
        let deviation =
            judge::deviation(&self.scene(&run), &self.lines_of(&run), &lines.join("\n"), self.tolerance)?;
        Some(Replaced { run, lines, word, deviation })
    }

    /// Gives the lines the run's own feed and line numbers.
    fn dress(&self, run: &Run, lines: &mut [String], machine: &Machine) {
        let gap = if machine.program.spaces { " " } else { "" };
        let blocks = &self.text.blocks[run.blocks.clone()];
        let feed = self.text.words(&blocks[0]).iter().find(|word| word.letter == b'F');
        if let (Some(feed), Some(line)) = (feed, lines.first_mut()) {
            line.push_str(&format!("{gap}{feed}"));
        }
        for (line, block) in lines.iter_mut().zip(blocks) {
            if let Some(number) = block.number {
                line.insert_str(0, &format!("N{number}{gap}"));
            }
        }
    }

    fn first(&self, run: &Run) -> &Seen {
        &self.followed.blocks[run.blocks.start]
    }

    /// The run's own lines.
    fn lines_of(&self, run: &Run) -> String {
        let blocks = &self.followed.blocks[run.blocks.clone()];
        blocks.iter().map(|seen| self.lines[seen.line - 1]).collect()
    }

    /// Where the run starts, for the reader.
    fn scene(&self, run: &Run) -> judge::Scene {
        let before = self.first(run).before;
        let start = Position { xy: run.points[0], z: before.at[2].unwrap_or(0.0) };
        let dialect = Dialect { start: Some(start), skip_optional: false, ..Dialect::of(self.machine) };
        judge::Scene { before, dialect }
    }

    /// The machine as the program writes for it where the run is: its unit, its decimals, its blanks.
    fn machine_at(&self, run: &Run) -> Machine {
        let before = self.first(run).before;
        let mut machine = self.machine.clone();
        machine.unit = before.unit;
        machine.program.decimals = decimals(self.text).max(least_decimals(before.unit));
        let first_line = self.lines[self.first(run).line - 1];
        machine.program.spaces = first_line.trim().contains([' ', '\t']);
        machine.arcs.style = match machine.arcs.style {
            ArcStyle::CentreAbsolute | ArcStyle::CentreIncremental if before.centre_from_zero => {
                ArcStyle::CentreAbsolute
            }
            ArcStyle::CentreAbsolute => ArcStyle::CentreIncremental,
            own => own,
        };
        machine
    }
}

/// The cuts along `path`, the height in proportion to the length.
fn moves(path: &ArcSpline, run: &Run) -> Vec<Move> {
    let (low, high) = run.heights.unwrap_or_default();
    let length = path.length();
    let mut along = 0.0;
    let mut at = Position { xy: run.points[0], z: low };
    let last = path.len().saturating_sub(1);
    let cut = |(i, span): (usize, crate::geom::Span)| {
        along += span.length();
        let z = if i == last { high } else { low + (high - low) * along / length };
        let from = std::mem::replace(&mut at, Position { xy: span.end, z });
        Move { from, to: at, bulge: span.bulge, feed: Some(1.0), spindle_rpm: 0.0, line: 0 }
    };
    path.spans().enumerate().map(cut).collect()
}

/// How many decimals the centres of arcs need (NISTIR 6556, 3.5.3.2).
fn least_decimals(unit: Unit) -> u32 {
    match unit {
        Unit::Mm => 3,
        Unit::Inch => 4,
    }
}

/// The motion word of a line without line number, times ten.
fn motion_word(line: &str) -> Option<u16> {
    match line.as_bytes() {
        [b'G', digit @ b'1'..=b'3', ..] => Some(10 * u16::from(digit - b'0')),
        _ => None,
    }
}
