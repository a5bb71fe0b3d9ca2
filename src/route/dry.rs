//! Programs to try before cutting: the same moves in the air, and a round about everything.

use kurbo::{Point, Rect};

use crate::error::Error;
use crate::geom::Span;
use crate::toolpath::{Move, Position, Toolpath};

use super::course::Course;
use super::cut::Cut;
use super::keep_out;
use super::setup::Setup;

/// A toolpath raised above the stock.
#[derive(Clone, Debug)]
pub struct AirCut {
    /// The same moves, higher, with the spindle stopped.
    pub toolpath: Toolpath,
    /// By how much they are raised, in mm: the program's start height too.
    pub lift_mm: f64,
}

/// The same moves raised so that the lowest is at the clearance height, with the spindle stopped.
pub fn air_cut(toolpath: &Toolpath, setup: &Setup) -> AirCut {
    let heights = setup.heights();
    let lowest = toolpath.moves.iter().map(|m| m.from.z.min(m.to.z)).fold(heights.clearance, f64::min);
    // In whole steps, so that every height is rounded as it was.
    let steps = (heights.clearance - lowest) / setup.step_mm;
    let whole = if (steps - steps.round()).abs() < 1e-6 { steps.round() } else { steps.ceil() };
    let lift_mm = whole * setup.step_mm;
    let raised = |p: Position| Position { z: p.z + lift_mm, ..p };
    let lift = |m: &Move| Move { from: raised(m.from), to: raised(m.to), spindle_rpm: 0.0, ..*m };
    AirCut { toolpath: Toolpath { moves: toolpath.moves.iter().map(lift).collect() }, lift_mm }
}

/// A round about all that a toolpath cuts, then about every clamp, with the spindle stopped: at the clearance height,
/// above the stock and above the highest clamp. The cutter's own radius is added to what it cuts.
///
/// # Errors
/// Refused when a clamp would be in the way.
pub fn frame(toolpath: &Toolpath, cut: &Cut, setup: &Setup) -> Result<Toolpath, Error> {
    let clearance_mm = setup.clearance_over_all() - setup.heights().top;
    let raised = Setup { clearance_mm, ..setup.clone() };
    let cuts = toolpath.moves.iter().filter(|m| !m.is_rapid()).map(|m| m.span().bbox());
    let extents = cuts.reduce(|a, b| a.union(b)).map(|r| r.inflate(cut.cutter_mm / 2.0, cut.cutter_mm / 2.0));
    let mut course = Course::new(&raised);
    for rect in extents.into_iter().chain(setup.keep_outs.iter().map(|k| k.place)) {
        let corners = corners(rect);
        course.travel_to(corners[0]);
        for k in 1..=4 {
            let span = Span::line(corners[k - 1], corners[k % 4]);
            course.along(span, raised.heights().clearance, cut);
        }
    }
    course.travel_to(setup.park);
    let framed = course.finish();
    keep_out::check(&framed, cut.cutter_mm / 2.0, &raised)?;
    Ok(framed)
}

/// The corners of a box, counter-clockwise from the lower left.
fn corners(r: Rect) -> [Point; 4] {
    [(r.x0, r.y0), (r.x1, r.y0), (r.x1, r.y1), (r.x0, r.y1)].map(Point::from)
}
