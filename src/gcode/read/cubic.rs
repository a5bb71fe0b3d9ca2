//! The cubic move: G5 with I, J, P and Q, as common practice has it.

use kurbo::{CubicBez, Vec2};

use super::block::{Codes, wrong};
use super::interpret::{Controller, Plane};
use super::moves::position;
use crate::error::Error;
use crate::geom::arcs_of;
use crate::toolpath::{Move, Position};

/// Cubic moves become arcs this near, in mm: a quarter of what the language lets an arc's radii differ.
pub const CUBIC_ERROR: f64 = 0.0005;
/// Beyond this size, in mm, doubles do not hold a cubic to the error.
const FARTHEST: f64 = 1e9;

impl Controller<'_> {
    /// G5: a cubic whose first control point I and J give from its start, the second P and Q from its end.
    pub(super) fn cubic_to(&mut self, codes: &mut Codes) -> Result<(), Error> {
        if !self.dialect.cubic_moves {
            let what = "G5 is a cubic move on some controllers and another thing on others";
            return Err(wrong(what).remedy("name a machine whose profile declares it (program.spline)"));
        }
        if self.arc_plane() != Plane::Xy {
            return Err(wrong("cubic moves are read in the XY plane only"));
        }
        let to = self.target(codes)?;
        let (Some(from), Some(end)) = (position(self.at), position(to)) else {
            let what = "a cubic move starts from a place that the program has not stated";
            return Err(wrong(what).remedy("state X, Y and Z before it"));
        };
        if from.z - end.z != 0.0 {
            return Err(wrong("a cubic move changes height: what it does then is not settled"));
        }
        let unit = self.unit().mm();
        let [i, j, p, q] = [b'I', b'J', b'P', b'Q'].map(|letter| codes.value(letter));
        let (Some(i), Some(j), Some(p), Some(q)) = (i, j, p, q) else {
            let what = "a cubic move needs I and J for its first control point, and P and Q for its second";
            return Err(wrong(what));
        };
        let cubic = CubicBez {
            p0: from.xy,
            p1: from.xy + Vec2::new(i, j) * unit,
            p2: end.xy + Vec2::new(p, q) * unit,
            p3: end.xy,
        };
        let points = [cubic.p0, cubic.p1, cubic.p2, cubic.p3];
        if points.into_iter().any(|p| p.x.abs().max(p.y.abs()) > FARTHEST) {
            return Err(wrong("a cubic move goes further than a thousand kilometres"));
        }
        self.run_along(cubic, from, codes)?;
        self.at = to;
        Ok(())
    }

    /// The arcs of a cubic, all at the feed of its line.
    fn run_along(&mut self, cubic: CubicBez, from: Position, codes: &Codes) -> Result<(), Error> {
        self.program.motion_blocks += 1;
        self.program.approximated = self.program.approximated.max(CUBIC_ERROR);
        let spans = arcs_of(cubic, CUBIC_ERROR);
        let feed = Some(self.feed_over(spans.iter().map(|span| span.length()).sum(), codes)?);
        let spindle_rpm = self.turning_rpm();
        let at = |xy| Position { xy, z: from.z };
        let moves = spans.iter().filter(|span| span.start != span.end).map(|span| Move {
            from: at(span.start),
            to: at(span.end),
            bulge: span.bulge,
            feed,
            spindle_rpm,
            line: self.line,
        });
        self.program.toolpath.moves.extend(moves);
        Ok(())
    }
}
