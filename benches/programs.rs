//! How fast programs are written, read and understood: `cargo bench --bench programs`.
//!
//! A million blocks of short lines and arcs, as a long job has them, on one core; the best of five runs.

#![expect(clippy::print_stdout, reason = "a benchmark prints its figures")]

use std::time::{Duration, Instant};

use kurbo::Point;
use ribband::gcode::{Dialect, Header, interpret, read, write};
use ribband::machine::Machine;
use ribband::toolpath::{Move, Position, Toolpath};

const BLOCKS: usize = 1_000_000;

fn main() {
    let machine = Machine::named("shop-router").expect("built in");
    let toolpath = waves();
    let header = Header { clearance: 15.0, ..Header::default() };
    let (text, writing) = best(|| write(&toolpath, &header, &machine).expect("can be written"));
    let (words, reading) = best(|| read(&text).expect("our own program"));
    let dialect = Dialect::of(&machine);
    let (program, understanding) = best(|| interpret(&words, &dialect).expect("our own program"));
    println!("{} motion blocks, {:.1} MB", program.motion_blocks, text.len() as f64 / 1e6);
    for (what, time) in [("write", writing), ("read", reading), ("interpret", understanding)] {
        println!("{what:10} {:6.0} ms", time.as_secs_f64() * 1e3);
    }
    let rate = program.motion_blocks as f64 / (reading + understanding).as_secs_f64();
    println!("read and interpreted at {:.1} million blocks a second", rate / 1e6);
}

/// The shortest of five runs, with what it made.
fn best<T>(run: impl Fn() -> T) -> (T, Duration) {
    let timed = || {
        let start = Instant::now();
        let made = run();
        (made, start.elapsed())
    };
    let mut shortest = timed();
    for _ in 1..5 {
        let next = timed();
        if next.1 < shortest.1 {
            shortest = next;
        }
    }
    shortest
}

/// Rows of arcs and lines, a few mm each.
fn waves() -> Toolpath {
    let mut here = Position { xy: Point::new(0.0, 0.0), z: 15.0 };
    let mut moves = Vec::with_capacity(BLOCKS);
    let mut go = |to: Position, bulge, feed| {
        moves.push(Move { from: here, to, bulge, feed, spindle_rpm: 18_000.0, line: 0 });
        here = to;
    };
    go(Position { xy: Point::new(0.0, 0.0), z: -3.0 }, 0.0, Some(400.0));
    for k in 0..BLOCKS {
        let (row, column) = (k / 400, k % 400);
        let x = if row.is_multiple_of(2) { column as f64 * 3.137 } else { (400 - column) as f64 * 3.137 };
        let y = row as f64 * 0.513 + (k as f64).sin();
        let bulge = if k.is_multiple_of(3) { 0.0 } else { 0.4 * (k as f64).cos() };
        go(Position { xy: Point::new(x, y), z: -3.0 }, bulge, Some(2000.0));
    }
    Toolpath { moves }
}
