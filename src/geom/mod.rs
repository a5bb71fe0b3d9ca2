//! Lines and arcs, exactly. This room knows no stage.

mod arc_spline;
mod span;

pub use arc_spline::{ArcSpline, Vertex};
pub use span::{Nearest, Span};
