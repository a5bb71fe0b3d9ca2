//! `ribband condense` as a person meets it.

use std::fmt::Write;

use serde_json::Value;

use crate::bad::Shop;

/// A ring of 40 mm in straight blocks of 2 degrees, with a comment in the letters of an old code page.
fn ring() -> Vec<u8> {
    let mut text =
        String::from("(a ring @)\r\nG17 G21 G90 G94\r\nG0 Z5\r\nS18000 M3\r\nG0 X40 Y0\r\nG1 Z-2 F500\r\n");
    for k in 1..=180 {
        let (y, x) = (f64::from(k) * std::f64::consts::TAU / 180.0).sin_cos();
        write!(text, "G1 X{:.3} Y{:.3} F1800\r\n", 40.0 * x, 40.0 * y).expect("text takes any line");
    }
    text.push_str("G0 Z5\r\nM5\r\nM30\r\n");
    text.bytes().map(|byte| if byte == b'@' { 0xe9 } else { byte }).collect()
}

fn shop() -> Shop {
    let shop = Shop::new();
    shop.put("ring.nc", ring());
    shop
}

#[test]
fn the_condensed_program_stands_beside_the_old_one_with_both_sizes_told() {
    let shop = shop();
    let ended = shop.run(&["condense", "ring.nc", "--report", "ring.json"]);
    assert_eq!(ended.status, 0, "{}", ended.err);
    assert_eq!(shop.names(), ["ring-condensed.nc", "ring.json", "ring.nc", "square.csv"]);
    let new = std::fs::read(shop.path("ring-condensed.nc")).expect("the program");
    assert!(new.len() < 400 && new.windows(9).any(|nine| nine == b"a ring \xe9)"), "{}", new.escape_ascii());
    let report: Value = serde_json::from_str(&shop.text("ring.json")).expect("JSON");
    let figure = |side: &str, name: &str| report[side][name].as_f64().expect("a number");
    for name in ["blocks", "motion_blocks", "bytes"] {
        assert!(figure("after", name) < figure("before", name), "{name}: {report}");
    }
    assert!(figure("after", "time_s") < 1.01 * figure("before", "time_s"), "{report}");
    assert_eq!(
        (&report["before"]["bytes"], &report["after"]["bytes"]),
        (&ring().len().into(), &new.len().into())
    );
    assert!(report["deviation_mm"].as_f64().is_some_and(|mm| mm <= 0.1), "{report}");
    assert!(ended.out.contains("184 before") && ended.out.contains("Time"), "{}", ended.out);
}

#[test]
fn a_program_condensed_once_is_returned_as_it_is_and_said_so() {
    let shop = shop();
    assert_eq!(shop.run(&["condense", "ring.nc", "-o", "once.nc", "--quiet"]).status, 0);
    let again = shop.run(&["condense", "once.nc", "-o", "twice.nc"]);
    assert_eq!(again.status, 0, "{}", again.err);
    assert!(
        again.out.contains("Unchanged") && again.out.contains("condensed within 0.1 mm"),
        "{}",
        again.out
    );
    let bytes = |name: &str| std::fs::read(shop.path(name)).expect("the program");
    assert_eq!(bytes("once.nc"), bytes("twice.nc"));
}

#[test]
fn what_is_wrong_is_told_and_nothing_is_written() {
    let shop = shop();
    shop.put("call.nc", "G21 G90\nG1 X1 Y1 F100\nM98 P5\nM30\n");
    shop.put("broken.nc", "G21 G90\nG1 X\n");
    let rows: [(&[&str], i32, &str); 5] = [
        (&["call.nc"], 1, "call.nc, line 3"),
        (&["broken.nc"], 3, "broken.nc, line 2"),
        (&["none.nc"], 3, "none.nc"),
        (&["ring.nc", "--tolerance", "0.0001mm"], 1, "--tolerance"),
        (&["ring.nc", "-o", "ring.nc", "--overwrite"], 4, "ring.nc"),
    ];
    for (typed, status, told) in rows {
        let ended = shop.run(&[&["condense"], typed].concat());
        assert_eq!(ended.status, status, "{typed:?}: {}", ended.err);
        assert!(ended.err.contains(told), "{typed:?}: {}", ended.err);
        assert_eq!(shop.names(), ["broken.nc", "call.nc", "ring.nc", "square.csv"], "{typed:?}");
    }
}

/// What `condense` made is held by `check` against a drawing of the same ring.
#[test]
fn check_holds_a_condensed_program() {
    let shop = shop();
    let points: String = (0..=180)
        .map(|k| (f64::from(k % 180) * std::f64::consts::TAU / 180.0).sin_cos())
        .map(|(y, x)| format!("{:.3},{:.3}\n", 40.0 * x, 40.0 * y))
        .collect();
    shop.put("ring.csv", points);
    assert_eq!(shop.run(&["condense", "ring.nc", "-o", "new.nc"]).status, 0);
    let typed = [
        "check",
        "new.nc",
        "--against",
        "ring.csv",
        "--drawing-unit",
        "mm",
        "--depth",
        "2",
        "--origin",
        "drawing",
    ];
    let held = shop.run(&typed);
    assert_eq!(held.status, 0, "{}{}", held.out, held.err);
    let tight = shop.run(&[&typed[..], &["--tolerance", "0.005mm"]].concat());
    assert_eq!(tight.status, 1, "the tolerance that was spent is seen: {}", tight.out);
}
