//! The whole of `post` on a million vertices beside straight-line simplification alone: `cargo bench --bench million`.
//!
//! Traces at a spacing of 0.06 mm with noise of 0.02 mm, at a tolerance of 0.1 mm: 256 closed contours, a quarter of
//! them, and one contour of as many vertices. The yardstick is the `geo` crate's Ramer, Douglas and Peucker on the same
//! vertices in memory, in the same run.

#![expect(clippy::print_stdout, reason = "a benchmark prints its figures")]

use std::f64::consts::TAU;
use std::ffi::OsString;
use std::fs;
use std::time::Instant;

use geo::{LineString, Simplify};
use kurbo::Point;
use serde_json::Value;

const TOLERANCE: f64 = 0.1;
const SPACING: f64 = 0.06;
const NOISE: f64 = 0.02;
const VERTICES: usize = 1_024_000;

fn main() {
    let many: Vec<Vec<Point>> = (0..256).map(|k| leaf(k, VERTICES / 256)).collect();
    beside("64 contours", &many[..64]);
    beside("256 contours", &many);
    beside("one contour", &[rosette(VERTICES)]);
}

/// Posts the contours and simplifies them, and prints both times.
fn beside(name: &str, contours: &[Vec<Point>]) {
    let lines: Vec<LineString> = contours.iter().map(|c| c.iter().map(|p| (p.x, p.y)).collect()).collect();
    let start = Instant::now();
    let left: usize = lines.iter().map(|l| l.simplify(TOLERANCE).0.len()).sum();
    let simplifying = start.elapsed().as_secs_f64();
    let folder = tempfile::tempdir().expect("a folder");
    let [drawing, program, report] = ["in.csv", "out.nc", "out.json"].map(|f| folder.path().join(f));
    fs::write(&drawing, text(contours)).expect("the drawing");
    let typed = ["ribband", "post", "--quiet", "--depth", "3", "--drawing-unit", "mm"].map(OsString::from);
    let files = [drawing.into(), "-o".into(), program.into(), "--report".into(), report.clone().into()];
    let start = Instant::now();
    let status = ribband::cli::main(typed.into_iter().chain(files).collect::<Vec<OsString>>());
    let posting = start.elapsed().as_secs_f64();
    assert_eq!(status, 0, "{name} is posted");
    let report: Value = serde_json::from_slice(&fs::read(report).expect("a report")).expect("JSON");
    let vertices: usize = contours.iter().map(Vec::len).sum();
    println!("{name}: {vertices} vertices, simplified to {left} lines in {simplifying:.2} s");
    let blocks = &report["program"]["motion_blocks"];
    println!(
        "  posted in {posting:.2} s, {:.1} times as long, {blocks} motion blocks",
        posting / simplifying
    );
    let stages = report["timings_ms"].as_object().expect("timings");
    let mut stages: Vec<(f64, &String)> =
        stages.iter().filter_map(|(s, ms)| Some((ms.as_f64()?, s))).collect();
    stages.sort_by(|a, b| b.0.total_cmp(&a.0));
    println!("  {}", stages.iter().map(|(ms, s)| format!("{s} {ms:.0}")).collect::<Vec<_>>().join(", "));
}

fn text(contours: &[Vec<Point>]) -> String {
    let contour = |c: &Vec<Point>| {
        let rows = c.iter().chain(c.first()).map(|p| format!("{:.4},{:.4}\n", p.x, p.y));
        rows.collect::<String>()
    };
    contours.iter().map(contour).collect::<Vec<_>>().join("\n")
}

/// A leaf of a few lobes in the `k`th field of a sheet.
fn leaf(k: usize, vertices: usize) -> Vec<Point> {
    let lobes = 3.0 + (k % 4) as f64;
    let curve = |t: f64| {
        let r = 1.0 + 0.15 * (lobes * t).cos() + 0.05 * (2.0 * t + k as f64).sin();
        Point::ZERO + kurbo::Vec2::from_angle(t) * (r * 31.0)
    };
    let field = kurbo::Vec2::new(80.0 * (k % 16) as f64, 80.0 * (k / 16) as f64);
    traced(curve, vertices, k as u64).into_iter().map(|p| p + field).collect()
}

/// One long contour: a hundred narrow petals.
fn rosette(vertices: usize) -> Vec<Point> {
    let curve = |t: f64| Point::ZERO + kurbo::Vec2::from_angle(t) * (430.0 + 145.0 * (100.0 * t).cos());
    traced(curve, vertices, 7)
}

/// `vertices` places on a closed curve over a whole turn, evenly spaced at about [`SPACING`], each off by noise.
fn traced(curve: impl Fn(f64) -> Point, vertices: usize, seed: u64) -> Vec<Point> {
    let fine = 8 * vertices;
    let at = |i: usize| curve(TAU * i as f64 / fine as f64);
    let mut lengths = vec![0.0];
    for i in 1..=fine {
        lengths.push(lengths[i - 1] + at(i).distance(at(i - 1)));
    }
    let scale = SPACING * vertices as f64 / lengths[fine];
    let mut noise = Noise(seed.wrapping_mul(0x9e37_79b9_7f4a_7c15) | 1);
    let place = |j: usize| {
        let i = lengths.partition_point(|&l| l * vertices as f64 <= lengths[fine] * j as f64);
        let p = at(i.saturating_sub(1));
        Point::new(p.x * scale + NOISE * noise.normal(), p.y * scale + NOISE * noise.normal())
    };
    (0..vertices).map(place).collect()
}

/// Normal deviates from a 64-bit xorshift generator (Marsaglia 2003) by sums of twelve.
struct Noise(u64);

impl Noise {
    fn normal(&mut self) -> f64 {
        let uniform = |state: &mut u64| {
            *state ^= *state << 13;
            *state ^= *state >> 7;
            *state ^= *state << 17;
            (*state >> 11) as f64 / (1_u64 << 53) as f64
        };
        (0..12).map(|_| uniform(&mut self.0)).sum::<f64>() - 6.0
    }
}
