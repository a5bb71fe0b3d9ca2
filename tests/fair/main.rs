//! The fairing room: cubic splines, and the least-bending one inside a tolerance.

mod least;
mod outlines;
mod splines;
