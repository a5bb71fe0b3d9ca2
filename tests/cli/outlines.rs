//! The main job on every kept outline: the written text, read by another reader, against the drawing.

use std::fs;
use std::path::{Path, PathBuf};

use kurbo::Point;
use rayon::prelude::*;
use serde_json::Value;

use crate::formats::Contours;
use crate::reading::{Chain, Cuts, cuts, distance};

fn outlines() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/outlines")
}

/// One outline of the manifest.
struct Outline {
    id: String,
    csv: PathBuf,
    tolerance: f64,
}

fn manifest() -> Vec<Outline> {
    let text = fs::read_to_string(outlines().join("manifest.json")).expect("the manifest");
    let manifest: Value = serde_json::from_str(&text).expect("JSON");
    let outline = |entry: &Value| Outline {
        id: entry["id"].as_str().expect("an id").into(),
        csv: outlines().join(entry["csv"].as_str().expect("a csv")),
        tolerance: entry["tolerance_mm"].as_f64().expect("a tolerance"),
    };
    manifest["outlines"].as_array().expect("a list").iter().map(outline).collect()
}

/// How finely arcs are sampled, in mm of chord error: what a sampled deviation may be off by.
const SAGITTA: f64 = 1e-5;

/// What `post` made of a drawing.
struct Posted {
    program: String,
    report: Value,
}

/// Runs `ribband post` in this process; panics unless its exit status is 0.
fn post(drawing: &Path, tolerance: f64) -> Posted {
    let folder = tempfile::tempdir().expect("a folder");
    let (program, report) = (folder.path().join("out.nc"), folder.path().join("out.json"));
    let tolerance = format!("{tolerance}mm");
    let typed = ["ribband", "post", "--quiet", "--depth", "3", "--drawing-unit", "mm", "--origin", "drawing"];
    let mut typed: Vec<_> = typed.iter().map(std::ffi::OsString::from).collect();
    typed.extend(["--tolerance", &tolerance, "-o"].map(Into::into));
    typed.extend([program.clone().into(), "--report".into(), report.clone().into(), drawing.into()]);
    assert_eq!(ribband::cli::main(typed), 0, "{}", drawing.display());
    Posted {
        program: fs::read_to_string(program).expect("the program"),
        report: serde_json::from_slice(&fs::read(report).expect("the report")).expect("JSON"),
    }
}

pub(crate) fn closed_up((points, closed): &(Vec<Point>, bool)) -> Vec<Point> {
    points.iter().chain(points.iter().take(usize::from(*closed))).copied().collect()
}

/// The largest sampled distance between what the program cuts and the drawing, both ways.
pub(crate) fn sampled_deviation(cuts: Cuts, drawing: &Contours, tolerance: f64) -> f64 {
    let chain = |points| Chain::new(points, 2.0 * tolerance);
    let cut: Vec<Chain> = cuts.chains.into_iter().map(chain).collect();
    assert_eq!(cut.len(), drawing.0.len(), "every contour is cut once");
    let drawn: Vec<Chain> = drawing.0.iter().map(|contour| chain(closed_up(contour))).collect();
    let both_ways = |a: &Chain, b: &Chain| a.farthest_from(b, 0.1).max(b.farthest_from(a, 0.1));
    // Each contour with the cut that is nearest to it.
    let nearest = |drawn: &Chain| cut.iter().map(|cut| both_ways(cut, drawn)).fold(f64::INFINITY, f64::min);
    drawn.iter().map(nearest).fold(0.0, f64::max)
}

/// Lines of the simplification by Ramer (1972), Douglas and Peucker (1973) at a tolerance; a closed contour is split
/// at its first vertex and the one farthest from it.
fn simplified_lines(contour: &(Vec<Point>, bool), tolerance: f64) -> usize {
    let points = closed_up(contour);
    let last = points.len() - 1;
    let far = |a: usize, b: usize, i: &usize| distance(points[*i], points[a], points[b]);
    let mut pending = vec![(0, last)];
    if contour.1 {
        let split = (0..last).max_by(|i, j| far(0, 0, i).total_cmp(&far(0, 0, j))).unwrap_or(0);
        pending = vec![(0, split), (split, last)];
    }
    let mut lines = 0;
    while let Some((a, b)) = pending.pop() {
        let worst = (a + 1..b).max_by(|i, j| far(a, b, i).total_cmp(&far(a, b, j)));
        match worst.filter(|i| far(a, b, i) > tolerance) {
            Some(i) => pending.extend([(a, i), (i, b)]),
            None => lines += usize::from(b > a),
        }
    }
    lines
}

/// The figures of one outline that the claims below are about.
struct Figures {
    id: String,
    spans: u64,
    corners: u64,
    lines: usize,
    closed: usize,
    contours: usize,
}

fn figures(outline: &Outline) -> Figures {
    let text = fs::read_to_string(&outline.csv).expect("the outline");
    let drawing = Contours::from_csv(&text);
    let posted = post(&outline.csv, outline.tolerance);
    let certified = posted.report["check"]["deviation_mm"].as_f64().expect("a deviation");
    let cuts = cuts(&posted.program, SAGITTA);
    // What two readings may differ by: rounded arcs, this reader's sampling, the grid of 2^-20 mm of coordinates.
    let reading = cuts.mismatch + SAGITTA + 1e-6;
    let sampled = sampled_deviation(cuts, &drawing, outline.tolerance);
    assert!(certified <= outline.tolerance, "{}: certified {certified}", outline.id);
    assert!(sampled <= outline.tolerance, "{}: sampled {sampled}", outline.id);
    assert!(
        sampled <= certified + reading,
        "{}: sampled {sampled} above the certified {certified}",
        outline.id
    );
    let contours = posted.report["contours"].as_array().expect("contours");
    let sum = |field: &str| contours.iter().map(|c| c[field].as_u64().expect("a count")).sum::<u64>();
    Figures {
        id: outline.id.clone(),
        spans: sum("lines") + sum("arcs"),
        corners: sum("corners"),
        lines: drawing.0.iter().map(|contour| simplified_lines(contour, outline.tolerance)).sum(),
        closed: drawing.0.iter().filter(|contour| contour.1).count(),
        contours: contours.len(),
    }
}

/// At the manifest's tolerance every outline is cut, within the tolerance and within what is certified; with at most
/// 0.45 times the lines of straight-line simplification in the median, and never more spans and corners than its
/// lines, corners and one.
#[test]
fn every_outline_is_cut_within_tolerance_in_far_fewer_blocks() {
    let all: Vec<Figures> = manifest().par_iter().map(figures).collect();
    assert!(all.len() >= 150, "the sweep is not empty: {}", all.len());
    for one in &all {
        // Every joint between two lines is a corner.
        let simplified = 2 * one.lines - (one.contours - one.closed);
        let ours = one.spans + one.corners;
        assert!(ours <= simplified as u64 + 1, "{}: {ours} spans and corners against {simplified}", one.id);
    }
    let mut ratios: Vec<f64> = all.iter().map(|one| one.spans as f64 / one.lines as f64).collect();
    ratios.sort_by(f64::total_cmp);
    let median = ratios[ratios.len() / 2];
    println!("{} outlines, spans over lines: median {median:.3}", all.len());
    assert!(median <= 0.45, "median {median}");
}

/// The program's blocks, without the comments that name the drawing.
fn blocks(program: &str) -> Vec<&str> {
    program.lines().filter(|line| !line.starts_with('(')).collect()
}

/// The dozen outlines that are kept in three formats, and one that is written in all three here, give the same program.
#[test]
fn three_formats_give_one_program() {
    let kept: Vec<Outline> = manifest()
        .into_iter()
        .filter(|o| o.csv.with_extension("svg").exists() && o.csv.with_extension("dxf").exists())
        .collect();
    assert!(kept.len() >= 12, "{} are kept in three formats", kept.len());
    kept.par_iter().for_each(|outline| {
        let program = |ending| post(&outline.csv.with_extension(ending), outline.tolerance).program;
        let csv = program("csv");
        for ending in ["svg", "dxf"] {
            assert_eq!(blocks(&program(ending)), blocks(&csv), "{} in {ending}", outline.id);
        }
    });
}

/// Every outline written as SVG and DXF is read as the same contours, to the last bit; as a program depends on the
/// contours alone, it is the same program.
#[test]
fn every_outline_is_the_same_drawing_in_three_formats() {
    use ribband::read::{Scale, Unit, read};
    let scale = Scale { drawing_unit: Some(Unit::Mm), ..Scale::default() };
    manifest().par_iter().for_each(|outline| {
        let text = fs::read_to_string(&outline.csv).expect("the outline");
        let drawing = Contours::from_csv(&text);
        let paths = |text: &str| {
            let sketch = read(&outline.id, text.as_bytes(), &scale).expect("it is read");
            sketch.contours.into_iter().map(|contour| contour.path).collect::<Vec<_>>()
        };
        let csv = paths(&text);
        assert!(paths(&drawing.svg()) == csv, "{} as SVG", outline.id);
        assert!(paths(&drawing.dxf()) == csv, "{} as DXF", outline.id);
    });
}
