//! Open contours whose ends must stay where they are.

use crate::geom::{ArcSpline, Span};
use crate::num::Tolerance;

use super::effort::Effort;
use super::state::SHORTEST;
use super::trace::Trace;
use super::{Fitted, Pace, closing, fit, least};

/// Replaces the open `contour` as [`fit`] does, but from its very first point to its very last.
///
/// For a stretch of something longer, which must go on where it went on before. A lap is one whose ends are one place.
pub fn fit_pinned(contour: &ArcSpline, tolerance: Tolerance) -> Fitted {
    let trace = Trace::new(contour, tolerance, Effort::FULL).filter(|trace| !trace.closed());
    let (Some(trace), Some(free)) = (trace, free(contour, tolerance)) else {
        return Fitted::as_drawn(contour);
    };
    let pinned = least(&trace, contour, tolerance, closing::pinned).best;
    let mut best = fewer(moored(&free, contour, tolerance), pinned);
    // A free path in a narrower band can be bent to the ends further.
    for share in NARROWER {
        if best.path.len() <= free.len() + 1 {
            break;
        }
        let narrow = Tolerance::new(share * tolerance.mm()).and_then(|narrow| self::free(contour, narrow));
        best = fewer(narrow.and_then(|free| moored(&free, contour, tolerance)), best);
    }
    best
}

/// The shares of the band that a free path keeps to in turn where it must be bent further.
const NARROWER: [f64; 3] = [0.95, 0.85, 0.7];
/// Shares of the first span that are cut off where the contour's start is led on to the rest of it.
const CUT_OFF: [f64; 3] = [0.5, 0.2, 0.05];

/// The one of fewer spans, a corner counting as half of one: where a path is led on to an end it turns by next to nothing.
fn fewer(other: Option<Fitted>, best: Fitted) -> Fitted {
    let weight = |fitted: &Fitted| fitted.path.len() + fitted.cost();
    other.filter(|other| weight(other) < weight(&best)).unwrap_or(best)
}

/// The path without regard to the ends; where they are one place, that of the lap, opened there.
fn free(contour: &ArcSpline, tolerance: Tolerance) -> Option<ArcSpline> {
    let (first, last) = (contour.vertices.first()?, contour.vertices.last()?);
    if first.at != last.at {
        return Some(fit(contour, tolerance, Pace::Thorough).path);
    }
    let mut lap = ArcSpline { vertices: contour.vertices.clone(), closed: true };
    lap.vertices.pop();
    let lap = fit(&lap, tolerance, Pace::Thorough).path;
    let distance = |i: &usize| lap.span(*i).nearest(first.at).distance;
    let at = (0..lap.len()).min_by(|a, b| distance(a).total_cmp(&distance(b)))?;
    let (cut, t) = (lap.span(at), lap.span(at).nearest(first.at).t);
    let others = (1..lap.len()).map(|k| lap.span((at + k) % lap.len()));
    let spans = [cut.part(t, 1.0)].into_iter().chain(others).chain([cut.part(0.0, t)]);
    let spans: Vec<Span> = spans.filter(|span| span.chord().hypot() >= SHORTEST).collect();
    Some(ArcSpline::from_spans(&spans, false))
}

/// `path` bent or led on to both ends of the contour; `None` where no way to do so holds.
fn moored(path: &ArcSpline, contour: &ArcSpline, tolerance: Tolerance) -> Option<Fitted> {
    let start = moored_start(path, contour, tolerance)?;
    let both = moored_start(&start.path.reversed(), &contour.reversed(), tolerance)?;
    Some(Fitted { path: both.path.reversed(), ..both })
}

/// The path of least cost that starts at the contour's start: its first span bent to it, or joined on by one more.
fn moored_start(path: &ArcSpline, contour: &ArcSpline, tolerance: Tolerance) -> Option<Fitted> {
    let start = contour.vertices.first()?.at;
    let spans: Vec<Span> = path.spans().collect();
    let (first, rest) = spans.split_first()?;
    let bent = [
        vec![Span::leaving(first.end, -first.tangent(1.0), start).reversed()],
        vec![Span { start, ..*first }],
    ];
    let led_on = CUT_OFF.iter().map(|&t| vec![Span { start, ..first.part(0.0, t) }, first.part(t, 1.0)]);
    let legal =
        |spans: &Vec<Span>| spans.iter().all(|s| s.bulge.abs() <= 1.0 && s.chord().hypot() >= SHORTEST);
    let mut ways = bent.into_iter().chain(led_on).filter(legal);
    ways.find_map(|start| {
        let path = ArcSpline::from_spans(&[&start, rest].concat(), false);
        Fitted::held(path, contour, tolerance)
    })
}
