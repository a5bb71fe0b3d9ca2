//! The stock, its thickness and its place, and the clamps that hold it.

use serde_json::Value;

use crate::shop::Shop;

fn numbers(value: &Value) -> Vec<f64> {
    value.as_array().expect("a list").iter().filter_map(Value::as_f64).collect()
}

fn told<'a>(summary: &'a str, row: &str) -> &'a str {
    summary.lines().find(|line| line.starts_with(row)).unwrap_or_else(|| panic!("{row} in {summary}"))
}

#[test]
fn a_range_of_thickness_is_cut_through_at_its_thickest_and_bounds_the_bed_at_its_thinnest() {
    let shop = Shop::new();
    // Lowest Z and the cut into the bed. On the stock's top the bed lies 0.2 mm higher under the thinnest stock, of the
    // 0.3 mm allowed; on the bed the thickness does not matter to it.
    for (line, lowest, bed_cut) in [
        ("--through --held tape", -6.2, 0.3),
        ("--through --held tape --bed-cut 0.2mm", -6.1, 0.2),
        ("--through --held tape --bed-cut 1mm", -6.3, 0.4),
        ("--through --held tape --zero bed", -0.2, 0.2),
        ("--skin 0.5mm", -5.4, 0.0),
        ("--skin 0.5mm --zero bed", 0.5, 0.0),
    ] {
        let (_, report) = shop.done(&format!("bracket.csv --side outside --thickness 5.9..6.1mm {line}"));
        let found = numbers(&report["setup"]["extents_mm"])[2];
        assert!((found - lowest).abs() < 1e-9, "{line}: lowest Z {found}");
        assert_eq!(report["setup"]["bed_cut_mm"].as_f64(), Some(bed_cut), "{line}");
        assert_eq!(numbers(&report["setup"]["thickness_mm"]), [5.9, 6.1], "{line}");
    }
    let ended = shop.post("bracket.csv --side outside --thickness 5.9..6.1mm --through --held tape");
    assert_eq!(
        told(&ended.out, "Stock"),
        "Stock      5.9 to 6.1 mm thick; the bed is cut 0.30 mm deep under the thinnest stock"
    );
    assert!(told(&ended.out, "Path").ends_with("lowest Z -6.2"), "{}", ended.out);
}

#[test]
fn tabs_stand_as_high_as_asked_on_the_thinnest_stock() {
    let line = "bracket.csv --side outside --thickness 5.9..6.1mm --through --tabs 2 --tab-height 1.5mm";
    let (program, report) = Shop::new().done(line);
    assert_eq!(report["check"]["holds"], true);
    assert!(program.contains("Z-4.4"), "1.5 mm above an underside at -5.9: {program}");
}

#[test]
fn the_stock_is_told_from_zero_and_on_the_machine() {
    let shop = Shop::new();
    // The bracket is 60 by 50 mm.
    for (line, stock, parts) in [
        ("--stock 200x150mm", [-70.0, -50.0, 130.0, 100.0], [0.0, 0.0, 60.0, 50.0]),
        ("--stock 200x150 --origin stock", [0.0, 0.0, 200.0, 150.0], [70.0, 50.0, 130.0, 100.0]),
        (
            "--stock 200x150 --origin stock --parts-at 20,30",
            [0.0, 0.0, 200.0, 150.0],
            [20.0, 30.0, 80.0, 80.0],
        ),
        (
            "--stock 200x150 --origin centre --parts-at 20,30",
            [-50.0, -55.0, 150.0, 95.0],
            [-30.0, -25.0, 30.0, 25.0],
        ),
        ("--stock 200x150 --parts-at 20,30 --turn 90", [-20.0, -30.0, 180.0, 120.0], [0.0, 0.0, 50.0, 60.0]),
    ] {
        let (_, report) = shop.done(&format!("bracket.csv --depth 3mm {line}"));
        assert_eq!(numbers(&report["setup"]["stock"]["box_mm"]), stock, "{line}");
        assert_eq!(numbers(&report["setup"]["layout"]["parts_mm"]), parts, "{line}");
        assert_eq!(report["check"]["holds"], true, "{line}");
    }
    let line = "bracket.csv --depth 3mm --thickness 6mm --origin stock --stock 200x150 --stock-at 300,50";
    let ended = shop.post(line);
    assert_eq!(
        told(&ended.out, "Stock"),
        "Stock      200.0 x 150.0 mm, 6.0 mm thick, its lower left corner at X 0.0 Y 0.0 from zero, on the machine at \
         X 300.0 Y 50.0; the bed is not cut"
    );
    let program = shop.text("out.nc");
    assert!(program.contains("(stock 6 mm thick, X 0 to 200, Y 0 to 150 from zero)"), "{program}");
    assert!(program.contains("(X and Y zero: the lower left corner of the stock)"), "{program}");
}

#[test]
fn a_cut_over_the_edge_of_the_stock_is_told() {
    let shop = Shop::new();
    let edge = "Note       the cutter runs up to 4.0 mm over the edge of the stock";
    let line = "bracket.csv --side outside --depth 3mm --entry plunge --pass 3mm --stock";
    let ended = shop.post(&format!("{line} 64x100"));
    // Six mm of cutter on each side, less the two mm of stock beside the part.
    assert!(ended.out.lines().any(|line| line == edge), "{}", ended.out);
    let ended = shop.post(&format!("{line} 200x100"));
    assert!(!ended.out.contains("over the edge"), "{}", ended.out);
}

#[test]
fn travel_is_judged_by_place_once_the_stock_has_one() {
    let shop = Shop::new();
    shop.done("bracket.csv --depth 3mm --origin stock --stock 200x150");
    let check = |at: &str| {
        let asked =
            "check out.nc --against bracket.csv --drawing-unit mm --depth 3mm --origin stock --stock 200x150";
        let typed: Vec<&str> = asked.split_whitespace().chain(["--stock-at", at]).collect();
        shop.run(&typed)
    };
    assert_eq!(check("1000,0").status, 0, "{}", check("1000,0").out);
    // The part begins 70 mm in from the stock's corner, and ends 70 mm before its other side: 1300 mm of travel.
    assert_eq!(check("1169,0").status, 0, "{}", check("1169,0").out);
    for at in ["1171,0", "0,1201", "-71,0", "0,-51"] {
        let ended = check(at);
        assert_eq!(ended.status, 1, "{at}: {}", ended.out);
        assert!(ended.out.contains("fails       the moves fit the machine's travel"), "{at}: {}", ended.out);
        assert!(ended.out.contains("leave the machine where the stock lies"), "{at}: {}", ended.out);
    }
    let by_size = shop.run(&["check", "out.nc", "--against", "bracket.csv", "--drawing-unit", "mm"]);
    let note = "(by size alone: where zero lies on the machine was not said)";
    assert!(by_size.out.contains(note) && !check("0,0").out.contains(note), "{}", by_size.out);
    let ended = shop.post("bracket.csv --depth 3mm --origin stock --stock 200x150 --stock-at 1171,0");
    assert_eq!(ended.status, 1, "{}", ended.err);
}

#[test]
fn clamps_are_kept_clear_of_told_and_checked() {
    let shop = Shop::new();
    let job = "bracket.csv --side outside --depth 3mm";
    let (program, report) = shop.done(&format!("{job} --clamp 80,0,100,20,4 --clamp -40,-40,-30,-30,4mm"));
    assert_eq!(numbers(&report["setup"]["clamps"][1]["box_mm"]), [-40.0, -40.0, -30.0, -30.0]);
    assert!(program.contains("(clamp 1: X 80 to 100, Y 0 to 20, 4 mm above the stock)"), "{program}");
    let claim = |report: &Value| {
        let claims = report["check"]["claims"].as_array().expect("claims").clone();
        claims
            .into_iter()
            .find(|claim| claim["name"] == "the cutter keeps clear of what it must")
            .expect("the claim")
    };
    assert_eq!(claim(&report)["state"], "holds");
    let check = |clamp: &str| {
        let asked =
            "check out.nc --against bracket.csv --drawing-unit mm --depth 3mm --side outside --cutter 6mm";
        let typed: Vec<&str> = asked.split_whitespace().chain(["--clamp", clamp]).collect();
        shop.run(&typed)
    };
    assert_eq!(check("80,0,100,20,4").status, 0, "{}", check("80,0,100,20,4").out);
    // It comes to its first cut 5 mm above the stock, from where nobody knows.
    let tall = check("200,200,230,230,25");
    let open =
        "that the way to the first cut, from a place that the program does not state, keeps clear of clamp 1";
    assert!(tall.status == 0 && tall.out.contains(open), "{}", tall.out);
    assert!(!check("200,200,230,230,4").out.contains(open), "lower than that way");
    // The cutter's centre runs 3 mm beside the part, its edge 6 mm; the lead is elsewhere.
    for (clamp, status) in
        [("66.3,5,90,9,4", 0), ("65.8,5,90,9,4", 1), ("30,-20,32,-5,0", 1), ("62,5,90,9,-0", 1)]
    {
        let ended = check(clamp);
        assert_eq!(ended.status, status, "{clamp}: {}", ended.out);
        assert_eq!(ended.out.contains("the cutter runs into clamp 1"), status == 1, "{clamp}: {}", ended.out);
    }
}

#[test]
fn clamps_and_stock_stand_in_a_job_file() {
    let shop = Shop::new();
    let file = "depth = 3\nstock = \"200x150\"\nstock-at = \"100,100\"\nparts-at = \"20,30\"\nthickness = \"5.9..6.1\"\n\
                origin = \"stock\"\n\n[[clamp]]\nx = [0, \"10mm\"]\ny = [60, 90]\nheight = 4\n\n\
                [[clamp]]\nx = [190, 200]\ny = [0, 30]\nheight = \"0.1in\"\n";
    shop.put("job.toml", file);
    let (_, report) = shop.done("bracket.csv --job job.toml");
    assert_eq!(numbers(&report["setup"]["clamps"][0]["box_mm"]), [0.0, 60.0, 10.0, 90.0]);
    assert_eq!(report["setup"]["clamps"][1]["height_mm"].as_f64(), Some(2.54));
    assert_eq!(numbers(&report["setup"]["stock"]["on_machine_mm"]), [100.0, 100.0]);
    assert_eq!(numbers(&report["setup"]["thickness_mm"]), [5.9, 6.1]);
    let (_, typed) = shop.done("bracket.csv --job job.toml --clamp 150,100,160,110,3");
    assert_eq!(typed["setup"]["clamps"].as_array().map(Vec::len), Some(1), "who names clamps names all");
    for (from, to, said) in [
        ("height = 4", "hight = 4", "job.toml, line 8: `clamp`: unknown field `hight`"),
        ("x = [0, \"10mm\"]", "x = [0]", "job.toml, line 8: `clamp`"),
        ("\"200x150\"", "\"200\"", "job.toml, line 2: `stock`: `200` is not a size"),
    ] {
        shop.put("job.toml", &file.replace(from, to));
        let ended = shop.post("bracket.csv --job job.toml");
        assert_eq!(ended.status, 2, "{to}: {}", ended.err);
        assert!(ended.err.contains(said), "{to}: {}", ended.err);
    }
}

const REFUSED: [(&str, i32); 18] = [
    ("bracket.csv --depth 3mm --stock 50x40", 1),
    ("bracket.csv --depth 3mm --stock 200x150 --parts-at 150,-1", 1),
    ("bracket.csv --depth 3mm --stock 200x150 --copies 4x1 --gap 10mm", 1),
    ("bracket.csv --depth 3mm --stock 300x100 --stock-at 1100,0 --copies 4x1 --gap 10mm", 1),
    ("bracket.csv --depth 3mm --stock 200x150 --stock-at=-75,0", 1),
    ("bracket.csv --side outside --thickness 5.6..6.4mm --through --held tape", 1),
    ("bracket.csv --side outside --thickness 5.9..6.1mm --depth 6.3mm --held tape", 1),
    ("bracket.csv --side outside --depth 3mm --clamp 62,5,90,20,4", 1),
    ("bracket.csv --side outside --depth 3mm --entry plunge --clamp 20,-20,30,-4,4", 1),
    ("bracket.csv --side outside --depth 3mm --clamp 200,200,230,230,25", 1),
    ("slot.csv --depth 3mm --machine fast-router --clamp 30,5,40,15,25", 1),
    ("bracket.csv --depth 3mm --stock-at 10,10", 2),
    ("bracket.csv --depth 3mm --parts-at 10,10", 2),
    ("bracket.csv --depth 3mm --origin stock", 2),
    ("bracket.csv --depth 3mm --thickness 6.4..5.6mm", 2),
    ("bracket.csv --depth 3mm --stock 200", 2),
    ("bracket.csv --depth 3mm --clamp 1,2,3,4", 2),
    ("bracket.csv --depth 3mm --machine inch-gantry --stock 8x6", 2),
];

#[test]
fn what_does_not_fit_or_is_in_the_way_is_refused() {
    let shop = Shop::new();
    let mut told = String::new();
    for (line, status) in REFUSED {
        let ended = shop.post(line);
        assert_eq!(ended.status, status, "{line}: {}{}", ended.out, ended.err);
        assert!(ended.out.is_empty() && !shop.exists("out.nc"), "{line}: nothing is written");
        told += &format!("{line}\n{}\n", ended.err);
    }
    insta::assert_snapshot!(told);
}

#[test]
fn a_machine_that_starts_by_its_own_coordinate_passes_between_tall_clamps() {
    let shop = Shop::new();
    // The rapid from zero to the slot's start has no width; the clamp stands away from it.
    let (program, report) = shop
        .done("slot.csv --depth 3mm --pass 3mm --entry plunge --machine fast-router --clamp 80,5,100,15,25");
    assert!(program.contains("25 mm above the stock"), "{program}");
    assert_eq!(report["check"]["holds"], true);
    let open = report["check"]["not_checked"].to_string();
    assert!(!open.contains("clamp 1"), "its way to the first cut is high: {open}");
}
