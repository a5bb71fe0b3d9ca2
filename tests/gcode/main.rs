//! Programs: written, read back, and read from elsewhere.

mod common;
mod cubic;
mod foreign;
mod grammar;
mod nist;
mod parts;
mod rounded;
mod routed;
mod second;
mod second_reader;
mod written;
