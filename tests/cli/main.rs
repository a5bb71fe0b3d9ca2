//! The command line from outside: statuses, messages, files.

mod bad;
mod batch;
mod beside;
mod condensing;
mod demo;
mod examples;
mod formats;
mod lengths;
mod limits;
mod other;
mod outlines;
mod outputs;
mod parts;
mod posting;
mod reading;
mod readme;
mod schema;
mod splines;
mod waste;
mod words;
