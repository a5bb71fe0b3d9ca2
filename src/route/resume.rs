//! Starting again in the middle of a program.

use crate::error::Error;
use crate::geom::{ArcSpline, Span};
use crate::toolpath::{Move, Toolpath};

use super::course::Course;
use super::cut::Cut;
use super::profile::Profile;
use super::setup::{Setup, settings};
use super::track::Track;
use super::{Routed, Routing, keep_out};

/// A place where a toolpath can be taken up again.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Restart {
    /// The move to take up, from 0.
    pub number: usize,
    /// Which of the cuts it belongs to, from 1 in the order in which they are begun.
    pub cut: usize,
    /// The id of its contour.
    pub contour: usize,
    /// The height that all of the contour is cut to already; `None` where the cut begins.
    pub below: Option<f64>,
}

/// The places where a toolpath can be taken up again: where a contour is begun, and, within one, where the cutter goes
/// down to the next pass from one that is done, with room for a ramp in its slot. The very start is none of them.
pub fn restarts(routing: &Routing, contours: &[Routed], setup: &Setup) -> Vec<Restart> {
    let moves = &routing.toolpath.moves;
    let ends = routing.safe_starts.iter().skip(1).copied().chain([moves.len()]);
    let visits = routing.safe_starts.iter().zip(ends).zip(&routing.begun);
    let mut found = Vec::new();
    for (cut, ((&start, end), &contour)) in (1..).zip(visits) {
        if start > 0 {
            found.push(Restart { number: start, cut, contour, below: None });
        }
        let Some(way) = contours.iter().find(|c| c.id == contour).map(|c| &c.cut) else { continue };
        let mut lowest = f64::INFINITY;
        for number in start + 1..end {
            let (before, m) = (&moves[number - 1], &moves[number]);
            lowest = lowest.min(before.to.z);
            let level = before.to.z >= before.from.z && before.span().length() > 0.0;
            if level && m.to.z < lowest && way_back(moves, number, way, setup).is_some() {
                found.push(Restart { number, cut, contour, below: Some(m.from.z) });
            }
        }
    }
    found
}

/// A toolpath that takes up another one at its move `number`, from 0.
///
/// In the middle of a contour the cutter comes down in the slot that is cut already, along the way that led to the
/// move, no steeper than a ramp and never below what was cut. Where that way is too short, and between contours, the
/// contour is begun anew.
///
/// # Errors
/// A wrong setting when there is no such move; refused when a clamp is in the way.
pub fn resume(routing: &Routing, number: usize, cut: &Cut, setup: &Setup) -> Result<Toolpath, Error> {
    let moves = &routing.toolpath.moves;
    if number >= moves.len() {
        let what = format!("there is no move {number}: the program has {}", moves.len());
        return Err(settings(
            what,
            "count its motion blocks from 0, or take a safe start from the setup sheet",
        ));
    }
    let mut course = Course::new(setup);
    course.spin(moves[number].spindle_rpm);
    let rest = match way_back(moves, number, cut, setup) {
        Some(way) => {
            way.ramp_down(&mut course, cut, setup);
            number
        }
        None => begin_anew(routing, number, &mut course),
    };
    let mut toolpath = course.finish();
    toolpath.moves.extend_from_slice(&moves[rest..]);
    keep_out::check(&toolpath, cut.cutter_mm / 2.0, setup)?;
    Ok(toolpath)
}

/// Travels to the last place at clearance height at or before a move; the number of the move to go on with.
fn begin_anew(routing: &Routing, number: usize, course: &mut Course) -> usize {
    let level = |m: &Move| m.is_rapid() && m.from.xy != m.to.xy;
    let moves = &routing.toolpath.moves;
    let start = if level(&moves[number]) {
        number
    } else {
        routing.safe_starts.iter().copied().rfind(|&start| start <= number).unwrap_or(0)
    };
    let first = &moves[start];
    course.travel_to(if level(first) { first.to.xy } else { first.from.xy });
    if level(first) { start + 1 } else { start }
}

/// The way that led to a move, along what is cut already, as long as a ramp to its height needs.
struct WayBack {
    track: Track,
    /// How deep it was cut.
    floor: Profile,
    ramp_mm: f64,
}

/// The way back from a cut; none where it is too short, and for a move that is no cut along a contour.
fn way_back(moves: &[Move], number: usize, cut: &Cut, setup: &Setup) -> Option<WayBack> {
    let along = |m: &&Move| !m.is_rapid() && m.span().length() > 0.0;
    let z = Some(&moves[number]).filter(along)?.from.z;
    let ramp_mm = cut.ramp_length(setup.heights().top - z);
    let mut way: Vec<&Move> = Vec::new();
    let mut length = 0.0;
    for m in moves[..number].iter().rev().take_while(along) {
        length += m.span().length();
        way.push(m);
        if length >= ramp_mm {
            way.reverse();
            let spans: Vec<Span> = way.iter().map(|m| m.span()).collect();
            let mut floor = vec![(0.0, way[0].from.z)];
            for m in &way {
                floor.push((floor[floor.len() - 1].0 + m.span().length(), m.to.z));
            }
            let track = Track::new(&ArcSpline::from_spans(&spans, false));
            return Some(WayBack { track, floor: Profile::through(floor), ramp_mm });
        }
    }
    None
}

impl WayBack {
    /// From the clearance height down to the end of the way.
    fn ramp_down(&self, course: &mut Course, cut: &Cut, setup: &Setup) {
        let (to, top) = (self.track.length(), setup.heights().top);
        let from = self.track.at_joint(to - self.ramp_mm, 2.0 * setup.step_mm);
        let ramp = Profile::through(vec![(from, top), (to, self.floor.at(to))]).over(&self.floor);
        course.travel_to(self.track.place(from));
        course.height_to(ramp.at(from), cut);
        course.follow(&self.track, (from, to), &ramp, cut);
    }
}
