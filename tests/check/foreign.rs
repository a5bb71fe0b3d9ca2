//! Programs that the project did not write, of real traces: all hold, and none does when it is shifted.

use std::path::Path;

use kurbo::{Affine, Point, Vec2};
use ribband::geom::{ArcSpline, Vertex};

use crate::emit::{Arcs, Form, program};
use crate::{asked, assert_holds, sketch, verdict};

/// The contours of a point list: a blank line starts a new one, closed when its first point is repeated.
fn contours(path: &Path) -> Vec<ArcSpline> {
    let text = std::fs::read_to_string(path).expect("a fixture");
    let mut all: Vec<Vec<Point>> = vec![Vec::new()];
    for line in text.lines() {
        let numbers: Vec<f64> = line.split(',').filter_map(|n| n.trim().parse().ok()).collect();
        match numbers[..] {
            [x, y] => all.last_mut().expect("one at least").push(Point::new(x, y)),
            _ if line.trim().is_empty() => all.push(Vec::new()),
            _ => {}
        }
    }
    let chain = |mut points: Vec<Point>| {
        let closed = points.len() > 2 && points.first() == points.last();
        if closed {
            points.pop();
        }
        ArcSpline::polyline(points, closed)
    };
    all.into_iter().filter(|points| points.len() > 1).map(chain).collect()
}

/// Name, contours and tolerance of a sample of the outlines: every `nth` of the manifest.
pub(crate) fn outlines(nth: usize) -> Vec<(String, Vec<ArcSpline>, f64)> {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/outlines");
    let manifest = std::fs::read_to_string(root.join("manifest.json")).expect("the manifest");
    let manifest: serde_json::Value = serde_json::from_str(&manifest).expect("the manifest is JSON");
    let rows = manifest["outlines"].as_array().expect("a list").iter().step_by(nth);
    let outline = |row: &serde_json::Value| {
        let file = row["csv"].as_str().expect("a file");
        (file.to_string(), contours(&root.join(file)), row["tolerance_mm"].as_f64().expect("a tolerance"))
    };
    rows.map(outline).collect()
}

fn forms() -> impl Iterator<Item = Form> {
    [false, true].into_iter().flat_map(|inches| {
        [false, true].into_iter().map(move |incremental| Form { inches, incremental, ..Form::PLAIN })
    })
}

/// Holds the program of `cut` against `drawing`, and refutes that of the same cut shifted by twice the tolerance.
fn holds_where_it_is_drawn(name: &str, cut: &[ArcSpline], form: Form, drawing: &[ArcSpline], tolerance: f64) {
    let (drawing, asked) = (sketch(drawing), asked(tolerance));
    assert_holds(&program(cut, form), &drawing, &asked);
    let shift = Affine::translate((1.6 * tolerance, -1.2 * tolerance));
    let shifted: Vec<ArcSpline> = cut.iter().map(|path| path.transformed(shift)).collect();
    let verdict = verdict(&program(&shifted, form), &drawing, &asked).expect("it reads");
    assert!(!verdict.holds, "{name}, {form:?}, shifted by twice the tolerance holds");
}

#[test]
fn traces_as_straight_blocks_hold_and_shifted_ones_do_not() {
    for (k, (name, paths, tolerance)) in outlines(3).into_iter().enumerate() {
        let form = forms().nth(k % 4).expect("four forms");
        holds_where_it_is_drawn(&name, &paths, form, &paths, tolerance);
    }
}

#[test]
fn traces_with_arcs_by_radius_hold_and_shifted_ones_do_not() {
    for (k, (name, paths, tolerance)) in outlines(3).into_iter().enumerate() {
        let form = Form { arcs: Arcs::Radius, ..forms().nth(k % 4).expect("four forms") };
        let cut: Vec<ArcSpline> = paths.iter().map(|path| with_arcs(path, tolerance)).collect();
        holds_where_it_is_drawn(&name, &cut, form, &paths, tolerance);
    }
}

/// A polyline with an arc through three vertices in place of two lines wherever it bows from them by at most a third
/// of the tolerance.
fn with_arcs(path: &ArcSpline, tolerance: f64) -> ArcSpline {
    let places: Vec<Point> = path.vertices.iter().map(|v| v.at).collect();
    let mut vertices = Vec::new();
    let mut k = 0;
    while k < places.len() {
        let bulge = match places[k..] {
            [a, b, c, ..] => bulge_through(a, b, c, tolerance / 3.0),
            _ => None,
        };
        vertices.push(Vertex { at: places[k], bulge: bulge.unwrap_or(0.0) });
        k += if bulge.is_some() { 2 } else { 1 };
    }
    ArcSpline { vertices, closed: path.closed }
}

/// The bulge of the arc from `a` through `b` to `c`; `None` where it leaves the lines between them by more than
/// `bow`, or is hardly an arc.
fn bulge_through(a: Point, b: Point, c: Point, bow: f64) -> Option<f64> {
    let between = |one: Vec2, other: Vec2| one.cross(other).atan2(one.dot(other));
    // By the angle on the circumference: half the turn at `b` is a quarter of the arc's sweep.
    let bulge = (between(b - a, c - b) / 2.0).tan();
    let sagitta = |chord: Vec2, seen: f64| chord.hypot() / 2.0 * (seen.abs() / 2.0).tan();
    let first = sagitta(b - a, between(a - c, b - c));
    let second = sagitta(c - b, between(b - a, c - a));
    (first.max(second) <= bow && (0.001..0.6).contains(&bulge.abs())).then_some(bulge)
}

#[test]
fn arcs_hold_in_every_form() {
    // Every fifth vertex of a ring, joined by arcs through the one between.
    let ring =
        |k: usize| Point::new(80.0, 70.0) + kurbo::Vec2::from_angle(0.1 * k as f64) * (40.0 + (k % 7) as f64);
    let points: Vec<Point> = (0..60).map(ring).collect();
    let mut path = ArcSpline::polyline(points, true);
    for (k, v) in path.vertices.iter_mut().enumerate() {
        v.bulge = [0.1, -0.3, 0.0, 0.7, -0.05][k % 5];
    }
    for arcs in [Arcs::Centre, Arcs::CentreFromZero, Arcs::Radius] {
        for form in forms().map(|form| Form { arcs, ..form }) {
            let text = program(std::slice::from_ref(&path), form);
            let verdict = verdict(&text, &sketch(&[path.clone()]), &asked(0.02)).expect("it reads");
            let bad: Vec<_> = crate::failing(&verdict);
            // Rounding each number by itself may break the rule for the radii; nothing else may fail.
            assert!(bad.iter().all(|name| name.contains("radii")), "{form:?}: {bad:?} {:#?}", verdict.claims);
        }
    }
}
