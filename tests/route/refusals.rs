//! What is refused, each with its whole message.

use std::f64::consts::PI;

use insta::assert_snapshot;
use kurbo::{Rect, Vec2};
use ribband::route::{Cut, Entry, Held, KeepOut, Routed, Setup, TabNumber, Tabs, Thickness, route};

use crate::{contour, cut, rectangle};

const THICK_6: Option<Thickness> = Some(Thickness { thinnest: 6.0, thickest: 6.0 });

fn refusal(contours: &[Routed], setup: &Setup) -> String {
    let error = route(contours, setup).expect_err("this job is refused");
    format!("exit {}: {error}", error.exit_status())
}

fn through() -> Cut {
    Cut { depth_mm: 6.2, ..cut() }
}

fn square(cut: Cut) -> Routed {
    Routed { cut, ..rectangle(3, (10.0, 10.0), (60.0, 40.0)) }
}

#[test]
fn a_part_that_nothing_holds() {
    let setup = Setup { thickness: THICK_6, ..Setup::default() };
    assert_snapshot!("nothing-holds-the-part", refusal(&[square(through())], &setup));
    let held = Cut { held: Some(Held::Vacuum), ..through() };
    assert!(route(&[square(held)], &setup).is_ok(), "vacuum holds it");
    let skin = Cut { depth_mm: setup.depth_leaving(0.3).expect("the thickness is known"), ..cut() };
    assert!(route(&[square(skin)], &setup).is_ok(), "a skin holds it");
    let open = Routed { cut: through(), ..contour(3, &[(0.0, 0.0), (50.0, 0.0)], false) };
    assert!(route(&[open], &setup).is_ok(), "an open slot frees nothing");
}

#[test]
fn too_deep_into_the_bed() {
    let thickness = Some(Thickness { thinnest: 5.8, thickest: 6.2 });
    let setup = Setup { thickness, ..Setup::default() };
    let depth_mm = setup.depth_through(0.1).expect("the thickness is known");
    let cut = Cut { held: Some(Held::Screws), depth_mm, ..cut() };
    assert_snapshot!("too-deep-into-the-bed", refusal(&[square(cut.clone())], &setup));
    let setup = Setup { bed_cut_mm: 0.5, ..setup };
    let notes = route(&[square(cut)], &setup).expect("half a millimetre is allowed").notes;
    assert_eq!(notes, ["the cutter goes up to 0.50 mm into the bed under the thinnest stock"]);
}

#[test]
fn tabs_that_cannot_be() {
    let setup = Setup { thickness: THICK_6, ..Setup::default() };
    let tabs = |count, length_mm, height_mm| Cut {
        tabs: Some(Tabs { number: TabNumber::Count(count), length_mm, height_mm }),
        ..through()
    };
    assert_snapshot!("tab-too-tall", refusal(&[square(tabs(4, 8.0, 6.0))], &setup));
    assert_snapshot!("too-many-tabs", refusal(&[square(tabs(12, 8.0, 2.0))], &setup));
    // Twelve sides of 8 mm: a tab and its slopes take more than one of them.
    let corner = |k: i32| Vec2::from_angle(f64::from(k) * PI / 6.0) * (4.0 / (PI / 12.0).sin());
    let points: Vec<(f64, f64)> = (0..12).map(corner).map(|v| (v.x, v.y)).collect();
    let small = Routed { cut: tabs(4, 2.0, 0.5), ..contour(3, &points, true) };
    assert_snapshot!("tab-on-a-corner", refusal(&[small], &setup));
    assert_snapshot!("tabs-without-thickness", refusal(&[square(tabs(4, 8.0, 2.0))], &Setup::default()));
}

#[test]
fn a_clamp_in_the_way() {
    let clamp = |x0, y0, x1, y1, height_mm| KeepOut { place: Rect::new(x0, y0, x1, y1), height_mm };
    let setup = |keep_out| Setup { keep_outs: vec![keep_out], ..Setup::default() };
    // Beside the contour, closer than the cutter's radius.
    let beside = setup(clamp(72.0, 20.0, 90.0, 30.0, 4.0));
    assert_snapshot!("clamp-beside-the-cut", refusal(&[square(cut())], &beside));
    // Lower than the clearance: only cuts matter.
    assert!(route(&[square(cut())], &setup(clamp(73.1, 20.0, 90.0, 30.0, 4.0))).is_ok());
    // Higher than the clearance, in the rectangle of the rapid from the park position, off its straight line.
    let high = setup(clamp(5.5, 1.0, 6.5, 2.0, 20.0));
    assert_snapshot!("clamp-under-a-rapid", refusal(&[square(cut())], &high));
    // An arc passes between the corners of its own box.
    let helix = Cut { entry: Entry::Ramp, ..cut() };
    assert!(route(&[square(helix)], &setup(clamp(30.0, 25.0, 50.0, 35.0, 4.0))).is_ok(), "inside the part");
}
