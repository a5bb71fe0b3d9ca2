//! How fast a program is read and checked: `cargo bench --bench check`.
//!
//! A million straight blocks against a drawing of a million vertices, on one core; the best of five runs, and the most
//! memory that was held, the text and the drawing with it.

#![expect(clippy::print_stdout, reason = "a benchmark prints its figures")]

use std::f64::consts::TAU;
use std::fmt::Write;
use std::time::Instant;

use kurbo::{Point, Vec2};
use ribband::check::{Asked, check};
use ribband::gcode::{Dialect, interpret, read};
use ribband::geom::ArcSpline;
use ribband::machine::Machine;
use ribband::num::Tolerance;
use ribband::sketch::{Contour, Place, Sketch};

const BLOCKS: usize = 1_000_000;

fn main() {
    let machine = Machine::named("shop-router").expect("built in");
    let (text, sketch) = (program(), drawing());
    let tolerance = Tolerance::new(0.1).expect("above zero");
    let asked = Asked { drawing_at: Some(Vec2::ZERO), lowest: Some(-6.0), ..Asked::new(tolerance) };
    let mut best = f64::INFINITY;
    for _ in 0..5 {
        let start = Instant::now();
        let program =
            read(&text).and_then(|words| interpret(&words, &Dialect::of(&machine))).expect("a program");
        let verdict = check(&program, &sketch, &machine, &asked);
        assert!(verdict.holds, "the program is good: {:?}", verdict.claims);
        best = best.min(start.elapsed().as_secs_f64());
    }
    println!("{BLOCKS} blocks against as many vertices: {:.0} ms", best * 1e3);
    println!("read and checked at {:.1} million blocks a second", BLOCKS as f64 / best / 1e6);
    if let Some(kibibytes) = most_memory() {
        println!("at most {:.0} bytes a block", kibibytes * 1024.0 / BLOCKS as f64);
    }
}

/// The most memory that this process held, in KiB; `None` where the system does not say.
fn most_memory() -> Option<f64> {
    let status = std::fs::read_to_string("/proc/self/status").ok()?;
    let line = status.lines().find_map(|line| line.strip_prefix("VmHWM:"))?;
    line.split_whitespace().next()?.parse().ok()
}

/// Place `k` of a wavy ring.
fn ring(k: usize) -> Point {
    let angle = TAU * k as f64 / BLOCKS as f64;
    let radius = 300.0 + 80.0 * (angle * 40.0).sin() + 10.0 * (angle * 1111.0).sin();
    Point::new(600.0, 600.0) + Vec2::from_angle(angle) * radius
}

fn drawing() -> Sketch {
    let path = ArcSpline::polyline((0..BLOCKS).map(ring), true);
    let contour =
        Contour { id: 1, layer: String::new(), colour: String::new(), place: Place::default(), path };
    Sketch { contours: vec![contour], mm_per_unit: 1.0, ..Sketch::default() }
}

fn program() -> String {
    let start = ring(0);
    let mut text = String::from("G17 G21 G40 G90 G94\nG0 Z5\nG0 X0 Y0\nS18000 M3\n");
    text.push_str(&format!("G0 X{:.3} Y{:.3}\nG1 Z-6 F600\nF1800\n", start.x, start.y));
    for p in (1..=BLOCKS).map(|k| ring(k % BLOCKS)) {
        writeln!(text, "X{:.3} Y{:.3}", p.x, p.y).expect("text takes any line");
    }
    text.push_str("G0 Z5\nM5\nM30\n");
    text
}
