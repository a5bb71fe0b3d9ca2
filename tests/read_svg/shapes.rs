//! Basic shapes and transforms.

use std::f64::consts::{PI, TAU};

use approx::assert_abs_diff_eq;
use kurbo::{Ellipse, Point, Shape};

use super::{circles, contours, corners, length, only, sketch, svg};

#[test]
fn shapes_of_straight_lines() {
    let rows: [(&str, &[(f64, f64)]); 7] = [
        ("<line x1='1' y1='2' x2='3' y2='4'/>", &[(1.0, 2.0), (3.0, 4.0)]),
        ("<line x2='3'/>", &[(0.0, 0.0), (3.0, 0.0)]),
        ("<polyline points='1,2 3,4 5,6'/>", &[(1.0, 2.0), (3.0, 4.0), (5.0, 6.0)]),
        ("<polyline points='1-2.5.5 5 6'/>", &[(1.0, -2.5), (0.5, 5.0)]),
        ("<polygon points=' 1,2\n3,4\t5,6 '/>", &[(1.0, 2.0), (3.0, 4.0), (5.0, 6.0)]),
        ("<rect x='1' y='2' width='3' height='4'/>", &[(1.0, 2.0), (4.0, 2.0), (4.0, 6.0), (1.0, 6.0)]),
        (
            "<rect width='10mm' height='1in'/>",
            &[(0.0, 0.0), (37.795276, 0.0), (37.795276, 96.0), (0.0, 96.0)],
        ),
    ];
    for (shape, wanted) in rows {
        let found = only(shape);
        assert_eq!(found.len(), wanted.len(), "{shape}: {found:?}");
        for (f, w) in found.iter().zip(wanted) {
            assert!((f.0 - w.0).abs() < 1e-6 && (f.1 - w.1).abs() < 1e-6, "{shape}: {f:?}, not {w:?}");
        }
    }
    assert!(contours("<polygon points='0 0 1 0 1 1'/>")[0].closed, "a polygon is closed");
    assert!(!contours("<polyline points='0 0 1 0 0 0'/>")[0].closed, "a polyline is not");
}

#[test]
fn circles_are_two_exact_arcs_from_three_oclock() {
    let circle = &contours("<circle cx='10' cy='20' r='5'/>")[0];
    assert_eq!(corners(circle), [(15.0, 20.0), (5.0, 20.0)]);
    assert!(circle.closed, "a circle is closed");
    for (centre, radius) in circles(circle) {
        assert!(centre.distance(Point::new(10.0, 20.0)) < 1e-9, "{centre:?}");
        assert_abs_diff_eq!(radius, 5.0, epsilon = 1e-12);
    }
    assert_abs_diff_eq!(circle.length(), 10.0 * PI, epsilon = 1e-9);
    assert_abs_diff_eq!(circle.area(), -25.0 * PI, epsilon = 1e-9);
}

#[test]
fn rounded_rectangles_fill_in_and_clamp_their_radii() {
    let straight = |w: f64, h: f64, r: f64| 2.0 * (w + h) - 8.0 * r + TAU * r;
    let rows = [
        ("rx='2'", straight(20.0, 10.0, 2.0)),
        ("ry='2'", straight(20.0, 10.0, 2.0)),
        ("rx='2' ry='2'", straight(20.0, 10.0, 2.0)),
        ("rx='auto' ry='2'", straight(20.0, 10.0, 2.0)),
        ("rx='5' ry='50'", straight(20.0, 10.0, 5.0)),
        ("rx='0' ry='2'", 60.0),
        ("rx='-1' ry='2'", straight(20.0, 10.0, 2.0)),
    ];
    for (radii, wanted) in rows {
        let rect = format!("<rect width='20' height='10' {radii}/>");
        assert_abs_diff_eq!(length(&rect), wanted, epsilon = 1e-5);
    }
    let sketch = sketch(&svg("<rect width='20' height='10' rx='2'/>"));
    assert!(sketch.sampling_mm == 0.0, "round corners are exact arcs");
    assert_eq!(sketch.contours[0].path.len(), 8);
}

#[test]
fn ellipses_against_an_independent_perimeter() {
    for (rx, ry) in [(50.0, 30.0), (20.0, 0.5), (3.0, 40.0)] {
        let path = &contours(&format!("<ellipse cx='7' cy='8' rx='{rx}' ry='{ry}'/>"))[0];
        let wanted = Ellipse::new((0.0, 0.0), (rx, ry), 0.0).perimeter(1e-9);
        assert!(
            (path.length() - wanted).abs() < 5e-5 * wanted,
            "{rx} x {ry}: {} not {wanted}",
            path.length()
        );
        for v in &path.vertices {
            let off = ((v.at.x - 7.0) / rx).hypot((v.at.y + 8.0) / ry) - 1.0;
            assert!(off.abs() < 1e-5, "a vertex is off the ellipse: {off}");
        }
    }
}

#[test]
fn sizes_that_draw_nothing() {
    for shape in [
        "<rect width='0' height='5'/>",
        "<rect width='5'/>",
        "<circle r='0'/>",
        "<circle/>",
        "<ellipse rx='0' ry='4'/>",
        "<path/>",
        "<path d=''/>",
        "<path d='none'/>",
        "<path d='M5 5'/>",
        "<path d='M5 5z'/>",
        "<polyline points=''/>",
    ] {
        assert_eq!(contours(&format!("{shape}<line x2='1'/>")).len(), 1, "{shape}");
    }
}

#[test]
fn transforms_apply_from_right_to_left() {
    let rows: [(&str, [(f64, f64); 2]); 17] = [
        ("translate(5)", [(6.0, 2.0), (8.0, 4.0)]),
        ("translate(5 6)", [(6.0, 8.0), (8.0, 10.0)]),
        ("scale(2)", [(2.0, 4.0), (6.0, 8.0)]),
        ("scale(2,-1)", [(2.0, -2.0), (6.0, -4.0)]),
        ("rotate(90)", [(-2.0, 1.0), (-4.0, 3.0)]),
        ("rotate(90 1 2)", [(1.0, 2.0), (-1.0, 4.0)]),
        ("rotate(180)", [(-1.0, -2.0), (-3.0, -4.0)]),
        ("rotate(-450)", [(2.0, -1.0), (4.0, -3.0)]),
        ("skewX(45)", [(3.0, 2.0), (7.0, 4.0)]),
        ("skewY(45)", [(1.0, 3.0), (3.0, 7.0)]),
        ("matrix(1 2 3 4 5 6)", [(12.0, 16.0), (20.0, 28.0)]),
        ("translate(10)scale(2)", [(12.0, 4.0), (16.0, 8.0)]),
        ("scale(2) translate(10)", [(22.0, 4.0), (26.0, 8.0)]),
        (" translate( 1 , 2 ) , rotate( 90 ) ", [(-1.0, 3.0), (-3.0, 5.0)]),
        ("translate(1-2)", [(2.0, 0.0), (4.0, 2.0)]),
        ("", [(1.0, 2.0), (3.0, 4.0)]),
        ("none", [(1.0, 2.0), (3.0, 4.0)]),
    ];
    for (transform, wanted) in rows {
        let found = only(&format!("<path transform='{transform}' d='M1 2L3 4'/>"));
        for (f, w) in found.iter().zip(wanted) {
            assert!(
                (f.0 - w.0).abs() < 1e-6 && (f.1 - w.1).abs() < 1e-6,
                "{transform}: {found:?}, not {wanted:?}"
            );
        }
    }
}

#[test]
fn nested_groups_multiply_and_a_style_overrules_the_attribute() {
    let nested = "<g transform='translate(10)'><g transform='scale(2)'><path d='M1 2L3 4'/></g></g>";
    assert_eq!(only(nested), [(12.0, 4.0), (16.0, 8.0)]);
    let styled =
        "<path transform='scale(9)' style='transform: translate(10px, 0) rotate(0.25turn)' d='M1 2L3 4'/>";
    assert_eq!(only(styled), [(8.0, 1.0), (6.0, 3.0)]);
    let origin = "<path transform='rotate(90)' transform-origin='1 2' d='M1 2L3 4'/>";
    assert_eq!(only(origin), [(1.0, 2.0), (-1.0, 4.0)]);
}

#[test]
fn arcs_survive_similarities_and_become_ellipses_otherwise() {
    let exact =
        ["rotate(30)", "scale(3)", "scale(-2 2)", "rotate(10) scale(1 -1)", "matrix(.6 .8 -.8 .6 1 2)"];
    for transform in exact {
        let group = format!("<g transform='{transform}'><circle r='5'/><path d='M0 0A5 5 0 0 1 10 0'/></g>");
        let sketch = sketch(&svg(&group));
        assert!(sketch.sampling_mm == 0.0, "{transform} keeps arcs");
        assert_eq!(sketch.contours[0].path.len(), 2, "{transform}");
    }
    for transform in ["scale(2 1)", "skewX(10)", "matrix(1 0 .5 1 0 0)"] {
        let group = format!("<g transform='{transform}'><circle r='5'/></g>");
        let sketch = sketch(&svg(&group));
        assert!(sketch.sampling_mm > 0.0 && sketch.sampling_mm <= 0.0005, "{transform} makes an ellipse");
    }
    let stretched = length("<g transform='scale(2 1)'><circle r='5'/></g>");
    let wanted = Ellipse::new((0.0, 0.0), (10.0, 5.0), 0.0).perimeter(1e-9);
    assert_abs_diff_eq!(stretched, wanted, epsilon = 2e-3);
}

#[test]
fn sampling_is_in_finished_millimetres() {
    let curve = "<path d='M0 0C0 10 10 10 10 0'/>";
    let vertices = |content: &str| contours(content)[0].vertices.len();
    let (plain, tenfold) = (vertices(curve), vertices(&format!("<g transform='scale(100)'>{curve}</g>")));
    assert!(tenfold >= 8 * plain, "a hundredfold curve takes about ten times the chords: {plain}, {tenfold}");
}
