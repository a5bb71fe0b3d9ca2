//! Cutter compensation, and the crossings it rests on, through the public door.

mod crossings;
mod exact;
mod outlines;
