//! Quantities that carry their meaning, and the small numerical tools the stages share.

mod length;
mod tolerance;

pub use length::{Feed, Length, LengthUnit};
pub use tolerance::{Deviation, Tolerance};
