//! Point lists through the public door.
#![expect(clippy::float_cmp, reason = "numbers that are exact must come through exactly")]

use ribband::error::{Error, Kind};
use ribband::read::{Scale, Unit, read};
use ribband::sketch::Sketch;

fn scale() -> Scale {
    Scale { drawing_unit: Some(Unit::Mm), ..Scale::default() }
}

fn sketch(text: &str) -> Sketch {
    read("t.csv", text.as_bytes(), &scale()).unwrap_or_else(|e| panic!("{text:?}: {e}"))
}

fn error(text: &[u8]) -> Error {
    match read("t.csv", text, &scale()) {
        Ok(_) => panic!("{:?} was read", String::from_utf8_lossy(text)),
        Err(error) => error,
    }
}

/// The points of each contour and whether it is closed.
fn contours(sketch: &Sketch) -> Vec<(Vec<(f64, f64)>, bool)> {
    let points = |c: &ribband::sketch::Contour| c.path.vertices.iter().map(|v| (v.at.x, v.at.y)).collect();
    sketch.contours.iter().map(|c| (points(c), c.path.closed)).collect()
}

#[test]
fn every_way_to_write_two_points() {
    let rows = [
        "1,2\n3,4\n",
        "1,2\n3,4",
        "1,2\r\n3,4\r\n",
        "1,2\r3,4\r",
        "1;2\n3;4\n",
        "1\t2\n3\t4\n",
        "1 2\n3 4\n",
        "  1   2  \n\t3 \t 4\n",
        "1 , 2\n3 ; 4\n",
        "+1,2.0\n3.,4e0\n",
        "1.000,2\n30e-1,.4E+1\n",
        "x,y\n1,2\n3,4\n",
        "X [mm];Y [mm]\n1;2\n3;4\n",
        "\"x\",\"y\"\n1,2\n3,4\n",
        "# a trace\n; more\n// and more\n1,2\n# between\n3,4\n",
        "1,2 # here\n3,4 // there\n",
        "\n\n1,2\n3,4\n\n\n",
        "\u{feff}1,2\n3,4\n",
        "1.0000000000000000000001,2\n3,4.00000000000000000000001\n",
        "1,2\n3,4\n\u{1a}",
    ];
    for row in rows {
        assert_eq!(contours(&sketch(row)), [(vec![(1.0, 2.0), (3.0, 4.0)], false)], "{row:?}");
    }
}

#[test]
fn utf_16_is_read() {
    let text = "x,y\n1,2\n3,4\n";
    let little: Vec<u8> =
        [0xff, 0xfe].into_iter().chain(text.encode_utf16().flat_map(u16::to_le_bytes)).collect();
    let big: Vec<u8> =
        [0xfe, 0xff].into_iter().chain(text.encode_utf16().flat_map(u16::to_be_bytes)).collect();
    for bytes in [little, big] {
        let read = read("t.csv", &bytes, &scale()).expect("UTF-16 with a mark is read");
        assert_eq!(contours(&read), contours(&sketch(text)), "the same points");
    }
}

#[test]
fn blank_lines_part_contours_and_a_repeated_first_point_closes() {
    let read = sketch("0,0\n4,0\n4,3\n0,0\n\n10,0\n11,0\n,\n  \n20,0\n20,1\n20,0\n");
    let square = (vec![(0.0, 0.0), (4.0, 0.0), (4.0, 3.0)], true);
    let line = (vec![(10.0, 0.0), (11.0, 0.0)], false);
    let there_and_back = (vec![(20.0, 0.0), (20.0, 1.0), (20.0, 0.0)], false);
    assert_eq!(contours(&read), [square, line, there_and_back]);
    let lines: Vec<usize> = read.contours.iter().map(|c| c.place.line).collect();
    assert_eq!(lines, [1, 6, 10]);
    assert_eq!(read.contours.iter().map(|c| c.id).collect::<Vec<_>>(), [1, 2, 3]);
}

#[test]
fn a_single_point_among_contours_is_told() {
    let read = sketch("0,0\n1,0\n\n5,5\n\n7,7\n7,7\n\n2,2\n3,3\n");
    assert_eq!(read.contours.len(), 2);
    assert_eq!(
        read.notes,
        [
            "the single point on line 4 is no contour and is left out",
            "1 element without length left out, the first a point list on line 6"
        ]
    );
}

#[test]
fn bad_lines_are_refused_with_their_place() {
    let rows: [(&[u8], usize, &str); 22] = [
        (b"1,2\nnan,4\n", 2, "\"nan\" is not a coordinate"),
        (b"nan,nan\n1,2\n", 1, "\"nan\" is not a coordinate"),
        (b"1,2\n3,inf\n", 2, "\"inf\" is not a coordinate"),
        (b"1,2\n3,-Infinity\n", 2, "\"-Infinity\" is not a coordinate"),
        (b"1,2\n1e400,4\n", 2, "\"1e400\" is a number too large to be a coordinate"),
        (b"1,2\n4,-1e400\n", 2, "\"-1e400\" is a number too large to be a coordinate"),
        (b"1,2\n3\n", 2, "\"3\" has 1 number where x and y are wanted"),
        (b"1,2\n3,4,5\n", 2, "\"3,4,5\" has 3 numbers where x and y are wanted"),
        (
            b"1,5;2,5\n",
            1,
            "\"1,5;2,5\" has 4 numbers where x and y are wanted (decimal commas? write points instead)",
        ),
        (b"1,2\n3,4x\n", 2, "cannot read \"3,4x\" as an x and a y"),
        (b"1,2\n3,,4\n", 2, "cannot read \"3,,4\" as an x and a y"),
        (b"1,2\n0x10,4\n", 2, "cannot read \"0x10,4\" as an x and a y"),
        (b"1,2\n1.2.3,4\n", 2, "cannot read \"1.2.3,4\" as an x and a y"),
        (b"1,2\n--3,4\n", 2, "cannot read \"--3,4\" as an x and a y"),
        (b"1,2\nx,y\n3,4\n", 2, "cannot read \"x,y\" as an x and a y"),
        (b"x,y\nx,y\n3,4\n", 2, "cannot read \"x,y\" as an x and a y"),
        (b"1,2\n3,\xff\xfe\n", 2, "cannot read \"3,\u{fffd}\u{fffd}\" as an x and a y"),
        (b"", 0, "the file is empty"),
        (b" \n\t\r\n", 0, "the file is empty"),
        (b"x,y\n", 0, "the point list holds no points"),
        (b"x,y\n1,2\n", 0, "the point list holds a single point; a contour needs two"),
        (b"1,2\n\x00\x01\x02", 0, "this is not text: byte 5 is 0x00"),
    ];
    for (text, line, what) in rows {
        let e = error(text);
        let shown = String::from_utf8_lossy(text);
        assert_eq!((e.kind, e.line, e.what.as_str()), (Kind::Input, line, what), "{shown:?}");
        assert_eq!(e.file, "t.csv", "{shown:?}");
        assert!(!e.remedy.is_empty(), "{shown:?} leaves the user without a way out");
    }
}

#[test]
fn points_without_a_unit_are_refused_with_the_size_in_each() {
    let refused = read("t.csv", b"0,0\n96,48\n", &Scale::default()).expect_err("the unit is unknown");
    assert_eq!(refused.kind, Kind::Refused);
    insta::assert_snapshot!(refused.to_string(), @r"
    t.csv: the drawing does not say how large one unit is
      it would be 96.0 x 48.0 mm with --drawing-unit mm, 2438.4 x 1219.2 mm with --drawing-unit in, 25.4 x 12.7 mm with --drawing-unit px; or give the finished width with --fit-width
    ");
}

#[test]
fn scales_multiply_and_fit() {
    let text = b"0,0\n10,5\n";
    let wide = |scale: &Scale| {
        let read = read("t.csv", text, scale).expect("a good scale");
        (read.bbox().expect("a box").width(), read.mm_per_unit, read.scale_from)
    };
    let inch = Scale { drawing_unit: Some(Unit::Inch), ..Scale::default() };
    assert_eq!(wide(&inch), (snapped(254.0), 25.4, "--drawing-unit in".into()));
    let half = Scale { scale: 0.5, ..inch };
    assert_eq!(wide(&half), (snapped(127.0), 12.7, "--drawing-unit in, --scale 0.5".into()));
    let fit = Scale { fit_width_mm: Some(300.0), ..Scale::default() };
    assert_eq!(wide(&fit), (300.0, 30.0, "--fit-width 300 mm".into()));
}

fn snapped(mm: f64) -> f64 {
    ribband::sketch::snap(mm)
}

#[test]
fn impossible_scales_are_settings_errors() {
    let rows = [
        Scale { scale: 0.0, ..scale() },
        Scale { scale: -1.0, ..scale() },
        Scale { scale: f64::NAN, ..scale() },
        Scale { fit_width_mm: Some(0.0), ..scale() },
        Scale { fit_width_mm: Some(100.0), scale: 2.0, ..scale() },
        Scale { fit_width_mm: Some(f64::INFINITY), ..scale() },
        Scale { layers: Some(vec!["cut".into()]), ..scale() },
    ];
    for row in rows {
        let refused = read("t.csv", b"0,0\n1,1\n", &row).expect_err("an impossible scale");
        assert_eq!(refused.kind, Kind::Settings, "{row:?}");
    }
    let no_width = Scale { fit_width_mm: Some(10.0), ..Scale::default() };
    let refused = read("t.csv", b"0,0\n0,1\n", &no_width).expect_err("no width to fit");
    assert_eq!(refused.kind, Kind::Refused);
}

#[test]
fn coordinates_beyond_reason_are_refused() {
    let e = error(b"0,0\n1e300,1\n");
    assert_eq!(e.kind, Kind::Input);
    assert!(e.what.contains("cannot be meant"), "{e}");
}

/// Long lists are read in pieces: a break, a comment, an error or a fault of counting at their seams would show here.
#[test]
fn pieces_join_seamlessly() {
    let mut text = String::from("x,y\n");
    let mut wanted = Vec::new();
    for i in 0..60_500_u32 {
        let (x, y) = (f64::from(i) / 8.0, f64::from(i % 97) / 4.0);
        if i % 1000 == 999 {
            text.push('\n');
        }
        if i % 313 == 0 {
            text.push_str("# remark\n");
        }
        if i % 1000 == 999 || i == 0 {
            wanted.push((text.lines().count() + 1, Vec::new()));
        }
        text.push_str(&format!("{x},{y}\n"));
        wanted.last_mut().expect("a contour is open").1.push((x, y));
    }
    let read = sketch(&text);
    let found: Vec<(usize, Vec<(f64, f64)>)> =
        read.contours.iter().zip(contours(&read)).map(|(c, (points, _))| (c.place.line, points)).collect();
    for (found, wanted) in found.iter().zip(&wanted) {
        assert_eq!(found.0, wanted.0, "lines of the contours' starts");
        assert!(
            found.1 == wanted.1,
            "points of the contour on line {} differ: {:?} {:?}",
            wanted.0,
            found.1.len(),
            wanted.1.len()
        );
    }
    assert_eq!(found.len(), wanted.len(), "number of contours");

    let lines = text.lines().count();
    text.push_str("1,nan\n");
    assert_eq!(error(text.as_bytes()).line, lines + 1);
}

proptest::proptest! {
    /// The fast path and the grammar give the very double that the standard library's exact reading gives.
    #[test]
    fn numbers_are_read_exactly(mantissa in 0_u64..=u64::MAX, decimals in 0_usize..25, negative: bool) {
        let digits = format!("{mantissa:0>25}");
        let (whole, fraction) = digits.split_at(digits.len() - decimals.min(digits.len()));
        let text = format!("{}{}.{fraction}", if negative { "-" } else { "" }, whole);
        let exact: f64 = text.parse().expect("a number");
        // A unit so small that nothing is beyond reason; the ratio of two widths tells one coordinate.
        let drawing = ribband::read::read_drawing(format!("{text},0\n{text}0,1\n").as_bytes()).expect("two points");
        match &drawing.elements[0].chain.curves[0] {
            ribband::read::Curve::Spans(v) => {
                proptest::prop_assert_eq!(v[0].at.x, exact);
                proptest::prop_assert_eq!(v[1].at.x, format!("{text}0").parse::<f64>().expect("a number"));
            }
            other => panic!("{other:?}"),
        }
    }

    /// No bytes whatever make the reader panic.
    #[test]
    fn any_bytes_are_read_or_refused(bytes in proptest::collection::vec(proptest::num::u8::ANY, 0..200)) {
        if let Err(e) = read("t", &bytes, &scale()) {
            proptest::prop_assert!(!e.what.is_empty(), "an error says what is wrong");
        }
    }

    /// Nor does any text made of what point lists are made of.
    #[test]
    fn any_near_list_is_read_or_refused(text in "[-+0-9.,; \t\nexyan#]{0,80}") {
        if let Err(e) = read("t", text.as_bytes(), &scale()) {
            proptest::prop_assert!(!e.what.is_empty(), "an error says what is wrong");
        }
    }
}
