//! Existing programs in fewer blocks, through the public door.

#[path = "../check/emit.rs"]
#[expect(dead_code, reason = "straight blocks need no radius")]
mod emit;
mod kept;
mod second;
#[path = "../gcode/second_reader.rs"]
mod second_reader;
mod traces;
