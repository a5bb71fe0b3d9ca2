//! Cutter compensation: the line of the cutter's centre, at its radius from a region, exactly.
//!
//! The centre may be wherever it is at least the radius away from the region to keep. The border of that room is
//! made of parallel spans and of arcs about corners, all at exactly the radius from the outline. So: lay out all of
//! them, cut them where they cross each other, keep the pieces that nothing of the outline comes closer to, and chain
//! those. Nothing is assumed about loops, pinches or islands, and nothing is lost unnoticed: every piece that is kept
//! must end up in a closed chain on the right side, or the whole is tried again with a radius larger by rounding
//! error, and refused in the end.

mod candidates;
mod chain;
mod pieces;
mod region;
mod sharp;
mod simple;
mod uncut;

use kurbo::Point;

use crate::error::{Error, Kind};
use crate::geom::ArcSpline;

use chain::Fault;
use region::Region;

pub use crate::job::Corners;
pub use uncut::{Uncut, uncut};

/// Which side of the outline the cutter stays on.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Side {
    /// Within the region that the loops enclose: for a hole or a pocket.
    Inside,
    /// Outside that region: for a part.
    Outside,
}

/// The lines of the cutter's centre about one region.
#[derive(Clone, Debug, Default)]
pub struct Compensated {
    /// The closed lines. Each has the outline on its right, so that a cutter which turns clockwise climbs.
    pub lines: Vec<CentreLine>,
    /// The places where the loops cross or touch themselves or each other.
    pub contacts: Vec<Point>,
    /// The loops, by their place in the input, that no line follows: the cutter is too large for them.
    pub vanished: Vec<usize>,
}

/// One closed line of the cutter's centre.
#[derive(Clone, Debug)]
pub struct CentreLine {
    /// The line itself.
    pub path: ArcSpline,
    /// The loops that it follows, by their place in the input: more than one where the cutter does not fit between.
    pub along: Vec<usize>,
}

/// The lines of the cutter's centre at `radius` mm from the region that the closed `loops` bound, on `side` of it. A
/// point belongs to the region when an odd number of loops run round it, so that a loop in a loop is a hole; loops
/// may cross, and the places where they do are told.
///
/// A line is within rounding error of its exact place (below the square root of `f64::EPSILON` times the drawing's
/// size).
///
/// # Errors
/// Refused for a loop that is open or a point, or that could not be followed without a doubt.
///
/// ```
/// use ribband::geom::ArcSpline;
/// use ribband::offset::{Corners, Side, compensate};
///
/// let square = ArcSpline::polyline([(0.0, 0.0), (10.0, 0.0), (10.0, 10.0), (0.0, 10.0)].map(Into::into), true);
/// let inside = compensate(&[square], 2.0, Side::Inside, Corners::Round)?;
/// assert!((inside.lines[0].path.area() - 36.0).abs() < 1e-9);
/// # Ok::<(), ribband::error::Error>(())
/// ```
pub fn compensate(
    loops: &[ArcSpline],
    radius: f64,
    side: Side,
    corners: Corners,
) -> Result<Compensated, Error> {
    if !(radius.is_finite() && radius > 0.0) {
        return Err(Error::new(
            Kind::Settings,
            format!("a cutter's radius of {radius} mm is not above zero"),
        ));
    }
    let region = Region::new(loops, radius, side)?;
    // Contacts that are exactly tangent at one radius are not so at the next.
    const TRIES: u32 = 5;
    let mut fault = Fault { at: Point::ORIGIN };
    for k in 0..TRIES {
        match follow(&region, radius + f64::from(k) * region.snap) {
            Ok(mut lines) => {
                if corners == Corners::Sharp {
                    lines.iter_mut().for_each(|l| l.path = sharp::sharpened(&region, radius, &l.path));
                }
                let vanished = vanished(loops.len(), &lines);
                return Ok(Compensated { lines, contacts: region.contacts, vanished });
            }
            Err(found) => fault = found,
        }
    }
    Err(undecided(fault))
}

/// One try at one radius.
fn follow(region: &Region, radius: f64) -> Result<Vec<CentreLine>, Fault> {
    let candidates = candidates::lay_out(region, radius);
    let pieces = pieces::valid(region, radius, &candidates);
    let mut lines = chain::chain(pieces, region.snap)?;
    for line in &mut lines {
        region.verify(line, radius)?;
        line.along = line.along.iter().flat_map(|&i| region.loops[i].along.iter().copied()).collect();
        line.along.sort_unstable();
        line.along.dedup();
    }
    Ok(lines)
}

fn vanished(count: usize, lines: &[CentreLine]) -> Vec<usize> {
    (0..count).filter(|i| !lines.iter().any(|line| line.along.contains(i))).collect()
}

fn undecided(Fault { at }: Fault) -> Error {
    Error::new(
        Kind::Refused,
        format!("the cutter's line near ({:.3}, {:.3}) could not be settled without a doubt", at.x, at.y),
    )
    .remedy("change the cutter or the tolerance a little, or clean the drawing there")
}
