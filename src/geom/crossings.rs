//! Where two spans meet.

use kurbo::{Point, Vec2};

use super::Span;

/// A place that two spans share.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Crossing {
    /// Fraction of the first span's length.
    pub t: f64,
    /// Fraction of the second span's length.
    pub u: f64,
    /// The place itself.
    pub at: Point,
}

/// Every place where `a` and `b` cross or touch, each once, in no particular order.
///
/// Spans touch where an end of one is within `touch` mm of the other, or where they are tangent within that distance;
/// places closer together than `touch` count as one. Spans that run along each other give the ends of the part they
/// share. A crossing at an angle is found to rounding error; a tangent contact only to about the square root of it.
pub fn crossings(a: &Span, b: &Span, touch: f64) -> Vec<Crossing> {
    let mut found = Vec::new();
    for (u, end) in [(0.0, b.start), (1.0, b.end)] {
        let near = a.nearest(end);
        if near.distance <= touch {
            add(&mut found, Crossing { t: near.t, u, at: end }, touch);
        }
    }
    for (t, end) in [(0.0, a.start), (1.0, a.end)] {
        let near = b.nearest(end);
        if near.distance <= touch {
            add(&mut found, Crossing { t, u: near.t, at: end }, touch);
        }
    }
    for at in carrier_crossings(a, b, touch) {
        let (on_a, on_b) = (a.nearest(at), b.nearest(at));
        let meeting = polished(a, b, Crossing { t: on_a.t, u: on_b.t, at: on_a.at });
        if meeting.at.distance(b.at(meeting.u)) <= touch {
            add(&mut found, meeting, touch);
        }
    }
    found
}

/// Keeps a crossing unless the same place is known already.
fn add(found: &mut Vec<Crossing>, new: Crossing, touch: f64) {
    if !found.iter().any(|known| known.at.distance(new.at) <= touch) {
        found.push(new);
    }
}

/// One Newton step on both fractions, which takes out what a far centre costs; kept only where it comes nearer.
fn polished(a: &Span, b: &Span, c: Crossing) -> Crossing {
    let (along_a, along_b) = (a.tangent(c.t) * a.length(), b.tangent(c.u) * b.length());
    let gap = b.at(c.u) - a.at(c.t);
    let across = along_a.cross(along_b);
    let (t, u) = (c.t + gap.cross(along_b) / across, c.u + gap.cross(along_a) / across);
    let (t, u) = (t.clamp(0.0, 1.0), u.clamp(0.0, 1.0));
    let at = a.at(t);
    if at.distance(b.at(u)) < gap.hypot() { Crossing { t, u, at } } else { c }
}

/// Where the whole lines or circles that carry the spans meet. An arc no further than `touch` from its chord goes by
/// its chord: its centre is too far away to compute with.
fn carrier_crossings(a: &Span, b: &Span, touch: f64) -> Vec<Point> {
    let near_centre = |span: &Span| span.centre().filter(|_| span.sagitta() > touch);
    match (near_centre(a), near_centre(b)) {
        (None, None) => lines(a, b),
        (None, Some(centre)) => line_and_circle(a, centre, b.radius(), touch),
        (Some(centre), None) => line_and_circle(b, centre, a.radius(), touch),
        (Some(one), Some(other)) => circles((one, a.radius()), (other, b.radius()), touch),
    }
}

fn lines(a: &Span, b: &Span) -> Vec<Point> {
    let t = (b.start - a.start).cross(b.chord()) / a.chord().cross(b.chord());
    if t.is_finite() { vec![a.start + a.chord() * t] } else { Vec::new() }
}

fn line_and_circle(line: &Span, centre: Point, radius: f64, touch: f64) -> Vec<Point> {
    let along = line.chord().normalize();
    let foot = line.start + along * (centre - line.start).dot(along);
    on_both_sides(foot, along, foot.distance(centre), radius, touch)
}

fn circles((centre, radius): (Point, f64), (other, other_radius): (Point, f64), touch: f64) -> Vec<Point> {
    let apart = other - centre;
    let distance = apart.hypot();
    // Distance from the first centre to the common chord.
    let reach = (distance + (radius - other_radius) * ((radius + other_radius) / distance)) / 2.0;
    if !reach.is_finite() {
        return Vec::new();
    }
    let towards = apart / distance;
    // The signed reach is at most the radius where the circles meet; a tangent pair may miss that by the touch.
    let across = Vec2::new(-towards.y, towards.x);
    on_both_sides(centre + towards * reach, across, reach.abs(), radius, touch)
}

/// The two points at `foot` ± the half chord of a circle whose centre is `distance` from the foot; the foot alone
/// where the circle falls short of it by no more than `touch`.
fn on_both_sides(foot: Point, along: Vec2, distance: f64, radius: f64, touch: f64) -> Vec<Point> {
    let half_squared = (radius - distance) * (radius + distance);
    if half_squared > 0.0 {
        let half = along * half_squared.sqrt();
        vec![foot + half, foot - half]
    } else if distance - radius <= touch {
        vec![foot]
    } else {
        Vec::new()
    }
}
