//! Several drawings in one call: each done or refused by itself, one summary, the worst exit status.

use std::fs;

use serde_json::Value;

use crate::bad::Shop;

/// A shop with three drawings that can be cut, one of unknown scale for a machine in inches and one that is broken.
fn shop() -> Shop {
    let shop = Shop::new();
    shop.put("wedge.csv", "0,0\n30,0\n0,20\n0,0\n");
    shop.put("stroke.csv", "0,0\n10,5\n40,0\n");
    shop.put("broken.csv", "0,0\n1,x\n");
    shop.put("large.csv", "0,0\n5000,0\n0,20\n0,0\n");
    fs::create_dir(shop.path("out")).expect("a folder");
    shop
}

const CUT: [&str; 4] = ["--depth", "3", "--drawing-unit", "mm"];

#[test]
fn each_drawing_is_done_as_if_it_were_alone() {
    let shop = shop();
    let three = ["post", "square.csv", "wedge.csv", "stroke.csv", "-o", "out", "--report", "out"];
    let ended = shop.run(&[&three[..], &["--setup-sheet", "out"], &CUT].concat());
    assert_eq!(ended.status, 0, "{}{}", ended.out, ended.err);
    assert!(ended.out.contains("3 drawings: 3 done\n") && ended.err.is_empty(), "{}{}", ended.out, ended.err);
    assert_eq!(ended.out.matches("Cautions").count(), 1, "{}", ended.out);
    let places = ["square.csv: ", "wedge.csv: ", "stroke.csv: "].map(|name| ended.out.find(name));
    assert!(places.is_sorted() && places[0].is_some(), "told in order: {}", ended.out);
    assert!(ended.out.contains("\n  the stock's thickness is not given"), "{}", ended.out);
    for name in ["square", "wedge", "stroke"] {
        let drawing = format!("{name}.csv");
        let alone = shop.run(&[&["post", &drawing, "-o", "alone.nc", "--overwrite"], &CUT[..]].concat());
        assert_eq!(alone.status, 0, "{}", alone.err);
        assert_eq!(shop.text(&format!("out/{name}.nc")), shop.text("alone.nc"));
        let report: Value = serde_json::from_str(&shop.text(&format!("out/{name}.json"))).expect("JSON");
        assert_eq!(report["drawing"]["file"], drawing);
        assert!(shop.text(&format!("out/{name}.html")).contains("<html"));
    }
}

#[test]
fn what_is_refused_keeps_nothing_from_the_others_and_sets_the_status() {
    let shop = shop();
    let post = |drawings: &[&str]| shop.run(&[&["post", "--overwrite"], drawings, &CUT[..]].concat());
    let refused = post(&["large.csv", "square.csv"]);
    assert_eq!(refused.status, 1, "{}", refused.err);
    let worst = post(&["wedge.csv", "broken.csv", "large.csv", "none.csv", "stroke.csv"]);
    assert_eq!(worst.status, 3, "{}", worst.err);
    assert!(worst.out.contains("5 drawings: 2 done, 3 not"), "{}", worst.out);
    assert_eq!(worst.err.matches("error: ").count(), 3, "{}", worst.err);
    for said in ["broken.csv, line 2", "large.csv: ", "none.csv: there is no such file"] {
        assert!(worst.err.contains(said), "{said}: {}", worst.err);
    }
    assert!(["square.nc", "wedge.nc", "stroke.nc"].iter().all(|name| shop.path(name).exists()));
    assert!(!shop.path("large.nc").exists() && !shop.path("broken.nc").exists());
    let kept = shop.run(&[&["post", "square.csv", "wedge.csv"], &CUT[..]].concat());
    assert_eq!(kept.status, 4, "nothing is replaced unasked: {}", kept.err);
    let quiet = post(&["square.csv", "wedge.csv", "--quiet"]);
    assert_eq!((quiet.status, quiet.out.as_str(), quiet.err.as_str()), (0, "", ""));
}

#[test]
fn drawings_that_would_write_to_one_file_are_refused_before_any_work() {
    let shop = shop();
    shop.put("square.txt", "0,0\n30,0\n0,20\n0,0\n");
    shop.put("square-2.csv", "0,0\n30,0\n0,20\n0,0\n");
    let before = shop.names();
    for drawings in
        [["square.csv", "square.txt"], ["square.csv", "square.csv"], ["square-2.csv", "square.csv"]]
    {
        let ended = shop.run(&[&["post"], &drawings[..], &CUT[..]].concat());
        assert_eq!(ended.status, 2, "{drawings:?}: {}", ended.err);
        assert!(ended.err.contains("square") && ended.err.contains("may both be written"), "{}", ended.err);
    }
    for option in ["-o", "--report", "--setup-sheet"] {
        let ended = shop.run(&[&["post", "square.csv", "wedge.csv", option, "all.nc"], &CUT[..]].concat());
        assert_eq!(ended.status, 2, "{}", ended.err);
        assert!(ended.err.contains("all.nc") && ended.err.contains("folder"), "{}", ended.err);
    }
    assert_eq!(shop.names(), before);
}

#[test]
fn many_drawings_are_measured_in_one_call() {
    let shop = shop();
    let names: Vec<String> = (0..100).map(|k| format!("d{k:03}.csv")).collect();
    for (k, name) in names.iter().enumerate() {
        shop.put(name, format!("0,0\n{},0\n0,20\n0,0\n", 10 + k));
    }
    let mut typed = vec!["measure", "--drawing-unit", "mm", "--report", "out"];
    typed.extend(names.iter().map(String::as_str));
    typed.push("broken.csv");
    let ended = shop.run(&typed);
    assert_eq!(ended.status, 3, "{}", ended.err);
    assert!(ended.out.ends_with("101 drawings: 100 done, 1 not: the errors say why\n"), "{}", ended.out);
    assert_eq!(ended.out.matches(".csv\n").count(), 100);
    for (k, name) in names.iter().enumerate() {
        let report: Value =
            serde_json::from_str(&shop.text(&format!("out/{}", name.replace("csv", "json")))).expect("JSON");
        assert_eq!(report["drawing"]["width_mm"], 10.0 + k as f64, "{report}");
    }
}
