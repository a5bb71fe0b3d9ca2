//! Fitting: few tangent arcs and lines, inside the tolerance, whatever the trace.

mod common;
mod hostile;
mod independence;
mod limits;
mod shapes;
mod traces;
