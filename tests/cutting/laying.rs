//! The drawing turned, mirrored and in copies.

use serde_json::Value;

use crate::shop::Shop;

/// Every place that the cutter goes to at feed below the stock's top, in order. Our own programs state both numbers of
/// a place wherever they change.
fn cuts(program: &str) -> Vec<(f64, f64)> {
    let (mut at, mut cuts, mut rapid) = ([0.0; 3], Vec::new(), true);
    for line in program.lines().filter(|line| line.starts_with(['G', 'X', 'Y', 'Z'])) {
        for word in line.split_whitespace() {
            let number = || word[1..].parse::<f64>().expect("a number");
            match &word[..1] {
                "G" => rapid = word == "G0",
                "X" => at[0] = number(),
                "Y" => at[1] = number(),
                "Z" => at[2] = number(),
                _ => {}
            }
        }
        if !rapid && at[2] < 0.0 {
            cuts.push((at[0], at[1]));
        }
    }
    cuts
}

fn layout(report: &Value) -> Vec<f64> {
    let parts = report["setup"]["layout"]["parts_mm"].as_array().expect("a box");
    parts.iter().filter_map(Value::as_f64).collect()
}

#[test]
fn copies_stand_in_a_grid_mirrored_and_turned() {
    let shop = Shop::new();
    let line = "bracket.csv --depth 3mm --entry plunge --mirror --turn 90 --copies 3x2 --gap 10mm";
    let (program, report) = shop.done(line);
    assert_eq!(report["check"]["holds"], true);
    // The bracket is 60 by 50 mm: turned 50 by 60, three side by side and two above each other.
    assert_eq!(layout(&report), [0.0, 0.0, 3.0 * 50.0 + 2.0 * 10.0, 2.0 * 60.0 + 10.0]);
    // Its inside corner (20, 20), mirrored to (-20, 20), turned to (-20, -20), and that in a box from (-50, -60).
    let corners: Vec<(f64, f64)> =
        (0..6).map(|k| (30.0 + 60.0 * f64::from(k % 3), 40.0 + 70.0 * f64::from(k / 3))).collect();
    let cuts = cuts(&program);
    for (x, y) in corners {
        let near = |cut: &&(f64, f64)| (cut.0 - x).hypot(cut.1 - y) < 0.01;
        assert!(cuts.iter().find(near).is_some(), "the corner of a copy at {x}, {y}");
    }
    let (_, once) = shop.done("bracket.csv --depth 3mm");
    for told in ["id", "bbox_mm", "vertices", "length_mm", "deviation_mm"] {
        assert_eq!(report["contours"][0][told], once["contours"][0][told], "{told} is the drawing's own");
    }
}

#[test]
fn an_odd_turn_keeps_size_and_tolerance() {
    let (_, report) = Shop::new().done("plate.svg --side auto --cutter 3mm --depth 3mm --turn 30");
    assert_eq!(report["check"]["holds"], true);
    let (sin, cos) = 30_f64.to_radians().sin_cos();
    let parts = layout(&report);
    assert!((parts[2] - parts[0] - (80.0 * cos + 60.0 * sin)).abs() < 1e-3, "{parts:?}");
    assert!((parts[3] - parts[1] - (80.0 * sin + 60.0 * cos)).abs() < 1e-3, "{parts:?}");
}

#[test]
fn each_copy_is_finished_from_the_inside_out_before_the_next() {
    let (program, _) =
        Shop::new().done("plate.svg --side auto --cutter 3mm --depth 3mm --copies 2x2 --gap 20mm");
    let mut told: Vec<(usize, bool)> = Vec::new();
    for (x, y) in cuts(&program) {
        let copy = usize::from(x > 90.0) + 2 * usize::from(y > 70.0);
        let (x, y) = (x - 100.0 * (copy % 2) as f64, y - 80.0 * (copy / 2) as f64);
        let outside = !(0.0..=80.0).contains(&x) || !(0.0..=60.0).contains(&y);
        if told.last() != Some(&(copy, outside)) {
            told.push((copy, outside));
        }
    }
    assert_eq!(told.len(), 8, "four copies, each with what is inside and then its edge: {told:?}");
    assert!(told.chunks(2).all(|pair| pair[0].0 == pair[1].0 && !pair[0].1 && pair[1].1), "{told:?}");
}

#[test]
fn a_program_is_checked_against_the_drawing_laid_out_as_said() {
    let shop = Shop::new();
    let laid = "--turn 90 --mirror --copies 2x1 --gap 12mm";
    shop.done(&format!("bracket.csv --side outside --cutter 3mm --depth 3mm {laid}"));
    let check = |laid: &str| {
        let asked =
            "check out.nc --against bracket.csv --drawing-unit mm --side outside --cutter 3mm --depth 3mm";
        let typed: Vec<&str> = asked.split_whitespace().chain(laid.split_whitespace()).collect();
        shop.run(&typed)
    };
    let held = check(laid);
    assert_eq!(held.status, 0, "{}", held.out);
    for wrong in [
        "--mirror --copies 2x1 --gap 12mm",
        "--turn 90 --copies 2x1 --gap 12mm",
        "--turn=-90 --mirror --copies 2x1 --gap 12mm",
        "--turn 90 --mirror --copies 2x1 --gap 13mm",
        "--turn 90 --mirror --copies 3x1 --gap 12mm",
        "--turn 90 --mirror",
    ] {
        assert_eq!(check(wrong).status, 1, "{wrong}: {}", check(wrong).out);
    }
}

#[test]
fn uncut_corners_of_copies_are_told_once_in_the_drawing_s_coordinates() {
    let shop = Shop::new();
    let line = "bracket.csv --side outside --depth 3mm --tolerance 0.05mm";
    let uncut = |report: &Value| report["contours"][0]["uncut"].as_array().expect("a list").clone();
    let (_, once) = shop.done(line);
    let (_, copies) = shop.done(&format!("{line} --turn 180 --copies 2x2 --gap 15mm"));
    let place = |told: &Value| {
        let words = told.as_str().expect("words").replace(['X', 'Y'], "");
        words.split_whitespace().filter_map(|word| word.parse::<f64>().ok()).collect::<Vec<_>>()
    };
    let (once, copies) = (uncut(&once), uncut(&copies));
    assert_eq!((once.len(), copies.len()), (1, 1));
    for (a, b) in place(&once[0]).iter().zip(place(&copies[0])) {
        assert!((a - b).abs() < 0.1, "{} and {}", once[0], copies[0]);
    }
}

#[test]
fn a_job_file_lays_out_too_and_is_told() {
    let shop = Shop::new();
    shop.put("job.toml", "depth = 3\nturn = 90\nmirror = true\ncopies = \"2x1\"\ngap = \"12mm\"\n");
    let ended = shop.post("bracket.csv --job job.toml --turn 180");
    assert_eq!(ended.status, 0, "{}", ended.err);
    let told = ended.out.lines().find(|line| line.starts_with("Laid out")).expect("a line");
    assert_eq!(
        told,
        "Laid out   mirrored, turned 180 degrees, 2 copies, 2 by 1, 12.0 mm apart: 132.0 x 50.0 mm in all"
    );
    assert!(shop.text("out.nc").contains("mirrored, turned 180 degrees, 2x1 copies 12 mm apart"));
}
