//! Block references: placement, layers, and the bounds on what they stand for.

use kurbo::Point;
use ribband::error::Kind;

use crate::{drawing, length, lines, sections, sketch, spans, try_sketch};

const UNIT_LINE: &str = "0|BLOCK|8|0|2|Unit|70|0|10|0|20|0|3|Unit|0|LINE|8|0|11|1|0|ENDBLK|8|0";

/// The ends of all spans, rounded to 1e-6.
fn ends(dxf: &str) -> Vec<[Point; 2]> {
    let rounded = |p: Point| Point::new((p.x * 1e6).round() / 1e6 + 0.0, (p.y * 1e6).round() / 1e6 + 0.0);
    spans(&sketch(dxf)).iter().map(|s| [rounded(s.start), rounded(s.end)]).collect()
}

/// Values computed with an independent DXF library: the spacing is turned, but not scaled.
#[test]
fn a_grid_turned_and_mirrored() {
    let insert = "0|INSERT|2|UNIT|10|10|20|20|41|2|42|-1|50|90|70|3|71|2|44|4|45|5";
    let found = ends(&sections("", UNIT_LINE, insert));
    let starts = [(10, 20), (10, 24), (10, 28), (5, 20), (5, 24), (5, 28)];
    let wanted =
        starts.map(|(x, y)| [(x, y), (x, y + 2)].map(|(x, y)| Point::new(f64::from(x), f64::from(y))));
    assert_eq!(found, wanted);
}

#[test]
fn the_base_point_is_taken_off_before_scaling() {
    let block = "0|BLOCK|2|B|10|3|20|4|0|LINE|10|3|20|4|11|5|21|4|0|ENDBLK";
    let found = ends(&sections("", block, "0|INSERT|2|B|10|100|20|50|41|10|42|10"));
    assert_eq!(found, [[Point::new(100.0, 50.0), Point::new(120.0, 50.0)]]);
}

#[test]
fn mirrored_arcs_turn_over() {
    let block = "0|BLOCK|2|B|0|LWPOLYLINE|10|0|20|0|42|1|10|10|20|0|0|ENDBLK";
    let plain = spans(&sketch(&sections("", block, "0|INSERT|2|B")))[0];
    let mirrored = spans(&sketch(&sections("", block, "0|INSERT|2|B|41|-1")))[0];
    let twice = spans(&sketch(&sections("", block, "0|INSERT|2|B|41|-1|42|-1")))[0];
    assert!((plain.bulge - 1.0).abs() < 1e-12 && (twice.bulge - 1.0).abs() < 1e-12, "{plain:?} {twice:?}");
    assert!((mirrored.bulge + 1.0).abs() < 1e-12, "{mirrored:?}");
}

#[test]
fn layer_0_in_a_block_is_the_layer_of_the_insert() {
    let blocks = "0|BLOCK|2|Inner|0|LINE|8|0|11|1|0|LINE|8|Own|11|2|0|ENDBLK|\
                  0|BLOCK|2|Outer|0|INSERT|8|0|2|Inner|0|INSERT|8|Mid|2|Inner|0|ENDBLK";
    let read = sketch(&sections("", blocks, "0|INSERT|8|Top|2|outer"));
    let layers: Vec<&str> = read.contours.iter().map(|c| c.layer.as_str()).collect();
    assert_eq!(layers, ["Top", "Own", "Mid", "Own"]);
    assert_eq!(read.contours[0].place.element, "LINE in block Inner");
}

/// An INSERT on a layer that is off hides what takes its layer; a frozen one hides all (DXF practice, from
/// memory).
#[test]
fn off_hides_layer_0_and_frozen_hides_everything() {
    let blocks = "0|BLOCK|2|B|0|LINE|8|0|11|1|0|LINE|8|Own|11|2|0|ENDBLK";
    let entities = "0|INSERT|8|L|2|B|0|LINE|8|Other|11|4";
    let read = |state: &str| {
        let tables = format!("0|TABLE|2|LAYER|0|LAYER|2|L|{state}|0|ENDTAB");
        length(&sketch(&sections(&tables, blocks, entities)))
    };
    assert!((read("70|0|62|1") - 7.0).abs() < 1e-9, "on");
    assert!((read("70|0|62|-1") - 6.0).abs() < 1e-9, "off");
    assert!((read("70|1|62|1") - 4.0).abs() < 1e-9, "frozen");
}

#[test]
fn blocks_that_are_missing_external_or_flat_are_told() {
    let blocks = "0|BLOCK|2|Elsewhere|70|4|1|other.dxf|0|ENDBLK|0|BLOCK|2|Here|0|LINE|11|5|0|ENDBLK";
    let entities = "0|INSERT|2|Gone|0|INSERT|2|Elsewhere|0|INSERT|2|Here|41|0|0|INSERT|2|Here|66|1|\
                    0|ATTRIB|1|text|0|SEQEND|0|INSERT|2|Here";
    let read = sketch(&sections("", blocks, entities));
    assert!((length(&read) - 10.0).abs() < 1e-9, "{}", length(&read));
    insta::assert_snapshot!(read.notes.join("\n"), @r"
    1 ATTRIB entity is not read
    1 INSERT entity is without length and not read
    1 INSERT entity is not read: the file has no block “Gone”
    1 INSERT entity is not read: block “Elsewhere” stands in another file
    ");
}

#[test]
fn a_block_that_contains_itself_is_refused() {
    let blocks = "0|BLOCK|2|A|0|INSERT|2|B|0|ENDBLK|0|BLOCK|2|B|0|LINE|11|1|0|INSERT|2|a|0|ENDBLK";
    let error = try_sketch(&sections("", blocks, "0|INSERT|2|A")).unwrap_err();
    assert_eq!(error.kind, Kind::Input);
    insta::assert_snapshot!(error, @r"
        part.dxf, line 38: block “a” contains itself
          explode the block in the drawing program and export again
        ");
}

/// A block that nothing inserts may be as broken as it likes.
#[test]
fn blocks_that_are_not_used_do_not_matter() {
    let blocks = "0|BLOCK|2|A|0|INSERT|2|A|0|LINE|10|nan|0|ENDBLK";
    let read = sketch(&sections("", blocks, "0|LINE|11|5"));
    assert!((length(&read) - 5.0).abs() < 1e-9, "{}", length(&read));
}

#[test]
fn blocks_nested_without_end_are_refused_whatever_their_number() {
    let count = 200_000;
    let nested: String =
        (0..count).map(|i| lines(&format!("0|BLOCK|2|B{i}|0|INSERT|2|B{}|0|ENDBLK", i + 1))).collect();
    let all = drawing("0|INSERT|2|B0").replacen("0\nSECTION\n2\nENTITIES", &in_blocks(&nested), 1);
    let error = try_sketch(&all).unwrap_err();
    assert!(error.kind == Kind::Input && error.what.contains("more than 64 deep"), "{error}");
}

#[test]
fn block_references_that_multiply_without_bound_are_refused() {
    let tenfold: String = (0..12)
        .map(|i| {
            let insert = format!("0|INSERT|2|B{}|70|10", i + 1);
            lines(&format!("0|BLOCK|2|B{i}|{insert}|0|ENDBLK"))
        })
        .collect();
    let last = lines("0|BLOCK|2|B12|0|LINE|11|1|0|ENDBLK");
    let all = drawing("0|INSERT|2|B0").replacen("0\nSECTION\n2\nENTITIES", &in_blocks(&(tenfold + &last)), 1);
    let error = try_sketch(&all).unwrap_err();
    assert!(error.kind == Kind::Input && error.what.contains("more than 500000 entities"), "{error}");
}

#[test]
fn a_huge_grid_of_an_empty_block_is_refused() {
    let blocks = "0|BLOCK|2|Empty|0|ENDBLK";
    let error = try_sketch(&sections("", blocks, "0|INSERT|2|Empty|70|32767|71|32767")).unwrap_err();
    assert!(error.what.contains("more than 500000 entities"), "{error}");
}

fn in_blocks(contents: &str) -> String {
    format!("0\nSECTION\n2\nBLOCKS\n{contents}0\nENDSEC\n0\nSECTION\n2\nENTITIES")
}
