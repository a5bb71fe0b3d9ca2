//! Quantities that carry their meaning, and the small numerical tools the stages share.

mod banded;
mod length;
mod tolerance;

pub use banded::{BlockTridiagonal, Factored};
pub(crate) use length::from_written;
pub use length::{Feed, Length, LengthUnit};
pub use tolerance::{Deviation, Tolerance};
