//! Every flaw has a drawing, and what is said of it is kept whole.

use ribband::clean::{FlawKind, clean};
use ribband::measure::{Measurement, measure};

use ribband::read::{Scale, Unit, read};

use super::common::{open, sketch};

/// The kind of flaw that each drawing was made for.
const DRAWINGS: [(&str, FlawKind); 8] = [
    ("crossing.svg", FlawKind::Crossing),
    ("nearly-closed.csv", FlawKind::NearlyClosed),
    ("junction.dxf", FlawKind::Junction),
    ("overlap.svg", FlawKind::Overlap),
    ("spike.csv", FlawKind::Spike),
    ("duplicate.dxf", FlawKind::Duplicate),
    ("part-duplicate.dxf", FlawKind::PartDuplicate),
    ("gap.dxf", FlawKind::Gap),
];

fn measured(name: &str) -> Measurement {
    let path = format!("{}/fixtures/flawed/{name}", env!("CARGO_MANIFEST_DIR"));
    let bytes = std::fs::read(&path).unwrap_or_else(|e| panic!("{path}: {e}"));
    let unit = if name.ends_with("csv") { Some(Unit::Mm) } else { None };
    let sketch = read(name, &bytes, &Scale { drawing_unit: unit, ..Scale::default() }).unwrap();
    measure(&sketch, 0.1)
}

#[test]
fn every_flaw_is_told_with_its_place_and_a_way_out() {
    for (name, kind) in DRAWINGS {
        let measured = measured(name);
        assert_eq!(measured.json(name)["flaws"][0]["kind"], kind.name(), "{name}: {:?}", measured.flaws);
        insta::assert_snapshot!(name.replace('.', "-"), measured.summary());
    }
}

#[test]
fn a_line_without_length_is_told_by_the_reader() {
    insta::assert_snapshot!("no-length-dxf", measured("no-length.dxf").summary());
}

#[test]
fn a_contour_without_length_is_dropped_and_told() {
    let cleaned = clean(&sketch([open(&[(5.0, 5.0), (5.0, 5.0)]), open(&[(0.0, 0.0), (9.0, 0.0)])]), 0.1);
    assert_eq!((cleaned.contours.len(), cleaned.counts.without_length), (1, 1));
    assert_eq!(cleaned.flaws[0].kind, FlawKind::NoLength);
    insta::assert_snapshot!("no-length", cleaned.flaws[0].to_string());
}
