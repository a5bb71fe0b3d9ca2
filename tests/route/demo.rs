//! The demo parts, from the drawing to moves that keep clear of every outline.

use std::fs;
use std::path::Path;

use ribband::fit::{Pace, fit};
use ribband::num::Tolerance;
use ribband::read::{Scale, read};
use ribband::route::{
    Cut, Entry, Outline, Routing, Setup, Side, Sided, TabNumber, Tabs, Thickness, beside, route,
};

use crate::sides::assert_clear;
use crate::{assert_safe, cut};

/// A demo part cut by nesting out of stock 12 mm thick, with tabs on every contour.
fn cut_out(name: &str, tabs: usize) -> (Sided, Routing) {
    let file = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/demo-parts").join(name);
    let bytes = fs::read(file).expect("the demo part is there");
    let sketch = read(name, &bytes, &Scale::default()).expect("the demo part reads");
    let tolerance = Tolerance::new(0.1).expect("a tolerance");
    let setup = Setup { thickness: Some(Thickness { thinnest: 12.0, thickest: 12.0 }), ..Setup::default() };
    let tabs = Some(Tabs { number: TabNumber::Count(tabs), length_mm: 5.0, height_mm: 1.5 });
    let depth_mm = setup.depth_through(0.2).expect("the thickness is known");
    let cut = Cut { side: Side::Outside, depth_mm, pass_mm: 3.0, tabs, entry: Entry::Ramp, ..cut() };
    let outline = |contour: &ribband::sketch::Contour| Outline {
        id: contour.id,
        path: fit(&contour.path, tolerance, Pace::Thorough).path,
        cut: cut.clone(),
    };
    let outlines: Vec<Outline> = sketch.contours.iter().map(outline).collect();
    let lines = beside(&outlines, tolerance.mm()).expect("it has sides");
    let routing = route(&lines.routed, &setup).expect("it routes");
    assert_safe(&routing.toolpath, &setup);
    assert_clear(&routing.toolpath, &outlines, 3.0);
    (lines, routing)
}

#[test]
fn the_sign_is_cut_letters_first() {
    let (lines, routing) = cut_out("sign.svg", 2);
    assert_eq!(routing.order.len(), 9, "every contour has one line");
    assert_eq!(routing.order.last(), Some(&1), "the plate last");
    let place = |id| routing.order.iter().position(|&i| i == id);
    assert!(place(6) < place(5) && place(8) < place(7), "what is in an O before the O");
    let corners = lines.uncut.iter().filter(|(id, _)| *id == 4).count();
    assert_eq!(corners, 6, "the inside corners of the T");
}

#[test]
fn the_paddle_blade_is_cut_slot_first() {
    let (lines, routing) = cut_out("paddle-blade.svg", 4);
    assert_eq!(routing.order, [2, 1]);
    assert!(lines.notes.is_empty(), "{:?}", lines.notes);
}
