//! Quantities that carry their meaning, and the small numerical tools the stages share.

mod tolerance;

pub use tolerance::{Deviation, Tolerance};
