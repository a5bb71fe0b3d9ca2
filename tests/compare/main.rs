//! `ribband compare` from outside: table, report and plot agree, the knee is where it must be.

use std::fmt::Write;
use std::fs;
use std::path::Path;
use std::process::Output;

use assert_cmd::Command;
use ribband::compare::{Figures, Knee, Row};
use serde_json::Value;

/// Rows whose blocks are given.
fn rows(points: &[(f64, usize)]) -> Vec<Row> {
    let row = |&(tolerance_mm, motion_blocks): &(f64, usize)| Row {
        tolerance_mm,
        program: Some(Figures {
            motion_blocks,
            bytes: 0,
            time_s: 0.0,
            cut_time_s: 0.0,
            starved_blocks: 0,
            deviation_mm: None,
        }),
        refused: None,
    };
    points.iter().map(row).collect()
}

/// Blocks that go with the inverse square up to 0.1 mm and with the inverse cube root beyond.
#[test]
fn the_knee_is_where_the_blocks_stop_falling_fast() {
    let blocks = |mm: f64| (10.0 * (0.1 / mm).powf(if mm < 0.1 { 2.0 } else { 1.0 / 3.0 }) * 100.0) as usize;
    let points: Vec<(f64, usize)> =
        [0.0125, 0.025, 0.05, 0.1, 0.2, 0.4, 0.8].map(|mm| (mm, blocks(mm))).to_vec();
    let knee = Knee::of(&rows(&points)).expect("a knee");
    assert!((knee.tolerance_mm - 0.1).abs() < 1e-12, "{knee:?}");
    assert_eq!(
        knee.reason,
        "below it, twice the tolerance saves 75 % of the blocks; above it, it saves 21 % of the blocks"
    );
}

#[test]
fn no_knee_where_the_blocks_fall_evenly_or_not_at_all() {
    let even: Vec<(f64, usize)> = (0..7).map(|k| (0.01 * 2_f64.powi(k), 6400 >> k)).collect();
    assert_eq!(Knee::of(&rows(&even)), None);
    let level: Vec<(f64, usize)> = (0..7).map(|k| (0.01 * 2_f64.powi(k), 12)).collect();
    assert_eq!(Knee::of(&rows(&level)), None);
    assert_eq!(Knee::of(&rows(&even[..2])), None, "two points have no bend");
    assert_eq!(Knee::of(&[]), None);
}

/// A jagged circle of 20 mm radius: 400 points, off it by up to 0.06 mm.
fn jagged() -> String {
    let mut text = String::new();
    for i in 0..=400_u32 {
        let k = i % 400;
        let angle = std::f64::consts::TAU * f64::from(k) / 400.0;
        // Knuth's multiplicative hash, the upper bits of it.
        let jag = (f64::from(k.wrapping_mul(2_654_435_761) >> 16) / 65536.0 - 0.5) * 0.12;
        let radius = 20.0 + jag;
        writeln!(text, "{:.4},{:.4}", radius * angle.cos(), radius * angle.sin()).expect("a string takes it");
    }
    text
}

fn compare(folder: &Path, typed: &[&str]) -> Output {
    let mut command = Command::cargo_bin("ribband").expect("the binary is built");
    let whole = ["compare", "jagged.csv", "--drawing-unit", "mm"];
    command.current_dir(folder).args(whole).args(typed).output().expect("it runs")
}

fn shop() -> tempfile::TempDir {
    let folder = tempfile::tempdir().expect("a folder");
    fs::write(folder.path().join("jagged.csv"), jagged()).expect("a file");
    folder
}

#[test]
fn table_report_and_plot_tell_the_same() {
    let shop = shop();
    let typed =
        ["--machine=old-controller", "--from=0.02", "--to=0.5", "--steps=5", "-o=p.svg", "--report=r.json"];
    let ended = compare(shop.path(), &typed);
    assert!(ended.status.success(), "{}", String::from_utf8_lossy(&ended.stderr));
    let (table, text) =
        (String::from_utf8_lossy(&ended.stdout), fs::read_to_string(shop.path().join("r.json")));
    let report: Value = serde_json::from_str(&text.expect("the report")).expect("JSON");
    let rows = report["rows"].as_array().expect("rows");
    assert_eq!(rows.len(), 5);
    let tolerances: Vec<f64> =
        rows.iter().map(|row| row["tolerance_mm"].as_f64().expect("a number")).collect();
    assert_eq!((tolerances[0], tolerances[4]), (0.02, 0.5));
    let factors: Vec<f64> = tolerances.windows(2).map(|pair| pair[1] / pair[0]).collect();
    let even = 25_f64.powf(0.25);
    assert!(factors.iter().all(|factor| (factor / even - 1.0).abs() < 0.01), "log-spaced: {tolerances:?}");
    for row in rows {
        let program = &row["program"];
        let of = |field: &str| program[field].as_f64().expect("a number");
        assert!(of("deviation_mm") <= row["tolerance_mm"].as_f64().expect("a number"), "{row}");
        assert_eq!(program["starved_blocks"], 0);
        let line =
            table.lines().find(|line| line.contains(&format!(" {} ", program["bytes"]))).expect("its line");
        assert!(line.contains(&format!(" {} ", program["motion_blocks"])), "{line}");
    }
    let blocks = |row: usize| rows[row]["program"]["motion_blocks"].as_f64().expect("a number");
    assert!(blocks(4) < 0.2 * blocks(0), "{table}");
    let knee = &report["knee"];
    let reason = format!("knee at {} mm: {}", knee["tolerance_mm"], knee["reason"].as_str().expect("a knee"));
    assert!(table.contains(&reason) && table.contains("<- knee"), "{table}");
    let drawn = report["as_drawn"]["motion_blocks"].as_u64().expect("a number");
    assert!(drawn >= 400 && table.contains("as drawn") && table.contains(&format!(" {drawn} ")), "{table}");

    let svg = fs::read_to_string(shop.path().join("p.svg")).expect("the plot");
    let plot = roxmltree::Document::parse(&svg).expect("well-formed");
    let dots = plot.descendants().filter(|node| node.tag_name().name() == "circle").count();
    assert_eq!(dots, 2 * rows.len(), "blocks and time of every row");
    let told: Vec<&str> = plot
        .descendants()
        .filter(|node| node.attribute("class") == Some("told"))
        .filter_map(|node| node.text())
        .collect();
    assert_eq!(told.join(" "), reason);
}

/// A tolerance finer than the program's decimals is refused in its row, and the others stand.
#[test]
fn refused_tolerances_are_rows_too() {
    let shop = shop();
    let ended = compare(shop.path(), &["--from=0.001", "--to=0.2", "--steps=2", "--report=-"]);
    assert!(ended.status.success(), "{}", String::from_utf8_lossy(&ended.stderr));
    let report: Value = serde_json::from_slice(&ended.stdout).expect("JSON alone");
    assert!(
        report["rows"][0]["refused"].as_str().is_some_and(|why| why.contains("whole tolerance")),
        "{report}"
    );
    assert!(report["rows"][1]["program"]["motion_blocks"].as_u64() > Some(0));
    let none = compare(shop.path(), &["--from=0.0001", "--to=0.001", "--steps=2"]);
    assert_eq!(none.status.code(), Some(1), "refused at every tolerance");
}

#[test]
fn wrong_ranges_say_what_is_wrong() {
    let shop = shop();
    for (typed, told) in [
        (&["--from=0.5", "--to=0.1"][..], "does not rise"),
        (&["--steps=1"], "steps is 1"),
        (&["--from=20"], "from is 20 mm"),
        (&["--to=0"], "to is 0 mm"),
        (&["--tolerance=0.1"], "--from, --to and --steps"),
        (&["-o=a", "--report=a"], "same file"),
    ] {
        let ended = compare(shop.path(), typed);
        let error = String::from_utf8_lossy(&ended.stderr);
        assert_eq!(ended.status.code(), Some(2), "{typed:?}: {error}");
        assert!(error.contains(told), "{typed:?}: {error}");
    }
    assert_eq!(fs::read_dir(shop.path()).expect("the folder").count(), 1, "nothing was written");
}
