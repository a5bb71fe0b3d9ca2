//! The command line from outside: statuses, messages, files.

mod demo;
mod formats;
mod lengths;
mod outputs;
mod words;
