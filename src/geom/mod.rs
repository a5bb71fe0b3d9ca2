//! Lines and arcs, exactly. This room knows no stage.

mod arc_spline;
mod chords;
mod coupling;
mod crossings;
mod distance;
mod free_space;
mod span;
mod winding;

pub use arc_spline::{ArcSpline, Vertex};
pub use crossings::{Crossing, crossings};
pub use distance::frechet;
pub use span::{Nearest, Span};
