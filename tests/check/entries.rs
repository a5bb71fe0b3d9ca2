//! Ramps, tabs and overlaps: cuts that are not one plunge and one lap.

use ribband::check::{Asked, Verdict};

use crate::{asked, failing, polyline, sketch, verdict};

/// The verdict on a square of 50 by 30 mm cut by the given lines between start and end.
fn square(lines: &str, asked: &Asked) -> Verdict {
    let drawing = sketch(&[polyline(&[(10.0, 10.0), (60.0, 10.0), (60.0, 40.0), (10.0, 40.0)], true)]);
    let text = format!("G17 G21 G40 G90 G94\nG0 Z5\nG0 X10 Y10\nS18000 M3\nF600\n{lines}\nG0 Z5\nM5\nM30\n");
    verdict(&text, &drawing, asked).expect("it reads")
}

fn shallow() -> Asked {
    Asked { lowest: Some(-2.0), ..asked(0.1) }
}

#[test]
fn a_ramp_along_the_contour_and_a_lap_from_its_end_hold() {
    let verdict = square("G1 Z0\nX40 Z-2\nX60\nY40\nX10\nY10\nX40", &shallow());
    assert!(verdict.holds, "{:?} {:#?}", failing(&verdict), verdict.claims);
    // The lap is not finished: ten millimetres beside the ramp stay above the floor.
    let short = square("G1 Z0\nX40 Z-2\nX60\nY40\nX10\nY10\nX30", &shallow());
    assert!(failing(&short).contains(&"every contour is cut"), "{:?}", failing(&short));
    let off = square("G1 Z0\nX40 Y12 Z-2\nY10\nX60\nY40\nX10\nY10\nX40", &shallow());
    assert!(failing(&off).contains(&"nothing is cut off the drawing"), "{:?}", failing(&off));
}

#[test]
fn a_zigzag_ramp_and_a_spiral_hold() {
    let zigzag = square("G1 Z0\nX30 Z-1\nX10 Z-2\nX60\nY40\nX10\nY10", &shallow());
    assert!(zigzag.holds, "{:?}", failing(&zigzag));
    let spiral = square("G1 Z0\nX60 Z-0.6\nY40 Z-1\nX10 Z-1.6\nY10 Z-2\nX60\nY40\nX10\nY10", &shallow());
    assert!(spiral.holds, "{:?}", failing(&spiral));
}

#[test]
fn a_lap_may_run_on_over_its_start() {
    let verdict = square("G1 Z-2\nX60\nY40\nX10\nY10\nX15", &shallow());
    assert!(verdict.holds, "{:?} {:#?}", failing(&verdict), verdict.claims);
    let off = square("G1 Z-2\nX60\nY40\nX10\nY10\nX15 Y8", &shallow());
    assert!(failing(&off).contains(&"nothing is cut off the drawing"), "{:?}", failing(&off));
}

#[test]
fn tabs_are_part_of_the_pass() {
    let steep = square("G1 Z-2\nX30\nZ-1\nX35\nZ-2\nX60\nY40\nX10\nY10", &shallow());
    assert!(steep.holds, "{:?}", failing(&steep));
    let sloped = square("G1 Z-2\nX30\nX32 Z-1\nX35\nX37 Z-2\nX60\nY40\nX10\nY10", &shallow());
    assert!(sloped.holds, "{:?}", failing(&sloped));
}
