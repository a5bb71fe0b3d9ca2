//! Files made to harm: whatever stands in them, the reader answers with a sketch or an error, soon.

use proptest::prelude::*;

use crate::{drawing, try_sketch};

/// Group codes that mean something to some entity, and a few that do not.
const CODES: [i32; 36] = [
    -5, 0, 1, 2, 5, 6, 8, 10, 11, 12, 13, 20, 21, 30, 38, 39, 40, 41, 42, 43, 44, 45, 48, 50, 51, 60, 62, 66,
    67, 70, 71, 72, 73, 74, 101, 210,
];

const VALUES: [&str; 22] = [
    "0",
    "1",
    "-1",
    "2",
    "3",
    "4",
    "8",
    "16",
    "64",
    "128",
    "0.5",
    "1e-300",
    "1e300",
    "-7.25",
    "90",
    "360",
    "32767",
    "B",
    "LINE",
    "",
    "nan",
    "99999999999999999999",
];

const KINDS: [&str; 14] = [
    "LINE",
    "ARC",
    "CIRCLE",
    "ELLIPSE",
    "LWPOLYLINE",
    "POLYLINE",
    "VERTEX",
    "SEQEND",
    "SPLINE",
    "INSERT",
    "ATTRIB",
    "BLOCK",
    "ENDBLK",
    "ENDSEC",
];

fn group() -> impl Strategy<Value = String> {
    (prop::sample::select(&CODES[..]), prop::sample::select(&VALUES[..]))
        .prop_map(|(c, v)| format!("{c}\n{v}\n"))
}

fn entity() -> impl Strategy<Value = String> {
    let groups = prop::collection::vec(group(), 0..14).prop_map(|groups| groups.concat());
    (prop::sample::select(&KINDS[..]), groups).prop_map(|(kind, groups)| format!("0\n{kind}\n{groups}"))
}

fn entities() -> impl Strategy<Value = String> {
    prop::collection::vec(entity(), 0..12).prop_map(|entities| entities.concat())
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(500))]

    #[test]
    fn groups_in_any_mixture(blocks in entities(), entities in entities()) {
        let text = format!(
            "0\nSECTION\n2\nBLOCKS\n0\nBLOCK\n2\nB\n{blocks}0\nENDBLK\n0\nENDSEC\n0\nSECTION\n2\nENTITIES\n\
             {entities}0\nENDSEC\n0\nEOF\n"
        );
        if let Ok(sketch) = try_sketch(&text) {
            let finite = sketch.contours.iter().flat_map(|c| &c.path.vertices).all(|v| v.at.is_finite());
            prop_assert!(finite, "a coordinate that is no number");
        }
    }

    #[test]
    fn one_line_replaced(line in 0..60_usize, value in "\\PC{0,12}") {
        let whole = drawing("0|LWPOLYLINE|8|0|70|1|10|0|20|0|42|1|10|9|20|0|0|SPLINE|71|1|40|0|40|0|40|1|40|1|\
                             10|0|20|0|10|5|20|5|0|CIRCLE|40|3");
        let lines: Vec<&str> = whole.lines().enumerate().map(|(i, l)| if i == line { &*value } else { l }).collect();
        if let Err(error) = try_sketch(&(lines.join("\n") + "\n")) {
            prop_assert!(!error.what.is_empty() && error.line <= lines.len(), "{error}");
        }
    }
}

#[test]
fn a_long_spline_of_far_points_ends() {
    let controls: String =
        (0..200).map(|i| format!("|10|{}|20|{}", i % 7 * 1_000_000, i % 5 * 1_000_000)).collect();
    let knots: String = (0..204).map(|k| format!("|40|{k}")).collect();
    let text = drawing(&format!("0|SPLINE|70|8|71|3{knots}{controls}"));
    let sketch = try_sketch(&text).unwrap();
    // A 10^-8th of the size, which is beyond 50 m.
    assert!(sketch.sampling_mm <= 0.06, "{}", sketch.sampling_mm);
}

#[test]
fn huge_radii_and_tiny_bulges_keep_their_ends() {
    for bulge in [1e-12, 1e-300, 1e12, -1e-9] {
        let text = drawing(&format!("0|LWPOLYLINE|10|0|20|0|42|{bulge:e}|10|100|20|0"));
        if let Ok(sketch) = try_sketch(&text) {
            let ends = &sketch.contours[0].path.vertices;
            assert!((ends[1].at.x - 100.0).abs() < 1e-9, "{bulge:e}: {ends:?}");
        }
    }
}

#[test]
fn weights_too_far_apart_are_refused_and_others_read() {
    let rows = [
        ("1e300", "1e-300", false),
        ("1e308", "1", false),
        ("1", "1e-20", false),
        ("1e-300", "1e-308", true),
        ("1", "1e-6", true),
    ];
    for (heavy, light, readable) in rows {
        let text = drawing(&format!(
            "0|SPLINE|71|2|40|0|40|0|40|0|40|1|40|1|40|1|41|{heavy}|41|{light}|41|{heavy}|\
             10|0|20|0|10|5|20|5|10|9|20|0"
        ));
        assert!(try_sketch(&text).is_ok() == readable, "{heavy} {light}");
    }
}
