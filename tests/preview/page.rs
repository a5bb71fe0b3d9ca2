//! The page: its figures are the report's, its data the program's, and no name runs.

use ribband::preview::page;
use serde_json::Value;

use crate::Made;

/// The data that the page's script reads.
fn data(page: &str) -> Value {
    let (_, rest) = page.split_once("id=\"data\">").expect("the data");
    serde_json::from_str(rest.split_once("</script>").expect("its end").0).expect("JSON")
}

/// The values of an attribute.
fn attributes<'a>(page: &'a str, section: &str, name: &str) -> Vec<&'a str> {
    let mark = format!("data-section=\"{section}\" data-{name}=\"");
    page.split(mark.as_str()).skip(1).filter_map(|rest| rest.split('"').next()).collect()
}

#[test]
fn figures_equal_the_reports() {
    let made = Made::demo("template.csv");
    let page = page(&made.scene()).expect("a page");
    let report: Value = serde_json::from_str(&made.report.json()).expect("JSON");
    let rows = [
        ("", "tolerance_mm"),
        ("check", "deviation_mm"),
        ("program", "motion_blocks"),
        ("program", "time_s"),
        ("program", "cut_time_s"),
        ("program", "cut_length_mm"),
        ("program", "bytes"),
        ("program.as_drawn", "motion_blocks"),
        ("program.as_drawn", "cut_time_s"),
        ("drawing", "width_mm"),
        ("setup", "depth_mm"),
        ("setup", "extents_mm"),
    ];
    for (section, name) in rows {
        let path = format!(
            "{}/{name}",
            if section.is_empty() { String::new() } else { format!("/{}", section.replace('.', "/")) }
        );
        let expected = report.pointer(&path).unwrap_or_else(|| panic!("{path} is in the report"));
        assert_eq!(attributes(&page, section, name), [expected.to_string()], "{path}");
    }
    assert_eq!(attributes(&page, "setup", "machine"), [made.report.setup.machine.as_str()]);
}

#[test]
fn data_are_the_programs_as_read_back() {
    let made = Made::demo("paddle-blade.svg");
    let data = data(&page(&made.scene()).expect("a page"));
    let moves = &made.plan.programs[0].program.toolpath.moves;
    let column = |name: &str| data[name].as_array().expect("a list").clone();
    let pairs: [(&str, Vec<f64>); 5] = [
        ("x", moves.iter().map(|m| m.to.xy.x).collect()),
        ("y", moves.iter().map(|m| m.to.xy.y).collect()),
        ("z", moves.iter().map(|m| m.to.z).collect()),
        ("feed", moves.iter().map(|m| m.feed.unwrap_or(0.0)).collect()),
        ("line", moves.iter().map(|m| m.line as f64).collect()),
    ];
    for (name, expected) in pairs {
        let shown = column(name);
        assert_eq!(shown.len(), expected.len());
        let off = shown.iter().zip(&expected).map(|(s, e)| (s.as_f64().expect("a number") - e).abs());
        assert!(off.fold(0.0, f64::max) <= 0.005, "{name}");
    }
    assert_eq!(data["program"].as_str(), Some(made.plan.programs[0].text.as_str()));
    let ended = column("ended").last().and_then(Value::as_f64).expect("a time");
    assert!((ended - made.report.program.time_s).abs() <= 0.001, "{ended}");
}

#[test]
fn the_chord_error_comes_near_the_certified_deviation_and_never_above() {
    for file in ["template.csv", "paddle-blade.svg"] {
        let made = Made::demo(file);
        let data = data(&page(&made.scene()).expect("a page"));
        let laps = data["laps"].as_array().expect("laps");
        assert_eq!(laps.len(), made.report.contours.len());
        let errors = laps.iter().flat_map(|lap| lap["error"].as_array().expect("a list"));
        let largest = errors.map(|e| e.as_f64().expect("a number").abs()).fold(0.0, f64::max);
        let certified = made.report.check.deviation_mm.expect("a deviation");
        // The page has five decimals; the certificate may be 5 % above the true distance.
        assert!(largest <= certified + 1e-5 && largest >= 0.9 * certified, "{largest} of {certified}");
    }
}

#[test]
fn names_are_shown_and_run_nothing() {
    let name = "</script><script>alert(1)</script>\"'><img src=x onerror=alert(2)> 図.csv";
    let made = Made::of(name, b"x,y\n0,0\n40,0\n40,30\n0,30\n0,0\n");
    let page = page(&made.scene()).expect("a page");
    assert!(!page.contains("<script>alert") && !page.contains("<img"));
    assert!(page.contains("&lt;img src=x onerror=alert(2)&gt; 図.csv"));
    // One for the data, one that runs.
    assert_eq!(page.matches("<script").count(), 2);
    assert_eq!(page.matches("</script").count(), 2);
}

#[test]
fn the_page_asks_for_nothing() {
    let page = page(&Made::demo("template.csv").scene()).expect("a page");
    let links: Vec<_> = page.match_indices("http").map(|(at, _)| &page[at..at + 30]).collect();
    assert!(
        links
            .iter()
            .all(|link| link.starts_with("http-equiv") || link.starts_with("http://www.w3.org/2000/svg")),
        "{links:?}"
    );
    assert!(!page.contains("src=\"") && !page.contains("@import") && !page.contains("url("));
}

#[test]
fn beside_the_line_the_error_is_that_of_the_edge_and_what_stays_uncut_is_drawn() {
    let sign = include_bytes!("../../fixtures/demo/sign.dxf");
    let settings =
        "depth = \"6mm\"\nthickness = \"6mm\"\nside = \"auto\"\nheld = \"vacuum\"\ncutter = \"3mm\"\n";
    let made = Made::with("sign.dxf", sign, settings);
    let text = page(&made.scene()).expect("a page");
    let data = data(&text);
    let laps = data["laps"].as_array().expect("laps");
    assert_eq!(laps.len(), made.report.contours.len());
    let errors = laps.iter().flat_map(|lap| lap["error"].as_array().expect("a list"));
    let largest = errors.map(|e| e.as_f64().expect("a number").abs()).fold(0.0, f64::max);
    let certified = made.report.check.deviation_mm.expect("a deviation");
    assert!(largest <= certified + 1e-5 && largest >= 0.8 * certified, "{largest} of {certified}");
    let uncut = text.split("<g id=\"layer-uncut\">").nth(1).and_then(|rest| rest.split("</g>").next());
    let drawn = uncut.expect("the layer").contains("<path");
    assert_eq!(drawn, made.report.contours.iter().any(|contour| !contour.uncut.is_empty()));
    assert!(drawn);
}
