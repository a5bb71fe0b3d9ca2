//! Taking a program up again after a stop.

use ribband::gcode::{Dialect, Program, interpret, read};
use ribband::machine::Machine;
use ribband::toolpath::Move;
use serde_json::Value;

use crate::shop::{Ended, Shop};

const PLATE: &str = "plate.svg --side auto --thickness 6mm --through --held vacuum";

fn program(text: &str, machine: &str) -> Program {
    let machine = Machine::named(machine).expect("built in");
    interpret(&read(text).expect("words"), &Dialect::of(&machine)).expect("a program")
}

fn restarts(report: &Value) -> Vec<Value> {
    report["program"]["restarts"].as_array().expect("a list").clone()
}

fn cuts(program: &Program) -> Vec<Move> {
    let bare = |m: &Move| Move { line: 0, feed: None, spindle_rpm: 0.0, ..*m };
    program.toolpath.moves.iter().filter(|m| !m.is_rapid()).map(bare).collect()
}

fn taken_up(shop: &Shop, job: &str, block: &str) -> Ended {
    let typed: Vec<&str> = job.split_whitespace().collect();
    shop.run(&[&["post"], &typed[..], &["-o", "out.nc", "--resume-at", block, "--overwrite"]].concat())
}

#[test]
fn every_place_of_a_program_gives_one_that_makes_the_rest_of_its_cuts() {
    let shop = Shop::new();
    for (machine, entry) in [("shop-router", "ramp"), ("inch-gantry", "helix"), ("old-controller", "plunge")]
    {
        let job = format!("{PLATE} --machine {machine} --entry {entry} --cutter 3mm --pass 1.5mm");
        let name = if machine == "old-controller" { "OUT.NC" } else { "out.nc" };
        let typed: Vec<&str> = job.split_whitespace().collect();
        let run =
            |more: &[&str]| shop.run(&[&["post"], &typed[..], &["-o", name, "--overwrite"], more].concat());
        let ended = run(&["--report", "out.json"]);
        assert_eq!(ended.status, 0, "{}", ended.err);
        let report: Value = serde_json::from_str(&shop.text("out.json")).expect("JSON");
        let text = shop.text(name);
        let whole = program(&text, machine);
        let places = restarts(&report);
        assert!(
            places.iter().filter(|place| place["below_mm"].is_null()).count() == 2,
            "three cuts: {places:?}"
        );
        let amid = places.iter().filter(|place| !place["below_mm"].is_null()).count();
        assert!(if entry == "plunge" { amid == 0 } else { amid >= 3 }, "{entry}: {places:?}");
        for place in &places {
            let line = place["line"].as_u64().expect("a line") as usize;
            let ended = run(&["--resume-at", &line.to_string()]);
            assert_eq!(ended.status, 0, "{machine}, line {line}: {}", ended.err);
            let stem = name.split('.').next().expect("a stem");
            let ending = name.split('.').next_back().expect("an ending");
            let short = format!("{stem}-{line}.{ending}");
            let long = format!("{stem}-from-{line}.{ending}");
            let again = program(&shop.text(if shop.exists(&long) { &long } else { &short }), machine);
            let left: Vec<Move> = cuts(&Program {
                toolpath: ribband::toolpath::Toolpath {
                    moves: whole.toolpath.moves.iter().filter(|m| m.line >= line).copied().collect(),
                },
                ..Program::default()
            });
            let made = cuts(&again);
            assert!(made.ends_with(&left), "{machine}, line {line}");
            let below = place["below_mm"].as_f64().unwrap_or(f64::INFINITY);
            let way_down = &made[..made.len() - left.len()];
            assert!(way_down.iter().all(|m| m.to.z >= below - 0.003), "never deeper than what is cut");
            assert!(
                amid == 0 || way_down.iter().all(|m| m.from.xy != m.to.xy || m.to.z > -0.01),
                "no plunge"
            );
            if !place["block"].is_null() {
                let ended = run(&["--resume-at", &format!("N{}", place["block"])]);
                assert_eq!(ended.status, 0, "{machine}, block: {}", ended.err);
            }
        }
    }
}

#[test]
fn comments_and_sheet_show_the_places() {
    let shop = Shop::new();
    let (text, report) = shop.done(&format!("{PLATE} --setup-sheet sheet.html"));
    let lines: Vec<&str> = text.lines().collect();
    for place in restarts(&report).iter().filter(|place| place["below_mm"].is_null()) {
        let line = place["line"].as_u64().expect("a line") as usize;
        let said = format!("(cut {}: contour {})", place["cut"], place["contour"]);
        assert_eq!(lines[line - 2], said, "before line {line}");
        // The comment's own line means the block after it.
        assert_eq!(taken_up(&shop, PLATE, &(line - 1).to_string()).status, 0);
        assert!(shop.text("sheet.html").contains(&format!("cut {}: line {line}, from X", place["cut"])));
    }
}

#[test]
fn a_block_that_is_no_place_to_start_again_is_refused_with_the_nearest() {
    let shop = Shop::new();
    let (_, report) = shop.done(PLATE);
    let line = restarts(&report)[1]["line"].as_u64().expect("a line");
    let mut told = String::new();
    for block in
        [(line + 1).to_string(), "2".into(), "100000".into(), "N10".into(), "2:57".into(), "x".into()]
    {
        let ended = taken_up(&shop, PLATE, &block);
        assert!(
            ended.status == if block == "2:57" || block == "x" { 2 } else { 1 },
            "{block}: {}",
            ended.err
        );
        told += &format!("--resume-at {block}\n{}\n", ended.err);
    }
    insta::assert_snapshot!(told);
}

#[test]
fn only_the_program_that_ran_is_taken_up() {
    let shop = Shop::new();
    let (text, report) = shop.done(PLATE);
    let line = restarts(&report)[0]["line"].to_string();
    let other = taken_up(&shop, &format!("{PLATE} --pass 2mm"), &line);
    assert_eq!(other.status, 1, "{}", other.err);
    shop.put("out.nc", &text.replace("Z-6.2", "Z-6.1"));
    let changed = taken_up(&shop, PLATE, &line);
    assert_eq!(changed.status, 1, "{}", changed.err);
    assert!(
        changed.err.contains("out.nc: this is not the program that these settings make"),
        "{}",
        changed.err
    );
    std::fs::remove_file(shop.path("out.nc")).expect("it goes");
    assert_eq!(taken_up(&shop, PLATE, &line).status, 3);
    assert!(!shop.exists(&format!("out-from-{line}.nc")));
}

#[test]
fn a_program_taken_up_amid_a_contour_as_a_whole() {
    let shop = Shop::new();
    let job = "slot.csv --depth 4mm --pass 2mm";
    let (_, report) = shop.done(job);
    let job = &format!("{job} --drawing-unit mm");
    let [place] = &restarts(&report)[..] else { panic!("one pass to go: {report}") };
    let line = place["line"].to_string();
    let ended = taken_up(&shop, job, &line);
    assert_eq!(ended.status, 0, "{}", ended.err);
    assert!(
        ended.out.contains(&format!("out.nc at line {line}, cut 1 of contour 1 below Z -2.00 mm")),
        "{}",
        ended.out
    );
    insta::assert_snapshot!(shop.text(&format!("out-from-{line}.nc")));
}
