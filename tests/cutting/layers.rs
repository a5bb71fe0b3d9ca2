//! Layers that are cut in different ways, from a job file.

use crate::shop::Shop;

fn rectangle(layer: &str, (x, y): (f64, f64), (w, h): (f64, f64)) -> String {
    let corners = [(x, y), (x + w, y), (x + w, y + h), (x, y + h)];
    let points: String = corners.iter().map(|(x, y)| format!("10\n{x}\n20\n{y}\n")).collect();
    format!("0\nLWPOLYLINE\n8\n{layer}\n90\n4\n70\n1\n{points}")
}

/// A plate with a letter engraved in it and a hole.
fn drawing() -> String {
    let parts = [
        rectangle("outline", (0.0, 0.0), (80.0, 50.0)),
        rectangle("letter", (10.0, 15.0), (20.0, 20.0)),
        rectangle("holes", (50.0, 15.0), (20.0, 20.0)),
    ];
    let head = "0\nSECTION\n2\nHEADER\n9\n$INSUNITS\n70\n4\n0\nENDSEC\n0\nSECTION\n2\nENTITIES\n";
    format!("{head}{}0\nENDSEC\n0\nEOF\n", parts.concat())
}

const JOB: &str = "thickness = 6\nthrough = true\nside = \"outside\"\ntabs = 3\ncutter = \"3mm\"\n\
                   [layer.letter]\nside = \"on\"\ndepth = 1\n[layer.holes]\nside = \"inside\"\nheld = \"tape\"\ntabs = 0\n";

fn shop(job: &str) -> Shop {
    let shop = Shop::new();
    shop.put("sign.dxf", &drawing());
    shop.put("job.toml", job);
    shop
}

#[test]
fn each_layer_is_cut_on_its_side_to_its_depth() {
    let shop = shop(JOB);
    let (program, report) = shop.done("sign.dxf --job job.toml");
    assert_eq!(report["check"]["holds"], true);
    assert_eq!(report["setup"]["side"], "by layer");
    assert!(program.contains("Z-1\n") || program.contains("Z-1 "), "the letter is engraved: {program}");
    assert!(program.contains("Z-6.2") && program.contains("Z-4.5"), "through, over tabs: {program}");
    let ended = shop.post("sign.dxf --job job.toml");
    assert!(ended.out.contains("on the side that each layer asks for"), "{}", ended.out);
}

#[test]
fn layers_whose_sides_contradict_each_other_are_refused() {
    let shop = shop(&JOB.replace("side = \"inside\"", "side = \"outside\""));
    let ended = shop.post("sign.dxf --job job.toml");
    assert_eq!(ended.status, 1, "{}", ended.err);
    assert!(
        ended.err.contains("contours 1 and 3 do not agree") && ended.err.contains("--side auto"),
        "{}",
        ended.err
    );
    assert!(!shop.exists("out.nc"), "nothing is written");
}

#[test]
fn whoever_says_one_of_depth_through_and_skin_says_all() {
    let shop = shop(JOB);
    let (_, report) = shop.done("sign.dxf --job job.toml --depth 2mm");
    assert_eq!(report["setup"]["depth_mm"], 2.0, "typed wins over layer and file");
}

#[test]
fn unknown_keys_and_values_of_a_layer_are_told_with_their_line() {
    for (from, to, said) in [
        ("side = \"on\"", "sides = \"on\"", "job.toml, line 7: there is no setting `sides`"),
        ("side = \"on\"", "side = \"over\"", "job.toml, line 7"),
        ("tabs = 3", "tabs = \"four\"", "job.toml, line 4"),
        ("tabs = 3", "tabs = -1", "job.toml, line 4"),
    ] {
        let ended = shop(&JOB.replace(from, to)).post("sign.dxf --job job.toml");
        assert_eq!(ended.status, 2, "{to}: {}", ended.err);
        assert!(ended.err.contains(said), "{to}: {}", ended.err);
    }
}
