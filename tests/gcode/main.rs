//! Programs: written, read back, and read from elsewhere.

mod common;
mod grammar;
mod nist;
mod rounded;
mod second;
mod written;
