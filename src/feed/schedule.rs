//! The feed of every block: what the process asks for, lowered to what the machine and its controller sustain.

use super::stretch::speed_cap;
use super::{Limits, Queue};
use crate::toolpath::{Move, Toolpath};

/// What a schedule came to.
#[derive(Clone, Debug, PartialEq)]
pub struct Schedule {
    /// Moves whose feed was lowered.
    pub lowered: usize,
    /// A feed override at which no block starves, in percent: the highest when every block runs at its feed from end to
    /// end, as no machine does; at most [`MOST_OVERRIDE`], and 0 where blocks starve at 100 % already.
    pub highest_override: u32,
}

/// The largest override that is looked at, in percent: what the controls of machines commonly go up to.
pub const MOST_OVERRIDE: u32 = 200;

/// Lowered feeds go down in steps of this factor from the feed asked for, so that neighbours share a feed word.
const STEP: f64 = 0.98;

/// Lowers the feed of every move that needs it to the least of the feed it has, the limits of the axes it uses, the
/// centripetal limit on its arc, and what the controller's queue sustains. Corners lower nothing: the
/// controller slows down for them by itself, whatever the feed word.
///
/// The queue is taken to run dry no later than on the real machine: every block at its feed from end to end, and one
/// place of the queue left unused. A second schedule lowers nothing more.
pub fn schedule(toolpath: &mut Toolpath, limits: &Limits) -> Schedule {
    let lowered = lower(toolpath, limits);
    Schedule { lowered, highest_override: highest_override(toolpath, limits) }
}

/// Lowers the feeds of the moves that need it; returns how many.
fn lower(toolpath: &mut Toolpath, limits: &Limits) -> usize {
    let mut times: Vec<f64> = toolpath.moves.iter().map(|m| least_time(m, limits)).collect();
    sustain(&toolpath.moves, &mut times, limits);
    let mut lowered = 0;
    for (m, time) in toolpath.moves.iter_mut().zip(&times).filter(|(_, time)| **time > 0.0) {
        let Some(feed) = m.feed else { continue };
        let programmed = stepped(feed.min(slowest_axis(m, limits)), m.length() / time * 60.0);
        lowered += usize::from(programmed < feed);
        m.feed = Some(programmed);
    }
    lowered
}

/// Lowers feeds like [`schedule`] for moves of which the controller gets so many `blocks` each: none of one that
/// rounding leaves out, many of an arc that becomes chords. Returns how many moves it lowered.
pub fn schedule_blocks(toolpath: &mut Toolpath, blocks: &[usize], limits: &Limits) -> usize {
    let taken = toolpath.moves.iter().zip(blocks).filter(|(_, n)| **n > 0);
    let mut pieces = Toolpath { moves: taken.flat_map(|(m, &n)| m.in_parts(n)).collect() };
    lower(&mut pieces, limits);
    let mut rest = pieces.moves.iter();
    let mut lowered = 0;
    for (m, &n) in toolpath.moves.iter_mut().zip(blocks) {
        // A move has one feed: the least that its blocks need.
        let least = rest.by_ref().take(n).filter_map(|piece| piece.feed).reduce(f64::min);
        lowered += usize::from(least.is_some() && least < m.feed);
        m.feed = least.or(m.feed);
    }
    lowered
}

/// The largest feed of the slowest axis that a move uses, in mm/min: a feed word above it would be above the profile,
/// even where the direction allows it.
fn slowest_axis(m: &Move, limits: &Limits) -> f64 {
    let flat = m.span().length() > 0.0;
    let used = [flat, flat, (m.to.z - m.from.z).abs() > 0.0];
    let feeds = limits.feed.iter().zip(used).filter(|(_, used)| *used).map(|(feed, _)| *feed);
    feeds.fold(f64::INFINITY, f64::min) * 60.0
}

/// The highest step down from `feed` that is not above `held`; `feed` itself where rounding alone sets them apart.
fn stepped(feed: f64, held: f64) -> f64 {
    if held >= feed * (1.0 - 8.0 * f64::EPSILON) {
        return feed;
    }
    let steps = ((held / feed).ln() / STEP.ln()).ceil();
    (feed * STEP.powf(steps)).min(held)
}

/// The time of a move at the highest speed it may have from end to end, in s.
fn least_time(m: &Move, limits: &Limits) -> f64 {
    let length = m.length();
    if length > 0.0 { length / speed_cap(m, limits) } else { 0.0 }
}

/// Lengthens the `times` of feed moves until no block is waited for. Where one would be, those before it that the queue
/// can hold share what is missing in proportion to their times.
fn sustain(moves: &[Move], times: &mut [f64], limits: &Limits) {
    let places = (limits.queue - 1).max(1);
    let written: Vec<usize> = (0..moves.len()).filter(|&i| times[i] > 0.0).collect();
    let mut starts = vec![0.0; written.len()];
    let (mut now, mut ready) = (0.0_f64, 0.0_f64);
    for k in 0..written.len() {
        let first = k.saturating_sub(places);
        if k >= places {
            ready = ready.max(starts[first]) + limits.interval();
        }
        if ready > now {
            let can_wait = |&i: &usize| moves[i].feed.is_some();
            let shared: f64 = written[first..k].iter().filter(|i| can_wait(i)).map(|&i| times[i]).sum();
            let longer = if shared > 0.0 { 1.0 + (ready - now) / shared } else { 1.0 };
            now = starts[first];
            for j in first..k {
                starts[j] = now;
                times[written[j]] *= if can_wait(&written[j]) { longer } else { 1.0 };
                now += times[written[j]];
            }
        }
        starts[k] = now;
        now += times[written[k]];
    }
}

/// The highest feed override, in whole percent, at which no block starves when every one runs from end to end at the
/// feed that the override and the machine allow; see [`Schedule::highest_override`].
pub fn highest_override(toolpath: &Toolpath, limits: &Limits) -> u32 {
    let starves = |percent: u32| {
        let mut queue = Queue::full(limits.queue, limits.interval());
        let mut now = 0.0;
        let mut line = 0;
        toolpath.moves.iter().filter(|m| m.length() > 0.0).any(|m| {
            let feed = m.feed.map(|feed| feed * f64::from(percent) / 100.0);
            // Moves that one line of the program makes are one block.
            let same = m.line > 0 && m.line == line;
            line = m.line;
            let waits = !same && queue.wait(now) > 0.0;
            if !same {
                queue.next(now);
            }
            now += least_time(&Move { feed, ..*m }, limits);
            waits
        })
    };
    if starves(100) {
        return 0;
    }
    let (mut holds, mut fails) = (100, MOST_OVERRIDE + 1);
    while fails - holds > 1 {
        let middle = u32::midpoint(holds, fails);
        if starves(middle) { fails = middle } else { holds = middle }
    }
    holds
}
