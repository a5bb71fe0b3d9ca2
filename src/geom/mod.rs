//! Lines and arcs, exactly. This room knows no stage.

mod along;
mod arc_spline;
mod chords;
mod coupling;
mod crossings;
mod cubic;
mod distance;
mod free_space;
mod index;
mod span;
mod winding;

pub use along::Along;
pub use arc_spline::{ArcSpline, Vertex};
pub use crossings::{Crossing, crossings};
pub use cubic::arcs_of;
pub use distance::{frechet, frechet_within};
pub use index::SpanIndex;
pub use span::{Nearest, Span};
