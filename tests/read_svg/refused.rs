//! Drawings that are refused, and that none of them harms.

use ribband::error::Kind;
use ribband::read::read;

use super::{mm, sketch, svg, try_sketch};

#[test]
fn broken_elements_are_refused_with_their_place() {
    let rows = [
        ("<path d='L1 1'/>", "path: the path data breaks off at \"L1 1\" where M or m is wanted"),
        ("<path d='M 10,10 L 20,20,30'/>", "path: the path data ends where a number is wanted"),
        ("<path d='M 0 0 L 1'/>", "path: the path data ends where a number is wanted"),
        (
            "<path d='M0 0 X 1 1'/>",
            "path: the path data breaks off at \"X 1 1\" where a path command is wanted",
        ),
        ("<path d='M0 0 1 1,'/>", "path: the path data ends where a number is wanted"),
        ("<path d='M0,,0'/>", "path: the path data breaks off at \",0\" where a number is wanted"),
        ("<path d='M0 0 L nan 1'/>", "path: the path data breaks off at \"nan 1\" where a number is wanted"),
        ("<path d='M0 0 L inf 1'/>", "path: the path data breaks off at \"inf 1\" where a number is wanted"),
        (
            "<path d='M0 0 L 1e400 1'/>",
            "path: the path data breaks off at \"1e400 1\": a number too large to be a coordinate",
        ),
        (
            "<path d='M0 0 A5 5 0 2 1 1 1'/>",
            "path: the path data breaks off at \"2 1 1 1\" where an arc flag, 0 or 1 is wanted",
        ),
        ("<path d='M0 0 A5 5 0 0 1 1'/>", "path: the path data ends where a number is wanted"),
        (
            "<path id='tail' d='M0 0 C1 1 2 2 3 3 4'/>",
            "path \"tail\": the path data ends where a number is wanted",
        ),
        (
            "<polyline points='0,0 1,x'/>",
            "polyline: the list of points breaks off at \"x\" where a number is wanted",
        ),
        ("<polygon points='0 0 1 1,'/>", "polygon: the list of points ends where a number is wanted"),
        ("<circle r='5em'/>", "circle: r: \"5em\" is in em, which has no fixed size here"),
        ("<circle r='five'/>", "circle: r: \"five\" is not a length"),
        ("<circle r='50%'/>", "circle: r: a length in % of a page whose size is not given"),
        (
            "<path transform='rotate(1 2)' d='M0 0H1'/>",
            "path: the transform \"rotate\" with 2 numbers is not understood",
        ),
        (
            "<path transform='turn(1)' d='M0 0H1'/>",
            "path: the transform \"turn\" with 1 numbers is not understood",
        ),
        ("<path transform='scale(2' d='M0 0H1'/>", "path: the transform breaks off at \"\""),
        ("<g id='a'><use href='#a'/></g>", "use: it draws itself within itself, without end"),
        ("<svg width='5' height='5' viewBox='0 0 5'/>", "svg: viewBox=\"0 0 5\" is not four numbers"),
    ];
    for (content, what) in rows {
        let text = svg(&format!("\n\n{content}"));
        let Err(error) = try_sketch(&text) else { panic!("{content} was read") };
        assert_eq!((error.kind, error.line, error.what.as_str()), (Kind::Input, 3, what), "{content}");
        assert!(!error.remedy.is_empty(), "{content} leaves no way out");
    }
}

#[test]
fn the_line_is_the_one_inside_a_long_attribute() {
    let text = svg("\n<path d='M0 0\nL 1 1\nL 2 x\nL 3 3'/>");
    let error = try_sketch(&text).expect_err("x is no number");
    assert_eq!(error.line, 4);
}

#[test]
fn documents_that_are_no_drawing() {
    let rows: [(&str, Kind, &str); 11] = [
        ("<svg", Kind::Input, "the XML is broken"),
        ("<svg><g>", Kind::Input, "the XML is cut short"),
        ("<svg><g></svg>", Kind::Input, "the XML is broken"),
        ("<html><body/></html>", Kind::Input, "its root is <html>, not <svg>"),
        ("<svg xmlns='http://www.w3.org/2000/svg'/>", Kind::Input, "holds nothing that can be cut"),
        ("<svg xmlns='urn:x'><path d='M0 0H1'/></svg>", Kind::Input, "its root is <svg>"),
        ("<svg width='0' height='5'><path d='M0 0H1'/></svg>", Kind::Input, "its width is not above zero"),
        ("<svg width='wide'><path d='M0 0H1'/></svg>", Kind::Input, "\"wide\" is not a length"),
        ("<svg viewBox='0 0 0 5'><path d='M0 0H1'/></svg>", Kind::Input, "its viewBox has no size"),
        ("<svg transform='scale(2)'><path d='M0 0H1'/></svg>", Kind::Input, "a transform of the whole page"),
        ("<svg><path d='M0 0H1e300'/></svg>", Kind::Input, "cannot be meant"),
    ];
    for (text, kind, what) in rows {
        let error = try_sketch(text).expect_err(text);
        assert_eq!(error.kind, kind, "{text}");
        assert!(error.what.contains(what), "{text}: {error}");
    }
}

#[test]
fn entities_that_multiply_are_refused() {
    let mut bomb = String::from("<!DOCTYPE svg [<!ENTITY a0 'aaaaaaaaaa'>");
    for i in 1..12 {
        bomb.push_str(&format!("<!ENTITY a{i} '{}'>", format!("&a{};", i - 1).repeat(10)));
    }
    bomb.push_str("]><svg><text>&a11;</text></svg>");
    let error = try_sketch(&bomb).expect_err("a bomb");
    assert_eq!(error.kind, Kind::Input);
    let plain = "<!DOCTYPE svg [<!ENTITY ns 'http://www.w3.org/2000/svg'>]><svg xmlns='&ns;'><path d='M0 0H1'/></svg>";
    assert_eq!(try_sketch(plain).expect("harmless entities are read").contours.len(), 1);
}

#[test]
fn uses_that_multiply_are_refused() {
    let long: String = (0..2000).map(|i| format!("<path d='M0 {i}{}'/>", "h1".repeat(50))).collect();
    let bomb = |depth: usize| {
        let mut text = format!("<g id='u0'>{long}</g>");
        for i in 1..=depth {
            let copies = format!("<use href='#u{}'/>", i - 1).repeat(5);
            text.push_str(&format!("<g id='u{i}'>{copies}</g>"));
        }
        svg(&format!("<defs>{text}</defs><use href='#u{depth}'/>"))
    };
    assert_eq!(try_sketch(&bomb(1)).expect("five copies are no bomb").contours.len(), 10_000);
    let error = try_sketch(&bomb(25)).expect_err("a bomb");
    assert!(error.what.contains("multiply the drawing"), "{error}");
}

#[test]
fn long_chains_of_use_are_refused_and_cycles_are_found_through_them() {
    let chain = |last: &str| {
        let links: String = (1..500).map(|i| format!("<use id='u{i}' href='#u{}'/>", i - 1)).collect();
        svg(&format!("<defs><g id='u0'>{last}</g>{links}</defs><use href='#u30'/><use href='#u499'/>"))
    };
    assert!(try_sketch(&chain("<path d='M0 0H1'/>")).expect_err("too deep").what.contains("deep"));
    assert!(try_sketch(&chain("<use href='#u7'/>")).expect_err("a cycle").what.contains("without end"));
}

#[test]
fn deep_nesting_does_not_overflow() {
    let deep = 100_000;
    let text = svg(&format!("{}<path d='M0 0H1'/>{}", "<g>".repeat(deep), "</g>".repeat(deep)));
    assert_eq!(sketch(&text).contours.len(), 1);
}

/// Products of transforms that leave the range of doubles, in every way a shape can be drawn.
#[test]
fn numbers_beyond_doubles_are_refused() {
    let shapes = [
        "<path d='M0 0L1 1'/>",
        "<path d='M0 0C1 1 2 2 3 0'/>",
        "<path d='M0 0Q1 1 2 0'/>",
        "<path d='M0 0A1 2 3 0 1 5 5'/>",
        "<circle r='1'/>",
        "<polygon points='0 0 1 1 2 0'/>",
    ];
    for shape in shapes {
        for transform in ["scale(1e200)", "matrix(1e200 -1e200 1e200 1e200 0 0)", "translate(1e308 -1e308)"] {
            let nested = format!("<g transform='{transform}'>").repeat(3) + shape + &"</g>".repeat(3);
            let error = try_sketch(&svg(&nested)).expect_err(&nested);
            assert_eq!(error.kind, Kind::Input, "{nested}: {error}");
        }
    }
}

#[test]
fn encodings() {
    let text = "<?xml version='1.0' encoding='ENC'?>\r\n<svg xmlns='http://www.w3.org/2000/svg'><g id='Füße'><path d='M0 0\r\nH1'/></g></svg>";
    let latin: Vec<u8> = text.replace("ENC", "iso-8859-1").chars().map(|c| c as u8).collect();
    let utf16: Vec<u16> = text.replace("ENC", "utf-16").encode_utf16().collect();
    let marked: Vec<u8> =
        [0xff, 0xfe].into_iter().chain(utf16.iter().flat_map(|u| u.to_le_bytes())).collect();
    let bare: Vec<u8> = utf16.iter().flat_map(|u| u.to_be_bytes()).collect();
    let utf8: Vec<u8> = "\u{feff}".bytes().chain(text.replace("ENC", "utf-8").bytes()).collect();
    for bytes in [latin, marked, bare, utf8] {
        let read = read("t.svg", &bytes, &mm()).unwrap_or_else(|e| panic!("{e}"));
        assert_eq!(read.contours[0].layer, "Füße");
        assert_eq!(read.contours[0].place.line, 2);
    }
    let wrong = read("t.svg", b"<svg><g id='F\xfc\xdfe'/></svg>", &mm()).expect_err("not UTF-8");
    assert!(wrong.what.contains("encoding"), "{wrong}");
}

#[test]
fn other_kinds_are_told_from_content_alone() {
    let rows: [(&[u8], &str); 3] = [
        (b"\x1f\x8b\x08\x00", "compressed"),
        (b"AutoCAD Binary DXF\r\n\x1a\x00", "binary form"),
        (b"\x89PNG\r\n\x1a\n\x00\x00", "not text"),
    ];
    for (bytes, what) in rows {
        let error = read("drawing.svg", bytes, &mm()).expect_err(what);
        assert_eq!(error.kind, Kind::Input);
        assert!(error.what.contains(what), "{error}");
    }
    let points = read("points.svg", b"0,0\n1,1\n", &mm()).expect("points, whatever the name says");
    assert_eq!(points.contours[0].place.element, "point list");
}

proptest::proptest! {
    /// A drawing with any of its bytes lost, doubled or changed is read or refused.
    #[test]
    fn any_damage_is_read_or_refused(file in 0..3_usize, at in 0.0..1.0_f64, cut in 0..40_usize, with in "\\PC{0,6}") {
        let file = ["s001.svg", "s045.svg", "s081.svg"][file];
        let path = format!("{}/fixtures/drawings/svg/{file}", env!("CARGO_MANIFEST_DIR"));
        let mut bytes = std::fs::read(path).expect("the fixture is there");
        let at = (at * bytes.len() as f64) as usize;
        let end = (at + cut).min(bytes.len());
        bytes.splice(at..end, with.bytes());
        if let Err(error) = read(file, &bytes, &mm()) {
            let lines = bytes.iter().filter(|b| **b == b'\n').count() + 1;
            proptest::prop_assert!(error.line <= lines && !error.remedy.is_empty(), "{error}");
        }
    }

    /// No path data, styles or transforms whatever make the reader panic or overflow.
    #[test]
    fn any_attribute_is_read_or_refused(
        d in "[-+0-9.,eE MmLlHhVvCcSsQqTtAaZz\\nx]{0,60}",
        style in "[-a-z:;!{}()#.,0-9@*\\[\\]>+~= \\\\/]{0,40}",
        transform in "[a-zA-Z(), 0-9.+e-]{0,40}",
    ) {
        let text = svg(&format!(
            "<style>{}</style><path d='{d}' style='{}'/><path transform='{transform}' d='M0 0L1 1'/>",
            style.replace('>', "&gt;"),
            style.replace('>', "&gt;"),
        ));
        if let Err(error) = try_sketch(&text) {
            proptest::prop_assert!(error.kind == Kind::Input, "{error}");
        }
    }
}
