//! Existing programs in fewer blocks, through the public door.

#[path = "../check/emit.rs"]
#[expect(dead_code, reason = "straight blocks need no style of arcs")]
mod emit;
mod kept;
mod traces;
