//! The fairing room: cubic splines, and the least-bending one inside a tolerance.

mod splines;
