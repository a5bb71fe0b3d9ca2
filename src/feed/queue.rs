//! The controller's queue of blocks.

use std::collections::VecDeque;

/// A queue that holds so many blocks, the one that is executed included, and reads one more each interval while there
/// is room. It is full when the first block starts.
#[derive(Clone, Debug)]
pub struct Queue {
    interval: f64,
    /// When each block that is held or being read is ready, in s, the one that is executed first.
    ready: VecDeque<f64>,
    started: bool,
}

impl Queue {
    /// A full queue of `capacity` blocks, at least one, that reads a block each `interval` s.
    pub fn full(capacity: usize, interval: f64) -> Self {
        Self { interval, ready: VecDeque::from(vec![0.0; capacity.max(1)]), started: false }
    }

    /// How long the next block has to be waited for when the one that is executed ends at time `ended`, in s.
    pub fn wait(&self, ended: f64) -> f64 {
        let next = self.ready.get(usize::from(self.started)).copied();
        (next.unwrap_or(ended + self.interval) - ended).max(0.0)
    }

    /// Goes on to the next block: the place of the one that was executed is free from its end, at time `ended`.
    pub fn next(&mut self, ended: f64) {
        if self.started {
            let before = self.ready.back().copied().unwrap_or(ended);
            self.ready.push_back(before.max(ended) + self.interval);
            self.ready.pop_front();
        }
        self.started = true;
    }
}
