//! From the cutter's centre lines to its moves: passes, entry, tabs, order.
//!
//! The order of the moves is safe by construction: the height goes up before the cutter travels, every rapid in the
//! plane runs at the clearance height, and nothing goes below that height by rapid.

mod contour;
mod course;
mod cut;
mod dry;
mod keep_out;
mod order;
mod profile;
mod relief;
mod resume;
mod setup;
mod shorten;
mod sides;
mod start;
mod tabs;
mod track;

use kurbo::Point;

use crate::error::Error;
use crate::geom::ArcSpline;
use crate::toolpath::Toolpath;

use contour::{Job, Levels};
use course::Course;
use order::Stop;
use track::Track;

pub use crate::job::{Corners, Direction, Entry, Held, TabNumber, Tabs, Thickness, Zero};
pub use contour::Lead;
pub use cut::{Cut, Side};
pub use dry::{AirCut, air_cut, frame};
pub use order::by_cutter;
pub use resume::{Restart, restarts, resume};
pub use setup::{Heights, KeepOut, Order, Setup};
pub use sides::{Outline, Sided, beside};

/// A contour ready to be cut: the line that the cutter's centre follows, and how it is cut.
#[derive(Clone, Debug, Default)]
pub struct Routed {
    /// The contour's id in the drawing.
    pub id: usize,
    /// The cutter's centre line, in the program's coordinates.
    pub path: ArcSpline,
    /// How deep, how fast.
    pub cut: Cut,
    /// How it is entered.
    pub work: Work,
}

/// What is done along a path.
#[derive(Clone, Debug, Default, PartialEq)]
pub enum Work {
    /// It is cut on the line: entered at a corner where a closed path has one, else at any joint; an open one at an
    /// end.
    #[default]
    OnLine,
    /// It is the line beside a part or in a hole: entered at its first vertex.
    Beside {
        /// The way in and out there, where there is room.
        lead: Option<Lead>,
        /// The line to cut in passes first; the path itself is then cut at full depth, once.
        rough: Option<ArcSpline>,
    },
    /// It is a hole of the cutter's own size: drilled in the middle of the path's box.
    Drill,
}

/// What routing made.
#[derive(Clone, Debug, Default)]
pub struct Routing {
    /// The moves, from a rapid at clearance height to the park position.
    pub toolpath: Toolpath,
    /// The contours' ids in the order in which they are first cut.
    pub order: Vec<usize>,
    /// The numbers of the moves, from 0, before which the cutter is at the clearance height above a new contour: safe
    /// places to start again.
    pub safe_starts: Vec<usize>,
    /// The id of the contour that is begun at each of these places.
    pub begun: Vec<usize>,
    /// What the person at the machine should know, one sentence each.
    pub notes: Vec<String>,
}

/// Routes the cutter along every contour and back to the park position: what lies within a closed contour before that
/// contour, so that nothing is cut that is loose already, and part by part on a short tour.
///
/// # Errors
/// [`Kind::Settings`](crate::error::Kind) for a setting out of its bounds, with its name; refused when a contour has
/// no length, frees a part that nothing holds, goes too far into the bed, or its tabs do not fit, and when a clamp is
/// in the way.
pub fn route(contours: &[Routed], setup: &Setup) -> Result<Routing, Error> {
    setup.validate()?;
    for contour in contours {
        contour.validate(setup)?;
    }
    let stops = order::tour(contours, setup);
    let mut routing = Routing { notes: notes(contours, setup), ..Routing::default() };
    let mut course = Course::new(setup);
    for pass in 0..rounds(contours, setup) {
        for stop in &stops {
            let contour = &contours[stop.contour];
            let before = course.len();
            contour.cut(*stop, pass, setup, &mut course)?;
            if course.len() > before {
                routing.safe_starts.push(before);
                routing.begun.push(contour.id);
            }
        }
    }
    course.travel_to(setup.park);
    routing.order = stops.iter().map(|stop| contours[stop.contour].id).collect();
    routing.toolpath = course.finish();
    let widest = contours.iter().map(|c| c.cut.cutter_mm).fold(0.0, f64::max);
    keep_out::check(&routing.toolpath, widest / 2.0, setup)?;
    Ok(routing)
}

/// How often the tour is made: once, or once for every pass.
fn rounds(contours: &[Routed], setup: &Setup) -> usize {
    match setup.order {
        Order::ByContour => 1,
        Order::ByPass => contours.iter().map(|c| c.cut.passes().len()).max().unwrap_or(0),
    }
}

/// What is true of the job as a whole.
fn notes(contours: &[Routed], setup: &Setup) -> Vec<String> {
    let mut notes = Vec::new();
    if setup.thickness.is_none() && contours.iter().any(|c| c.path.closed) {
        notes.push(
            "the stock's thickness is not given: whether a cut goes through and frees a part is not known"
                .into(),
        );
    }
    let deepest = contours.iter().filter_map(|c| setup.bed_cut(c.cut.depth_mm)).fold(0.0, f64::max);
    if deepest > 0.0 {
        notes.push(format!("the cutter goes up to {deepest:.2} mm into the bed under the thinnest stock"));
    }
    notes
}

impl Routed {
    /// Every flaw that would make the contour impossible or unsafe to cut.
    fn validate(&self, setup: &Setup) -> Result<(), Error> {
        let finite = self.path.vertices.iter().all(|v| v.at.is_finite() && v.bulge.is_finite());
        if !finite || self.path.is_empty() || self.path.length() == 0.0 {
            return Err(setup::refused(
                format!("contour {} has nothing to cut: its path has no length", self.id),
                "remove it from the drawing, or leave its layer out",
            ));
        }
        self.cut.validate()?;
        self.cut.hold(self.id, self.frees(), setup)
    }

    /// True when the cutter leaves something within a closed path, that comes free when it is cut through: nothing is left
    /// where the path is no wider than the cutter.
    fn frees(&self) -> bool {
        let wide = |bbox: kurbo::Rect| bbox.width().min(bbox.height()) > self.cut.cutter_mm;
        self.path.closed && self.work != Work::Drill && self.path.bbox().is_some_and(wide)
    }

    /// Adds the moves of one tour's visit to the contour.
    fn cut(&self, stop: Stop, round: usize, setup: &Setup, course: &mut Course) -> Result<(), Error> {
        let Some(levels) = self.levels(round, setup) else { return Ok(()) };
        if let Work::Drill = self.work {
            if round == 0 {
                contour::drill(course, self.entrance(stop.entry), &self.cut);
            }
            return Ok(());
        }
        let job = self.job(stop, setup)?;
        match &self.work {
            Work::Beside { rough: Some(rough), .. } => {
                let rough = Track::new(rough);
                let tabs = job.tabs.as_ref().map(|tabs| tabs.beside(&job.track, &rough));
                let first = Job { track: rough, cut: job.cut, tabs, lead: None };
                first.cut(course, &levels);
                let last = levels.levels.last().copied().unwrap_or(levels.from);
                if last <= setup.heights().top - self.cut.depth_mm {
                    job.finish(course, &first.track, last);
                }
            }
            _ => job.cut(course, &levels),
        }
        Ok(())
    }

    /// The contour with its track begun where the tour enters it.
    fn job(&self, stop: Stop, setup: &Setup) -> Result<Job<'_>, Error> {
        let track = Track::new(&self.path_from(stop.entry));
        let wanted = self.cut.tabs.filter(|_| self.frees());
        let place = |tabs| tabs::place(self.id, &track, &self.cut, &tabs, setup.heights());
        let tabs = wanted.map(place).transpose()?;
        let lead = match self.work {
            Work::Beside { lead, .. } => lead,
            _ => None,
        };
        Ok(Job { track, cut: &self.cut, tabs, lead })
    }

    /// The passes of one tour: all of them, or the one whose turn it is.
    fn levels(&self, round: usize, setup: &Setup) -> Option<Levels> {
        let top = setup.heights().top;
        let all: Vec<f64> = self.cut.passes().into_iter().map(|depth| top - depth).collect();
        match setup.order {
            Order::ByContour => Some(Levels { from: top, levels: all }),
            Order::ByPass => {
                let from = if round == 0 { top } else { *all.get(round - 1)? };
                Some(Levels { from, levels: vec![*all.get(round)?] })
            }
        }
    }

    /// The places where cutting may begin, as vertex numbers.
    fn entries(&self, step_mm: f64) -> Vec<usize> {
        let count = self.path.vertices.len();
        match (&self.work, self.path.closed) {
            (Work::OnLine, false) => vec![0, count - 1],
            (Work::OnLine, true) => {
                let corners: Vec<usize> = (0..count).filter(|&i| is_corner(&self.path, i, step_mm)).collect();
                if corners.is_empty() { (0..count).collect() } else { corners }
            }
            _ => vec![0],
        }
    }

    /// The path as it is cut when it is entered at a vertex.
    fn path_from(&self, entry: usize) -> ArcSpline {
        match (self.path.closed, entry) {
            (_, 0) => self.path.clone(),
            (true, _) => self.path.started_at(entry),
            (false, _) => self.path.reversed(),
        }
    }

    /// The place where the cutter goes down first for that entry.
    fn entrance(&self, entry: usize) -> Point {
        match self.work {
            Work::Drill => self.path.bbox().map_or(Point::ORIGIN, |bbox| bbox.center()),
            _ => self.path.vertices[entry].at,
        }
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
