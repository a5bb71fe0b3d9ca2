//! Drawings from elsewhere against what independent libraries found in them.

use std::path::Path;

use ribband::read::{Scale, Unit, read};
use ribband::sketch::Sketch;
use serde::Deserialize;

#[derive(Deserialize)]
struct Reference {
    file: String,
    length_mm: f64,
    bbox_mm: Option<[f64; 4]>,
    page_height_mm: f64,
}

/// How many drawings are compared. It may only grow, and none is off; one that ever is must be explained here.
const COMPARED: usize = 91;

fn folder() -> std::path::PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/drawings/svg")
}

fn sketch(file: &str) -> Sketch {
    let bytes = std::fs::read(folder().join(file)).expect("the fixture is there");
    let px = Scale { drawing_unit: Some(Unit::Px), ..Scale::default() };
    read(file, &bytes, &px).unwrap_or_else(|e| panic!("{e}"))
}

/// What is off: length by more than 0.1 %, or a bound by more than 0.01 mm.
fn faults(reference: &Reference) -> Vec<String> {
    let sketch = sketch(&reference.file);
    let length: f64 = sketch.contours.iter().map(|c| c.path.length()).sum();
    let mut faults = Vec::new();
    if (length - reference.length_mm).abs() > 1e-3 * reference.length_mm {
        faults.push(format!("length {length:.6}, not {:.6}", reference.length_mm));
    }
    let found = sketch.bbox().expect("a drawing has a box");
    if let Some([x0, top, x1, bottom]) = reference.bbox_mm {
        let height = reference.page_height_mm;
        let wanted = [x0, height - bottom, x1, height - top];
        for (found, wanted) in [found.x0, found.y0, found.x1, found.y1].iter().zip(wanted) {
            if (found - wanted).abs() > 0.01 {
                faults.push(format!("bound {found:.4}, not {wanted:.4}"));
            }
        }
    }
    faults
}

#[test]
fn lengths_and_boxes_agree_with_independent_libraries() {
    let manifest = std::fs::read(folder().join("manifest.json")).expect("the manifest is there");
    let references: Vec<Reference> = serde_json::from_slice(&manifest).expect("the manifest is JSON");
    let off: Vec<(String, Vec<String>)> = references
        .iter()
        .map(|r| (r.file.clone(), faults(r)))
        .filter(|(_, faults)| !faults.is_empty())
        .collect();
    assert!(off.is_empty(), "{} of {} are off: {off:#?}", off.len(), references.len());
    assert!(references.len() >= COMPARED, "only {} drawings are left", references.len());
}

#[test]
fn sampling_keeps_its_bound() {
    for file in ["s001.svg", "s025.svg", "s058.svg", "s074.svg"] {
        let sketch = sketch(file);
        assert!(sketch.sampling_mm <= 0.0005, "{file}: {} mm", sketch.sampling_mm);
    }
    assert!(sketch("s049.svg").sampling_mm == 0.0, "a drawing of lines needs no sampling");
}
