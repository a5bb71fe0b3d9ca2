//! Straight moves and arcs of the interpreter.

use kurbo::Point;

use super::arc::Arc;
use super::block::{Codes, wrong};
use super::interpret::{AXES, Controller, Plane};
use super::program::{ArcFlaw, What};
use crate::error::Error;
use crate::machine::{HelixFeed, Unit};
use crate::toolpath::{Move, Position};

/// Arcs across the XY plane become chords this near, in mm: half of what the language lets an arc's radii
/// differ.
const CHORD_ERROR: f64 = 0.001;

/// A place that may not be stated in every axis.
pub(super) type Place = [Option<f64>; 3];

impl Controller<'_> {
    /// Where the axis words of the line lead; axes without a word stay.
    pub(super) fn target(&mut self, codes: &mut Codes) -> Result<Place, Error> {
        let unit = self.unit().mm();
        let absolute = self.is_absolute();
        let mut to = self.at;
        for (axis, letter) in AXES.into_iter().enumerate() {
            let Some(value) = codes.value(letter) else { continue };
            let value = value * unit;
            to[axis] = match (absolute, self.at[axis]) {
                (true, _) => Some(value + self.offset(axis)),
                (false, Some(at)) => Some(at + value),
                (false, None) if value == 0.0 => None,
                (false, None) => {
                    let letter = char::from(letter);
                    let what =
                        format!("{letter} moves by a distance from a place that the program has not stated");
                    return Err(wrong(what).remedy("state a place from zero (G90) first"));
                }
            };
        }
        Ok(to)
    }

    /// G0 and G1.
    pub(super) fn line_to(&mut self, feeding: bool, codes: &mut Codes) -> Result<(), Error> {
        if !codes.has_axis() {
            return Err(wrong("the line has I, J, K or R, and a straight move has no use for them"));
        }
        let moved = AXES.map(|axis| codes.has(axis));
        let to = self.target(codes)?;
        self.program.motion_blocks += 1;
        let feed = if feeding { Some(self.feed_over(distance(self.at, to), codes)?) } else { None };
        self.straight(moved, to, feed);
        Ok(())
    }

    /// A straight move, or an approach where not every axis has a stated place.
    pub(super) fn straight(&mut self, moved: [bool; 3], to: Place, feed: Option<f64>) {
        match (position(self.at), position(to)) {
            (Some(from), Some(end)) => self.push(from, end, 0.0, feed),
            _ => self.happens(What::Approach { moved, to, rapid: feed.is_none() }),
        }
        self.at = to;
    }

    /// Adds a move, unless it goes nowhere.
    fn push(&mut self, from: Position, to: Position, bulge: f64, feed: Option<f64>) {
        if from != to {
            let spindle_rpm = self.turning_rpm();
            let moves = &mut self.program.toolpath.moves;
            moves.push(Move { from, to, bulge, feed, spindle_rpm, line: self.line });
        }
    }

    /// The feed in mm/min for a move of `length` mm; 0 when none was ever set.
    pub(super) fn feed_over(&mut self, length: f64, codes: &Codes) -> Result<f64, Error> {
        if !self.in_inverse_time() {
            return Ok(self.feed.unwrap_or(0.0));
        }
        if !codes.has(b'F') {
            return Err(wrong("in inverse time (G93) every move needs its own F"));
        }
        Ok(self.feed.unwrap_or(0.0) * length)
    }

    /// G2 and G3.
    pub(super) fn arc_to(&mut self, clockwise: bool, codes: &mut Codes) -> Result<(), Error> {
        let plane = self.arc_plane();
        let [a, b, c] = axes(plane);
        if !codes.has(AXES[a]) && !codes.has(AXES[b]) {
            return Err(wrong("an arc needs at least one axis word of its plane"));
        }
        let to = self.target(codes)?;
        let (Some(from), Some(end)) = (position(self.at), position(to)) else {
            let what = "an arc starts from a place that the program has not stated";
            return Err(wrong(what).remedy("state X, Y and Z before it"));
        };
        let (start, stop) = (coordinates(from), coordinates(end));
        let flat = |p: [f64; 3]| Point::new(p[a], p[b]);
        let arc = self.arc(plane, (flat(start), flat(stop)), clockwise, codes)?;
        self.program.motion_blocks += 1;
        self.judge(&arc);
        let rise = stop[c] - start[c];
        let feed = self.arc_feed(&arc, rise, codes)?;
        let place = |(t, at): (f64, Point)| {
            let mut p = stop;
            (p[a], p[b]) = (at.x, at.y);
            if t < 1.0 {
                p[c] = start[c] + rise * t;
            }
            Position { xy: Point::new(p[0], p[1]), z: p[2] }
        };
        let mut at = from;
        let mut go = |controller: &mut Self, bulge, to| {
            controller.push(at, to, bulge, Some(feed));
            at = to;
        };
        if plane == Plane::Xy {
            let (bulge, ends) = arc.halves();
            ends.for_each(|end| go(self, bulge, place(end)));
        } else {
            self.program.approximated = CHORD_ERROR;
            arc.chords(CHORD_ERROR).for_each(|end| go(self, 0.0, place(end)));
        }
        self.at = to;
        Ok(())
    }

    /// The arc of the line, in its plane.
    fn arc(
        &mut self,
        plane: Plane,
        (from, to): (Point, Point),
        clockwise: bool,
        codes: &mut Codes,
    ) -> Result<Arc, Error> {
        let unit = self.unit().mm();
        let letters = match plane {
            Plane::Xy => [b'I', b'J'],
            Plane::Zx => [b'K', b'I'],
            Plane::Yz => [b'J', b'K'],
        };
        let centred = letters.into_iter().any(|letter| codes.has(letter));
        if let Some(radius) = codes.value(b'R') {
            if centred {
                return Err(wrong("an arc has a centre and a radius: which one holds cannot be told"));
            }
            return Arc::by_radius(from, to, radius * unit, clockwise);
        }
        if !centred {
            return Err(wrong("an arc needs its centre in its plane, or a radius"));
        }
        let from_zero = self.centre_is_from_zero();
        let [a, b, _] = axes(plane);
        let mut centre = |letter: u8, axis: usize, start: f64| match (codes.value(letter), from_zero) {
            (Some(value), true) => Ok(value * unit + self.offset(axis)),
            (Some(value), false) => Ok(start + value * unit),
            (None, false) => Ok(start),
            (None, true) => Err(wrong(format!("a centre from zero needs {} too", char::from(letter)))),
        };
        let centre = Point::new(centre(letters[0], a, from.x)?, centre(letters[1], b, from.y)?);
        Arc::by_centre(from, to, centre, clockwise)
    }

    /// Keeps the worst mismatch of radii, and those that the language does not allow.
    fn judge(&mut self, arc: &Arc) {
        let limit = match self.unit() {
            Unit::Mm => 0.002,
            Unit::Inch => 0.0002 * 25.4,
        };
        let flaw = ArcFlaw { line: self.line, mismatch: arc.mismatch };
        let program = &mut self.program;
        if program.worst_arc.is_none_or(|worst| worst.mismatch < flaw.mismatch) {
            program.worst_arc = Some(flaw);
        }
        // Differences of coordinates carry their rounding with them.
        let scale = arc.from.to_vec2().hypot().max(arc.to.to_vec2().hypot());
        if flaw.mismatch > limit + 8.0 * f64::EPSILON * scale {
            program.arc_flaws.push(flaw);
        }
    }

    /// The feed along an arc that rises by `rise` mm.
    fn arc_feed(&mut self, arc: &Arc, rise: f64, codes: &Codes) -> Result<f64, Error> {
        let flat = arc.length();
        let length = flat.hypot(rise);
        let feed = self.feed_over(length, codes)?;
        let by_plane = rise != 0.0 && self.dialect.helix_feed == HelixFeed::Plane && !self.in_inverse_time();
        if by_plane {
            self.assume("the feed of a helix is measured along its plane, as the profile says");
        }
        Ok(if by_plane { feed * length / flat } else { feed })
    }
}

/// The axes of a plane, turning the first towards the second seen against the third.
fn axes(plane: Plane) -> [usize; 3] {
    match plane {
        Plane::Xy => [0, 1, 2],
        Plane::Zx => [2, 0, 1],
        Plane::Yz => [1, 2, 0],
    }
}

/// `place` when every axis is stated.
pub(super) fn position(place: Place) -> Option<Position> {
    let [x, y, z] = place;
    Some(Position { xy: Point::new(x?, y?), z: z? })
}

/// X, Y and Z of `at`.
fn coordinates(at: Position) -> [f64; 3] {
    [at.xy.x, at.xy.y, at.z]
}

/// The distance between two places in the axes that both state.
fn distance(from: Place, to: Place) -> f64 {
    let by_axis = from.into_iter().zip(to).map(|(from, to)| from.zip(to).map_or(0.0, |(from, to)| to - from));
    by_axis.map(|d| d * d).sum::<f64>().sqrt()
}
