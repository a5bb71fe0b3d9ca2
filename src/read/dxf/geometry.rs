//! Entities to chains of exact curves: lines, arcs, circles, ellipses and polylines.

use std::f64::consts::TAU;

use kurbo::{Point, Vec2};
use nalgebra::Vector3;

use super::document::Entity;
use super::groups::{Group, Record};
use super::placement::{Placement, normal, object_axes, point};
use super::spline;
use crate::error::Error;
use crate::geom::Vertex;
use crate::read::curve::{Chain, Curve, EllipseArc};

/// What an entity draws.
#[derive(Debug)]
pub(super) enum Drawn {
    /// A chain, seen from above.
    Chain(Chain, Remark),
    /// Nothing that has a length.
    Nothing,
    /// Something that is not an outline; the word says what it is.
    NotRead(String),
}

/// What the user should know of a chain.
#[derive(Clone, Copy, Debug, Default)]
pub(super) struct Remark {
    /// It does not lie flat: what is read is its outline as seen from above.
    pub(super) sloped: bool,
    /// It is a SPLINE of fit points alone, drawn by our own rule.
    pub(super) fitted: bool,
    /// It is a SPLINE said to be closed whose ends do not meet.
    pub(super) unclosed: bool,
}

/// What `entity` draws where `placement` puts it.
pub(super) fn drawn(entity: &Entity, placement: &Placement) -> Result<Drawn, Error> {
    let record = &entity.record;
    match record.kind {
        "LINE" => line(record, placement),
        "ARC" => {
            let start = record.real_or(50, 0.0)?;
            let sweep = (record.real_or(51, 360.0)? - start).rem_euclid(360.0);
            let sweep = if sweep == 0.0 { 360.0 } else { sweep };
            circular(record, [start.to_radians(), sweep.to_radians()], placement)
        }
        "CIRCLE" => circular(record, [0.0, TAU], placement),
        "ELLIPSE" => ellipse(record, placement),
        "LWPOLYLINE" => light_polyline(record, placement),
        "POLYLINE" => polyline(entity, placement),
        "SPLINE" => spline::drawn(record, placement),
        other => Ok(Drawn::NotRead(other.to_owned())),
    }
}

/// A LINE lies in world coordinates, whatever its extrusion.
fn line(record: &Record, placement: &Placement) -> Result<Drawn, Error> {
    Ok(straight(&[point(record, 10)?, point(record, 11)?], false, placement))
}

/// Straight lines through points in space.
fn straight(points: &[Vector3<f64>], closed: bool, placement: &Placement) -> Drawn {
    let remark = Remark { sloped: is_sloped(points, placement), ..Remark::default() };
    let seen = points.iter().map(|p| placement.seen(p));
    Drawn::Chain(Chain::of(Curve::polyline(seen), closed), remark)
}

/// True when the way through `points`, placed, is longer than it looks from above, beyond rounding.
pub(super) fn is_sloped(points: &[Vector3<f64>], placement: &Placement) -> bool {
    points.windows(2).map(|pair| placement.direction(&(pair[1] - pair[0]))).any(|step| {
        let seen = step.x.hypot(step.y);
        step.norm() - seen > 64.0 * f64::EPSILON * step.norm()
    })
}

/// True when a plane with this normal, placed, is not level, beyond rounding.
fn is_tilted(normal: &Vector3<f64>, placement: &Placement) -> bool {
    let axes = object_axes(normal);
    let along = |i: usize| placement.direction(&axes.column(i).into_owned());
    let image = along(0).cross(&along(1));
    image.norm() - image.z.abs() > 64.0 * f64::EPSILON * image.norm()
}

/// A chain in the plane of the record's object coordinates, put in place.
fn planar(record: &Record, chain: Chain, elevation: f64, placement: &Placement) -> Result<Drawn, Error> {
    let normal = normal(record)?;
    let chain = chain.transformed(placement.plane(&object_axes(&normal), elevation));
    Ok(Drawn::Chain(chain, Remark { sloped: is_tilted(&normal, placement), ..Remark::default() }))
}

/// An ARC or CIRCLE, counter-clockwise in its object coordinates from the first angle through the second.
fn circular(record: &Record, [start, sweep]: [f64; 2], placement: &Placement) -> Result<Drawn, Error> {
    let radius = record.real_or(40, 0.0)?.abs();
    if radius == 0.0 {
        return Ok(Drawn::Nothing);
    }
    let centre = point(record, 10)?;
    let arc = EllipseArc::circular(Point::new(centre.x, centre.y), radius, start, sweep);
    planar(record, Chain::of(Curve::Ellipse(arc), sweep >= TAU), centre.z, placement)
}

/// An ELLIPSE lies in world coordinates; its angles are parameters, and the minor axis is the normal times
/// the major.
fn ellipse(record: &Record, placement: &Placement) -> Result<Drawn, Error> {
    let normal = normal(record)?;
    let major = point(record, 11)?;
    let minor = normal.cross(&major) * record.real_or(40, 1.0)?.abs();
    if major.norm() == 0.0 {
        return Ok(Drawn::Nothing);
    }
    let start = record.real_or(41, 0.0)?;
    let sweep = elliptic_sweep(start, record.real_or(42, TAU)?);
    let half_axis = |w: &Vector3<f64>| {
        let w = placement.direction(w);
        Vec2::new(w.x, w.y)
    };
    let centre = placement.seen(&point(record, 10)?);
    let arc = EllipseArc { centre, u: half_axis(&major), v: half_axis(&minor), start, sweep };
    let remark = Remark { sloped: is_tilted(&normal, placement), ..Remark::default() };
    Ok(Drawn::Chain(Chain::of(Curve::Ellipse(arc), sweep >= TAU), remark))
}

/// How far the parameter runs from `start` to `end`, counter-clockwise; a whole turn where they are the same,
/// or as good as 2 pi apart when that is printed with six decimals or more.
fn elliptic_sweep(start: f64, end: f64) -> f64 {
    const PRINTED: f64 = 1e-6;
    let difference = end - start;
    if difference == 0.0 || (difference.abs() - TAU).abs() < PRINTED {
        TAU
    } else {
        difference.rem_euclid(TAU)
    }
}

/// One vertex of a polyline.
#[derive(Clone, Copy, Default)]
struct Corner {
    at: Vector3<f64>,
    bulge: f64,
}

/// An LWPOLYLINE: every group 10 begins a vertex, and the groups 20 and 42 after it belong to it. Group 90,
/// the number of vertices, is not relied on.
fn light_polyline(record: &Record, placement: &Placement) -> Result<Drawn, Error> {
    let mut corners: Vec<Corner> = Vec::new();
    for group in record.own() {
        match (group.code, corners.last_mut()) {
            (10, _) => corners.push(Corner { at: Vector3::new(group.real()?, 0.0, 0.0), bulge: 0.0 }),
            (20, Some(corner)) => corner.at.y = group.real()?,
            (42, Some(corner)) => corner.bulge = group.real()?,
            _ => {}
        }
    }
    let closed = record.whole_or(70, 0)? & 1 != 0;
    bulged(record, &corners, closed, placement)
}

/// A POLYLINE with its VERTEX records.
fn polyline(entity: &Entity, placement: &Placement) -> Result<Drawn, Error> {
    const CLOSED: i64 = 1;
    const SPLINE_FIT: i64 = 4;
    const IN_SPACE: i64 = 8;
    const MESH: i64 = 16;
    const POLYFACE: i64 = 64;
    const FRAME_VERTEX: i64 = 16;
    let record = &entity.record;
    let flags = record.whole_or(70, 0)?;
    if flags & MESH != 0 {
        return Ok(Drawn::NotRead("POLYLINE mesh".to_owned()));
    }
    if flags & POLYFACE != 0 {
        return Ok(Drawn::NotRead("POLYLINE polyface mesh".to_owned()));
    }
    let mut corners = Vec::with_capacity(entity.parts.len());
    for vertex in entity.parts {
        let is_frame = vertex.whole_or(70, 0)? & FRAME_VERTEX != 0;
        if !(is_frame && flags & SPLINE_FIT != 0) {
            corners.push(Corner { at: point(vertex, 10)?, bulge: vertex.real_or(42, 0.0)? });
        }
    }
    let closed = flags & CLOSED != 0;
    if flags & IN_SPACE == 0 {
        return bulged(record, &corners, closed, placement);
    }
    let points: Vec<_> = corners.iter().map(|c| c.at).collect();
    Ok(if points.len() < 2 { Drawn::Nothing } else { straight(&points, closed, placement) })
}

/// A flat polyline with bulges, at the elevation of its record: group 38, or group 30 of a POLYLINE.
fn bulged(record: &Record, corners: &[Corner], closed: bool, placement: &Placement) -> Result<Drawn, Error> {
    let code = if record.kind == "LWPOLYLINE" { 38 } else { 30 };
    let elevation = record.first(code).map_or(Ok(0.0), Group::real)?;
    let vertex = |c: &Corner| Vertex { at: Point::new(c.at.x, c.at.y), bulge: c.bulge };
    let mut vertices: Vec<Vertex> = corners.iter().map(vertex).collect();
    if closed {
        close(&mut vertices);
    }
    if vertices.len() < 2 {
        return Ok(Drawn::Nothing);
    }
    planar(record, Chain::of(Curve::Spans(vertices), closed), elevation, placement)
}

/// Leads a closed polyline back to its start, unless its last vertex is there already.
fn close(vertices: &mut Vec<Vertex>) {
    if let (Some(first), Some(last)) = (vertices.first().copied(), vertices.last())
        && last.at != first.at
    {
        vertices.push(Vertex { bulge: 0.0, ..first });
    }
}
