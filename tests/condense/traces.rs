//! Real traces as programs of straight blocks, condensed.

use std::path::Path;

use ribband::condense::condense;
use ribband::fit::{Pace, fit};
use ribband::gcode::{Dialect, Program, interpret, read};
use ribband::geom::{ArcSpline, frechet};
use ribband::machine::Machine;
use ribband::num::Tolerance;
use ribband::read::{Scale, Unit, read as read_drawing};

use crate::emit::{Form, program};
use crate::second_reader::agree;

/// Name, contours and tolerance of every `nth` outline, the largest left out.
fn outlines(nth: usize) -> Vec<(String, Vec<ArcSpline>, Tolerance)> {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/outlines");
    let manifest = std::fs::read_to_string(root.join("manifest.json")).expect("the manifest");
    let manifest: serde_json::Value = serde_json::from_str(&manifest).expect("the manifest is JSON");
    let rows = manifest["outlines"].as_array().expect("a list").iter().step_by(nth);
    let rows = rows.filter(|row| row["vertices"].as_u64().is_some_and(|vertices| vertices < 4000));
    let scale = Scale { drawing_unit: Some(Unit::Mm), ..Scale::default() };
    let outline = |row: &serde_json::Value| {
        let file = row["csv"].as_str().expect("a file");
        let bytes = std::fs::read(root.join(file)).expect("a fixture");
        let sketch = read_drawing(file, &bytes, &scale).expect("a drawing");
        let tolerance = row["tolerance_mm"].as_f64().and_then(Tolerance::new).expect("a tolerance");
        (file.to_string(), sketch.contours.into_iter().map(|c| c.path).collect(), tolerance)
    };
    rows.map(outline).collect()
}

fn machine() -> Machine {
    Machine::named("shop-router").expect("built in")
}

fn understood(text: &str) -> Program {
    let words = read(text).expect("it reads");
    interpret(&words, &Dialect::of(&machine())).expect("every word is known")
}

fn forms() -> impl Iterator<Item = Form> {
    [false, true].into_iter().flat_map(|inches| {
        [false, true].into_iter().map(move |incremental| Form { inches, incremental, ..Form::PLAIN })
    })
}

/// The passes of a program below its zero, each as the cutter's way from above with its height.
fn passes(program: &Program) -> Vec<(f64, ArcSpline)> {
    let cuts = program.toolpath.moves.iter().filter(|m| m.feed.is_some() && (m.to.z - m.from.z).abs() < 1e-9);
    let cuts: Vec<_> = cuts.collect();
    let runs = cuts.chunk_by(|a, b| a.to == b.from);
    runs.map(|run| {
        let spans: Vec<_> = run.iter().map(|m| m.span()).collect();
        (run[0].from.z, ArcSpline::from_spans(&spans, false))
    })
    .collect()
}

#[test]
fn condensed_traces_stay_within_tolerance_and_come_near_the_fewest() {
    let mut worst = 0.0_f64;
    for (k, (name, paths, tolerance)) in outlines(7).into_iter().enumerate() {
        let form = forms().nth(k % 4).expect("four forms");
        let text = program(&paths, form);
        let condensed = condense(&text, &machine(), tolerance).expect("it is condensed");
        // Increments that were rounded to f32 add up over some thousand blocks.
        let near = if form.incremental { 1e-2 } else { 1e-4 };
        let agreed = agree(&condensed.text, &understood(&condensed.text), &machine(), near);
        assert_eq!(agreed, Ok(()), "{name}, {form:?}");
        let (old, new) = (passes(&understood(&text)), passes(&understood(&condensed.text)));
        assert_eq!(old.len(), new.len(), "{name}");
        for ((z, old), (height, new)) in old.iter().zip(&new) {
            assert!((z - height).abs() < 1e-9, "{name}: {z} became {height}");
            let deviation = frechet(new, old);
            assert!(deviation.mm <= tolerance.mm() * 1.05, "{name}: {deviation:?} of {tolerance:?}");
        }
        let left = tolerance.less(0.0015).expect("above zero");
        let best: usize = paths.iter().map(|path| fit(path, left, Pace::Thorough).path.len()).sum();
        let got = new.iter().map(|(_, path)| path.len()).sum::<usize>() as f64 / 3.0;
        let most = (1.1 * best as f64).max(best as f64 + 2.0 * paths.len() as f64);
        assert!(got <= most, "{name}: {got} spans, and {best} from the drawing");
        worst = worst.max(got / best as f64);
    }
    println!("at worst {worst:.3} times the spans from the drawing");
}
