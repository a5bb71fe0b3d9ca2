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
use crate::geom::{ArcSpline, frechet_within};
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
/// Shares of the tolerance that are tried one after the other, until what is read back holds: for the fit, and for arcs
/// that the machine cannot take. Both with the rounding may come to more than the whole.
const ATTEMPTS: [(f64, f64); 5] = [(1.0, 0.25), (0.98, 0.02), (0.9, 0.15), (0.7, 0.25), (1.0, 0.0)];

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
    /// The runs that can be cut in fewer blocks, in order.
    pub(super) fn replaced(&self, runs: Vec<Run>) -> Vec<Replaced> {
        let mut replaced = Vec::new();
        let mut left = runs;
        for shares in ATTEMPTS {
            let tried = self.tried(left, shares);
            left = Vec::new();
            for tried in tried {
                match tried {
                    Ok(done) => replaced.push(done),
                    Err(run) => left.push(run),
                }
            }
        }
        replaced.sort_by_key(|replaced| replaced.run.blocks.start);
        replaced
    }

    /// The runs that fewer spans were found for within those shares of the tolerance, written or left to be tried again.
    /// Runs of the same shape are worked on once.
    fn tried(&self, runs: Vec<Run>, (fit, chords): (f64, f64)) -> Vec<Result<Replaced, Run>> {
        let mut known = HashMap::new();
        let mut shapes: Vec<&Run> = Vec::new();
        let mut shape_of = |run| {
            *known.entry(shape(run)).or_insert_with(|| {
                shapes.push(run);
                shapes.len() - 1
            })
        };
        let shape_of: Vec<usize> = runs.iter().map(&mut shape_of).collect();
        let fitted: Vec<Option<ArcSpline>> = shapes.par_iter().map(|run| self.fitted(run, fit)).collect();
        let pairs: Vec<(Run, usize)> = runs.into_iter().zip(shape_of).collect();
        let tried = pairs.into_par_iter().filter_map(|(run, shape)| {
            let path = fitted[shape].as_ref()?;
            Some(self.written(&run, path, chords).ok_or(run))
        });
        tried.collect()
    }

    /// The way in fewer spans, if there is one.
    fn fitted(&self, run: &Run, share: f64) -> Option<ArcSpline> {
        let path = run.path();
        let machine = self.machine_at(run);
        let share = if run.slopes() { SLOPING * share } else { share };
        let left = Tolerance::new(share * self.tolerance.mm() - 1.5 * machine.last_place())?;
        let fitted = match machine.arcs.style {
            ArcStyle::None => fit::simplify(&path, left),
            _ => flattened(fit::fit_pinned(&path, left).path, &path, left, machine.arcs.largest),
        };
        (fitted.len() < run.blocks.len()).then_some(fitted)
    }

    /// The run with the lines for `path`, if they are fewer and hold.
    fn written(&self, run: &Run, path: &ArcSpline, chords: f64) -> Option<Replaced> {
        let machine = self.machine_at(run);
        let incremental = self.first(run).before.incremental;
        let amid = Amid { incremental, word: None, chord_error: chords * self.tolerance.mm() };
        let mut lines = write::run(&moves(path, run), &machine, amid);
        let word = lines.iter().rev().find_map(|line| motion_word(line));
        if lines.len() >= run.blocks.len() {
            return None;
        }
        self.dress(run, &mut lines, &machine);
        let (old, new) = (self.lines_of(run), lines.join("\n"));
        let deviation = judge::deviation(&self.scene(run), &old, &new, self.tolerance)?;
        Some(Replaced { run: run.clone(), lines, word, deviation })
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

/// What runs have in common that are worked on once: their places, and whether they slope.
fn shape(run: &Run) -> (Vec<[u64; 2]>, bool) {
    (run.points.iter().map(|p| [p.x.to_bits(), p.y.to_bits()]).collect(), run.slopes())
}

/// The path with its arcs of more than the `largest` radius as lines, where it stays within the tolerance so.
fn flattened(path: ArcSpline, run: &ArcSpline, tolerance: Tolerance, largest: f64) -> ArcSpline {
    let wide: Vec<usize> =
        (0..path.len()).filter(|&i| !path.span(i).is_line() && path.span(i).radius() > largest).collect();
    wide.into_iter().fold(path, |path, i| {
        let mut flat = path.clone();
        flat.vertices[i].bulge = 0.0;
        let holds = frechet_within(&flat, run, tolerance.mm()).mm <= tolerance.mm();
        if holds { flat } else { path }
    })
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
