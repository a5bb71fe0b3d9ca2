//! The text of the file: line ends, comments, code pages, units, and what is broken.

use ribband::error::{Error, Kind};
use ribband::read::{Scale, read};

use crate::{drawing, length, lines, sketch, try_sketch};

/// The names of the layers of a file given in bytes.
fn layers(bytes: &[u8]) -> Vec<String> {
    let read = read("part.dxf", bytes, &Scale::default()).unwrap();
    read.contours.into_iter().map(|c| c.layer).collect()
}

/// A file with one LINE on `layer`, of the given version and code page.
fn on_layer(version: &str, page: &str, layer: &[u8]) -> Vec<u8> {
    let head = lines(&format!(
        "0|SECTION|2|HEADER|9|$ACADVER|1|{version}|9|$DWGCODEPAGE|3|{page}|9|$INSUNITS|70|4|0|ENDSEC|\
         0|SECTION|2|ENTITIES|0|LINE|8"
    ));
    [head.as_bytes(), layer, lines("|11|5|0|ENDSEC|0|EOF").as_bytes()].concat()
}

#[test]
fn line_ends_comments_and_what_follows_the_end() {
    let plain = drawing("0|LINE|8|0|11|5");
    let rows = [
        plain.replace('\n', "\r\n"),
        plain.replace('\n', "\r"),
        plain.trim_end().to_owned(),
        format!("999\na comment\n{plain}"),
        plain.replace("0\nLINE\n", "0\nLINE\n999\n0\n"),
        format!("{plain}what comes after\nthe end mark\ndoes not matter"),
        format!("\u{feff}{plain}"),
        plain.replace("8\n0\n", "8\n\n"),
    ];
    for text in rows {
        let read = sketch(&text);
        assert!((length(&read) - 5.0).abs() < 1e-9 && read.notes.is_empty(), "{text:?}: {:?}", read.notes);
    }
}

#[test]
fn a_minimal_file_holds_entities_only() {
    let read = sketch(&lines("0|SECTION|2|ENTITIES|0|LINE|11|5|0|ENDSEC|0|EOF"));
    assert!((length(&read) - 5.0).abs() < 1e-9, "{}", length(&read));
}

#[test]
fn names_in_every_code_page() {
    assert_eq!(layers(&on_layer("AC1015", "ANSI_1252", b"Au\xdfen")), ["Außen"]);
    assert_eq!(layers(&on_layer("AC1015", "ANSI_1251", b"\xea\xf0\xf3\xe3")), ["круг"]);
    assert_eq!(layers(&on_layer("AC1015", "ansi_932", b"\x8a\x4f")), ["外"]);
    assert_eq!(layers(&on_layer("AC1021", "ANSI_1252", "Außen".as_bytes())), ["Außen"]);
    assert_eq!(layers(&on_layer("AC1021", "ANSI_1252", b"Au\xdfen")), ["Außen"]);
    assert_eq!(layers(&on_layer("AC1009", "dos850", "Außen".as_bytes())), ["Außen"]);
    assert_eq!(layers(&on_layer("AC1009", "dos850", b"Au\xdfen")), ["Außen"]);
    assert_eq!(layers(&on_layer("AC1015", "ANSI_1252", b"Au\\U+00DFen \\U+5916")), ["Außen 外"]);
    assert_eq!(layers(&on_layer("AC1015", "ANSI_1252", b"\\U+00")), ["\\U+00"]);
    assert_eq!(layers(&on_layer("AC1015", "ANSI_1252", b"\\U+D800")), ["\\U+D800"]);
}

/// Millimetres in a drawing unit: DXF reference, `$INSUNITS`; the lengths themselves by their definitions.
#[test]
fn units_of_the_header() {
    let rows = [
        (1, 25.4),
        (2, 304.8),
        (4, 1.0),
        (5, 10.0),
        (6, 1000.0),
        (9, 0.0254),
        (10, 914.4),
        (13, 0.001),
        (14, 100.0),
        (21, 304.800_609_601_219),
        (22, 25.400_050_800_101_6),
    ];
    for (code, mm) in rows {
        let text = drawing("0|LINE|11|1").replace("70\n4\n", &format!("70\n{code}\n"));
        let read = read("part.dxf", text.as_bytes(), &Scale::default()).unwrap();
        assert!((read.mm_per_unit / mm - 1.0).abs() < 1e-14, "{code}: {}", read.mm_per_unit);
        assert!(read.scale_from.starts_with(&format!("$INSUNITS {code} (")), "{}", read.scale_from);
    }
}

#[test]
fn without_a_unit_the_drawing_is_refused_until_one_is_given() {
    let plain = drawing("0|LINE|11|50");
    for unit in ["70\n0\n", "70\n99\n"] {
        let text = plain.replace("70\n4\n", unit);
        let error = read("part.dxf", text.as_bytes(), &Scale::default()).unwrap_err();
        assert!(error.kind == Kind::Refused && error.remedy.contains("--drawing-unit"), "{error}");
        assert!((length(&sketch(&text)) - 50.0).abs() < 1e-9, "{unit:?} with --drawing-unit mm");
    }
    let unknown = sketch(&plain.replace("70\n4\n", "70\n99\n"));
    assert!(unknown.notes[0].contains("$INSUNITS 99"), "{:?}", unknown.notes);
}

fn error(text: &str) -> Error {
    let error = try_sketch(text).expect_err(text);
    assert!(error.kind == Kind::Input && error.file == "part.dxf" && !error.remedy.is_empty(), "{error}");
    error
}

#[test]
fn numbers_that_are_none_are_refused_with_their_line() {
    for number in ["nan", "NaN", "inf", "-infinity", "1e400", "1,5", "0x10", "1e", "--1", "", "12 mm", "１"]
    {
        let error = error(&drawing(&format!("0|LINE|8|0|11|{number}")));
        assert!(error.line == 24 && error.what.contains("group 11"), "{number}: {error}");
    }
    for whole in ["1.5", "x", "1e300"] {
        let error = error(&drawing(&format!("0|LWPOLYLINE|70|{whole}|10|0|20|0|10|5|20|0")));
        assert!(error.line == 22 && error.what.contains("a whole number"), "{whole}: {error}");
    }
}

#[test]
fn coordinates_that_overflow_are_refused() {
    let block = "0|BLOCK|2|B|0|LINE|11|1e300|0|ENDBLK";
    let text = crate::sections("", block, "0|INSERT|2|B|41|1e300");
    assert!(error(&text).what.contains("beyond all bounds"), "{}", error(&text));
    assert!(error(&drawing("0|LINE|11|1e12")).what.contains("cannot be meant"));
}

/// A file cut at any line is refused, or read with a word where all its sections are whole.
#[test]
fn files_cut_short_are_never_read_as_whole() {
    let whole = drawing("0|LINE|8|0|11|5|0|LINE|8|0|10|5|11|5|21|5");
    let count = whole.lines().count();
    let first_lines = |n: usize| whole.lines().take(n).map(|line| line.to_owned() + "\n").collect::<String>();
    for n in 1..count - 2 {
        let error = error(&first_lines(n));
        assert!(error.line <= n, "{n}: {error}");
    }
    let unended = sketch(&first_lines(count - 2));
    assert!(unended.notes[0].contains("EOF"), "{:?}", unended.notes);
}

#[test]
fn binary_dxf_is_refused_with_a_way_out() {
    let bytes = b"AutoCAD Binary DXF\r\n\x1a\0\0\0SECTION\0";
    let error = read("part.dxf", bytes, &Scale::default()).unwrap_err();
    assert!(error.kind == Kind::Input && error.what.contains("binary"), "{error}");
    assert!(error.remedy.contains("ASCII"), "{error}");
}
