//! How long a toolpath takes on a machine, and where it crawls.

use kurbo::Point;

use super::Limits;
use super::motion::{Happening, run};
use crate::toolpath::{Move, Toolpath};

/// How long a toolpath takes, and how it runs.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Times {
    /// The whole toolpath, in s, waiting for blocks included.
    pub time_s: f64,
    /// The contour moves alone (feed moves that travel in XY), in s.
    pub cut_time_s: f64,
    /// Blocks whose predecessor ended with the controller's queue empty.
    pub starved_blocks: usize,
    /// The mean speed of the contour moves, in mm/min; 0 when there are none.
    pub mean_mm_min: f64,
    /// The mean speed on the slowest contour move, in mm/min; 0 when there are none.
    pub slowest_mm_min: f64,
    /// The stretches of contour moves at less than half of their feed that take longest, the longest first.
    pub crawls: Vec<Crawl>,
}

/// Moves one after another that run at less than half of their feed.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Crawl {
    /// Where it starts.
    pub at: Point,
    /// The line of the program it starts on; 0 when it was not read from text.
    pub line: usize,
    /// Its length in mm.
    pub length_mm: f64,
    /// The time it takes, in s.
    pub time_s: f64,
}

/// How many crawls are listed.
const CRAWLS: usize = 5;

/// The time that each move of a toolpath takes on a machine within `limits`, in s. Waiting for a block that starves
/// counts for its move.
pub fn spent(toolpath: &Toolpath, limits: &Limits) -> Vec<f64> {
    spent_and_starved(toolpath, limits).0
}

fn spent_and_starved(toolpath: &Toolpath, limits: &Limits) -> (Vec<f64>, usize) {
    let mut spent = vec![0.0; toolpath.moves.len()];
    let (mut wait, mut starved_blocks) = (0.0, 0);
    run(toolpath, limits, |happening| match happening {
        Happening::Starved(time) => {
            starved_blocks += 1;
            wait = time;
        }
        Happening::Runs(phase) => {
            spent[phase.of] += phase.time() + wait;
            wait = 0.0;
        }
    });
    (spent, starved_blocks)
}

/// How long a toolpath takes on a machine within `limits`.
pub fn time(toolpath: &Toolpath, limits: &Limits) -> Times {
    let (spent, starved_blocks) = spent_and_starved(toolpath, limits);
    let contour = |m: &Move| !m.is_rapid() && m.span().length() > 0.0;
    let cutting = || toolpath.moves.iter().zip(&spent).filter(|(m, _)| contour(m));
    let cut_time_s: f64 = cutting().map(|(_, time)| time).sum();
    let length: f64 = cutting().map(|(m, _)| m.length()).sum();
    let slowest = cutting().map(|(m, time)| m.length() / time).fold(f64::INFINITY, f64::min);
    Times {
        time_s: spent.iter().sum(),
        cut_time_s,
        starved_blocks,
        mean_mm_min: if length > 0.0 { 60.0 * length / cut_time_s } else { 0.0 },
        slowest_mm_min: if slowest.is_finite() { 60.0 * slowest } else { 0.0 },
        crawls: crawls(toolpath, &spent),
    }
}

/// The crawls of a toolpath whose moves take the times `spent`.
fn crawls(toolpath: &Toolpath, spent: &[f64]) -> Vec<Crawl> {
    let slow = |(m, time): &(&Move, &f64)| m.feed.is_some_and(|feed| m.length() * 120.0 < feed * **time);
    let timed: Vec<(&Move, &f64)> = toolpath.moves.iter().zip(spent).collect();
    let runs = timed.chunk_by(|a, b| slow(a) && slow(b)).filter(|run| run.first().is_some_and(slow));
    let mut crawls: Vec<Crawl> = runs
        .filter_map(|run| {
            let (first, _) = run.first()?;
            let length_mm = run.iter().map(|(m, _)| m.length()).sum();
            let time_s = run.iter().map(|(_, time)| **time).sum();
            Some(Crawl { at: first.from.xy, line: first.line, length_mm, time_s })
        })
        .collect();
    crawls.sort_by(|a, b| b.time_s.total_cmp(&a.time_s));
    crawls.truncate(CRAWLS);
    crawls
}
