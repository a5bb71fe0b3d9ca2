//! The figures of a drawing.

use approx::assert_relative_eq;
use ribband::clean::{corners, largest_disc, roughness, smallest_radius, support};
use ribband::geom::ArcSpline;
use ribband::measure::measure;

use super::common::{fixture, open, outlines, ring, sketch};

fn disc(path: ArcSpline) -> f64 {
    largest_disc(&sketch([path]).contours[0]).unwrap()
}

fn rounded(points: &[(f64, f64)], bulges: &[(usize, f64)]) -> ArcSpline {
    let mut path = ring(points);
    bulges.iter().for_each(|&(i, bulge)| path.vertices[i].bulge = bulge);
    path
}

#[test]
fn the_largest_disc_of_plain_shapes() {
    let part = 1.0 / 200.0;
    // A circle of two halves, a square, a long slot, a triangle of sides 3, 4, 5 (inradius 1).
    assert_relative_eq!(
        disc(rounded(&[(0.0, 0.0), (10.0, 0.0)], &[(0, 1.0), (1, 1.0)])),
        10.0,
        max_relative = part
    );
    assert_relative_eq!(
        disc(ring(&[(0.0, 0.0), (7.0, 0.0), (7.0, 7.0), (0.0, 7.0)])),
        7.0,
        max_relative = part
    );
    let slot = rounded(&[(0.0, 0.0), (90.0, 0.0), (90.0, 6.0), (0.0, 6.0)], &[(1, 1.0), (3, 1.0)]);
    assert_relative_eq!(disc(slot), 6.0, max_relative = part);
    assert_relative_eq!(disc(ring(&[(0.0, 0.0), (4.0, 0.0), (0.0, 3.0)])), 2.0, max_relative = part);
    // Clockwise is no different.
    assert_relative_eq!(disc(ring(&[(0.0, 3.0), (4.0, 0.0), (0.0, 0.0)])), 2.0, max_relative = part);
}

#[test]
fn no_disc_in_what_encloses_nothing() {
    assert_eq!(largest_disc(&sketch([open(&[(0.0, 0.0), (5.0, 0.0), (5.0, 5.0)])]).contours[0]), None);
    let flat = largest_disc(&sketch([ring(&[(0.0, 0.0), (5.0, 0.0)])]).contours[0]);
    assert_eq!(flat, None);
    // A bow tie encloses two triangles, whatever its signed area.
    let bow_tie = ring(&[(0.0, 0.0), (10.0, 10.0), (10.0, 0.0), (0.0, 10.0)]);
    let inradius = 25.0 / (5.0 + 5.0 * 2_f64.sqrt());
    assert_relative_eq!(disc(bow_tie), 2.0 * inradius, max_relative = 1.0 / 200.0);
}

/// The least radius of a computed curve, from its own formula.
fn true_radius(name: &str) -> f64 {
    let truth: serde_json::Value =
        serde_json::from_str(&fixture(&format!("analytic/{name}-a.truth.json"))).unwrap();
    truth["min_radius_mm"].as_f64().unwrap()
}

#[test]
fn the_least_radius_of_computed_curves() {
    // The involute has its least radius at its very end, where no arm reaches over it.
    let curves = ["arcchain", "circle", "clothoid", "ellipse", "limacon", "logspiral", "roundrect", "sine"];
    let all = outlines();
    for (name, (variant, within)) in curves.iter().flat_map(|c| [(c, ("clean", 0.1)), (c, ("n02", 0.45))]) {
        let id = format!("analytic/{name}-a-s05-{variant}");
        let path = &all.iter().find(|o| o.id == id).unwrap().paths[0];
        let rough = roughness(path);
        let found = smallest_radius(path, &rough, &corners(path, &rough)).unwrap();
        assert_relative_eq!(found, true_radius(name), max_relative = within);
    }
}

#[test]
fn exact_arcs_give_their_own_radius() {
    let slot = rounded(&[(0.0, 0.0), (90.0, 0.0), (90.0, 6.0), (0.0, 6.0)], &[(1, 1.0), (3, 1.0)]);
    assert_eq!(smallest_radius(&slot, &roughness(&slot), &[]), Some(3.0));
    let square = ring(&[(0.0, 0.0), (7.0, 0.0), (7.0, 7.0), (0.0, 7.0)]);
    assert_eq!(smallest_radius(&square, &roughness(&square), &[]), None);
}

#[test]
fn the_roughest_contour_decides_what_a_drawing_supports() {
    let all = outlines();
    let path = |id: &str| all.iter().find(|o| o.id == id).unwrap().paths[0].clone();
    let drawing = sketch([
        path("analytic/circle-a-s05-clean"),
        path("glyph/dejavu-sans-u0053-raster"),
        path("analytic/circle-a-s05-n02"),
    ]);
    let support = support(&drawing.contours);
    assert_eq!(support.mm, 0.18);
    assert_eq!(support.reason, "steps of a 0.25 mm pixel; below 0.18 mm the cut follows the steps");
}

#[test]
fn a_drawing_is_measured_whole() {
    let all = outlines();
    let noisy = all.iter().find(|o| o.id == "analytic/keyhole-a-s05-n02").unwrap().paths[0].clone();
    let plate = ring(&[(-20.0, -20.0), (90.0, -20.0), (90.0, 110.0), (-20.0, 110.0)]);
    let hole = rounded(&[(70.0, 80.0), (80.0, 80.0)], &[(0, 1.0), (1, 1.0)]);
    let mut drawing = sketch([plate, noisy, hole, open(&[(0.0, 0.0), (0.0, 5.0), (0.0, 5.0), (-3.0, 9.0)])]);
    drawing.contours[2].layer = "holes".into();
    drawing.notes.push("1 TEXT entity is not cut".into());
    let measured = measure(&drawing, 0.1);
    insta::assert_snapshot!("measured", format!("{}\n{}", measured.table(), measured.summary()));

    let report = measured.json("plate.dxf");
    let field = |path: &str| report.pointer(path).unwrap_or_else(|| panic!("{path}")).clone();
    assert_eq!(field("/drawing/width_mm"), 110.0);
    assert_eq!(field("/drawing/height_mm"), 130.0);
    assert_eq!(field("/drawing/contours"), 4);
    assert_eq!(field("/contours/0/area_mm2"), 110.0 * 130.0);
    assert_eq!(field("/contours/0/bbox_mm"), serde_json::json!([-20.0, -20.0, 90.0, 110.0]));
    assert_eq!(field("/contours/1/role"), "hole");
    assert_eq!(field("/contours/1/texture"), "noise");
    assert_eq!(field("/contours/1/corners"), 4);
    assert_eq!(field("/contours/3/closed"), false);
    assert_eq!(field("/contours/3/area_mm2"), serde_json::Value::Null);
    assert_relative_eq!(
        field("/contours/2/area_mm2").as_f64().unwrap(),
        25.0 * std::f64::consts::PI,
        epsilon = 1e-9
    );
}

#[test]
fn the_length_is_before_cleaning_and_the_area_has_a_sign() {
    let line = open(&[(0.0, 0.0), (10.0, 0.0)]);
    let clockwise = ring(&[(0.0, 0.0), (0.0, 5.0), (5.0, 5.0), (5.0, 0.0)]);
    let measured = measure(&sketch([line.clone(), line, clockwise]), 0.1);
    assert_eq!(measured.drawn.length_mm, 40.0);
    assert_eq!(measured.contours.len(), 2);
    assert_eq!(measured.contours[1].area_mm2, Some(-25.0));
}

#[test]
fn an_empty_drawing_is_measured_too() {
    let measured = measure(&sketch([]), 0.1);
    assert!(measured.summary().contains("0 closed, 0 open"));
    assert_eq!(measured.json("nothing.csv")["contours"], serde_json::json!([]));
}

#[test]
fn long_lists_are_cut_short_for_the_terminal_and_say_so() {
    let squares = (0..60).map(|k| {
        let x = 20.0 * f64::from(k);
        ring(&[(x, 0.0), (x + 9.0, 9.0), (x + 9.0, 0.0), (x, 9.0)])
    });
    let measured = measure(&sketch(squares), 0.1);
    assert!(measured.table().contains("and 20 more contours"));
    assert!(measured.summary().contains("and 40 more flaws"));
    assert_eq!(measured.json("squares.svg")["flaws"].as_array().unwrap().len(), 60);
}
