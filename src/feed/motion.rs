//! The motion of a toolpath on a machine, block by block as its controller sees it.

use super::course::Course;
use super::{Limits, Queue};
use crate::toolpath::Toolpath;

/// A part of the motion with constant tangential acceleration.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Phase {
    /// Which move of the toolpath it belongs to.
    pub of: usize,
    /// Where it starts, in mm along the move.
    pub from: f64,
    /// Its length in mm.
    pub length: f64,
    /// Speed at its start, in mm/s.
    pub start: f64,
    /// Speed at its end, in mm/s.
    pub end: f64,
}

impl Phase {
    /// How long it takes, in s: its length over the mean speed.
    pub fn time(&self) -> f64 {
        2.0 * self.length / (self.start + self.end)
    }
}

/// What happens as the program runs.
#[derive(Clone, Copy, Debug)]
pub(super) enum Happening {
    /// A block had to be waited for: this one, for so many s.
    Starved(f64),
    /// A part of the motion.
    Runs(Phase),
}

/// The motion of a toolpath from rest to rest, in order. Time spent waiting for starved blocks is not in it.
pub fn motion(toolpath: &Toolpath, limits: &Limits) -> Vec<Phase> {
    let mut phases = Vec::new();
    run(toolpath, limits, |happening| {
        if let Happening::Runs(phase) = happening {
            phases.push(phase);
        }
    });
    phases
}

/// Runs a toolpath and tells what happens, in order. The time is proportional to the stretches, times those within
/// the stopping distance (never more than the queue holds).
pub(super) fn run(toolpath: &Toolpath, limits: &Limits, mut tell: impl FnMut(Happening)) {
    let course = Course::of(toolpath, limits);
    let mut view = View::of(&course);
    let mut queue = Queue::full(limits.queue, limits.interval());
    let (mut now, mut speed) = (0.0_f64, 0.0_f64);
    let last = course.blocks.len() - 1;
    for block in 0..last {
        let wait = queue.wait(now);
        queue.next(now);
        if wait > 0.0 {
            tell(Happening::Starved(wait));
            now += wait;
        }
        let (first, end) = (course.blocks[block], course.blocks[block + 1]);
        view.look((first, end), course.blocks[(block + limits.queue).min(last)]);
        for i in first..end {
            let stretch = &course.stretches[i];
            let next = stretch.reach(speed).min(view.limit(i + 1));
            let run = stretch.run(speed, next);
            let speeds = [speed.sqrt(), run.peak.sqrt(), run.peak.sqrt(), next.sqrt()];
            let mut from = stretch.from;
            // A part so short that its place cannot tell has speeds that differ by rounding only.
            let least = 16.0 * f64::EPSILON * (stretch.from + stretch.length);
            for (part, &length) in run.lengths.iter().enumerate().filter(|(_, length)| **length > least) {
                let phase =
                    Phase { of: stretch.of, from, length, start: speeds[part], end: speeds[part + 1] };
                now += phase.time();
                from += length;
                tell(Happening::Runs(phase));
            }
            speed = next;
        }
    }
}

/// What the controller allows at the joints of a block, knowing the course up to some joint at which it must be able to
/// stop.
struct View<'a> {
    course: &'a Course,
    /// The squared speed that can surely be lost from the start to each joint.
    losses: Vec<f64>,
    /// Squared speeds at the joints back from the last known one, until they meet the course's own.
    ahead: Vec<f64>,
    /// The last known joint.
    known: usize,
}

impl<'a> View<'a> {
    fn of(course: &'a Course) -> Self {
        let mut loss = 0.0;
        let to_end = course.stretches.iter().map(|stretch| {
            loss += stretch.sure_loss();
            loss
        });
        Self { course, losses: std::iter::once(0.0).chain(to_end).collect(), ahead: Vec::new(), known: 0 }
    }

    /// Looks from the joints of a block, its first to its last, up to joint `known`.
    fn look(&mut self, (first, last): (usize, usize), known: usize) {
        self.ahead.clear();
        self.known = known;
        let (joints, losses) = (&self.course.joints, &self.losses);
        // Where the course's own speeds can surely be lost in time, there is no need to look.
        if (first..=last).all(|joint| joints[joint] <= losses[known] - losses[joint]) {
            return;
        }
        let mut speed = 0.0;
        for joint in (first..=known).rev() {
            if joint < known {
                speed = self.course.stretches[joint].reach_back(speed);
            }
            if speed >= joints[joint] {
                return;
            }
            self.ahead.push(speed);
        }
    }

    /// The largest squared speed at a joint between the two that were looked from and to.
    fn limit(&self, joint: usize) -> f64 {
        self.ahead.get(self.known - joint).copied().unwrap_or(self.course.joints[joint])
    }
}
