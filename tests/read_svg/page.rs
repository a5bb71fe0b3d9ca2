//! The page: physical size, view boxes, nested viewports, `use` and `symbol`.

use ribband::error::Kind;
use ribband::read::{Scale, Unit, read};

use super::{contours, corners, only, sketch};

/// Where the user point (10, 20) comes to lie, in mm, and mm a unit.
fn placed(attributes: &str, scale: &Scale) -> (f64, f64, f64) {
    let text = format!("<svg xmlns='http://www.w3.org/2000/svg' {attributes}><path d='M10 20l1 1'/></svg>");
    let sketch = read("t.svg", text.as_bytes(), scale).unwrap_or_else(|e| panic!("{attributes}: {e}"));
    let at = sketch.contours[0].path.vertices[0].at;
    (at.x, at.y, sketch.mm_per_unit)
}

#[test]
fn the_page_gives_scale_and_zero() {
    let px = 25.4 / 96.0;
    let rows = [
        // One unit one millimetre; y from the page's bottom edge.
        ("width='100mm' height='50mm' viewBox='0 0 100 50'", (10.0, 30.0, 1.0)),
        ("width='10cm' height='5cm' viewBox='0 0 100 50'", (10.0, 30.0, 1.0)),
        ("width='200mm' height='100mm' viewBox='0 0 100 50'", (20.0, 60.0, 2.0)),
        ("width='4in' height='2in' viewBox='0 0 4000 2000'", (0.254, 50.292, 0.0254)),
        (
            "width='72pt' height='36pt' viewBox='0 0 72 36'",
            (10.0 * 25.4 / 72.0, 16.0 * 25.4 / 72.0, 25.4 / 72.0),
        ),
        (
            "width='6pc' height='6pc' viewBox='0 0 6 30'",
            (10.0 * 25.4 / 30.0 + 10.16, 10.0 * 25.4 / 30.0, 25.4 / 30.0),
        ),
        ("width='400Q' height='200Q' viewBox='0 0 100 50'", (10.0, 30.0, 1.0)),
        ("width='96px' height='96px'", (10.0 * px, 76.0 * px, px)),
        ("width='96' height='96'", (10.0 * px, 76.0 * px, px)),
        ("width='96' height='96' viewBox='0 0 48 48'", (20.0 * px, 56.0 * px, px)),
        ("width='100mm' height='100mm'", (10.0 * px, 100.0 - 20.0 * px, px)),
        // A view box that starts elsewhere.
        ("width='100mm' height='50mm' viewBox='-5 -10 100 50'", (15.0, 20.0, 1.0)),
        // One length given: the other by the view box.
        ("width='100mm' viewBox='0 0 100 50'", (10.0, 30.0, 1.0)),
        ("height='50mm' viewBox='0 0 100 50'", (10.0, 30.0, 1.0)),
        ("width='100mm' height='100%' viewBox='0 0 100 50'", (10.0, 30.0, 1.0)),
        ("style='width:100mm;height:50mm' viewBox='0 0 100 50'", (10.0, 30.0, 1.0)),
    ];
    for (attributes, (x, y, mm_per_unit)) in rows {
        let found = placed(attributes, &Scale::default());
        let close = (found.0 - x).abs() < 1e-6 && (found.1 - y).abs() < 1e-6;
        assert!(
            close && (found.2 - mm_per_unit).abs() < 1e-12,
            "{attributes}: {found:?}, not {x} {y} {mm_per_unit}"
        );
    }
}

/// A view box of 100 x 50 in a viewport of 100 x 100 mm: where the slack goes (SVG 2, preserveAspectRatio).
#[test]
fn aspect_ratios() {
    let rows = [
        ("xMidYMid", (10.0, 55.0)),
        ("xMidYMin meet", (10.0, 80.0)),
        ("xMinYMax", (10.0, 30.0)),
        ("none", (10.0, 60.0)),
        ("xMinYMid slice", (20.0, 60.0)),
        ("xMidYMid slice", (-30.0, 60.0)),
        ("xMaxYMid slice", (-80.0, 60.0)),
    ];
    for (aspect, (x, y)) in rows {
        let attributes =
            format!("width='100mm' height='100mm' viewBox='0 0 100 50' preserveAspectRatio='{aspect}'");
        let found = placed(&attributes, &Scale::default());
        assert!((found.0 - x).abs() < 1e-6 && (found.1 - y).abs() < 1e-6, "{aspect}: {found:?}, not {x} {y}");
    }
}

#[test]
fn a_page_without_a_size_is_refused_with_the_size_in_each_unit() {
    for attributes in
        ["", "viewBox='0 0 100 50'", "width='100%' height='100%' viewBox='0 0 100 50'", "width='auto'"]
    {
        let text =
            format!("<svg xmlns='http://www.w3.org/2000/svg' {attributes}><path d='M0 0H96V48'/></svg>");
        let error = read("sign.svg", text.as_bytes(), &Scale::default()).expect_err("no size");
        assert_eq!(error.kind, Kind::Refused, "{attributes}");
        for said in ["96.0 x 48.0 mm with --drawing-unit mm", "25.4 x 12.7 mm", "--fit-width"] {
            assert!(error.remedy.contains(said), "{said} in {error}");
        }
    }
    // The page's bottom edge is the view box's.
    let inch = Scale { drawing_unit: Some(Unit::Inch), ..Scale::default() };
    assert_eq!(placed("viewBox='0 0 100 50'", &inch).2, 25.4);
    let fit = Scale { fit_width_mm: Some(7.0), ..Scale::default() };
    assert_eq!(placed("viewBox='0 0 100 50'", &fit).2, 7.0);
}

#[test]
fn the_drawings_own_unit_wins_and_bare_numbers_are_what_the_user_says() {
    let mm = Scale { drawing_unit: Some(Unit::Mm), ..Scale::default() };
    let own = "<svg xmlns='http://www.w3.org/2000/svg' width='4in' height='2in' viewBox='0 0 4 2'><path d='M0 0H1'/></svg>";
    let own = read("t.svg", own.as_bytes(), &mm).expect("a good drawing");
    assert_eq!(own.mm_per_unit, 25.4);
    assert!(own.notes.iter().any(|n| n.contains("--drawing-unit mm is not used")), "{:?}", own.notes);
    assert_eq!(own.scale_from, "page size 4in x 2in");

    // Width and height are bare numbers: 100 mm for 200 units.
    let bare = "<svg xmlns='http://www.w3.org/2000/svg' width='100' height='50' viewBox='0 0 200 100'><path d='M0 0H200'/></svg>";
    let width = |scale: &Scale| {
        let read = read("t.svg", bare.as_bytes(), scale).expect("a good drawing");
        assert!(read.notes.is_empty(), "{:?}", read.notes);
        read.bbox().expect("a box").width()
    };
    assert_eq!(width(&mm), 100.0);
    assert!((width(&Scale::default()) - 2540.0 / 96.0).abs() < 1e-6, "px at 96 to the inch unless told");
}

#[test]
fn nested_viewports() {
    let inner = "<svg x='10' y='20' width='50' height='50' viewBox='0 0 10 10'><path d='M1 2L3 4'/></svg>";
    assert_eq!(only(inner), [(15.0, 30.0), (25.0, 40.0)]);
    let plain = "<svg x='10' y='20' width='5' height='5'><path d='M1 2L3 4'/></svg>";
    assert_eq!(only(plain), [(11.0, 22.0), (13.0, 24.0)]);
    let nothing = "<svg width='0' height='5'><path d='M1 2L3 4'/></svg><line x2='1'/>";
    assert_eq!(contours(nothing).len(), 1);
    let shares = "<svg width='200' height='100'><rect x='10%' y='10%' width='50%' height='50%'/></svg>";
    assert_eq!(only(shares), [(20.0, 10.0), (120.0, 10.0), (120.0, 60.0), (20.0, 60.0)]);
}

#[test]
fn used_elements_are_drawn_where_they_are_used() {
    let defs =
        "<defs><path id='p' d='M1 2L3 4'/><g id='g' transform='scale(2)'><use href='#p' x='1'/></g></defs>";
    let rows: [(&str, [(f64, f64); 2]); 5] = [
        ("<use href='#p'/>", [(1.0, 2.0), (3.0, 4.0)]),
        ("<use xlink:href='#p' x='10' y='20'/>", [(11.0, 22.0), (13.0, 24.0)]),
        ("<use href='#p' x='10' transform='scale(2)'/>", [(22.0, 4.0), (26.0, 8.0)]),
        ("<use href='#g' y='5'/>", [(4.0, 9.0), (8.0, 13.0)]),
        ("<g transform='translate(100)'><use href='#g'/></g>", [(104.0, 4.0), (108.0, 8.0)]),
    ];
    for (content, wanted) in rows {
        assert_eq!(only(&format!("{defs}{content}")), wanted, "{content}");
    }
}

#[test]
fn symbols_are_viewports_of_their_use() {
    let symbol = "<symbol id='s' viewBox='0 0 10 10'><path d='M1 2L3 4'/></symbol>";
    assert!(super::try_sketch(&super::svg(symbol)).is_err(), "a symbol itself is not drawn");
    let used = format!("{symbol}<use href='#s' x='5' y='6' width='20' height='20'/>");
    assert_eq!(only(&used), [(7.0, 10.0), (11.0, 14.0)]);
    let nested = "<svg id='v' width='10' height='10' viewBox='0 0 10 10'><path d='M1 2L3 4'/></svg>";
    let found = contours(&format!("{nested}<use href='#v' width='30' height='30'/>"));
    assert_eq!(corners(&found[1]), [(3.0, 6.0), (9.0, 12.0)]);
}

#[test]
fn layers_colours_and_places() {
    let text = r##"<svg xmlns="http://www.w3.org/2000/svg" xmlns:e="urn:editor" width="100mm" height="100mm" viewBox="0 0 100 100">
<g id="g1" e:label="Outside cuts" stroke="#FF0000">
  <path d="M0 0H1"/>
  <g id="inner"><path style="stroke: blue" d="M0 0H1"/></g>
</g>
<g id="pockets" fill="green"><path d="M0 0H1"/></g>
<path stroke="none" fill="none" d="M0 0H1"/>
</svg>"##;
    let read = sketch(text);
    let said: Vec<(&str, &str, usize)> =
        read.contours.iter().map(|c| (c.layer.as_str(), c.colour.as_str(), c.place.line)).collect();
    assert_eq!(
        said,
        [("Outside cuts", "#FF0000", 3), ("Outside cuts", "blue", 4), ("pockets", "green", 6), ("", "", 7)]
    );
    let only = Scale { layers: Some(vec!["POCKETS".into()]), ..Scale::default() };
    let kept = ribband::read::read("t.svg", text.as_bytes(), &only).expect("the layer is there");
    assert_eq!(kept.contours.len(), 1);
    let none = Scale { layers: Some(vec!["drill".into()]), ..Scale::default() };
    let error = ribband::read::read("t.svg", text.as_bytes(), &none).expect_err("no such layer");
    assert_eq!(error.kind, Kind::Settings);
    assert!(error.remedy.contains("Outside cuts, pockets"), "{error}");
}
