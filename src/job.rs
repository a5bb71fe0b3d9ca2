//! What is asked for: settings as typed, merged from all their sources in one place, and judged before any work.

mod file;
mod settings;

pub use file::{JobFile, LayerSettings};
pub use settings::{DrawingUnit, Origin, Outputs, Settings, Zero};
