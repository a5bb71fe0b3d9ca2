//! Several cutters in one job: a program for each, the freeing cut in the last.

use serde_json::Value;

use crate::shop::Shop;

/// A sign plate of 80 x 50 mm: letters engraved by a fine cutter, a hole by one and the outline by another.
fn layered() -> String {
    let rectangle = |layer: &str, (x, y): (f64, f64), (w, h): (f64, f64)| {
        let corners = [(x, y), (x + w, y), (x + w, y + h), (x, y + h)];
        let points: String = corners.iter().map(|(x, y)| format!("10\n{x}\n20\n{y}\n")).collect();
        format!("0\nLWPOLYLINE\n8\n{layer}\n90\n4\n70\n1\n{points}")
    };
    let parts = [
        rectangle("outline", (0.0, 0.0), (80.0, 50.0)),
        rectangle("letter", (10.0, 15.0), (20.0, 20.0)),
        rectangle("holes", (50.0, 15.0), (20.0, 20.0)),
    ];
    let head = "0\nSECTION\n2\nHEADER\n9\n$INSUNITS\n70\n4\n0\nENDSEC\n0\nSECTION\n2\nENTITIES\n";
    format!("{head}{}0\nENDSEC\n0\nEOF\n", parts.concat())
}

const JOB: &str = "thickness = 6\nthrough = true\nside = \"outside\"\nheld = \"vacuum\"\ncutter = \"6mm\"\n\
                   [layer.letter]\nside = \"on\"\ndepth = 1\ncutter = \"3.175mm\"\n\
                   [layer.holes]\nside = \"inside\"\ncutter = \"3.175mm\"\n";

fn shop(job: &str) -> Shop {
    let shop = Shop::new();
    shop.put("sign.dxf", &layered());
    shop.put("job.toml", job);
    shop
}

fn ids(program: &Value) -> Vec<u64> {
    program["contours"].as_array().expect("a list").iter().filter_map(Value::as_u64).collect()
}

#[test]
fn each_cutter_gets_a_program_of_its_own_and_the_freeing_cut_is_in_the_last() {
    let shop = shop(JOB);
    let ended = shop.post("sign.dxf --job job.toml --setup-sheet sheet.html");
    assert_eq!(ended.status, 0, "{}", ended.err);
    assert!(!shop.exists("out.nc"), "the programs are numbered");
    let (first, last) = (shop.text("out-1.nc"), shop.text("out-2.nc"));
    let report: Value = serde_json::from_str(&shop.text("out.json")).expect("JSON");
    let programs = report["programs"].as_array().expect("a list");
    assert_eq!(programs.iter().map(ids).collect::<Vec<_>>(), [vec![2, 3], vec![1]]);
    for (program, (text, cutter, place)) in
        programs.iter().zip([(&first, 3.175, "program 1 of 2"), (&last, 6.0, "program 2 of 2")])
    {
        assert_eq!(program["setup"]["cutter_mm"], cutter);
        assert_eq!(program["check"]["holds"], true);
        assert_eq!(program["program"]["bytes"], text.len());
        assert!(text.contains(place) && text.contains(&format!("cutter {cutter} mm")), "{text}");
        assert!(text.contains("M30"), "complete by itself");
    }
    assert!(first.contains("Z-1") && first.contains("Z-6.2"), "letter and hole: {first}");
    assert_eq!(report["program"]["bytes"], first.len() + last.len());
    let files: Vec<&str> = report["program"]["parts"]
        .as_array()
        .expect("a list")
        .iter()
        .filter_map(|part| part["file"].as_str())
        .collect();
    assert_eq!(files, ["out-1.nc", "out-2.nc"]);
    assert!(ended.out.contains("3.175 mm, then 6 mm: a program for each"), "{}", ended.out);
    let sheet = shop.text("sheet.html");
    assert_eq!(sheet.matches("<article").count(), 2, "a sheet for each");
    assert!(sheet.contains("out-1.nc") && sheet.contains("out-2.nc") && sheet.contains("program 2 of 2"));
}

#[test]
fn each_program_holds_against_the_whole_drawing() {
    let shop = shop(JOB);
    assert_eq!(shop.post("sign.dxf --job job.toml").status, 0);
    // The other way round: a job that leaves one cutter's layers out cuts the same as its program of two.
    let alone = JOB
        .replace("[layer.letter]", "[layer.letter]\nskip = true")
        .replace("[layer.holes]", "[layer.holes]\nskip = true");
    shop.put("alone.toml", &alone);
    let of_two = shop.text("out-2.nc");
    assert_eq!(shop.post("sign.dxf --job alone.toml").status, 0);
    let motion = |text: &str| -> Vec<String> {
        text.lines().filter(|line| !line.starts_with('(')).map(str::to_owned).collect()
    };
    assert_eq!(motion(&of_two), motion(&shop.text("out.nc")));
}

#[test]
fn a_cutter_that_nothing_takes_makes_no_program() {
    let shop = shop(&JOB.replace("\"3.175mm\"", "\"6mm\""));
    let (program, report) = shop.done("sign.dxf --job job.toml");
    assert_eq!(report["programs"], serde_json::json!([]));
    assert!(program.contains("cutter 6 mm"));
    // A typed cutter wins over those of the layers.
    let shop = self::shop(JOB);
    let (_, report) = shop.done("sign.dxf --job job.toml --cutter 3.175mm");
    assert_eq!(report["setup"]["cutter_mm"], 3.175);
}

#[test]
fn several_programs_cannot_go_to_standard_output() {
    let shop = shop(JOB);
    let ended = shop.run(&["post", "sign.dxf", "--job", "job.toml", "-o", "-"]);
    assert_eq!((ended.status, ended.out.as_str()), (4, ""), "{}", ended.err);
}

#[test]
fn a_cutter_too_short_for_its_layer_is_refused() {
    let job = JOB.replace("thickness = 6", "thickness = 14");
    let ended = shop(&job).post("sign.dxf --job job.toml");
    assert_eq!(ended.status, 1);
    assert!(ended.err.contains("the flutes of 3.175mm"), "{}", ended.err);
}

#[test]
fn allowances_differ_from_layer_to_layer() {
    let job = JOB.replace("cutter = \"3.175mm\"", "allowance = \"-0.1mm\"");
    let shop = shop(&job.replace("held", "allowance = \"0.2mm\"\nheld"));
    let (program, report) = shop.done("sign.dxf --job job.toml --entry plunge --tolerance 0.02mm");
    assert_eq!(report["check"]["holds"], true);
    assert!(program.contains("X-3.2"), "radius and 0.2 mm off the outline: {program}");
    // The hole from 50 to 70 is cut 0.1 mm wider: radius less that off its edge.
    assert!(program.contains("X52.9"), "{program}");
}
