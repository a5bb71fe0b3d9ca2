//! Corners relieved, so that a part with a sharp corner seats in them.

use kurbo::Point;

use crate::geom::{ArcSpline, Span, SpanIndex};
use crate::offset::Uncut;

/// Relieves corners, and notes where it cannot.
pub(super) struct Corners<'a> {
    /// All outlines beside which is cut.
    pub(super) outlines: &'a SpanIndex,
    /// How far an outline may be from what was drawn, in mm.
    pub(super) tolerance: f64,
    /// The corners that stay as they are.
    pub(super) left: Vec<Point>,
}

impl Corners<'_> {
    /// The line, at `radius` mm from the outlines, with a short way into every inside corner that stays uncut, and back:
    /// so far that the cutter's edge just touches the corner itself. It cuts into both sides next to the corner.
    pub(super) fn relieved(&mut self, path: &ArcSpline, uncut: &[Uncut], radius: f64) -> ArcSpline {
        let mut spans: Vec<Span> = Vec::with_capacity(path.len());
        for (i, span) in path.spans().enumerate() {
            let before = path.span((i + path.len() - 1) % path.len());
            let turn = before.tangent(1.0).cross(span.tangent(0.0));
            let reaches = |u: &&Uncut| {
                let away = u.at.distance(span.start);
                (away - radius - u.gap_mm).abs() <= f64::EPSILON.sqrt() * away
            };
            // Only a corner turns: the line runs by other places, such as necks, without a break.
            if let Some(corner) = uncut.iter().find(reaches).filter(|_| turn.abs() > 1.0 / 64.0) {
                match self.way_into(span.start, corner.at, radius) {
                    Some(way) => spans.extend([way, way.reversed()]),
                    None => self.left.push(corner.at),
                }
            }
            spans.push(span);
        }
        ArcSpline::from_spans(&spans, true)
    }

    /// The way from a corner of the line towards the outline's corner; `None` where less stays there than makes a
    /// corner for certain, or where the sides bend so that the cutter would go deeper into them than into straight ones.
    fn way_into(&self, from: Point, corner: Point, radius: f64) -> Option<Span> {
        let tolerance = self.tolerance;
        let away = corner - from;
        let slope = radius / away.hypot();
        let tip = corner - away * slope;
        let clear = |p: Point| {
            let least = (corner.distance(p) * slope - tolerance).max(2.0 * tolerance);
            self.outlines.distance(p) >= least
        };
        const SAMPLES: u32 = 32;
        let is_corner = radius - 2.0 * tolerance > (radius + 2.0 * tolerance) * slope;
        let suits =
            is_corner && (0..=SAMPLES).all(|k| clear(from.lerp(tip, f64::from(k) / f64::from(SAMPLES))));
        suits.then(|| Span::line(from, tip))
    }

    /// What the person at the machine should know of the corners that stay.
    pub(super) fn told(&self) -> Option<String> {
        let first = self.left.first()?;
        Some(format!(
            "{} of the inside corners are not relieved, the first at ({:.3}, {:.3}): their sides bend, or what stays \
             there is hardly more than the tolerance",
            self.left.len(),
            first.x,
            first.y
        ))
    }
}
