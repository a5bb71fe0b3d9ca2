//! One outline in three formats is one outline.

use std::path::Path;

use super::mm;

#[test]
fn points_svg_and_dxf_give_equal_coordinates() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/outlines");
    let mut compared = 0;
    for kind in ["analytic", "coast", "glyph", "traced"] {
        for entry in std::fs::read_dir(folder.join(kind)).expect("the outlines are there") {
            let svg = entry.expect("an entry").path();
            if svg.extension().is_some_and(|e| e == "svg") {
                compare(&svg);
                compared += 1;
            }
        }
    }
    assert!(compared >= 12, "only {compared} outlines stand in three formats");
}

fn compare(svg: &Path) {
    let read = |extension: &str| {
        let file = svg.with_extension(extension);
        let bytes = std::fs::read(&file).unwrap_or_else(|e| panic!("{}: {e}", file.display()));
        let sketch =
            ribband::read::read(&file.display().to_string(), &bytes, &mm()).unwrap_or_else(|e| panic!("{e}"));
        sketch.contours.into_iter().map(|c| c.path).collect::<Vec<_>>()
    };
    let points = read("csv");
    assert!(!points.is_empty(), "{}", svg.display());
    assert!(points == read("svg"), "{}: SVG and points differ", svg.display());
    assert!(points == read("dxf"), "{}: DXF and points differ", svg.display());
}
