//! Feeds and spindle speed that suit the machine, its controller and the cutter.

use super::curving::share_feeds;
use crate::feed::{self, Limits, hold_chip_load};
use crate::gcode::{Header, blocks_of};
use crate::job::Job;
use crate::toolpath::{Move, Toolpath};

/// Lowers feeds to what machine and controller sustain, and the spindle speed with them; tells what the person at the
/// machine should know of it.
pub(super) fn suit(toolpath: &mut Toolpath, header: &Header, job: &Job, cutter: usize) -> Vec<String> {
    let blocks = blocks_of(toolpath, header, &job.machine);
    // A cubic move is planned as the arcs that stand for it, which are more blocks than it is.
    let lowered = feed::schedule_blocks(toolpath, &blocks, &Limits::of(&job.machine));
    share_feeds(toolpath, &header.curves);
    let mut told = Vec::new();
    if lowered > 0 {
        let cutting = toolpath.moves.iter().filter(|m| !m.is_rapid()).count();
        let unit = job.machine.unit;
        told.push(format!(
            "the feed is lowered on {lowered} of {cutting} moves, to {:.0} {}/min at the least: the machine or its \
             controller sustains no more there",
            slowest(toolpath) / unit.mm(),
            unit.symbol()
        ));
    }
    told.extend(chips(toolpath, job, cutter));
    told
}

/// The spindle speed that suits the feeds, and what stays outside the cutter's range.
fn chips(toolpath: &mut Toolpath, job: &Job, cutter: usize) -> Vec<String> {
    let Some(cutter) = &job.cutters[cutter].entry else { return Vec::new() };
    let asked = spindle_rpm(toolpath);
    let Some(load) = hold_chip_load(toolpath, cutter, &job.machine.spindle) else { return Vec::new() };
    let slower = (load.rpm < asked).then(|| {
        format!(
            "the spindle turns at {:.0} rev/min, not {asked:.0}, so that the chip is not too thin",
            load.rpm
        )
    });
    slower.into_iter().chain(load.told).collect()
}

/// The highest spindle speed of the moves, in rev/min.
pub(super) fn spindle_rpm(toolpath: &Toolpath) -> f64 {
    toolpath.moves.iter().map(|m| m.spindle_rpm).fold(0.0, f64::max)
}

/// The lowest feed along a contour, in mm/min.
fn slowest(toolpath: &Toolpath) -> f64 {
    let along = toolpath.moves.iter().filter(|m| m.from.xy != m.to.xy);
    along.filter_map(|m: &Move| m.feed).fold(f64::INFINITY, f64::min)
}
