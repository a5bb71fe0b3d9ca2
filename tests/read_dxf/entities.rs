//! Entities one by one: what each row draws, and the traps of their groups.

use std::f64::consts::{PI, TAU};

use kurbo::Point;

use crate::{box_error, drawing, length, lines, sections, sketch, spans, try_sketch};

/// A row: what it shows, its groups, its length and its box in mm.
type Row = (&'static str, &'static str, f64, [f64; 4]);

/// Lines of 10 mm, and arcs with the chord (0,0)-(10,0).
#[rustfmt::skip]
const ROWS: &[Row] = &[
    ("LINE", "0|LINE|8|0|10|1|20|2|11|4|21|6", 5.0, [1.0, 2.0, 4.0, 6.0]),
    ("LINE in world coordinates whatever its extrusion", "0|LINE|8|0|10|1|20|2|11|4|21|6|210|0|220|0|230|-1", 5.0, [1.0, 2.0, 4.0, 6.0]),
    ("groups in any order", "0|LINE|21|6|11|4|20|2|8|0|10|1", 5.0, [1.0, 2.0, 4.0, 6.0]),
    ("groups left out are 0", "0|LINE|8|0|11|10", 10.0, [0.0, 0.0, 10.0, 0.0]),
    ("blanks around codes and values", "  0|LINE|  8|0| 10| 1.0 | 20|2.|11|+4|21|6e0", 5.0, [1.0, 2.0, 4.0, 6.0]),
    ("groups of other programs", "0|LINE|102|{OTHER|10|99|102|}|10|1|20|2|11|4|21|6|1001|OTHER|1010|7", 5.0, [1.0, 2.0, 4.0, 6.0]),
    ("CIRCLE", "0|CIRCLE|8|0|10|5|20|6|40|2", 2.0 * TAU, [3.0, 4.0, 7.0, 8.0]),
    ("CIRCLE seen from below", "0|CIRCLE|8|0|10|5|20|6|40|2|230|-1", 2.0 * TAU, [-7.0, 4.0, -3.0, 8.0]),
    ("ARC from 350 to 10 degrees is 20 degrees", "0|ARC|8|0|10|0|20|0|40|9|50|350|51|10", PI, [8.863269777109872, -1.562833599002374, 9.0, 1.562833599002374]),
    ("ARC seen from below: ends (-8,2) and (-5,5)", "0|ARC|8|0|10|5|20|2|40|3|50|0|51|90|210|0|220|0|230|-1", 1.5 * PI, [-8.0, 2.0, -5.0, 5.0]),
    ("ARC of no sweep is a whole circle", "0|ARC|8|0|10|0|20|0|40|1|50|30|51|390", TAU, [-1.0, -1.0, 1.0, 1.0]),
    ("LWPOLYLINE, open", "0|LWPOLYLINE|8|0|90|3|70|0|10|0|20|0|10|10|20|0|10|10|20|10", 20.0, [0.0, 0.0, 10.0, 10.0]),
    ("LWPOLYLINE, closed", "0|LWPOLYLINE|8|0|90|3|70|1|10|0|20|0|10|10|20|0|10|10|20|10", 34.14213562373095, [0.0, 0.0, 10.0, 10.0]),
    ("a wrong count (group 90)", "0|LWPOLYLINE|8|0|90|99|70|0|10|0|20|0|10|10|20|0|10|10|20|10", 20.0, [0.0, 0.0, 10.0, 10.0]),
    ("linetype bit without closed bit", "0|LWPOLYLINE|8|0|70|128|10|0|20|0|10|10|20|0|10|10|20|10", 20.0, [0.0, 0.0, 10.0, 10.0]),
    ("first vertex repeated although closed", "0|LWPOLYLINE|70|1|10|0|20|0|10|10|20|0|10|10|20|10|10|0|20|0", 34.14213562373095, [0.0, 0.0, 10.0, 10.0]),
    ("bulge on the last vertex of an open one", "0|LWPOLYLINE|70|0|10|0|20|0|10|10|20|0|42|1", 10.0, [0.0, 0.0, 10.0, 0.0]),
    ("bulge on the last vertex of a closed one", "0|LWPOLYLINE|70|1|10|0|20|0|10|10|20|0|42|1", 10.0 + 5.0 * PI, [0.0, 0.0, 10.0, 5.0]),
    ("bulge to the right of the chord", "0|LWPOLYLINE|70|0|10|0|20|0|42|1|10|10|20|0", 5.0 * PI, [0.0, -5.0, 10.0, 0.0]),
    ("bulge before its vertex's y", "0|LWPOLYLINE|70|0|10|0|42|1|20|0|10|10|20|0", 5.0 * PI, [0.0, -5.0, 10.0, 0.0]),
    ("bulge seen from below turns over", "0|LWPOLYLINE|70|0|10|0|20|0|42|1|10|10|20|0|210|0|220|0|230|-1", 5.0 * PI, [-10.0, -5.0, 0.0, 0.0]),
    ("widths and elevation are no geometry", "0|LWPOLYLINE|38|7|43|2|10|0|20|0|40|1|41|2|10|10|20|0", 10.0, [0.0, 0.0, 10.0, 0.0]),
    ("POLYLINE of R12", "0|POLYLINE|66|1|70|1|0|VERTEX|10|0|20|0|0|VERTEX|10|10|20|0|42|1|0|SEQEND", 10.0 + 5.0 * PI, [0.0, 0.0, 10.0, 5.0]),
    ("POLYLINE without SEQEND", "0|POLYLINE|70|0|0|VERTEX|10|0|20|0|0|VERTEX|10|10|20|0", 10.0, [0.0, 0.0, 10.0, 0.0]),
    ("POLYLINE spline-fit: frame vertices are skipped", "0|POLYLINE|70|4|75|6|0|VERTEX|10|0|20|50|70|16|0|VERTEX|10|0|20|0|70|8|0|VERTEX|10|10|20|0|70|8|0|VERTEX|10|5|20|50|70|16|0|SEQEND", 10.0, [0.0, 0.0, 10.0, 0.0]),
    ("POLYLINE curve-fit: all vertices are kept", "0|POLYLINE|70|2|0|VERTEX|10|0|20|0|42|1|70|0|0|VERTEX|10|10|20|0|70|1|0|VERTEX|10|20|20|0|70|2|0|SEQEND", 10.0 + 5.0 * PI, [0.0, -5.0, 20.0, 0.0]),
    ("POLYLINE in space, level", "0|POLYLINE|70|8|0|VERTEX|10|0|20|0|30|4|70|32|0|VERTEX|10|10|20|0|30|4|70|32|0|SEQEND", 10.0, [0.0, 0.0, 10.0, 0.0]),
    ("ELLIPSE of ratio 1", "0|ELLIPSE|10|1|20|1|11|0|21|5|40|1|41|0|42|6.283185307179586", 10.0 * PI, [-4.0, -4.0, 6.0, 6.0]),
    ("ELLIPSE with 2 pi printed short", "0|ELLIPSE|10|1|20|1|11|0|21|5|40|1|41|0|42|6.2831853", 10.0 * PI, [-4.0, -4.0, 6.0, 6.0]),
    ("ELLIPSE arc whose parameters are close is short", "0|ELLIPSE|10|0|20|0|11|10000|21|0|40|1|41|0|42|0.000001", 0.01, [10000.0, 0.0, 10000.0, 0.01]),
    ("SPLINE of degree 1", "0|SPLINE|70|8|71|1|40|0|40|0|40|1|40|2|40|2|10|0|20|0|10|10|20|0|10|10|20|10", 20.0, [0.0, 0.0, 10.0, 10.0]),
];

#[test]
fn every_row_has_its_length_and_its_box() {
    for &(name, groups, wanted, bbox) in ROWS {
        let read = sketch(&drawing(groups));
        assert!(read.contours.len() == 1, "{name}: {} contours", read.contours.len());
        assert!((length(&read) - wanted).abs() < 1e-5, "{name}: length {}", length(&read));
        assert!(box_error(&read, bbox) < 2e-6, "{name}: box {:?}", read.bbox());
        assert!(read.notes.is_empty(), "{name}: {:?}", read.notes);
    }
}

/// Radius and sagitta of a chord of 10: r = c (1 + b^2) / (4 b), s = b c / 2 (DXF reference, bulge; the
/// values computed independently).
#[test]
fn bulge_values_of_the_table() {
    let rows = [
        (60.0_f64, 0.267949192, 10.0, 1.339745962),
        (90.0, 0.414213562, 7.071067812, 2.071067812),
        (180.0, 1.0, 5.0, 5.0),
        (270.0, 2.414213562, 7.071067812, 12.071067812),
    ];
    for (degrees, bulge, radius, sagitta) in rows {
        let read = sketch(&drawing(&format!("0|LWPOLYLINE|70|0|10|0|20|0|42|{bulge}|10|10|20|0")));
        let span = spans(&read)[0];
        assert!((span.radius() - radius).abs() < 1e-7, "{degrees}: radius {}", span.radius());
        assert!((span.sagitta() - sagitta).abs() < 1e-7, "{degrees}: sagitta {}", span.sagitta());
        assert!((span.length() - radius * degrees.to_radians()).abs() < 1e-6, "{degrees}: {}", span.length());
    }
}

#[test]
fn closed_contours_do_not_repeat_their_start() {
    let square = "10|0|20|0|10|10|20|0|10|10|20|10|10|0|20|10";
    for repeated in ["", "|10|0|20|0"] {
        let read = sketch(&drawing(&format!("0|LWPOLYLINE|70|1|{square}{repeated}")));
        let path = &read.contours[0].path;
        assert!(path.closed && path.vertices.len() == 4, "{:?}", path.vertices);
    }
    let circle = sketch(&drawing("0|CIRCLE|10|0|20|0|40|5"));
    assert!(circle.contours[0].path.closed && circle.contours[0].path.len() == 2, "a circle is two arcs");
}

#[test]
fn arcs_run_clockwise_when_seen_from_below() {
    let read = sketch(&drawing("0|ARC|10|5|20|2|40|3|50|0|51|90|230|-1"));
    let span = spans(&read)[0];
    assert!(span.bulge < 0.0, "bulge {}", span.bulge);
    assert!(span.start.distance(Point::new(-8.0, 2.0)) < 2e-6, "{:?}", span.start);
    assert!(span.end.distance(Point::new(-5.0, 5.0)) < 2e-6, "{:?}", span.end);
}

#[test]
fn what_is_no_outline_is_counted_by_name() {
    let entities = "0|TEXT|10|0|20|0|1|word|0|TEXT|10|0|20|0|1|word|0|ODDITY|10|1|0|HATCH|10|0|0|POINT|10|0|20|0|\
                    0|POLYLINE|70|16|71|2|72|2|0|VERTEX|10|0|70|64|0|SEQEND|\
                    0|POLYLINE|70|64|0|VERTEX|10|0|70|192|0|VERTEX|70|128|0|SEQEND|\
                    0|CIRCLE|10|0|20|0|40|0|0|LWPOLYLINE|10|3|20|3|0|LINE|11|5";
    insta::assert_snapshot!(sketch(&drawing(entities)).notes.join("\n"), @r"
    1 HATCH entity is not read
    1 ODDITY entity is not read
    1 POINT entity is not read
    1 POLYLINE mesh entity is not read
    1 POLYLINE polyface mesh entity is not read
    2 TEXT entities are not read
    1 CIRCLE entity is without length and not read
    1 LWPOLYLINE entity is without length and not read
    ");
}

#[test]
fn fit_points_alone_need_a_word() {
    let notes = sketch(&drawing("0|SPLINE|70|8|71|3|74|3|11|0|21|0|11|5|21|5|11|10|21|0")).notes;
    assert!(notes.len() == 1 && notes[0].contains("fit points alone"), "{notes:?}");
}

#[test]
fn a_spline_that_only_says_it_is_closed_stays_open() {
    let spline = "0|SPLINE|70|1|71|1|40|0|40|0|40|1|40|2|40|2|10|0|20|0|10|10|20|0|10|10|20|10";
    let read = sketch(&drawing(spline));
    assert!(!read.contours[0].path.closed, "closed across a gap");
    assert!(read.notes.iter().any(|n| n.contains("ends do not meet")), "{:?}", read.notes);
}

#[test]
fn broken_splines_say_why() {
    let rows = [
        ("0|SPLINE|71|3|40|0|40|1|10|0|20|0|10|1|20|0|10|2|20|0|10|3|20|0", "2 knots where 8 are needed"),
        ("0|SPLINE|71|1|40|0|40|1|40|0|40|1|10|0|20|0|10|1|20|0", "knots that do not rise"),
        (
            "0|SPLINE|71|1|40|0|40|0|40|1|40|1|41|1|41|0|10|0|20|0|10|1|20|0",
            "a weight that is not above zero",
        ),
        ("0|SPLINE|71|0|40|0|40|1|10|0|20|0", "degree 0"),
        ("0|SPLINE|71|99|40|0|40|1|10|0|20|0", "degree 99"),
    ];
    for (groups, why) in rows {
        let error = try_sketch(&drawing(groups)).expect_err(groups);
        assert!(
            error.line == 20 && error.what.contains(why) && !error.remedy.is_empty(),
            "{groups}: {error}"
        );
    }
}

#[test]
fn layers_off_frozen_and_locked() {
    let tables = "0|TABLE|2|LAYER|70|4|\
                  0|LAYER|2|Off|70|0|62|-3|0|LAYER|2|Frozen|70|1|62|3|0|LAYER|2|Locked|70|4|62|3|\
                  0|LAYER|2|NewViewports|70|2|62|3|0|LAYER|2|NoPlot|70|0|62|3|290|0|0|ENDTAB";
    let line = |layer: &str, y: f64| format!("|0|LINE|8|{layer}|20|{y}|11|5|21|{y}");
    let layers = ["OFF", "frozen", "Locked", "NewViewports", "NoPlot", "Unlisted", "0"];
    let entities: String = layers.iter().zip(1..).map(|(layer, y)| line(layer, f64::from(y))).collect();
    let read = sketch(&sections(tables, "", &entities[1..]));
    let kept: Vec<&str> = read.contours.iter().map(|c| c.layer.as_str()).collect();
    assert_eq!(kept, ["Locked", "NewViewports", "NoPlot", "Unlisted", "0"]);
    insta::assert_snapshot!(read.notes.join("\n"), @r"
    1 entity is not read: layer “OFF” is off or frozen
    1 entity is not read: layer “frozen” is off or frozen
    1 entity is read from layer “NoPlot”, which is not plotted
    ");
}

#[test]
fn invisible_and_paper_space_entities_are_left_out() {
    let read = sketch(&drawing("0|LINE|60|1|11|9|0|LINE|67|1|11|9|0|LINE|60|0|67|0|11|5"));
    assert!((length(&read) - 5.0).abs() < 1e-9, "{}", length(&read));
    insta::assert_snapshot!(read.notes.join("\n"), @r"
    1 entity is not read: marked invisible
    1 entity is not read: in paper space
    ");
}

#[test]
fn colours_come_from_the_entity_its_layer_or_its_block() {
    let tables = "0|TABLE|2|LAYER|0|LAYER|2|Red|62|1|0|LAYER|2|True|62|7|420|255|0|ENDTAB";
    let blocks = "0|BLOCK|2|B|0|LINE|8|Red|62|0|11|1|0|LINE|8|0|11|2|0|ENDBLK";
    let entities = "0|LINE|8|Red|11|1|0|LINE|8|Red|62|5|11|1|0|LINE|8|Red|62|5|420|16711680|11|1|\
                    0|LINE|8|True|11|1|0|LINE|8|Unlisted|11|1|0|INSERT|8|Red|2|B|62|4";
    let read = sketch(&sections(tables, blocks, entities));
    let colours: Vec<&str> = read.contours.iter().map(|c| c.colour.as_str()).collect();
    assert_eq!(colours, ["1", "5", "#ff0000", "#0000ff", "", "4", "1"]);
}

#[test]
fn every_contour_knows_its_place() {
    let read = sketch(&drawing("0|LINE|8|0|11|1|0|CIRCLE|8|Holes|40|1"));
    let places: Vec<_> = read
        .contours
        .iter()
        .map(|c| (c.id, c.layer.as_str(), c.place.element.as_str(), c.place.line))
        .collect();
    assert_eq!(places, [(1, "0", "LINE", 20), (2, "Holes", "CIRCLE", 26)]);
    assert_eq!(lines("0|LINE"), "0\nLINE\n");
}
