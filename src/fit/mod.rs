//! From a contour to the fewest tangent arcs and lines inside the tolerance.
//!
//! The search walks the trace in levels of equal cost. A state is a place near the trace with an exact heading; one
//! arc leads on to the next. An arc costs 1 and so does a corner, so corners appear only where they save arcs. The
//! theory of how few arcs there can be, and the published relatives: Drysdale, Rote and Sturm 2008; Maier 2014.

mod beam;
mod canonical;
mod circle;
mod closing;
mod effort;
mod keeping;
mod lines;
mod narrowing;
mod pinned;
mod reach;
mod refine;
mod seeds;
mod simplify;
mod state;
mod trace;

use kurbo::Point;

use crate::geom::{ArcSpline, frechet_within};
use crate::num::{Deviation, Tolerance};
use beam::Run;
use effort::Effort;
use trace::Trace;

pub use effort::Pace;
pub use pinned::fit_pinned;
pub use simplify::simplify;

/// A contour replaced by tangent arcs and lines.
#[derive(Clone, Debug)]
pub struct Fitted {
    /// The path, in the contour's own direction.
    pub path: ArcSpline,
    /// The certified distance between path and contour.
    pub deviation: Deviation,
}

impl Fitted {
    /// The contour itself.
    fn as_drawn(contour: &ArcSpline) -> Self {
        let at = contour.vertices.first().map_or(Point::ZERO, |v| v.at);
        Self { path: contour.clone(), deviation: Deviation { mm: 0.0, at, certified: true } }
    }

    /// The path, if it holds the tolerance.
    fn held(path: ArcSpline, contour: &ArcSpline, tolerance: Tolerance) -> Option<Self> {
        let deviation = frechet_within(&path, contour, tolerance.mm());
        (deviation.mm <= tolerance.mm()).then_some(Self { path, deviation })
    }

    /// Spans plus corners.
    fn cost(&self) -> usize {
        self.path.len() + self.path.corners(LAST_PLACE).count()
    }
}

/// Replaces `contour` with the fewest tangent arcs and lines that stay within `tolerance` of it, both ways and in order,
/// as far as `pace` leaves time to find them.
///
/// The result does not depend on the vertex a closed contour starts at, nor on the direction. A contour without
/// length comes back as it is. The deviation returned is at most `tolerance`.
pub fn fit(contour: &ArcSpline, tolerance: Tolerance, pace: Pace) -> Fitted {
    let (canonical, against) = canonical::canonical(contour);
    let (first, later) = pace.efforts();
    let mut found = fitted(&canonical, tolerance, first);
    for effort in later {
        if found.searched {
            break;
        }
        let again = fitted(&canonical, tolerance, *effort);
        let best = if again.best.cost() < found.best.cost() { again.best } else { found.best };
        found = Found { best, ..again };
    }
    let fitted = found.best;
    if against { Fitted { path: fitted.path.reversed(), ..fitted } } else { fitted }
}

/// What a search came to.
#[derive(Clone)]
struct Found {
    best: Fitted,
    /// True when no other search is likely to find better.
    searched: bool,
}

/// The fit of a contour in canonical order.
fn fitted(contour: &ArcSpline, tolerance: Tolerance, effort: Effort) -> Found {
    let Some(trace) = Trace::new(contour, tolerance, effort) else {
        return Found { best: Fitted::as_drawn(contour), searched: true };
    };
    match circle::whole(&trace).and_then(|circle| Fitted::held(circle, contour, tolerance)) {
        Some(circle) => Found { best: circle, searched: true },
        None => least(&trace, contour, tolerance, searched),
    }
}

fn searched(trace: &Trace) -> Run {
    if trace.closed() { closing::closed(trace) } else { beam::open(trace) }
}

/// The cheapest that holds the tolerance of what the search finds, straight-line simplification and the contour itself.
fn least(trace: &Trace, contour: &ArcSpline, tolerance: Tolerance, search: fn(&Trace) -> Run) -> Found {
    let held = |path| Fitted::held(path, contour, tolerance);
    let search = |share: &f64| {
        let narrowed = narrowing::within(trace.narrowed(*share), tolerance, search);
        held(narrowed.path)
            .map(|best| Found { best, searched: narrowed.patches == 0 || trace.effort().gives_up })
    };
    let found = SHARES.iter().find_map(search);
    let straight = 2 * simplify::lines_of(trace, tolerance);
    let sure = |found: &&Found| {
        let cost = found.best.cost();
        cost <= contour.len() && WELL_BELOW * cost as f64 <= straight as f64
    };
    if let Some(found) = found.as_ref().filter(sure) {
        return found.clone();
    }
    let searched = found.as_ref().is_some_and(|found| found.searched) && !trace.effort().gives_up;
    let best = |best: Fitted, other: Fitted| if other.cost() < best.cost() { other } else { best };
    let others = [found.map(|found| found.best), held(simplify(contour, tolerance))].into_iter().flatten();
    Found { best: others.fold(Fitted::as_drawn(contour), best), searched }
}

/// The shares of the tolerance that the search may use, tried in turn: what certifying the path costs is seldom more
/// than the first leaves.
const SHARES: [f64; 5] = [0.993, 0.97, 0.9, 0.8, 0.7];
/// How many times cheaper than straight lines from bead to bead a path must be for them not to be looked at closer.
const WELL_BELOW: f64 = 1.3;
/// The last place that programs are written to, in mm: a smaller break of tangent is not a corner.
const LAST_PLACE: f64 = 0.001;
