//! Splines, ellipses and placed curves against points, lengths and boxes of independent libraries, as
//! `tests/oracles/dxf_curves.py` wrote them.

use kurbo::Point;
use ribband::geom::Span;
use serde::Deserialize;

use crate::{box_error, length, sketch, spans};

#[derive(Deserialize)]
struct Oracle {
    cases: Vec<Case>,
}

#[derive(Deserialize)]
struct Case {
    name: String,
    dxf: String,
    length: f64,
    bbox: [f64; 4],
    points: Vec<(f64, f64)>,
}

/// Coordinates are held on a grid of 2^-20 mm, and the oracle's are printed to 1e-9 mm at worst.
const GRID_MM: f64 = 2e-6;

/// The cases that stand in the oracle; more may be added, none may get lost.
const CASES: usize = 40;

fn cases() -> Vec<Case> {
    let oracle: Oracle = serde_json::from_str(include_str!("../oracles/dxf_curves.json")).unwrap();
    assert!(oracle.cases.len() >= CASES, "{} cases", oracle.cases.len());
    oracle.cases
}

fn distance(spans: &[Span], p: Point) -> f64 {
    spans.iter().map(|s| s.nearest(p).distance).fold(f64::INFINITY, f64::min)
}

#[test]
fn curves_pass_through_the_points_of_the_libraries() {
    for case in cases() {
        let read = sketch(&case.dxf);
        let spans = spans(&read);
        for (i, &(x, y)) in case.points.iter().enumerate() {
            let off = distance(&spans, Point::new(x, y));
            assert!(off <= read.sampling_mm + GRID_MM, "{}: point {i} is {off} mm off", case.name);
        }
    }
}

#[test]
fn lengths_and_boxes_agree_with_the_libraries() {
    for case in cases() {
        let read = sketch(&case.dxf);
        let short = 1.0 - length(&read) / case.length;
        assert!((-1e-8..1e-4).contains(&short), "{}: length {} of {}", case.name, length(&read), case.length);
        let off = box_error(&read, case.bbox);
        assert!(off <= read.sampling_mm + GRID_MM, "{}: box {off} mm off", case.name);
    }
}

#[test]
fn circles_and_arcs_stay_exact_where_the_scales_are_equal() {
    let exact =
        ["arc seen from below", "block with a base point", "block turned and scaled", "block mirrored"];
    let found: Vec<Case> = cases().into_iter().filter(|case| exact.contains(&&*case.name)).collect();
    assert!(found.len() == exact.len(), "{} of the cases", found.len());
    for case in found {
        let read = sketch(&case.dxf);
        assert!(read.sampling_mm == 0.0, "{}: sampled to {}", case.name, read.sampling_mm);
        assert!(spans(&read).iter().any(|s| !s.is_line()), "{}: no arc", case.name);
    }
}

#[test]
fn what_is_not_level_is_told() {
    let tilted = ["tilted ellipse", "circle in a tilted plane", "arc with an oblique normal"];
    for case in cases() {
        let told = sketch(&case.dxf).notes.iter().any(|note| note.contains("not level"));
        assert!(told == tilted.contains(&&*case.name), "{}", case.name);
    }
}
