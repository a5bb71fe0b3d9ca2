//! The check through its public door: programs that hold, and programs that must not.

mod claims;
mod emit;
mod entries;
mod foreign;
mod sides;
mod tampering;

use kurbo::Point;
use ribband::check::{Asked, Claim, State, Verdict, check};
use ribband::gcode::{Dialect, interpret, read};
use ribband::geom::ArcSpline;
use ribband::machine::Machine;
use ribband::num::Tolerance;
use ribband::sketch::{Contour, Place, Sketch};

/// A sketch of the given contours.
pub(crate) fn sketch(paths: &[ArcSpline]) -> Sketch {
    let contour = |(i, path): (usize, &ArcSpline)| Contour {
        id: i + 1,
        layer: String::new(),
        colour: String::new(),
        place: Place::default(),
        path: path.clone(),
    };
    Sketch {
        contours: paths.iter().enumerate().map(contour).collect(),
        mm_per_unit: 1.0,
        ..Sketch::default()
    }
}

/// The polyline through `points`.
pub(crate) fn polyline(points: &[(f64, f64)], closed: bool) -> ArcSpline {
    ArcSpline::polyline(points.iter().map(|&p| Point::from(p)), closed)
}

/// A job 6 mm deep in passes of 2 mm at zero on the stock's top, the drawing at the program's zero.
pub(crate) fn asked(tolerance: f64) -> Asked {
    Asked {
        drawing_at: Some(kurbo::Vec2::ZERO),
        clearance: Some(5.0),
        lowest: Some(-6.0),
        pass: Some(2.0),
        ..Asked::new(Tolerance::new(tolerance).expect("a tolerance above zero"))
    }
}

/// The verdict on `text`; an error of reading is a refusal in words.
pub(crate) fn verdict(text: &str, sketch: &Sketch, asked: &Asked) -> Result<Verdict, String> {
    let machine = Machine::named("shop-router").expect("a built-in profile");
    let words = read(text).map_err(|e| e.to_string())?;
    let program = interpret(&words, &Dialect::of(&machine)).map_err(|e| e.to_string())?;
    Ok(check(&program, sketch, &machine, asked))
}

/// The names of the claims that fail.
pub(crate) fn failing(verdict: &Verdict) -> Vec<&'static str> {
    verdict.claims.iter().filter(|c| c.state == State::Fails).map(|c| c.name).collect()
}

/// The claim with the given words in its name.
pub(crate) fn claim<'a>(verdict: &'a Verdict, words: &str) -> &'a Claim {
    verdict.claims.iter().find(|c| c.name.contains(words)).expect("a claim of that name")
}

#[track_caller]
pub(crate) fn assert_holds(text: &str, sketch: &Sketch, asked: &Asked) {
    match verdict(text, sketch, asked) {
        Ok(verdict) => assert!(verdict.holds, "fails {:?}\n{:#?}", failing(&verdict), verdict.claims),
        Err(error) => panic!("refused: {error}"),
    }
}
