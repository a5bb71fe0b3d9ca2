//! From the cutter's centre lines to its moves: passes, entry, order.
//!
//! The order of the moves is safe by construction: the height goes up before the cutter travels, every rapid in the
//! plane runs at the clearance height, and nothing goes below that height by rapid.

mod course;
mod order;
mod setup;

use kurbo::Point;

use crate::error::Error;
use crate::geom::ArcSpline;
use crate::toolpath::Toolpath;

use course::Course;

pub use setup::{Cut, Heights, Setup, Thickness, Zero};

/// A contour ready to be cut: the line that the cutter's centre follows, and how it is cut.
#[derive(Clone, Debug)]
pub struct Routed {
    /// The contour's id in the drawing.
    pub id: usize,
    /// The cutter's centre line, in the program's coordinates.
    pub path: ArcSpline,
    /// How deep, how fast.
    pub cut: Cut,
}

/// What routing made.
#[derive(Clone, Debug, Default)]
pub struct Routing {
    /// The moves, from a rapid at clearance height to the park position.
    pub toolpath: Toolpath,
    /// The contours' ids in the order in which they are cut.
    pub order: Vec<usize>,
    /// What the person at the machine should know, one sentence each.
    pub notes: Vec<String>,
}

/// Routes the cutter along every contour and back to the park position.
///
/// A closed contour is entered at a joint of its path, at a corner where it has one; an open one at the nearer end.
///
/// # Errors
/// [`Kind::Settings`](crate::error::Kind) for a setting out of its bounds, with its name; refused when a contour has
/// no length.
pub fn route(contours: &[Routed], setup: &Setup) -> Result<Routing, Error> {
    setup.validate()?;
    for contour in contours {
        contour.validate()?;
    }
    let mut course = Course::new(setup);
    let mut order = Vec::with_capacity(contours.len());
    for stop in order::tour(contours, setup) {
        let contour = &contours[stop.contour];
        course.cut_contour(&contour.path_from(stop.entry), &contour.cut);
        order.push(contour.id);
    }
    course.travel_to(setup.park);
    Ok(Routing { toolpath: course.finish(), order, notes: Vec::new() })
}

impl Routed {
    /// Every flaw that would make the contour impossible to cut.
    fn validate(&self) -> Result<(), Error> {
        let finite = self.path.vertices.iter().all(|v| v.at.is_finite() && v.bulge.is_finite());
        if !finite || self.path.is_empty() || self.path.length() == 0.0 {
            return Err(setup::refused(
                format!("contour {} has nothing to cut: its path has no length", self.id),
                "remove it from the drawing, or leave its layer out",
            ));
        }
        self.cut.validate()
    }

    /// The places where cutting may begin, as vertex numbers: the corners of a closed path or, where it has none, all
    /// its joints; the two ends of an open one.
    fn entries(&self, step_mm: f64) -> Vec<usize> {
        let count = self.path.vertices.len();
        if !self.path.closed {
            return vec![0, count - 1];
        }
        let corners: Vec<usize> = (0..count).filter(|&i| is_corner(&self.path, i, step_mm)).collect();
        if corners.is_empty() { (0..count).collect() } else { corners }
    }

    /// The path as it is cut when it is entered at a vertex.
    fn path_from(&self, entry: usize) -> ArcSpline {
        match (self.path.closed, entry) {
            (_, 0) => self.path.clone(),
            (true, _) => self.path.started_at(entry),
            (false, _) => self.path.reversed(),
        }
    }

    /// The place of vertex `entry`.
    fn place(&self, entry: usize) -> Point {
        self.path.vertices[entry].at
    }
}

/// True when the tangent of a closed path breaks at vertex `i` by more than rounding its ends to `step_mm` explains:
/// each end moves by less than the step, so a chord turns by less than twice the step over its length.
fn is_corner(path: &ArcSpline, i: usize, step_mm: f64) -> bool {
    let before = path.span(if i == 0 { path.len() - 1 } else { i - 1 });
    let after = path.span(i);
    let (from, to) = (before.tangent(1.0), after.tangent(0.0));
    let turn = from.cross(to).atan2(from.dot(to)).abs();
    let shortest = before.chord().hypot().min(after.chord().hypot());
    turn * shortest > 4.0 * step_mm
}
