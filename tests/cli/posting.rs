//! `ribband post` as a person meets it: where the program goes, what is said, what wins.

use serde_json::Value;

use crate::bad::Shop;

fn report(shop: &Shop) -> Value {
    serde_json::from_str(&shop.text("out.json")).expect("JSON")
}

#[test]
fn the_program_stands_beside_the_drawing_and_is_not_replaced_unasked() {
    let shop = Shop::new();
    let typed = ["post", "square.csv", "--drawing-unit", "mm", "--depth", "3"];
    assert_eq!(shop.run(&typed).status, 0);
    let first = shop.text("square.nc");
    assert!(first.contains("G1") && first.ends_with("M30\n"), "{first}");
    shop.put("square.nc", "mine");
    let refused = shop.run(&typed);
    assert_eq!(refused.status, 4, "{}", refused.err);
    assert!(refused.err.contains("square.nc") && refused.err.contains("--overwrite"), "{}", refused.err);
    assert_eq!(shop.text("square.nc"), "mine");
    assert_eq!(shop.run(&[&typed[..], &["--overwrite"]].concat()).status, 0);
    assert_eq!(shop.text("square.nc"), first);
    assert_eq!(shop.names(), ["square.csv", "square.nc"]);
}

#[test]
fn an_output_over_the_drawing_is_refused_even_when_replacing_is_allowed() {
    let shop = Shop::new();
    let typed =
        ["post", "square.csv", "--drawing-unit", "mm", "--depth", "3", "--overwrite", "-o", "./square.csv"];
    let ended = shop.run(&typed);
    assert_eq!(ended.status, 4, "{}", ended.err);
    assert!(shop.text("square.csv").starts_with("0,0"), "the drawing is as it was");
}

#[test]
fn a_dash_writes_the_program_to_standard_output_and_the_summary_beside_it() {
    let shop = Shop::new();
    let to_file = shop.post("square.csv", &[]);
    let piped = shop.run(&["post", "square.csv", "--drawing-unit", "mm", "--depth", "3", "-o", "-"]);
    assert_eq!(piped.status, 0, "{}", piped.err);
    assert_eq!(piped.out, shop.text("out.nc"), "the program and nothing else");
    assert!(piped.err.starts_with("Machine"), "{}", piped.err);
    assert!(to_file.out.starts_with("Machine") && to_file.err.is_empty(), "{}", to_file.err);
    let quiet =
        shop.run(&["post", "square.csv", "--drawing-unit", "mm", "--depth", "3", "-o", "-", "--quiet"]);
    assert_eq!((quiet.out, quiet.err), (piped.out, String::new()));
}

#[test]
fn the_summary_says_what_the_person_at_the_machine_must_know() {
    let shop = Shop::new();
    let ended = shop.post("square.csv", &["--tolerance", "0.1mm"]);
    insta::assert_snapshot!(ended.out.split("\nCautions\n").next().unwrap_or_default());
    assert!(ended.out.contains("13. Know what you cut"), "the cautions follow: {}", ended.out);
    assert!(!ended.out.contains('\u{1b}'), "no colours where there is no terminal");
}

#[test]
fn the_program_of_a_square_as_a_whole() {
    let shop = Shop::new();
    assert_eq!(shop.post("square.csv", &["--tolerance", "0.1mm"]).status, 0);
    insta::assert_snapshot!(shop.text("out.nc"));
}

#[test]
fn what_is_typed_wins_over_the_layer_over_the_job_file_over_the_default() {
    let shop = Shop::new();
    let line = |layer: &str, y: &str| format!("0\nLINE\n8\n{layer}\n10\n0\n20\n{y}\n11\n50\n21\n{y}\n");
    let head = "0\nSECTION\n2\nHEADER\n9\n$INSUNITS\n70\n4\n0\nENDSEC\n0\nSECTION\n2\nENTITIES\n";
    shop.put("two.dxf", format!("{head}{}{}0\nENDSEC\n0\nEOF\n", line("deep", "0"), line("flat", "20")));
    shop.put("job.toml", "depth = 4\nfeed = 1000\n[layer.flat]\nfeed = 500\n");
    let feeds = |more: &[&str]| {
        let typed =
            ["post", "two.dxf", "--job", "job.toml", "-o", "out.nc", "--overwrite", "--report", "out.json"];
        let ended = shop.run(&[&typed, more].concat());
        assert_eq!(ended.status, 0, "{}", ended.err);
        let program = shop.text("out.nc");
        let feeds: Vec<&str> =
            program.lines().filter(|l| l.starts_with("X") || l.starts_with("G1 X")).collect();
        (feeds.join("|"), report(&shop)["setup"].clone())
    };
    let (by_file, setup) = feeds(&[]);
    assert!(by_file.contains("F1000") && by_file.contains("F500"), "{by_file}");
    assert_eq!((setup["depth_mm"].as_f64(), setup["feed_mm_min"].as_f64()), (Some(4.0), Some(1000.0)));
    let (typed, setup) = feeds(&["--feed", "800", "--depth", "2"]);
    assert!(typed.contains("F800") && !typed.contains("F500") && !typed.contains("F1000"), "{typed}");
    assert_eq!(setup["depth_mm"].as_f64(), Some(2.0));
}

#[test]
fn layers_can_be_left_out_and_cut_to_their_own_depth() {
    let shop = Shop::new();
    let line = |layer: &str, y: &str| format!("0\nLINE\n8\n{layer}\n10\n0\n20\n{y}\n11\n50\n21\n{y}\n");
    let head = "0\nSECTION\n2\nHEADER\n9\n$INSUNITS\n70\n4\n0\nENDSEC\n0\nSECTION\n2\nENTITIES\n";
    let lines = line("deep", "0") + &line("flat", "20") + &line("notes", "40");
    shop.put("three.dxf", format!("{head}{lines}0\nENDSEC\n0\nEOF\n"));
    shop.put("job.toml", "depth = 4\n[layer.flat]\ndepth = 1.5\n[layer.notes]\nskip = true\n");
    let typed = ["post", "three.dxf", "--job", "job.toml", "-o", "out.nc", "--report", "out.json"];
    let ended = shop.run(&typed);
    assert_eq!(ended.status, 0, "{}", ended.err);
    let program = shop.text("out.nc");
    assert!(program.contains("Z-1.5") && program.contains("Z-4") && !program.contains("Y40"), "{program}");
    assert_eq!(report(&shop)["contours"].as_array().map(Vec::len), Some(2));
}

#[test]
fn an_inch_machine_takes_no_bare_number_and_speaks_inches() {
    let shop = Shop::new();
    let inch = |depth: &str| {
        let typed = ["post", "square.csv", "--drawing-unit", "mm", "--machine", "inch-gantry", "--overwrite"];
        shop.run(&[&typed[..], &["-o", "out.tap", "--depth", depth]].concat())
    };
    let refused = inch("0.25");
    assert_eq!(refused.status, 2, "{}", refused.err);
    assert!(refused.err.contains("0.25in") && refused.err.contains("0.25mm"), "{}", refused.err);
    let done = inch("1/4in");
    assert_eq!(done.status, 0, "{}", done.err);
    assert!(done.out.contains("0.787 x 0.787 in finished") && done.out.contains("in/min"), "{}", done.out);
    let program = shop.text("out.tap");
    assert!(program.contains("G20") && program.contains("Z-0.25") && program.contains("\r\n"), "{program}");
}

#[test]
fn the_same_job_gives_the_same_bytes_on_any_number_of_cores() {
    let shop = Shop::new();
    let demo = concat!(env!("CARGO_MANIFEST_DIR"), "/fixtures/demo/template.csv");
    let program = |threads: &str| {
        let typed = ["post", demo, "--drawing-unit", "mm", "--depth", "3", "-o", "-", "--quiet"];
        let ended = shop.run_with(&typed, &[("RAYON_NUM_THREADS", threads)]);
        assert_eq!(ended.status, 0, "{}", ended.err);
        ended.out
    };
    let alone = program("1");
    assert!(alone.contains("drawing sha256") && alone.contains("ribband 0."), "{alone}");
    for threads in ["2", "7"] {
        assert!(program(threads) == alone, "{threads} threads give another program");
    }
}

#[test]
fn a_controller_that_takes_few_names_is_given_none_that_it_does_not_take() {
    let shop = Shop::new();
    let typed = ["post", "square.csv", "--drawing-unit", "mm", "--depth", "3", "--machine", "old-controller"];
    let refused = shop.run(&[&typed[..], &["-o", "much-too-long-a-name.nc"]].concat());
    assert_eq!(refused.status, 2, "{}", refused.err);
    assert!(refused.err.contains("choose another name with -o"), "{}", refused.err);
}
