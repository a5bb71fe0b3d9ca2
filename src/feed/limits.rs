//! What bounds the motion: the axes, the corners and the controller.

use crate::machine::{Axes, Machine};

/// The limits of a machine and its controller, in mm and seconds. Axes stand in the order X, Y, Z.
#[derive(Clone, Debug, PartialEq)]
pub struct Limits {
    /// The largest feed of each axis, in mm/s.
    pub feed: [f64; 3],
    /// The speed of each axis in a rapid, in mm/s.
    pub rapid: [f64; 3],
    /// The acceleration of each axis, in mm/s2.
    pub acceleration: [f64; 3],
    /// How far from a corner the path may be rounded in planning its speed, in mm; at 0 every corner is a stop.
    pub junction: f64,
    /// Blocks the controller can hold and see ahead, the one it executes included; at least 1.
    pub queue: usize,
    /// Blocks it can read in a second.
    pub blocks_per_second: f64,
}

impl Limits {
    /// The limits of `machine`. A corner that rounding to the last place explains is none, so that the junction
    /// allowance is at least one unit of it.
    pub fn of(machine: &Machine) -> Self {
        let axes = |axes: &Axes, per: f64| [axes.x / per, axes.y / per, axes.z / per];
        Self {
            feed: axes(&machine.feed, 60.0),
            rapid: axes(&machine.rapid, 60.0),
            acceleration: axes(&machine.acceleration, 1.0),
            junction: machine.controller.junction.max(machine.last_place()),
            queue: (machine.controller.queue as usize).max(1),
            blocks_per_second: machine.controller.blocks_per_second,
        }
    }

    /// The time to read a block, in s.
    pub(super) fn interval(&self) -> f64 {
        self.blocks_per_second.recip()
    }
}
