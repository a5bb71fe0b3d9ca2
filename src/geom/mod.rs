//! Lines and arcs, exactly. This room knows no stage.

mod arc_spline;
mod crossings;
mod span;
mod winding;

pub use arc_spline::{ArcSpline, Vertex};
pub use crossings::{Crossing, crossings};
pub use span::{Nearest, Span};
