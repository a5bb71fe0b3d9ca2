//! Cleaning and measuring, through the public door.

#![allow(
    clippy::unwrap_used,
    clippy::float_cmp,
    reason = "a test fails by panicking; exact values are exact"
)]

mod chaining;
mod common;
mod duplicates;
mod flawed;
mod jaggedness;
mod measuring;
mod nesting;
