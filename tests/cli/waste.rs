//! The tolerance on the waste side alone: the written text, read by another reader, never enters the part.

use std::fs;
use std::path::{Path, PathBuf};

use kurbo::Point;
use serde_json::Value;

use crate::formats::Contours;
use crate::outlines::closed_up;
use crate::reading::{Chain, cuts};

/// How finely arcs are sampled, in mm.
const SAGITTA: f64 = 1e-5;

/// A folder with a drawing.
struct Bench(tempfile::TempDir);

impl Bench {
    fn new(drawing: &str) -> Self {
        let bench = Self(tempfile::tempdir().expect("a folder"));
        fs::write(bench.path("drawing.csv"), drawing).expect("a file");
        bench
    }

    fn outline(name: &str) -> Self {
        let from = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/outlines").join(name);
        Self::new(&fs::read_to_string(from).expect("an outline"))
    }

    fn path(&self, name: &str) -> PathBuf {
        self.0.path().join(name)
    }

    fn drawing(&self) -> Contours {
        Contours::from_csv(&fs::read_to_string(self.path("drawing.csv")).expect("a drawing"))
    }

    fn run(&self, line: &str) -> u8 {
        let word = |word: &str| match word.strip_prefix('@') {
            Some(name) => self.path(name).into_os_string(),
            None => word.into(),
        };
        ribband::cli::main(std::iter::once("ribband".into()).chain(line.split_whitespace().map(word)))
    }

    /// Posts with the tolerance on the waste side; its exit status.
    fn post(&self, settings: &str) -> u8 {
        self.run(&format!(
            "post @drawing.csv --drawing-unit mm --origin drawing --depth 3 --held vacuum --entry plunge --quiet \
             --tolerance-side waste -o @out.nc --report @out.json --overwrite {settings}"
        ))
    }

    fn posted(&self, settings: &str) -> (String, Value) {
        assert_eq!(self.post(settings), 0, "{settings}");
        let text = fs::read_to_string(self.path("out.nc")).expect("a program");
        let report = fs::read(self.path("out.json")).expect("a report");
        (text, serde_json::from_slice(&report).expect("JSON"))
    }
}

/// Whether a place is in the region that closed contours bound by even and odd: a ray to the right.
fn in_region(drawing: &Contours, p: Point) -> bool {
    let sides = drawing.0.iter().flat_map(|contour| {
        let points = closed_up(contour);
        points.windows(2).map(|ends| (ends[0], ends[1])).collect::<Vec<_>>()
    });
    let crossed = sides
        .filter(|(a, b)| (a.y > p.y) != (b.y > p.y) && p.x < a.x + (b.x - a.x) * (p.y - a.y) / (b.y - a.y));
    crossed.count() % 2 == 1
}

/// The least and the largest distance of what is cut from the drawing, and how many places of it are in the part.
fn measured(program: &str, drawing: &Contours, reach: f64) -> (f64, f64, usize) {
    let drawn: Vec<Chain> = drawing.0.iter().map(|c| Chain::new(closed_up(c), 2.0 * reach)).collect();
    let (mut least, mut most, mut inside) = (f64::INFINITY, 0.0_f64, 0);
    for ends in cuts(program, SAGITTA).chains.iter().flat_map(|chain| chain.windows(2)) {
        let pieces = (ends[0].distance(ends[1]) / 0.05).ceil().max(1.0);
        for k in 0..pieces as usize {
            let p = ends[0].lerp(ends[1], k as f64 / pieces);
            let away = drawn.iter().map(|chain| chain.distance(p)).fold(f64::INFINITY, f64::min);
            (least, most) = (least.min(away), most.max(away));
            // Sampling and the rounding of the numbers' last place leave a path on the line on either side of it.
            inside += usize::from(away > 0.001 + SAGITTA && in_region(drawing, p));
        }
    }
    (least, most, inside)
}

/// Outlines of one part each, with the tolerance of the test.
const PARTS: [(&str, f64); 3] = [
    ("traced/cell-subpx.csv", 0.1),
    ("analytic/gear-a-s05-n02.csv", 0.2),
    ("glyph/dejavu-sans-u0038.csv", 0.1),
];

/// No lead is cut on the way: the whole of the lowest pass is beside the drawing.
#[test]
fn a_path_on_the_line_is_never_in_the_part_and_within_the_tolerance_beyond_it() {
    for (outline, tolerance) in PARTS {
        let bench = Bench::outline(outline);
        let (program, report) = bench.posted(&format!("--tolerance {tolerance}"));
        let drawing = bench.drawing();
        let (_, _, inside) = measured(&program, &drawing, 4.0);
        assert_eq!(inside, 0, "{outline}: places in the part");
        assert_eq!(report["tolerance_side"], "waste");
        assert_eq!(report["check"]["holds"], true);
        let certified = report["check"]["deviation_mm"].as_f64().expect("a deviation");
        assert!(certified > 0.4 * tolerance && certified <= tolerance, "{outline}: {certified}");
    }
}

/// Beside the line the cutter's edge keeps to the waste too: its centre is a radius away at least, and at most the
/// tolerance more where it can be.
#[test]
fn a_path_beside_the_line_leaves_the_part_whole() {
    for (outline, tolerance) in PARTS {
        let bench = Bench::outline(outline);
        let (program, _) = bench.posted(&format!("--tolerance {tolerance} --side auto --cutter 1mm"));
        let (least, _, inside) = measured(&program, &bench.drawing(), 4.0);
        assert!(least >= 0.5 - 0.001, "{outline}: {least} from the edge");
        assert_eq!(inside, 0, "{outline}");
    }
}

/// A square of 40 mm with a square hole of 20 mm, by hand: the path lies outside the one and inside the other.
#[test]
fn what_is_waste_goes_by_nesting() {
    let square = |x: f64, size: f64| {
        let far = x + size;
        format!("{x},{x}\n{far},{x}\n{far},{far}\n{x},{far}\n{x},{x}\n\n")
    };
    let bench = Bench::new(&(square(0.0, 40.0) + &square(10.0, 20.0)));
    let (program, _) = bench.posted("--tolerance 0.2 --corners sharp");
    let (least, most, inside) = measured(&program, &bench.drawing(), 4.0);
    assert_eq!(inside, 0);
    assert!(least > 0.05, "{least}");
    // Leads apart, which go further into the waste.
    let chains = cuts(&program, SAGITTA).chains;
    assert_eq!(chains.len(), 2);
    assert!(most < 4.0, "{most}");
    let extent = |chain: &[Point]| chain.iter().fold(f64::NEG_INFINITY, |far, p| far.max(p.x - p.y));
    assert!(chains.iter().all(|chain| extent(chain) > 19.0));
}

#[test]
fn what_has_no_waste_side_is_refused() {
    let bench = Bench::new("0,0\n60,0\n60,25\n");
    assert_eq!(bench.post("--tolerance 0.1"), 1, "an open contour");
    assert!(!bench.path("out.nc").exists());
    let bench = Bench::outline("traced/cell-subpx.csv");
    assert_eq!(bench.post("--tolerance 0.1 --machine fast-router --as splines"), 1, "cubic moves");
    assert_eq!(bench.post("--tolerance 0.004"), 1, "nothing left of half the tolerance");
}

/// The check finds a path that goes as far into the part as it may go beyond it: the program for both sides.
#[test]
fn a_program_for_both_sides_does_not_pass_for_one() {
    let bench = Bench::outline("traced/cell-subpx.csv");
    let line = "post @drawing.csv --drawing-unit mm --origin drawing --depth 3 --held vacuum --quiet --tolerance 0.1 \
                -o @both.nc";
    assert_eq!(bench.run(line), 0);
    let text = fs::read_to_string(bench.path("both.nc")).expect("a program");
    let (_, _, inside) = measured(&text, &bench.drawing(), 4.0);
    assert!(inside > 0, "it uses both sides");
    bench.posted("--tolerance 0.1");
    let check = |program: &str| {
        bench.run(&format!(
            "check {program} --against @drawing.csv --drawing-unit mm --origin drawing --tolerance 0.1 \
             --tolerance-side waste"
        ))
    };
    assert_eq!((check("@out.nc"), check("@both.nc")), (0, 1));
}
