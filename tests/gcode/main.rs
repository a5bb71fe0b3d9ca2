//! Programs: written, read back, and read from elsewhere.

mod common;
mod written;
