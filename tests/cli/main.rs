//! The command line from outside: statuses, messages, files.

mod lengths;
mod outputs;
mod words;
