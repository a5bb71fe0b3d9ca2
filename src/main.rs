//! The `ribband` command.

fn main() {}
