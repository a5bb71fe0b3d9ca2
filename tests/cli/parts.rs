//! Programs that are longer than the controller's memory: numbered parts, each complete, together the whole.

use std::fmt::Write;

use ribband::gcode::{Dialect, interpret, read};
use ribband::machine::Machine;
use serde_json::Value;

use crate::bad::Shop;

/// Five-cornered flowers, 30 mm apart, as a list of points.
fn flowers(count: u32) -> String {
    let mut text = String::new();
    for column in 0..count {
        for i in 0..=120 {
            let angle = std::f64::consts::TAU * f64::from(i % 120) / 120.0;
            let radius = 11.0 + 2.0 * (5.0 * angle).sin();
            let (x, y) = (radius * angle.cos() + 30.0 * f64::from(column), radius * angle.sin());
            writeln!(text, "{x:.4},{y:.4}").expect("a string takes it");
        }
        text.push('\n');
    }
    text
}

fn shop() -> Shop {
    let shop = Shop::new();
    shop.put("FLOWERS.csv", flowers(9));
    shop.put("ONE.csv", flowers(1));
    shop
}

const TYPED: [&str; 7] =
    ["--drawing-unit", "mm", "--depth", "3", "--machine", "old-controller", "--pass=0.5"];

#[test]
fn a_program_longer_than_the_memory_is_numbered_parts_that_make_every_cut() {
    let shop = shop();
    let ended =
        shop.run(&[&["post", "FLOWERS.csv", "-o", "F.nc", "--report", "r.json"], &TYPED[..]].concat());
    assert_eq!(ended.status, 0, "{}", ended.err);
    let report: Value = serde_json::from_str(&shop.text("r.json")).expect("JSON");
    let parts = report["program"]["parts"].as_array().expect("a list");
    assert!(parts.len() >= 2, "{parts:?}");
    assert!(
        ended.out.contains(&format!("F-1.nc to F-{}.nc: {} parts", parts.len(), parts.len())),
        "{}",
        ended.out
    );
    let old = Machine::named("old-controller").expect("built in");
    let (mut cut, mut bytes, mut blocks) = (0.0, 0, 0);
    for (k, part) in (1..).zip(parts) {
        assert_eq!(part["file"], format!("F-{k}.nc"));
        let text = shop.text(&format!("F-{k}.nc"));
        assert!(
            text.len() <= 32768 && text.contains(&format!("part {k} of {}", parts.len())),
            "{}",
            text.len()
        );
        let program = interpret(&read(&text).expect("words"), &Dialect::of(&old)).expect("a program");
        assert!(program.ended.is_some(), "complete by itself");
        cut += program.toolpath.moves.iter().filter(|m| !m.is_rapid()).map(|m| m.length()).sum::<f64>();
        (bytes, blocks) = (bytes + text.len(), blocks + program.blocks);
    }
    let of = |field: &str| report["program"][field].as_f64().expect("a number");
    assert!((cut - of("cut_length_mm")).abs() < 1e-6, "{cut}");
    let count = |field: &str| report["program"][field].as_u64().expect("a count");
    assert_eq!((count("bytes"), count("blocks")), (bytes as u64, blocks as u64));
    assert_eq!(count("starved_blocks"), 0);
    assert!(!shop.path("F.nc").exists(), "the whole stands nowhere");
}

/// A saw of so many teeth round a square of 400 mm: every vertex is a corner.
fn saw(teeth: u32) -> String {
    let mut text = String::new();
    let side = teeth / 4;
    let place = |k: u32| (400.0 * f64::from(k / 2 % side) / f64::from(side), f64::from(k % 2) * 1.5);
    for k in 0..=8 * side {
        let (along, in_by) = place(k);
        let (x, y) = match k / (2 * side) % 4 {
            0 => (along, in_by),
            1 => (400.0 - in_by, along),
            2 => (400.0 - along, 400.0 - in_by),
            _ => (in_by, 400.0 - along),
        };
        writeln!(text, "{x:.3},{y:.3}").expect("a string takes it");
    }
    text
}

#[test]
fn a_pass_longer_than_the_memory_goes_on_where_it_was_left() {
    let shop = shop();
    shop.put("SAW.csv", saw(2400));
    let typed = ["post", "SAW.csv", "-o", "S.nc", "--report", "r.json", "--tolerance", "0.05mm"];
    let ended = shop.run(&[&typed, &TYPED[..6]].concat());
    assert_eq!(ended.status, 0, "{}", ended.err);
    assert!(
        ended.out.contains("goes up and down again") && ended.out.contains("next part goes on"),
        "{}",
        ended.out
    );
    let report: Value = serde_json::from_str(&shop.text("r.json")).expect("JSON");
    let parts = report["program"]["parts"].as_array().expect("a list").len();
    assert!(parts >= 2, "{parts}");
    assert_eq!(report["check"]["holds"], true);
    assert_eq!(report["program"]["starved_blocks"], 0);
    // One after the other, as they are run, they are a program that holds.
    let texts = (1..=parts).map(|k| shop.text(&format!("S-{k}.nc")));
    let blocks = texts.map(|text| {
        let lines = text.lines().filter(|line| !["%", "M30", "M5", "M0"].contains(line));
        lines.map(|line| format!("{line}\n")).collect::<String>()
    });
    shop.put("whole.nc", blocks.collect::<String>() + "M5\nM30\n");
    let check = ["check", "whole.nc", "--against", "SAW.csv", "--tolerance", "0.05mm", "--clearance", "5"];
    let held = shop.run(&[&check, &TYPED[..6]].concat());
    assert_eq!(held.status, 0, "{}{}", held.out, held.err);
}

#[test]
fn a_program_that_fits_is_one_file() {
    let shop = shop();
    let ended = shop.run(&[&["post", "ONE.csv", "-o", "ONE.nc", "--report", "r.json"], &TYPED[..]].concat());
    assert_eq!(ended.status, 0, "{}", ended.err);
    let report: Value = serde_json::from_str(&shop.text("r.json")).expect("JSON");
    assert_eq!(report["program"]["parts"], serde_json::json!([]));
    assert!(shop.text("ONE.nc").len() <= 32768);
}

#[test]
fn parts_replace_nothing_and_need_names_that_the_controller_takes() {
    let shop = shop();
    shop.put("F-2.nc", "mine");
    let post = |output: &str| shop.run(&[&["post", "FLOWERS.csv", "-o", output], &TYPED[..]].concat());
    let taken = post("F.nc");
    assert_eq!(taken.status, 4, "{}", taken.err);
    assert!(taken.err.contains("F-2.nc") && shop.text("F-2.nc") == "mine", "{}", taken.err);
    assert!(!shop.path("F-1.nc").exists(), "none without the others");
    // Eight characters are fine for one file, and two too long for its parts.
    let long = post("FLOWERS8.nc");
    assert_eq!(long.status, 2, "{}", long.err);
    let piped = post("-");
    assert_eq!((piped.status, piped.out.as_str()), (4, ""), "{}", piped.err);
}
