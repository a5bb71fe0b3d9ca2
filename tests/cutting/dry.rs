//! Dry runs beside the program: the same moves in the air, and a round about everything.

use ribband::gcode::read::What;
use ribband::gcode::{Dialect, Program, interpret, read};
use ribband::machine::Machine;
use serde_json::Value;

use crate::shop::Shop;

fn program(text: &str, machine: &str) -> Program {
    let machine = Machine::named(machine).expect("built in");
    interpret(&read(text).expect("words"), &Dialect::of(&machine)).expect("a program")
}

fn turns(program: &Program) -> bool {
    program.events.iter().any(|event| matches!(event.what, What::SpindleOn { .. }))
}

/// The box of all moves at feed.
fn extents(program: &Program) -> kurbo::Rect {
    let cuts = program.toolpath.moves.iter().filter(|m| !m.is_rapid()).map(|m| m.span().bbox());
    cuts.reduce(|a, b| a.union(b)).expect("it cuts")
}

const TABBED: &str = "bracket.csv --side outside --thickness 6mm --through --tabs 2";

#[test]
fn an_air_cut_makes_every_move_above_the_stock_with_the_spindle_off() {
    let shop = Shop::new();
    for machine in ["shop-router", "benchtop-router", "inch-gantry", "fast-router"] {
        let (text, report) = shop.done(&format!("{TABBED} --machine {machine} --air-cut"));
        let (low, high) = (program(&text, machine), program(&shop.text("out-air.nc"), machine));
        assert!(!turns(&high) && (turns(&low) || machine == "benchtop-router"), "{machine}");
        assert_eq!(low.toolpath.moves.len(), high.toolpath.moves.len(), "{machine}");
        let lift = high.toolpath.moves[0].from.z - low.toolpath.moves[0].from.z;
        for (low, high) in low.toolpath.moves.iter().zip(&high.toolpath.moves) {
            assert_eq!((low.from.xy, low.to.xy, low.bulge), (high.from.xy, high.to.xy, high.bulge));
            assert!(
                (high.to.z - low.to.z - lift).abs() < 0.003 && high.to.z >= 5.0 - 0.003,
                "{machine}: {high:?}"
            );
        }
        let told = &report["dry_runs"][0];
        assert_eq!((&told["kind"], &told["files"][0]["file"]), (&"air cut".into(), &"out-air.nc".into()));
        let claims = told["claims"].as_array().expect("claims");
        assert!(claims.iter().all(|claim| claim["state"] != "fails"), "{claims:?}");
        assert!(claims.iter().any(|claim| claim["name"] == "no word starts the spindle"));
    }
}

#[test]
fn a_frame_goes_round_all_cuts_at_clearance_height() {
    let shop = Shop::new();
    let ended = shop.post(&format!("{TABBED} --frame --air-cut --setup-sheet sheet.html"));
    assert_eq!(ended.status, 0, "{}", ended.err);
    assert!(ended.out.contains("out-air.nc: air cut, spindle off"), "{}", ended.out);
    assert!(ended.out.contains("out-frame.nc: frame, spindle off"), "{}", ended.out);
    let frame = program(&shop.text("out-frame.nc"), "shop-router");
    assert!(!turns(&frame) && frame.toolpath.moves.iter().all(|m| m.to.z >= 5.0));
    let cut = extents(&program(&shop.text("out.nc"), "shop-router"));
    let round = extents(&frame);
    assert!(
        (round.x0 - (cut.x0 - 3.0)).abs() < 2e-3 && (round.y1 - (cut.y1 + 3.0)).abs() < 2e-3,
        "{round:?}"
    );
    assert!(shop.text("sheet.html").contains("frame out-frame.nc"));
    insta::assert_snapshot!(shop.text("out-frame.nc"));
}

#[test]
fn a_frame_goes_round_every_clamp_above_it() {
    let shop = Shop::new();
    shop.done(&format!("{TABBED} --frame --clamp=-60,0,-40,20,3mm"));
    let frame = program(&shop.text("out-frame.nc"), "shop-router");
    assert!(!turns(&frame) && frame.toolpath.moves.iter().all(|m| m.to.z >= 8.0), "over the clamp too");
    assert!((extents(&frame).x0 + 60.0).abs() < 1e-9, "out to the clamp");
}

#[test]
fn dry_runs_stand_beside_every_program_or_nothing_is_written() {
    let shop = Shop::new();
    shop.put("out-frame.nc", "mine");
    let typed = [
        "post",
        "slot.csv",
        "--drawing-unit",
        "mm",
        "--depth",
        "3mm",
        "--frame",
        "--air-cut",
        "-o",
        "out.nc",
    ];
    let ended = shop.run(&typed);
    assert_eq!(ended.status, 4, "{}", ended.err);
    assert!(ended.err.contains("out-frame.nc") && shop.text("out-frame.nc") == "mine");
    assert!(!shop.exists("out.nc") && !shop.exists("out-air.nc"), "none without the others");
    let typed = ["post", "slot.csv", "--drawing-unit", "mm", "--depth", "3mm", "--air-cut", "-o", "-"];
    let piped = shop.run(&typed);
    assert_eq!((piped.status, piped.out.as_str()), (4, ""), "{}", piped.err);
}

#[test]
fn short_names_in_capitals_stay_so() {
    let shop = Shop::new();
    let typed = "slot.csv --drawing-unit mm --depth 3mm --machine old-controller --air-cut --frame -o";
    for (name, air, frame) in
        [("S.NC", "S-AIR.NC", "S-FRAME.NC"), ("SLOT12.NC", "SLOT12-A.NC", "SLOT12-F.NC")]
    {
        let typed: Vec<&str> = ["post"].into_iter().chain(typed.split(' ')).chain([name]).collect();
        let ended = shop.run(&typed);
        assert_eq!(ended.status, 0, "{}", ended.err);
        assert!(shop.exists(air) && shop.exists(frame), "{name}");
    }
    let typed: Vec<&str> = ["post"].into_iter().chain(typed.split(' ')).chain(["SLOT1234.NC"]).collect();
    let ended = shop.run(&typed);
    assert_eq!(ended.status, 2, "{}", ended.err);
    assert!(!shop.exists("SLOT1234.NC"));
}

#[test]
fn an_air_cut_of_a_long_program_is_in_parts_too() {
    let shop = Shop::new();
    // Thirty rough rings, each cut in many passes.
    let ring = |k: u32| -> String {
        (0..=90)
            .map(|i| {
                let angle = std::f64::consts::TAU * f64::from(i % 90) / 90.0;
                let radius = 8.0 + (7.0 * angle).sin();
                format!("{:.4},{:.4}\n", 25.0 * f64::from(k) + radius * angle.cos(), radius * angle.sin())
            })
            .collect()
    };
    shop.put("rings.csv", &(0..12).map(ring).collect::<Vec<_>>().join("\n"));
    let typed = "post rings.csv --drawing-unit mm --depth 3mm --pass 0.3mm --machine old-controller --air-cut -o R.NC --report r.json";
    let ended = shop.run(&typed.split(' ').collect::<Vec<_>>());
    assert_eq!(ended.status, 0, "{}", ended.err);
    let report: Value = serde_json::from_str(&shop.text("r.json")).expect("JSON");
    let files = report["dry_runs"][0]["files"].as_array().expect("a list");
    assert!(files.len() >= 2, "{files:?}");
    for (k, file) in (1..).zip(files) {
        assert_eq!(file["file"], format!("R-AIR-{k}.NC"));
        assert!(shop.text(&format!("R-AIR-{k}.NC")).len() <= 32768);
    }
}
