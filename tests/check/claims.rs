//! Each claim on its own: what makes it hold and what makes it fail.

use kurbo::{Rect, Vec2};
use ribband::check::{Feeds, KeepOut, State};

use crate::emit::{Form, program};
use crate::{asked, assert_holds, claim, failing, polyline, sketch, verdict};

fn square() -> ribband::geom::ArcSpline {
    polyline(&[(10.0, 10.0), (60.0, 10.0), (60.0, 40.0), (10.0, 40.0)], true)
}

#[test]
fn a_plain_program_holds_and_says_what_it_found() {
    let sketch = sketch(&[square()]);
    let verdict = verdict(&program(&[square()], Form::PLAIN), &sketch, &asked(0.1)).expect("it reads");
    assert!(verdict.holds, "fails {:?}", failing(&verdict));
    let deviation = verdict.deviation.expect("something was cut");
    assert!(deviation.certified && deviation.mm < 1e-9, "on the grid the cut is the drawing: {deviation:?}");
    let travel = claim(&verdict, "travel");
    assert_eq!((travel.value, travel.limit), (Some(11.0), Some(150.0)), "Z from -6 to 5 is the tightest");
    assert!(!verdict.not_checked.is_empty(), "no check is complete");
}

#[test]
fn a_drawing_is_found_at_the_usual_places_only() {
    let sketch = sketch(&[square()]);
    let find = ribband::check::Asked { drawing_at: None, ..asked(0.1) };
    for at in [Vec2::ZERO, Vec2::new(-10.0, -10.0), Vec2::new(-35.0, -25.0)] {
        let placed = square().transformed(kurbo::Affine::translate(at));
        assert_holds(&program(&[placed], Form::PLAIN), &sketch, &find);
    }
    let off = square().transformed(kurbo::Affine::translate((0.2, 0.0)));
    let verdict = verdict(&program(&[off], Form::PLAIN), &sketch, &find).expect("it reads");
    assert!(!verdict.holds, "a program that is off is not placed elsewhere");
}

/// The square's program with one text replaced by another, and the claims that then fail.
fn broken(from: &str, to: &str) -> Vec<&'static str> {
    let text = program(&[square()], Form::PLAIN);
    assert!(text.contains(from), "{from:?} is in the program:\n{text}");
    let changed = text.replacen(from, to, 1);
    failing(&verdict(&changed, &sketch(&[square()]), &asked(0.1)).expect("it reads"))
}

#[test]
fn each_flaw_is_found_by_its_claim() {
    let rows = [
        ("S18000 M3\n", "", "spindle turns"),
        ("S18000", "S90000", "spindle turns"),
        (" F600", "", "feeds are set"),
        ("F1800", "F180000", "feeds are set"),
        ("G1 Z-2.000", "G0 Z-2.000", "no rapid goes"),
        ("M5\n", "", "ends raised"),
        ("M30\n", "", "ends raised"),
        ("G0 Z5\n", "G0 Z1\n", "raised before"),
        ("G1 Z-6.000", "G1 Z-6.500", "deeper than asked"),
        ("G1 Z-4.000", "G1 Z-6.000", "no pass is deeper"),
        ("G1 Z-6.000", "G1 Z-5.900", "to the depth asked"),
        ("X60.000", "X60.150", "within the tolerance"),
        ("X60.000", "X1460.000", "travel"),
        ("G0 Z5.000\nM5", "G1 X70.000 F1800\nG0 Z5.000\nM5", "off the drawing"),
    ];
    for (from, to, words) in rows {
        let failing = broken(from, to);
        assert!(failing.iter().any(|name| name.contains(words)), "{from:?} to {to:?}: {failing:?}");
    }
}

#[test]
fn a_contour_that_is_not_cut_is_missed() {
    let other = polyline(&[(100.0, 10.0), (130.0, 10.0), (130.0, 40.0)], false);
    let drawing = sketch(&[square(), other]);
    let verdict = verdict(&program(&[square()], Form::PLAIN), &drawing, &asked(0.1)).expect("it reads");
    assert_eq!(failing(&verdict), ["every contour is cut"]);
    assert_eq!(claim(&verdict, "every contour").value, Some(1.0));
}

#[test]
fn a_contour_drawn_in_pieces_may_be_cut_as_one() {
    let corners = [(10.0, 10.0), (60.0, 10.0), (60.0, 40.0), (10.0, 40.0), (10.0, 10.0)];
    let pieces: Vec<_> = corners.windows(2).map(|ends| polyline(ends, false)).collect();
    assert_holds(&program(&[square()], Form::PLAIN), &sketch(&pieces), &asked(0.1));
    // One more piece inside the box of the others that nothing follows.
    let mut more = pieces.clone();
    more.push(polyline(&[(20.0, 20.0), (50.0, 30.0)], false));
    let verdict = verdict(&program(&[square()], Form::PLAIN), &sketch(&more), &asked(0.1)).expect("it reads");
    assert!(failing(&verdict).contains(&"every contour is cut"), "{:?}", failing(&verdict));
}

#[test]
fn clamps_are_kept_clear_of_by_cuts_and_by_the_whole_box_of_a_rapid() {
    let clamp = |x: f64, y: f64| KeepOut {
        name: "clamp".into(),
        outline: Rect::new(x, y, x + 4.0, y + 4.0),
        top: 20.0,
    };
    let with = |clamp: KeepOut| {
        let mut asked = asked(0.1);
        asked.cutter = 6.0;
        asked.keep_out.push(clamp);
        let verdict =
            verdict(&program(&[square()], Form::PLAIN), &sketch(&[square()]), &asked).expect("it reads");
        claim(&verdict, "keeps clear").state
    };
    assert_eq!(with(clamp(100.0, 100.0)), State::Holds);
    assert_eq!(with(clamp(30.0, 20.0)), State::Holds, "inside the square, more than a radius away");
    assert_eq!(with(clamp(62.0, 20.0)), State::Fails, "within a radius of the cut");
    assert_eq!(with(clamp(0.0, 8.5)), State::Fails, "beside the rapid's line, within its box");
}

#[test]
fn feeds_are_held_to_what_was_asked() {
    let drawing = sketch(&[square()]);
    let text = program(&[square()], Form::PLAIN);
    let with = |cutting: f64, plunge: f64| {
        let asked = ribband::check::Asked { feeds: Some(Feeds { cutting, plunge }), ..asked(0.1) };
        claim(&verdict(&text, &drawing, &asked).expect("it reads"), "feeds").state
    };
    assert_eq!(with(1800.0, 600.0), State::Holds);
    assert_eq!(with(1700.0, 600.0), State::Fails);
    assert_eq!(with(1800.0, 500.0), State::Fails);
}
