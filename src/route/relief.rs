//! Corners relieved, so that a part with a sharp corner seats in them.

use crate::geom::{ArcSpline, Span};
use crate::offset::Uncut;

/// The line with a short way into every inside corner that stays uncut, and back: so far that the cutter's edge, at
/// `radius` mm from its centre, just touches the corner itself. It cuts into both sides next to the corner.
pub(super) fn relieved(path: &ArcSpline, uncut: &[Uncut], radius: f64) -> ArcSpline {
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
            let way = corner.at - span.start;
            let tip = corner.at - way * (radius / way.hypot());
            spans.extend([Span::line(span.start, tip), Span::line(tip, span.start)]);
        }
        spans.push(span);
    }
    ArcSpline::from_spans(&spans, true)
}
