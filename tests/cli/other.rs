//! `ribband measure`, `ribband check`, `ribband machines`; pipes and folders that do not play along.

use std::fs;
use std::io::Read;
use std::process::{Command, Stdio};

use serde_json::Value;

use crate::bad::Shop;

#[test]
fn measure_says_what_is_in_a_drawing() {
    let shop = Shop::new();
    let ended = shop.run(&["measure", "square.csv", "--drawing-unit", "mm", "--report", "m.json"]);
    assert_eq!(ended.status, 0, "{}", ended.err);
    assert!(ended.out.contains("20.00 x 20.00 mm") && ended.out.contains("80.00"), "{}", ended.out);
    let report: Value = serde_json::from_str(&shop.text("m.json")).expect("JSON");
    assert_eq!(report["drawing"]["width_mm"], 20.0, "{report}");
    assert_eq!(shop.run(&["measure", "square.csv"]).status, 1, "unknown scale");
    assert_eq!(shop.run(&["measure", "none.csv", "--drawing-unit", "mm"]).status, 3);
    assert_eq!(shop.run(&["measure", "square.csv", "--drawing-unit", "mm", "--report", "m.json"]).status, 4);
}

#[test]
fn check_holds_what_post_wrote_and_refutes_what_was_changed() {
    let shop = Shop::new();
    assert_eq!(shop.post("square.csv", &["--tolerance", "0.1mm"]).status, 0);
    let check = |program: &str, more: &[&str]| {
        let typed = ["check", program, "--against", "square.csv", "--drawing-unit", "mm"];
        shop.run(&[&typed, more].concat())
    };
    let held =
        check("out.nc", &["--depth", "3", "--pass", "3", "--clearance", "5", "--origin", "lower-left"]);
    assert_eq!(held.status, 0, "{}{}", held.out, held.err);
    let [verdict, _, ..] = held.out.lines().collect::<Vec<_>>()[..] else { panic!("{}", held.out) };
    assert_eq!(verdict, "checked against the drawing: holds");
    assert!(held.out.contains("No program can check") && !held.out.contains("\nfails"), "{}", held.out);
    for (what, to, claim) in [
        ("X20 ", "X20.2 ", "within the tolerance"),
        ("\nM5", "", "spindle off"),
        ("\nG0 Z5\nS", "\nS", "raised before"),
        ("Z-3", "Z-3.5", "deeper than asked"),
    ] {
        shop.put(
            "changed.nc",
            format!("{} ", shop.text("out.nc").replace("X20\n", "X20 \n").replace(what, to)),
        );
        let refuted = check("changed.nc", &["--depth", "3"]);
        assert_eq!(refuted.status, 1, "{what} to {to}: {}", refuted.out);
        assert!(refuted.out.starts_with("checked against the drawing: does not hold\n"), "{}", refuted.out);
        let failed: Vec<&str> = refuted.out.lines().filter(|line| line.starts_with("fails")).collect();
        assert!(failed.iter().any(|line| line.contains(claim)), "{what} to {to}: {failed:?}");
    }
    shop.put("odd.nc", "G1 X1 Y1 F100\nG77\nM30\n");
    let odd = check("odd.nc", &[]);
    assert_eq!(odd.status, 1, "{}", odd.err);
    assert!(odd.err.contains("odd.nc, line 2") && odd.err.contains("G77"), "{}", odd.err);
    assert_eq!(check("none.nc", &[]).status, 3);
}

/// A switch at the machine decides on lines that start with a slash: the program must hold both ways.
#[test]
fn check_holds_a_program_with_and_without_its_optional_lines() {
    let shop = Shop::new();
    let judge = |deep: &str, then: &str| {
        let text = format!(
            "G17 G21 G90 G94\nG0 Z5\nG0 X0 Y0\nS18000 M3\n/G1 Z-1 F500\n{deep}G1 Z-3 F500\nX20 F900\nY20\nX0\nY0\n\
             G0 Z5\n{then}M5\nM30\n"
        );
        shop.put("p.nc", text);
        shop.run(&["check", "p.nc", "--against", "square.csv", "--drawing-unit", "mm", "--depth", "3"])
    };
    let held = judge("", "/M9\n");
    assert_eq!(held.status, 0, "{}{}", held.out, held.err);
    for (deep, then, run_too) in [("/", "", false), ("", "/G1 X40 Z-1\n/G0 Z5\n", true)] {
        let refuted = judge(deep, then);
        assert_eq!(refuted.status, 1, "{}{}", refuted.out, refuted.err);
        let failed: Vec<&str> = refuted.out.lines().filter(|line| line.starts_with("fails")).collect();
        let by_skipping = failed.iter().any(|line| line.contains("lines that start with a slash skipped"));
        assert_eq!(by_skipping, !run_too, "{failed:?}");
        assert!(refuted.out.starts_with("checked against the drawing: does not hold\n"), "{}", refuted.out);
    }
    let odd = judge("", "/G77\n");
    assert!(odd.status == 1 && odd.err.contains("p.nc, line 12: G77"), "{}", odd.err);
}

#[test]
fn check_writes_its_verdict() {
    let shop = Shop::new();
    assert_eq!(shop.post("square.csv", &[]).status, 0);
    let typed = ["check", "out.nc", "--against", "square.csv", "--drawing-unit", "mm", "--report", "-"];
    let ended = shop.run(&typed);
    let report: Value = serde_json::from_str(&ended.out).expect("JSON alone on standard output");
    assert_eq!(report["check"]["holds"], true);
    assert!(ended.err.contains("holds"), "the list goes beside it: {}", ended.err);
}

#[test]
fn machines_are_listed_explained_and_reported() {
    let shop = Shop::new();
    let list = shop.run(&["machines"]);
    assert!(list.status == 0 && list.out.contains("shop-router") && list.out.contains("old-controller"));
    let report: Value = serde_json::from_str(&shop.run(&["machines", "--report"]).out).expect("JSON");
    let names: Vec<&str> =
        report["machines"].as_array().expect("a list").iter().filter_map(|m| m["name"].as_str()).collect();
    assert!(names.contains(&"shop-router") && names.len() >= 5, "{names:?}");
    shop.put("mine.toml", "name = \"mine\"\n");
    let broken = shop.run(&["machines", "mine.toml"]);
    assert!(broken.status == 2 && broken.err.contains("mine.toml"), "{}", broken.err);
}

#[test]
fn a_folder_that_takes_no_file_keeps_what_it_has() {
    let shop = Shop::new();
    fs::create_dir(shop.path("file-not-folder.nc")).expect("a folder");
    let typed = [
        "post",
        "square.csv",
        "--drawing-unit",
        "mm",
        "--depth",
        "3",
        "--overwrite",
        "-o",
        "file-not-folder.nc",
    ];
    let ended = shop.run(&typed);
    assert_eq!(ended.status, 4, "{}", ended.err);
    assert_eq!(shop.names(), ["file-not-folder.nc", "square.csv"]);
}

/// A full disk, played by the device that is always full.
#[cfg(target_os = "linux")]
#[test]
fn a_full_disk_is_told() {
    let shop = Shop::new();
    let full = fs::OpenOptions::new().write(true).open("/dev/full").expect("the device");
    let status = Command::new(env!("CARGO_BIN_EXE_ribband"))
        .current_dir(shop.path(""))
        .args(["post", "square.csv", "--drawing-unit", "mm", "--depth", "3", "-o", "-", "--quiet"])
        .stdout(full)
        .stderr(Stdio::piped())
        .output()
        .expect("it runs");
    assert_eq!(status.status.code(), Some(4));
    assert!(String::from_utf8_lossy(&status.stderr).contains("standard output"));
}

#[test]
fn a_reader_that_goes_away_is_no_crash() {
    let shop = Shop::new();
    let mut running = Command::new(env!("CARGO_BIN_EXE_ribband"))
        .current_dir(shop.path(""))
        .args(["post", "square.csv", "--drawing-unit", "mm", "--depth", "3", "-o", "-"])
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("it runs");
    drop(running.stdout.take());
    let mut told = String::new();
    running.stderr.take().expect("a pipe").read_to_string(&mut told).expect("text");
    assert_eq!(running.wait().expect("it ends").code(), Some(4), "{told}");
    assert!(told.contains("standard output") && !told.contains("panicked"), "{told}");
}

/// Killed at any moment, it leaves the old program or the new one, never a part.
#[test]
fn killed_at_any_moment_it_leaves_no_half_program() {
    let shop = Shop::new();
    assert_eq!(shop.post("square.csv", &[]).status, 0);
    let whole = shop.text("out.nc");
    for microseconds in (0..40_000).step_by(4_000) {
        shop.put("out.nc", "old");
        let mut running = Command::new(env!("CARGO_BIN_EXE_ribband"))
            .current_dir(shop.path(""))
            .args([
                "post",
                "square.csv",
                "--drawing-unit",
                "mm",
                "--depth",
                "3",
                "-o",
                "out.nc",
                "--overwrite",
                "--quiet",
            ])
            .spawn()
            .expect("it runs");
        std::thread::sleep(std::time::Duration::from_micros(microseconds));
        running.kill().expect("it can be killed");
        running.wait().expect("it ends");
        let left = shop.text("out.nc");
        assert!(left == "old" || left == whole, "after {microseconds} microseconds: {left}");
    }
}
