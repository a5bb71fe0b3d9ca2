//! Program text to what it says: words and blocks as they stand, then their meaning.
//!
//! Knows nothing of the writer: a program is judged from its bytes alone.

mod arc;
mod block;
mod cubic;
mod cycle;
mod dialect;
mod functions;
mod interpret;
mod moves;
mod program;
mod words;

pub use cubic::CUBIC_ERROR;
pub use dialect::Dialect;
pub use interpret::interpret;
pub use program::{ArcFlaw, Event, Program, What};
pub use words::{Block, Text, Word, read};
