//! Round corners of the cutter's line made sharp: the cutter runs past the corner instead of about it.

use kurbo::Point;

use crate::geom::{ArcSpline, Span};

use super::region::Region;

/// The line with every arc about a corner of up to a quarter turn replaced by its two tangents, where nothing of the
/// outline stands in the way. Sharper corners stay round: there the way past would be long.
pub(super) fn sharpened(region: &Region, radius: f64, path: &ArcSpline) -> ArcSpline {
    let mut spans: Vec<Span> = Vec::with_capacity(path.len());
    for (i, span) in path.spans().enumerate() {
        let (before, after) = (path.span((i + path.len() - 1) % path.len()), path.span((i + 1) % path.len()));
        // An arc that another part of the outline cuts short is no whole corner.
        let whole = is_smooth(&before, &span) && is_smooth(&span, &after);
        match apex(region, radius, &span).filter(|_| whole) {
            Some(apex) => spans.extend([Span::line(span.start, apex), Span::line(apex, span.end)]),
            None => spans.push(span),
        }
    }
    ArcSpline::from_spans(&straightened(&spans, region.snap), true)
}

/// Where the tangents of an arc about a corner meet; none for another span, or where the way there is not free.
fn apex(region: &Region, radius: f64, span: &Span) -> Option<Point> {
    let centre = span.centre()?;
    let about_corner = span.bulge < 0.0
        && (span.radius() - radius).abs() <= 4.0 * region.snap
        && region.has_vertex_at(centre, 4.0 * region.snap);
    // tan(sweep/4) of a quarter turn, and a little for rounding.
    let quarter = (std::f64::consts::PI / 8.0).tan() * (1.0 + 64.0 * f64::EPSILON);
    if !about_corner || -span.bulge > quarter {
        return None;
    }
    let apex = centre + (span.at(0.5) - centre) / (span.sweep() / 2.0).cos();
    const SAMPLES: u32 = 16;
    let free = |from: Point| {
        (0..=SAMPLES)
            .map(|k| from.lerp(apex, f64::from(k) / f64::from(SAMPLES)))
            .all(|p| region.distance(p) >= radius - 4.0 * region.snap)
    };
    (free(span.start) && free(span.end)).then_some(apex)
}

/// True when one span runs into the next without a break that their radii would show.
fn is_smooth(a: &Span, b: &Span) -> bool {
    let (from, to) = (a.tangent(1.0), b.tangent(0.0));
    from.dot(to) > 0.0 && from.cross(to).abs() < f64::EPSILON.sqrt() * 64.0
}

/// Lines that run on straight joined to one.
fn straightened(spans: &[Span], snap: f64) -> Vec<Span> {
    let mut joined: Vec<Span> = Vec::with_capacity(spans.len());
    for span in spans {
        match joined.last_mut() {
            Some(last) if runs_straight(last, span, snap) => *last = Span::line(last.start, span.end),
            _ => joined.push(*span),
        }
    }
    if let [first, .., last] = joined[..]
        && runs_straight(&last, &first, snap)
    {
        joined[0] = Span::line(last.start, first.end);
        joined.pop();
    }
    joined
}

fn runs_straight(a: &Span, b: &Span, snap: f64) -> bool {
    let on_line = || Span::line(a.start, b.end).nearest(a.end).distance <= snap;
    a.is_line() && b.is_line() && on_line() && a.chord().dot(b.chord()) > 0.0
}
