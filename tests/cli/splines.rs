//! Cubic moves from the command line: the written text, read by another reader, against real outlines.

use std::fs;
use std::path::{Path, PathBuf};

use kurbo::Point;
use serde_json::Value;

use crate::formats::Contours;
use crate::outlines::sampled_deviation;
use crate::reading::cuts;

/// How finely curves are sampled, in mm.
const SAGITTA: f64 = 1e-5;

/// A folder with a drawing and a machine that has the word for cubic moves.
struct Bench(tempfile::TempDir);

impl Bench {
    fn new(outline: &str) -> Self {
        let bench = Self(tempfile::tempdir().expect("a folder"));
        let from = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/outlines").join(outline);
        fs::copy(from, bench.path("drawing.csv")).expect("an outline");
        let profile = ribband::machine::built_in("shop-router").expect("built in");
        let with_word = profile.replacen("[program]", "[program]\nspline = \"G5\"", 1);
        assert_ne!(with_word, profile, "the profile has a section for the form of its programs");
        fs::write(bench.path("machine.toml"), with_word).expect("a file");
        bench
    }

    fn path(&self, name: &str) -> PathBuf {
        self.0.path().join(name)
    }

    fn text(&self, name: &str) -> String {
        fs::read_to_string(self.path(name)).expect(name)
    }

    fn json(&self, name: &str) -> Value {
        serde_json::from_str(&self.text(name)).expect("JSON")
    }

    /// Runs `ribband` in this process: `@name` is a file of the folder.
    fn run(&self, line: &str) -> u8 {
        let word = |word: &str| match word.strip_prefix('@') {
            Some(name) => self.path(name).into_os_string(),
            None => word.into(),
        };
        ribband::cli::main(std::iter::once("ribband".into()).chain(line.split_whitespace().map(word)))
    }

    /// Posts the drawing on the line as cubic moves; the program and its report.
    fn post(&self, settings: &str) -> (String, Value) {
        let line = format!(
            "post @drawing.csv --drawing-unit mm --origin drawing --machine @machine.toml --depth 3 --as splines \
             --quiet -o @out.nc --report @out.json --overwrite {settings}"
        );
        assert_eq!(self.run(&line), 0, "{line}");
        (self.text("out.nc"), self.json("out.json"))
    }

    fn check(&self, program: &str, machine: &str) -> u8 {
        self.run(&format!(
            "check {program} --against @drawing.csv --drawing-unit mm --origin drawing --machine {machine} \
             --tolerance 0.1 --report @check.json --overwrite"
        ))
    }
}

fn cubic_lines(program: &str) -> Vec<&str> {
    program.lines().filter(|line| line.starts_with("G5 ")).collect()
}

const OUTLINES: [(&str, f64); 6] = [
    ("traced/cell-subpx.csv", 0.1),
    ("traced/dolphin-subpx.csv", 0.1),
    ("traced/wing000.csv", 0.05),
    ("coast/ne10-country-switzerland.csv", 0.1),
    ("glyph/libertine-u0053.csv", 0.05),
    ("analytic/keyhole-a-s05-n02.csv", 0.1),
];

#[test]
fn the_text_keeps_the_tolerance_on_real_outlines() {
    for (outline, tolerance) in OUTLINES {
        let bench = Bench::new(outline);
        let (program, report) = bench.post(&format!("--tolerance {tolerance} --entry plunge"));
        let drawing = Contours::from_csv(&bench.text("drawing.csv"));
        let found = sampled_deviation(cuts(&program, SAGITTA), &drawing, tolerance);
        let certified = report["check"]["deviation_mm"].as_f64().expect("a deviation");
        assert!(found <= certified + SAGITTA, "{outline}: {found} sampled, {certified} certified");
        assert!(certified <= tolerance, "{outline}: {certified}");
        let told: u64 = report["contours"]
            .as_array()
            .expect("contours")
            .iter()
            .fold(0, |sum, contour| sum + contour["cubics"].as_u64().expect("a count"));
        let passes = report["setup"]["passes"].as_u64().expect("a count");
        let lines = cubic_lines(&program).len() as u64;
        assert!(lines > 2 && lines == passes * told, "{outline}: {lines} of {passes} times {told}");
        let arcs = program.lines().filter(|line| line.starts_with("G2 ") || line.starts_with("G3 ")).count();
        assert_eq!(arcs, 0, "{outline}: what bends is a cubic move");
    }
}

#[test]
fn ramps_tabs_and_laps_to_and_fro_keep_the_tolerance_too() {
    for (outline, settings) in [
        ("traced/cell-subpx.csv", "--tolerance 0.1 --thickness 3 --tabs 3 --pass 2"),
        ("analytic/sine-a-s05-n02.csv", "--tolerance 0.1 --pass 1"),
    ] {
        let bench = Bench::new(outline);
        let (program, report) = bench.post(settings);
        assert_eq!(report["check"]["holds"], true, "{outline}");
        assert!(cubic_lines(&program).len() > 6, "{outline}");
        assert_eq!(bench.check("@out.nc", "@machine.toml"), 0, "{outline}: by the text alone");
    }
}

/// A mirror turns every curve's control points too; the check lays the drawing out by itself.
#[test]
fn copies_turned_and_mirrored_are_cubic_moves_too() {
    let bench = Bench::new("glyph/libertine-u0053.csv");
    let one = bench.post("--tolerance 0.1 --entry plunge").0;
    let (program, report) =
        bench.post("--tolerance 0.1 --entry plunge --copies 2x1 --gap 10mm --turn 30 --mirror --curvature");
    // A lap that is entered within a curve has that one as arcs.
    let (two, one) = (cubic_lines(&program).len(), cubic_lines(&one).len());
    assert!(two <= 2 * one && two >= 2 * one - 2, "{two} in two copies, {one} in one");
    assert_eq!(report["check"]["holds"], true);
}

#[test]
fn a_control_point_that_is_moved_is_found() {
    let bench = Bench::new("traced/cell-subpx.csv");
    let (program, _) = bench.post("--tolerance 0.1 --entry plunge");
    assert_eq!(bench.check("@out.nc", "@machine.toml"), 0);
    let longest = *cubic_lines(&program).iter().max_by_key(|line| line.len()).expect("a cubic move");
    let line = program.lines().position(|line| line == longest).expect("it is there") + 1;
    for letter in ['I', 'J', 'P', 'Q'] {
        let moved: Vec<String> = longest
            .split(' ')
            .map(|word| match word.strip_prefix(letter) {
                Some(number) => format!("{letter}{:.3}", number.parse::<f64>().expect("a number") + 0.8),
                None => word.into(),
            })
            .collect();
        let moved = moved.join(" ");
        fs::write(bench.path("moved.nc"), program.replacen(longest, &moved, 1)).expect("a file");
        assert_eq!(bench.check("@moved.nc", "@machine.toml"), 1, "{moved}");
        let claims = bench.json("check.json")["check"]["claims"].clone();
        let failed = claims.as_array().expect("claims").iter().find(|claim| claim["state"] == "fails");
        let at = failed.expect("a failed claim")["at"].as_str().expect("a place").to_owned();
        assert!(at.starts_with(&format!("line {line},")), "{at}, not line {line}");
    }
}

#[test]
fn machines_without_the_word_refuse_it() {
    let bench = Bench::new("traced/cell-subpx.csv");
    let line = "post @drawing.csv --drawing-unit mm --depth 3 --as splines --quiet -o @none.nc";
    assert_eq!(bench.run(line), 1);
    assert!(!bench.path("none.nc").exists());
    let beside = format!("{line} --machine @machine.toml --side outside --held vacuum");
    assert_eq!(bench.run(&beside), 1, "beside a cubic runs no cubic");
    bench.post("--tolerance 0.1");
    assert_eq!(bench.check("@out.nc", "shop-router"), 1, "G5 is not known there");
}

/// A circle by cubic moves takes the time of a circle by arcs: the speed is that of the bend.
#[test]
fn the_bend_of_a_cubic_sets_its_speed() {
    let bench = Bench::new("analytic/circle-a-s05-clean.csv");
    let settings = "--tolerance 0.02 --entry plunge --feed 6000";
    let (program, splines) = bench.post(settings);
    assert!(cubic_lines(&program).len() >= 3);
    let line = format!(
        "post @drawing.csv --drawing-unit mm --origin drawing --machine @machine.toml --depth 3 --quiet \
         -o @arcs.nc --report @arcs.json {settings}"
    );
    assert_eq!(bench.run(&line), 0);
    let time = |report: &Value| report["program"]["cut_time_s"].as_f64().expect("a time");
    let (cubic, arc) = (time(&splines), time(&bench.json("arcs.json")));
    assert!((cubic / arc - 1.0).abs() < 0.02, "{cubic} s and {arc} s");
}

/// A circle and an ellipse (semi-axes 50 and 20: curvature from b/a² to a/b²) are known; the report must tell their
/// curvature, and that the arcs' steps lie about it.
#[test]
fn the_report_tells_curvature_along_trace_fair_curve_and_path() {
    for (outline, least, most) in [
        ("analytic/circle-a-s05-n02.csv", 1.0 / 50.0, 1.0 / 50.0),
        ("analytic/ellipse-a-s05-n02.csv", 20.0 / 2500.0, 50.0 / 400.0),
    ] {
        let bench = Bench::new(outline);
        let line = "post @drawing.csv --drawing-unit mm --depth 3 --tolerance 0.1 --curvature --quiet -o @out.nc \
                    --report @out.json";
        assert_eq!(bench.run(line), 0);
        let report = bench.json("out.json");
        let contour = &report["contours"][0];
        let bends = |curve: &str| -> Vec<f64> {
            let curve = &contour["curvature"][curve];
            let along = curve["along_mm"].as_array().expect("lengths");
            let along: Vec<f64> = along.iter().map(|s| s.as_f64().expect("a length")).collect();
            assert!(along.is_sorted() && along[along.len() - 1] > 200.0, "{outline}: {along:?}");
            let bends = curve["per_mm"].as_array().expect("curvatures");
            assert_eq!(bends.len(), along.len());
            bends.iter().map(|k| k.as_f64().expect("a curvature").abs()).collect()
        };
        let range =
            |bends: &[f64]| bends.iter().fold((f64::INFINITY, 0.0_f64), |r, k| (r.0.min(*k), r.1.max(*k)));
        let (trace, fair, path) = (range(&bends("trace")), range(&bends("fair")), range(&bends("path")));
        assert!(trace.1 > 3.0 * most, "{outline}: the trace's noise shows: {trace:?}");
        for curve in [fair, path] {
            // The tolerance lets a curve of bend k deviate by as much as an arc of another bend over its length does.
            assert!(
                curve.0 > 0.4 * least && curve.1 < 1.3 * most,
                "{outline}: {curve:?} for {least} to {most}"
            );
        }
        let bending = |curve: &str| contour["curvature"][curve]["bending"].as_f64().expect("a number");
        assert!(bending("fair") < bending("trace") / 3.0, "{outline}");
        assert!(report["timings_ms"]["fair"].as_f64().expect("a time") > 0.0);
    }
}

#[test]
fn the_drawings_corners_stay() {
    let bench = Bench::new("traced/cell-subpx.csv");
    let side = |from: Point, to: Point| (0..100).map(move |k| from.lerp(to, f64::from(k) / 100.0));
    let corners = [(0.0, 0.0), (50.0, 0.0), (50.0, 30.0), (0.0, 30.0), (0.0, 0.0)].map(Point::from);
    let mut text = String::from("x,y\n");
    for p in corners.windows(2).flat_map(|pair| side(pair[0], pair[1])).chain([corners[0]]) {
        text += &format!("{},{}\n", p.x, p.y);
    }
    fs::write(bench.path("drawing.csv"), text).expect("a file");
    let (program, report) = bench.post("--tolerance 0.1 --entry plunge");
    assert_eq!(report["contours"][0]["cubics"], 0, "what is straight is a line");
    let mut chain = cuts(&program, SAGITTA).chains.remove(0);
    chain.dedup();
    assert_eq!(chain.len(), 5, "{chain:?}");
    for corner in &corners {
        assert!(chain.contains(corner), "{corner:?} in {chain:?}");
    }
}
