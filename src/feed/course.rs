//! A toolpath as stretches with the largest speeds at their joints, before any controller looks at it.

use super::Limits;
use super::stretch::{Stretch, least, stretches};
use crate::toolpath::{Move, Toolpath};

/// The stretches of a toolpath in order, cut into blocks.
pub(super) struct Course {
    pub(super) stretches: Vec<Stretch>,
    /// The largest squared speed at each joint, one more than stretches, from rest to rest: no joint's can be raised,
    /// given those behind it, without breaking a limit.
    pub(super) joints: Vec<f64>,
    /// The first stretch of each block, and at last the number of stretches.
    pub(super) blocks: Vec<usize>,
}

impl Course {
    /// The course of a toolpath. Moves that one line of the program makes are one block.
    pub(super) fn of(toolpath: &Toolpath, limits: &Limits) -> Self {
        let moves = &toolpath.moves;
        let mut course =
            Self { stretches: Vec::with_capacity(moves.len()), joints: vec![0.0], blocks: Vec::new() };
        let mut before: Option<usize> = None;
        for (i, m) in moves.iter().enumerate() {
            if i == 0 || m.line == 0 || m.line != moves[i - 1].line {
                course.blocks.push(course.stretches.len());
            }
            for stretch in stretches(i, m, limits) {
                if let Some(last) = course.stretches.last() {
                    let corner = match before {
                        Some(of) if of != i => corner(&moves[of], m, limits),
                        _ => f64::INFINITY,
                    };
                    course.joints.push(last.cap.min(stretch.cap).min(corner));
                }
                before = Some(i);
                course.stretches.push(stretch);
            }
        }
        course.joints.push(0.0);
        course.joints.truncate(course.stretches.len() + 1);
        course.blocks.push(course.stretches.len());
        for i in (0..course.stretches.len()).rev() {
            course.joints[i] = course.joints[i].min(course.stretches[i].reach_back(course.joints[i + 1]));
        }
        course
    }
}

/// The largest squared speed in the corner between two moves: that of the arc of radius d cos(p/2) / (1 - cos(p/2))
/// which rounds a turn of p within the allowance d, provided that it fits into half of either move.
fn corner(before: &Move, after: &Move, limits: &Limits) -> f64 {
    let (a, b) = (direction(before, 1.0), direction(after, 0.0));
    let change = [b[0] - a[0], b[1] - a[1], b[2] - a[2]];
    let size = norm(change);
    let shorter = before.length().min(after.length());
    // Tangents are no more precise than the coordinates they are made of, over the length of the move.
    let coarse = 1.0 + before.to.xy.x.abs().max(before.to.xy.y.abs()).max(before.to.z.abs()) / shorter;
    if size <= 16.0 * f64::EPSILON * coarse {
        return f64::INFINITY;
    }
    // The change of a unit vector that turns by p is 2 sin(p/2); 1 - cos(p/2) is taken without cancellation.
    let half_sine = (size / 2.0).min(1.0);
    let half_cosine = norm([b[0] + a[0], b[1] + a[1], b[2] + a[2]]) / 2.0;
    let rounding = limits.junction * half_cosine * (1.0 + half_cosine) / (half_sine * half_sine);
    let room = shorter / 2.0 * half_cosine / half_sine;
    least(change.map(|c| c / size), limits.acceleration) * rounding.min(room)
}

/// The unit tangent of a move at its start (0) or end (1).
fn direction(m: &Move, t: f64) -> [f64; 3] {
    let (span, length) = (m.span(), m.length());
    let level = span.length() / length;
    let flat = if level > 0.0 { span.tangent(t) * level } else { kurbo::Vec2::ZERO };
    [flat.x, flat.y, (m.to.z - m.from.z) / length]
}

fn norm([x, y, z]: [f64; 3]) -> f64 {
    (x * x + y * y + z * z).sqrt()
}
