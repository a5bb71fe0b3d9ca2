//! The report's published schema, and real reports against it.

use std::fs;
use std::path::Path;

use ribband::report::Report;
use serde_json::Value;

use crate::bad::Shop;

fn published() -> String {
    let file = Path::new(env!("CARGO_MANIFEST_DIR")).join("docs/report.schema.json");
    if std::env::var_os("RIBBAND_WRITE_SCHEMA").is_some() {
        fs::write(&file, Report::schema()).expect("the docs folder can be written");
    }
    fs::read_to_string(file).expect("the schema")
}

/// Kept by `RIBBAND_WRITE_SCHEMA=1 cargo test --test cli schema`.
#[test]
fn the_published_schema_is_that_of_the_code() {
    assert!(published() == Report::schema(), "docs/report.schema.json is out of date");
}

#[test]
fn reports_keep_to_the_schema_and_broken_ones_do_not() {
    let schema: Value = serde_json::from_str(&published()).expect("JSON");
    let validator = jsonschema::validator_for(&schema).expect("a schema");
    let shop = Shop::new();
    for machine in ["shop-router", "inch-gantry"] {
        let typed = ["post", "square.csv", "--drawing-unit", "mm", "--depth", "3mm", "--machine", machine];
        let ended = shop.run(
            &[
                &typed[..],
                &["--report", "report.json", "-o", "out.nc", "--overwrite", "--air-cut", "--frame"],
            ]
            .concat(),
        );
        assert_eq!(ended.status, 0, "{}", ended.err);
        let report: Value = serde_json::from_str(&shop.text("report.json")).expect("JSON");
        assert!(
            validator.is_valid(&report),
            "{:?}",
            validator.iter_errors(&report).next().map(|e| e.to_string())
        );
        for (part, field) in [("program", "time_s"), ("check", "holds"), ("setup", "extents_mm")] {
            let mut broken = report.clone();
            broken[part][field] = Value::from("a text");
            assert!(!validator.is_valid(&broken), "{part}.{field} may be a text");
        }
    }
}

/// The figures of a report agree with each other and with the program's text.
#[test]
fn the_figures_of_a_report_agree() {
    let shop = Shop::new();
    assert_eq!(shop.post("square.csv", &["--report", "report.json", "--tolerance", "0.1mm"]).status, 0);
    let report: Value = serde_json::from_str(&shop.text("report.json")).expect("JSON");
    let text = shop.text("out.nc");
    assert_eq!(report["program"]["bytes"], text.len());
    assert_eq!(report["program"]["blocks"], text.lines().filter(|l| !l.starts_with('(')).count());
    assert_eq!(report["setup"]["extents_mm"], serde_json::json!([0.0, 0.0, -3.0, 20.0, 20.0, 5.0]));
    assert_eq!(report["drawing"]["length_mm"], 80.0);
    assert_eq!(report["contours"][0]["corners"], 4);
    let cut = report["program"]["cut_length_mm"].as_f64().expect("a length");
    assert!((83.0..=170.0).contains(&cut), "80 mm around and the way down: {cut}");
}
