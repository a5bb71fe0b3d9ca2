//! Quantities that carry their meaning, and the small numerical tools the stages share.

mod banded;
mod length;
mod tolerance;

pub use banded::{BlockTridiagonal, Factored};
pub use length::{Feed, Length, LengthUnit};
pub use tolerance::{Deviation, Tolerance};
