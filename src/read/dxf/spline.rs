//! SPLINE: B-splines by control points and knots, or by fit points alone.

use kurbo::CubicBez;
use nalgebra::{RowVector3, Vector3};

use super::geometry::{Drawn, Remark, is_sloped};
use super::groups::Record;
use super::placement::{Placement, point};
use crate::error::Error;
use crate::num::BlockTridiagonal;
use crate::read::curve::{Chain, Curve, Nurbs};
use crate::read::sample::project;

/// Bits of group 70.
const CLOSED: i64 = 1;
const PERIODIC: i64 = 2;

/// The repeating groups of a SPLINE record.
#[derive(Default)]
struct Lists {
    knots: Vec<f64>,
    weights: Vec<f64>,
    controls: Vec<Vector3<f64>>,
    fits: Vec<Vector3<f64>>,
}

impl Lists {
    /// Collects them. All lie in world coordinates, whatever the extrusion.
    fn of(record: &Record) -> Result<Self, Error> {
        let mut lists = Self::default();
        for group in record.own() {
            match group.code {
                40 => lists.knots.push(group.real()?),
                41 => lists.weights.push(group.real()?),
                10 => lists.controls.push(Vector3::new(group.real()?, 0.0, 0.0)),
                11 => lists.fits.push(Vector3::new(group.real()?, 0.0, 0.0)),
                20 | 30 => set(lists.controls.last_mut(), group.code / 10 - 1, group.real()?),
                21 | 31 => set(lists.fits.last_mut(), group.code / 10 - 1, group.real()?),
                _ => {}
            }
        }
        Ok(lists)
    }
}

fn set(point: Option<&mut Vector3<f64>>, axis: i32, value: f64) {
    if let Some(point) = point {
        point[axis as usize] = value;
    }
}

/// What a SPLINE draws where `placement` puts it.
pub(super) fn drawn(record: &Record, placement: &Placement) -> Result<Drawn, Error> {
    let lists = Lists::of(record)?;
    let says_closed = record.whole_or(70, 0)? & (CLOSED | PERIODIC) != 0;
    if lists.controls.is_empty() {
        return through_fit_points(record, lists.fits, says_closed, placement);
    }
    let sloped = is_sloped(&lists.controls, placement);
    let nurbs = b_spline(record, lists, placement)?;
    let closed = says_closed && gap(&nurbs) <= record.real_or(43, CONTROL_POINT_TOLERANCE)?;
    let remark = Remark { sloped, unclosed: says_closed && !closed, ..Remark::default() };
    Ok(Drawn::Chain(Chain::of(Curve::Nurbs(nurbs), closed), remark))
}

/// The default of group 43 in the DXF reference, in drawing units: control points closer than this are the
/// same.
const CONTROL_POINT_TOLERANCE: f64 = 1e-7;

fn b_spline(record: &Record, lists: Lists, placement: &Placement) -> Result<Nurbs, Error> {
    const HIGHEST_DEGREE: i64 = 25;
    let degree = record.whole_or(71, 3)?;
    if !(1..=HIGHEST_DEGREE).contains(&degree) {
        return Err(
            record.error(format!("SPLINE of degree {degree}; degrees 1 to {HIGHEST_DEGREE} can be read"))
        );
    }
    let controls = lists.controls.iter().map(|p| placement.seen(p)).collect();
    // Only the ratios of weights matter; the heaviest is made 1, so that no product overflows.
    let heaviest = lists.weights.iter().copied().fold(0.0, f64::max);
    let weights = lists.weights.iter().map(|w| w / heaviest).collect();
    Nurbs::new(degree as usize, lists.knots, controls, weights)
        .map_err(|why| record.error(format!("broken SPLINE: {why}")))
}

/// The distance between the ends of a B-spline.
fn gap(nurbs: &Nurbs) -> f64 {
    let pieces = nurbs.pieces();
    let start = pieces.first().and_then(|piece| piece.first());
    let end = pieces.last().and_then(|piece| piece.last());
    start.zip(end).map_or(0.0, |(&start, &end)| project(start).distance(project(end)))
}

/// A SPLINE that gives only points on the curve. The DXF reference does not say which curve runs through
/// them; ours is the cubic spline on chord-length parameters, with the end tangents of groups 12 and 13 where
/// given, natural elsewhere, periodic when closed.
fn through_fit_points(
    record: &Record,
    mut fits: Vec<Vector3<f64>>,
    closed: bool,
    placement: &Placement,
) -> Result<Drawn, Error> {
    fits.dedup();
    if closed && fits.len() > 1 && fits.first() != fits.last() {
        fits.push(fits[0]);
    }
    if fits.len() < 2 {
        return Ok(Drawn::Nothing);
    }
    let tangent = |code| Ok(point(record, code)?.try_normalize(0.0));
    let ends = if closed { [None, None] } else { [tangent(12)?, tangent(13)?] };
    let remark = Remark { sloped: is_sloped(&fits, placement), fitted: true, unclosed: false };
    let slopes = slopes(&fits, ends, closed)
        .ok_or_else(|| record.error("SPLINE with fit points too close together"))?;
    let curves = pieces(&fits, &slopes).map(|p| p.map(|p| placement.seen(&p)));
    let curves = curves.map(|[p0, p1, p2, p3]| Curve::Cubic(CubicBez::new(p0, p1, p2, p3))).collect();
    Ok(Drawn::Chain(Chain { curves, closed }, remark))
}

/// The Bézier control points of the cubic pieces through `fits` with the given slopes by chord length.
fn pieces(fits: &[Vector3<f64>], slopes: &[Vector3<f64>]) -> impl Iterator<Item = [Vector3<f64>; 4]> {
    fits.windows(2).zip(slopes.windows(2)).map(|(p, slope)| {
        let third = (p[1] - p[0]).norm() / 3.0;
        [p[0], p[0] + slope[0] * third, p[1] - slope[1] * third, p[1]]
    })
}

/// The slopes by chord length at `fits`, where the spline's second derivative is continuous, natural ends and
/// given end slopes included; `closed` means that the last point is the first. `None` when lengths are lost
/// in rounding.
///
/// With h the chord lengths, each row is `m[i-1]/h + 2 m[i] (1/h + 1/h') + m[i+1]/h' = 3 (chord/h^2 +
/// chord'/h'^2)`, gathered here chord by chord.
fn slopes(fits: &[Vector3<f64>], ends: [Option<Vector3<f64>>; 2], closed: bool) -> Option<Vec<Vector3<f64>>> {
    let last = fits.len() - 1;
    let ring = closed && last > 1;
    let unknowns = if ring { last } else { last + 1 };
    let mut matrix = BlockTridiagonal::<1>::zeros(unknowns, ring);
    let mut right = vec![RowVector3::zeros(); unknowns];
    for (i, pair) in fits.windows(2).enumerate() {
        let (chord, next) = (pair[1] - pair[0], (i + 1) % unknowns);
        let stiffness = chord.norm().recip();
        matrix.coupling[i].x = stiffness;
        for at in [i, next] {
            matrix.diagonal[at].x += 2.0 * stiffness;
            right[at] += chord.transpose() * (3.0 * stiffness * stiffness);
        }
    }
    for (at, neighbour, coupling, given) in [(0, 1, 0, ends[0]), (last, last - 1, last - 1, ends[1])] {
        let Some(slope) = given else { continue };
        right[neighbour] -= slope.transpose() * matrix.coupling[coupling].x;
        matrix.coupling[coupling].x = 0.0;
        matrix.diagonal[at].x = 1.0;
        right[at] = slope.transpose();
    }
    matrix.factor()?.solve(&mut right);
    if ring {
        right.push(right[0]);
    }
    Some(right.iter().map(|row| row.transpose()).collect())
}
