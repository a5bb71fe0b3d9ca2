//! Cleaning and measuring, through the public door.

mod chaining;
mod common;
mod duplicates;
mod jaggedness;
mod nesting;
