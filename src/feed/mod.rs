//! Feeds, time and slow controllers: how fast a toolpath runs, and which feeds suit it to its machine.
//!
//! The model: every axis keeps its speed and its acceleration; corners are passed as fast as a rounding within the
//! junction allowance could be; the controller sees so many blocks, and leaves each no faster than it can still stop
//! inside those it sees; it reads so many blocks a second into its queue, and where the queue runs dry the motion waits.
//! That it would rather slow down than wait does not matter to the time: the reading sets it then.

mod chip;
mod course;
mod limits;
mod motion;
mod queue;
mod schedule;
mod stretch;
mod time;

pub use chip::{ChipLoad, hold_chip_load};
pub use limits::Limits;
pub use motion::{Phase, motion};
pub use queue::Queue;
pub use schedule::{MOST_OVERRIDE, Schedule, highest_override, schedule, schedule_blocks};
pub use time::{Crawl, Times, spent, time};
