//! How the cutter's speed goes within a move, for the moves that last long enough to be watched.

use super::Scene;
use super::markup::number;
use crate::feed::{Phase, motion};

/// Moves that are over sooner run at an even pace on the page: nobody sees within them.
const WATCHED_S: f64 = 0.1;

/// As JSON, for each such move by its number: the speed in mm/s that it starts with; then, part by part of even
/// acceleration, the part's length in mm and the speed at its end.
pub(super) fn paces(scene: &Scene) -> String {
    let phases = motion(&scene.program.toolpath, &scene.limits);
    let of_moves = phases.chunk_by(|a, b| a.of == b.of);
    let watched = of_moves.filter(|phases| phases.iter().map(Phase::time).sum::<f64>() >= WATCHED_S);
    let pace = |phases: &[Phase]| {
        let parts = phases.iter().map(|p| format!(",{},{}", number(p.length, 4), number(p.end, 3)));
        format!("\"{}\":[{}{}]", phases[0].of, number(phases[0].start, 3), parts.collect::<String>())
    };
    format!("{{{}}}", watched.map(pace).collect::<Vec<_>>().join(","))
}
