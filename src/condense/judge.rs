//! Whether blocks may take the place of a run: both are read back, by the program reader, and compared.

use super::follow::State;
use super::space;
use crate::gcode::{Dialect, interpret, read};
use crate::geom::{ArcSpline, frechet_within};
use crate::machine::Unit;
use crate::num::{Deviation, Tolerance};
use crate::toolpath::{Move, Position};

/// Where a run starts.
pub(super) struct Scene {
    pub(super) before: State,
    pub(super) dialect: Dialect,
}

impl Scene {
    /// The moves of `lines` from here; `None` for lines that are not legal.
    fn moves(&self, lines: &str) -> Option<Vec<Move>> {
        let unit = if self.before.unit == Unit::Mm { "G21" } else { "G20" };
        let distance = if self.before.incremental { "G91" } else { "G90" };
        let centre = if self.before.centre_from_zero { "G90.1" } else { "G91.1" };
        let feed = self.before.feed.unwrap_or_default();
        let text = format!("G17 {unit} {distance} G94 {centre}\nG1 F{feed}\n{lines}\n");
        let program = interpret(&read(&text).ok()?, &self.dialect).ok()?;
        program.arc_flaws.is_empty().then_some(program.toolpath.moves)
    }
}

/// The distance between the ways that the lines `old` and `new` lead from the same place, if it is within `tolerance`:
/// from the same start to the same end, at the same feed, along and up or down.
pub(super) fn deviation(scene: &Scene, old: &str, new: &str, tolerance: Tolerance) -> Option<Deviation> {
    let (old, new) = (scene.moves(old)?, scene.moves(new)?);
    let feed = old.first()?.feed;
    let steady = |moves: &[Move]| moves.iter().all(|m| m.feed == feed);
    let end = |moves: &[Move]| moves.last().map(|m| m.to);
    let rounding = (old.len() + new.len()) as f64 * 16.0 * f64::EPSILON;
    let ends_alike = end(&old).zip(end(&new)).is_some_and(|(a, b)| same(a, b, rounding));
    if !(steady(&old) && steady(&new) && ends_alike) {
        return None;
    }
    let sloping = old.iter().chain(&new).any(|m| (m.to.z - m.from.z).abs() > 0.0);
    let deviation = if sloping { space::deviation(&old, &new) } else { in_plane(&old, &new, tolerance)? };
    (deviation.mm <= tolerance.mm()).then_some(deviation)
}

/// True when both are one place but for the rounding of sums.
fn same(a: Position, b: Position, rounding: f64) -> bool {
    let apart = a.xy.distance(b.xy).max((a.z - b.z).abs());
    let scale = [a.xy.x, a.xy.y, a.z].into_iter().map(f64::abs).fold(1.0, f64::max);
    apart <= rounding * scale
}

/// The distance of two level ways; `None` when one runs round the other way.
fn in_plane(old: &[Move], new: &[Move], tolerance: Tolerance) -> Option<Deviation> {
    let (old, new) = (chain(old), chain(new));
    // Ways round and back to the start enclose areas that differ by no more than what lies between them.
    let between = tolerance.mm() * (old.length() + new.length());
    let same_way = (old.area() - new.area()).abs() <= between;
    same_way.then(|| frechet_within(&new, &old, tolerance.mm()))
}

fn chain(moves: &[Move]) -> ArcSpline {
    let spans: Vec<_> = moves.iter().map(Move::span).collect();
    ArcSpline::from_spans(&spans, false)
}
