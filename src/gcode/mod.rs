//! Programs as text: the writer, and, apart from it, the reader with its interpreter.
//!
//! Behaviour is that of the RS274/NGC language (Kramer, Proctor and Messina, NISTIR 6556, 2000); where
//! controllers differ from it, the machine profile says how.

pub mod read;
pub mod write;

pub use read::{Dialect, Program, interpret, read};
pub use write::{Header, Mark, Part, write, write_parts};
