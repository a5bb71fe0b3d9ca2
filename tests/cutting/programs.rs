//! What is written, and what is told of it.

use insta::assert_snapshot;
use serde_json::Value;

use crate::shop::Shop;

fn numbers(value: &Value) -> Vec<f64> {
    value.as_array().expect("a list").iter().filter_map(Value::as_f64).collect()
}

#[test]
fn a_nested_part_as_a_whole() {
    let shop = Shop::new();
    let (program, _) =
        shop.done("plate.svg --side auto --thickness 6mm --through --held vacuum --entry plunge");
    assert_snapshot!(program);
}

#[test]
fn a_tabbed_part_as_a_whole() {
    let shop = Shop::new();
    let (program, _) = shop.done("bracket.csv --side outside --thickness 6mm --through --tabs 2");
    assert_snapshot!(program);
}

#[test]
fn a_ramped_slot_as_a_whole() {
    let (program, _) = Shop::new().done("slot.csv --depth 4mm --pass 2mm");
    assert_snapshot!(program);
}

#[test]
fn a_drilled_plate_as_a_whole() {
    let shop = Shop::new();
    let holes = [(10, 10), (50, 10), (10, 30)].map(|(x, y)| format!("<circle cx='{x}' cy='{y}' r='3'/>"));
    let head = "<svg xmlns='http://www.w3.org/2000/svg' width='60mm' height='40mm' viewBox='0 0 60 40'>";
    shop.put("drilled.svg", &format!("{head}<path d='M0 0H60V40H0Z'/>{}</svg>", holes.concat()));
    let (program, _) = shop
        .done("drilled.svg --side auto --thickness 6mm --through --held tape --cutter 6mm --entry plunge");
    assert_snapshot!(program);
}

#[test]
fn the_summary_tells_the_side_and_what_stays_uncut() {
    let shop = Shop::new();
    let ended = shop.post("bracket.csv --side outside --thickness 6mm --through --tabs 2");
    assert_snapshot!(ended.out.split("\nCautions\n").next().unwrap_or_default());
}

#[test]
fn an_inside_corner_is_reported_with_what_the_cutter_leaves() {
    let (_, report) = Shop::new().done("bracket.csv --side outside --depth 3mm --tolerance 0.05mm");
    let uncut = report["contours"][0]["uncut"].as_array().expect("a list");
    let [told] = &uncut[..] else { panic!("one corner: {uncut:?}") };
    // A round cutter of radius 3 stays (sqrt 2 - 1) 3 mm off a corner.
    let gap = 3.0 * (2_f64.sqrt() - 1.0);
    assert!(told.as_str().expect("words").contains(&format!("by {gap:.2} mm")), "{told} for {gap}");
    assert_eq!(
        (&report["setup"]["side"], &report["setup"]["direction"]),
        (&"outside".into(), &"conventional".into())
    );
}

#[test]
fn the_path_runs_at_radius_and_allowance_from_the_part() {
    let shop = Shop::new();
    for (more, off) in [("", 3.0), ("--allowance 0.2mm", 3.2), ("--allowance -0.2mm", 2.8)] {
        let (_, report) = shop.done(&format!("bracket.csv --side outside --depth 3mm --entry plunge {more}"));
        let extents = numbers(&report["setup"]["extents_mm"]);
        let tolerance = report["tolerance_mm"].as_f64().expect("a figure");
        // The lead goes further out, on one side only.
        let nearest = extents[0].max(extents[1]);
        assert!((nearest + off).abs() <= tolerance, "{more}: {extents:?}");
        assert_eq!(report["check"]["holds"], true, "{more}");
    }
}

#[test]
fn climbing_runs_the_other_way_round() {
    let shop = Shop::new();
    let arcs = |direction: &str| {
        let (program, _) = shop.done(&format!(
            "bracket.csv --side outside --depth 3mm --pass 3mm --entry plunge --direction {direction}"
        ));
        let count = |word: &str| program.lines().filter(|line| line.starts_with(word)).count();
        (count("G2"), count("G3"))
    };
    let (conventional, climb) = (arcs("conventional"), arcs("climb"));
    assert!(conventional.1 > conventional.0, "counter-clockwise about a part: {conventional:?}");
    assert_eq!(climb, (conventional.1, conventional.0));
}

#[test]
fn skin_and_through_go_by_the_thickness() {
    let shop = Shop::new();
    for (line, lowest) in [
        ("--thickness 6mm --skin 0.5mm", -5.5),
        ("--thickness 6mm --through --held tape", -6.2),
        ("--thickness 6mm --through --held tape --bed-cut 0.05mm", -6.05),
        ("--thickness 6mm --through --held tape --zero bed", -0.2),
    ] {
        let (_, report) = shop.done(&format!("bracket.csv --side auto {line}"));
        let found = numbers(&report["setup"]["extents_mm"])[2];
        assert!((found - lowest).abs() < 1e-9, "{line}: {found}");
    }
}

#[test]
fn every_way_of_cutting_a_nested_part_holds() {
    let shop = Shop::new();
    let ways =
        ["", "--entry helix", "--entry plunge", "--leave 0.4mm", "--direction climb", "--corners sharp"];
    for way in ways {
        let line =
            format!("plate.svg --side auto --thickness 6mm --through --held vacuum --cutter 3mm {way}");
        let (_, report) = shop.done(&line);
        assert_eq!(report["check"]["holds"], true, "{way}");
        let claims = report["check"]["claims"].as_array().expect("claims");
        let open: Vec<&Value> = claims.iter().filter(|claim| claim["state"] != "holds").collect();
        assert!(open.iter().all(|claim| claim["note"] == "no clamps were declared"), "{way}: {open:?}");
    }
}

#[test]
fn a_program_for_a_side_is_checked_for_that_side_and_refuted_for_another() {
    let shop = Shop::new();
    shop.done("plate.svg --side auto --depth 3mm --cutter 3mm");
    let check = |more: &str| {
        let typed: Vec<&str> = more.split_whitespace().collect();
        let place = ["check", "out.nc", "--against", "plate.svg", "--origin", "lower-left", "--depth", "3mm"];
        shop.run(&[&place, &typed[..]].concat())
    };
    let held = check("--side auto --cutter 3mm");
    assert_eq!(held.status, 0, "{}{}", held.out, held.err);
    assert!(held.out.contains("holds       the cutter stays off what is kept"), "{}", held.out);
    for (wrong, said) in [
        ("--side inside --cutter 3mm", "fails       the cutter stays off what is kept"),
        ("--side auto --cutter 4mm", "fails       the cutter stays off what is kept"),
        ("--side auto --cutter 2mm", "fails       the cutter reaches all of the drawing that it can"),
        ("--side on", "fails       every contour is cut"),
    ] {
        let ended = check(wrong);
        assert_eq!(ended.status, 1, "{wrong}: {}", ended.out);
        assert!(ended.out.contains(said), "{wrong}: {}", ended.out);
    }
}
