//! Whole drawings: those from elsewhere against reference lengths and boxes, and the broken ones in
//! `fixtures/bad`.

use std::fs;
use std::path::{Path, PathBuf};

use ribband::error::Kind;
use ribband::read::{Scale, Unit, read};
use serde::Deserialize;

use crate::{box_error, length};

/// How many drawings and outlines are compared; a count that may only grow.
const COMPARED: usize = 20;

/// What independent libraries found in a drawing.
#[derive(Deserialize)]
struct Reference {
    file: String,
    length_mm: f64,
    bbox_mm: [f64; 4],
}

#[derive(Deserialize)]
struct Outlines {
    outlines: Vec<Outline>,
}

#[derive(Deserialize)]
struct Outline {
    dxf: Option<String>,
    csv: String,
    contours: usize,
    closed: bool,
    vertices: usize,
    length_mm: f64,
    bbox_mm: [f64; 4],
}

fn fixtures() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures")
}

fn read_fixture(path: &Path) -> ribband::sketch::Sketch {
    let scale = Scale { drawing_unit: Some(Unit::Mm), ..Scale::default() };
    let name = path.display().to_string();
    read(&name, &fs::read(path).unwrap(), &scale).unwrap_or_else(|e| panic!("{e}"))
}

/// No drawing is excepted: every one agrees within 0.1 % in length and 0.01 mm in each bound.
#[test]
fn lengths_and_boxes_of_drawings_from_elsewhere() {
    let folder = fixtures().join("drawings/dxf");
    let references: Vec<Reference> =
        serde_json::from_str(&fs::read_to_string(folder.join("manifest.json")).unwrap()).unwrap();
    for Reference { file, length_mm, bbox_mm } in &references {
        let read = read_fixture(&folder.join(file));
        let found = length(&read);
        assert!((found / length_mm - 1.0).abs() < 1e-3, "{file}: length {found}, not {length_mm}");
        assert!(box_error(&read, *bbox_mm) < 0.01, "{file}: box {:?}, not {bbox_mm:?}", read.bbox());
    }
    assert!(references.len() + outlines().len() >= COMPARED, "drawings were lost");
}

/// The outlines that the fixtures hold as DXF.
fn outlines() -> Vec<(PathBuf, Outline)> {
    let folder = fixtures().join("outlines");
    let manifest = fs::read_to_string(folder.join("manifest.json")).unwrap();
    let all: Outlines = serde_json::from_str(&manifest).unwrap();
    let with_file = |o: Outline| Some((folder.join(o.dxf.as_ref()?), o));
    all.outlines.into_iter().filter_map(with_file).filter(|(path, _)| path.exists()).collect()
}

#[test]
fn outlines_have_their_vertices_lengths_and_boxes() {
    for (path, outline) in outlines() {
        let read = read_fixture(&path);
        let name = path.display();
        let vertices: usize = read.contours.iter().map(|c| c.path.vertices.len()).sum();
        assert!(read.contours.len() == outline.contours, "{name}: {} contours", read.contours.len());
        assert!(read.contours.iter().all(|c| c.path.closed == outline.closed), "{name}: closed or open");
        assert!(vertices == outline.vertices, "{name}: {vertices} vertices, not {}", outline.vertices);
        assert!((length(&read) / outline.length_mm - 1.0).abs() < 1e-6, "{name}: length {}", length(&read));
        assert!(box_error(&read, outline.bbox_mm) < 2e-6, "{name}: box {:?}", read.bbox());
    }
}

#[test]
fn an_outline_is_the_same_from_dxf_and_from_a_point_list() {
    for (path, outline) in outlines() {
        let from_dxf = read_fixture(&path);
        let from_points = read_fixture(&fixtures().join("outlines").join(&outline.csv));
        let paths = |sketch: &ribband::sketch::Sketch| -> Vec<_> {
            sketch.contours.iter().map(|c| c.path.clone()).collect()
        };
        assert_eq!(paths(&from_dxf), paths(&from_points), "{}", path.display());
    }
}

#[test]
fn broken_drawings_say_what_to_do() {
    let folder = fixtures().join("bad");
    let mut files: Vec<PathBuf> = fs::read_dir(folder).unwrap().map(|entry| entry.unwrap().path()).collect();
    files.retain(|path| path.extension().is_some_and(|e| e == "dxf"));
    files.sort();
    let message = |path: &PathBuf| {
        let name = path.file_name().unwrap().to_string_lossy();
        let error = read(&name, &fs::read(path).unwrap(), &Scale::default()).expect_err(&name);
        let wanted = if name.contains("no-unit") { Kind::Refused } else { Kind::Input };
        assert!(error.kind == wanted && !error.remedy.is_empty(), "{error}");
        error.to_string()
    };
    let messages: Vec<String> = files.iter().map(message).collect();
    insta::assert_snapshot!(messages.join("\n"), @r"
    dxf-all-frozen.dxf: the drawing holds nothing that can be cut (2 entities are not read: layer “Outline” is off or frozen)
      draw paths, polylines, lines or circles and save it again
    dxf-binary.dxf: this is a DXF file in binary form
      save it again as ASCII (text) DXF
    dxf-block-in-itself.dxf, line 28: block “Handle” contains itself
      explode the block in the drawing program and export again
    dxf-block-without-end.dxf, line 20: block “Handle” has no end (ENDBLK)
      export the drawing again as ASCII DXF (R12 or later)
    dxf-cut-in-a-pair.dxf, line 43: the file ends after group code 51, before its value
      the file is cut short: export the drawing again as ASCII DXF (R12 or later)
    dxf-cut-short.dxf, line 16: section ENTITIES has no end: the file is cut short
      copy or export the drawing again; a program cut from half a drawing is half a part
    dxf-decimal-comma.dxf, line 28: group 11 should be a finite number, found “120,5”
      correct the value, or export the drawing again as ASCII DXF (R12 or later)
    dxf-far-away.dxf: the drawing reaches 1.200e11 mm from its zero, which cannot be meant
      check its unit and look for a stray point far away
    dxf-line-lost.dxf, line 21: expected a DXF group code (a whole number), found “Outline”
      export the drawing again as ASCII DXF (R12 or later)
    dxf-no-section.dxf, line 2: expected SECTION or EOF, found “LINE”
      export the drawing again as ASCII DXF (R12 or later)
    dxf-no-unit.dxf: the drawing does not say how large one unit is
      it would be 140.0 x 40.0 mm with --drawing-unit mm, 3556.0 x 1016.0 mm with --drawing-unit in, 37.0 x 10.6 mm with --drawing-unit px; or give the finished width with --fit-width
    dxf-not-a-number.dxf, line 28: group 11 should be a finite number, found “nan”
      correct the value, or export the drawing again as ASCII DXF (R12 or later)
    dxf-nothing-to-cut.dxf: the drawing holds nothing that can be cut (1 POINT entity is not read; 1 TEXT entity is not read)
      draw paths, polylines, lines or circles and save it again
    dxf-spline-short-of-knots.dxf, line 20: broken SPLINE: 2 knots where 8 are needed
      export the drawing again as ASCII DXF (R12 or later)
    dxf-too-large-a-number.dxf, line 40: group 40 should be a finite number, found “1e400”
      correct the value, or export the drawing again as ASCII DXF (R12 or later)
    ");
}
