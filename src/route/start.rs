//! Where a line beside a part is begun, and how the cutter comes to it and leaves.

use kurbo::{Point, Vec2};

use crate::geom::{ArcSpline, Span, SpanIndex, Vertex};
use crate::job::Entry;

use super::contour::Lead;
use super::cut::Cut;

/// How many of the longest calm spans are tried.
const SPANS: usize = 8;

/// The closed line begun in the middle of its longest calm span on which a lead has room, with that lead: a circle as
/// large as the cutter's radius or, where it has to be, a half or a quarter of that. `left` tells on which side the
/// waste is, `distance` how far the line is from the outlines that the cutter must keep clear of.
pub(super) fn begun(
    path: &ArcSpline,
    outlines: &SpanIndex,
    distance: f64,
    left: bool,
    cut: &Cut,
) -> (ArcSpline, Option<Lead>) {
    let mut spans: Vec<usize> = (0..path.len()).collect();
    let calm = |&i: &usize| {
        let span = path.span(i);
        span.length() / (1.0 + span.sweep().abs())
    };
    spans.sort_by(|a, b| calm(b).total_cmp(&calm(a)));
    spans.truncate(SPANS);
    for radius_mm in [1.0, 0.5, 0.25].map(|share| share * cut.cutter_mm / 2.0) {
        for whole in [true, false].into_iter().filter(|&whole| whole || cut.entry != Entry::Helix) {
            let lead = Lead { radius_mm, left, whole };
            if let Some(&i) = spans.iter().find(|&&i| has_room(&path.span(i), lead, outlines, distance)) {
                return (begun_in(path, i), Some(lead));
            }
        }
    }
    (begun_in(path, spans.first().copied().unwrap_or(0)), None)
}

/// True when the cutter clears all outlines on the lead at the middle of a span.
fn has_room(span: &Span, lead: Lead, outlines: &SpanIndex, distance: f64) -> bool {
    let (start, heading) = (span.at(0.5), span.tangent(0.5));
    let across = Vec2::new(-heading.y, heading.x) * if lead.left { 1.0 } else { -1.0 };
    let centre = start + across * lead.radius_mm;
    // Rounding of a place on the line itself, many times over.
    let slack = f64::EPSILON.sqrt() * (distance + start.to_vec2().hypot());
    let clear = |p: Point| outlines.distance(p) >= distance - slack;
    const SAMPLES: u32 = 16;
    let reach = if lead.whole { std::f64::consts::PI } else { std::f64::consts::FRAC_PI_2 };
    (0..=SAMPLES).all(|k| {
        let angle = reach * f64::from(k) / f64::from(SAMPLES);
        let (sin, cos) = angle.sin_cos();
        let (ahead, aside) = (heading * sin * lead.radius_mm, across * (cos * lead.radius_mm));
        clear(centre - aside + ahead) && clear(centre - aside - ahead)
    }) && clear(centre)
}

/// A closed path begun in the middle of one of its spans.
fn begun_in(path: &ArcSpline, i: usize) -> ArcSpline {
    let span = path.span(i);
    let (first, second) = (span.part(0.0, 0.5), span.part(0.5, 1.0));
    let mut begun = path.started_at(i);
    begun.vertices[0] = Vertex { at: second.start, bulge: second.bulge };
    begun.vertices.push(Vertex { at: first.start, bulge: first.bulge });
    begun
}
