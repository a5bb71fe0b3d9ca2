//! The controller's queue of blocks.

use std::collections::VecDeque;

/// A queue that holds so many blocks, the one that is executed included, and takes one more each interval while there
/// is room. It is full when the first block starts.
#[derive(Clone, Debug)]
pub struct Queue {
    interval: f64,
    /// When each of the blocks behind the one that is executed is ready, in s.
    ready: VecDeque<f64>,
    last: f64,
}

impl Queue {
    /// A full queue of `capacity` blocks, at least one, that reads a block each `interval` s.
    pub fn full(capacity: usize, interval: f64) -> Self {
        Self { interval, ready: VecDeque::from(vec![0.0; capacity.max(1)]), last: 0.0 }
    }

    /// When the next block is ready to start, in s.
    pub fn next_ready(&self) -> f64 {
        self.ready.front().copied().unwrap_or(0.0)
    }

    /// Starts the next block at time `now`, not before it is ready: its place is filled with the next one read.
    pub fn start(&mut self, now: f64) {
        self.ready.pop_front();
        self.last = self.last.max(now) + self.interval;
        self.ready.push_back(self.last);
    }
}
