//! Programs as text: the writer, and, apart from it, the reader with its interpreter.
//!
//! Behaviour is that of the RS274/NGC language (Kramer, Proctor and Messina, NISTIR 6556, 2000); where
//! controllers differ from it, the machine profile says how.
//!
//! ```
//! use ribband::gcode::{Dialect, interpret, read};
//! use ribband::machine::Machine;
//!
//! let text = "G21 G90 G94 G17\nG0 Z5\nX7 Y7\nG2 X10 Y16 I3 J4 F600\nM2\n";
//! let dialect = Dialect::of(&Machine::named("shop-router")?);
//! let program = interpret(&read(text)?, &dialect)?;
//! let arc = program.toolpath.moves[0].span();
//! assert!((arc.radius() - 5.0).abs() < 1e-12);
//! assert_eq!(program.ended, Some(5));
//! # Ok::<(), ribband::error::Error>(())
//! ```

pub mod read;
pub mod write;

pub use read::{Dialect, Program, interpret, read};
pub use write::{Curve, Header, Mark, Part, Written, blocks_of, lift, write, write_lines, write_parts};
