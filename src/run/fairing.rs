//! The fair curve of each contour, where the job has a use for it, and the arcs that stand for it while the cutter is
//! routed.

use kurbo::{Affine, Point};
use rayon::prelude::*;

use super::placing::Placing;
use super::prepare::Prepared;
use crate::clean;
use crate::error::{Error, Kind};
use crate::fair::{self, Effort};
use crate::fit::Fitted;
use crate::gcode::read::CUBIC_ERROR;
use crate::geom::{ArcSpline, Span, arcs_of};
use crate::job::{Job, Moves};
use crate::num::{Deviation, Tolerance};
use crate::route::Routed;
use crate::sketch::Contour;

/// What of the tolerance the arcs may take that stand for a cubic: a fiftieth.
const STANDING_IN: f64 = 1.0 / 50.0;
/// What is kept for them, and for a fair curve's being proven to a two-hundredth only.
const KEPT: f64 = 1.0 / 40.0;

/// The fair curve of each contour within what is left of the tolerance; none where the job neither shows nor writes it.
///
/// # Errors
/// Refused where what cubic moves cost leaves nothing of the tolerance.
pub(super) fn fair(job: &Job, prepared: &Prepared, left: Tolerance) -> Result<Vec<fair::Outline>, Error> {
    if job.moves == Moves::Arcs && !job.curvature {
        return Ok(Vec::new());
    }
    // Once for the reading of the text, and once because the check allows for it.
    let spent = left.mm() * KEPT + 2.0 * CUBIC_ERROR;
    let tolerance = left.less(spent).ok_or_else(|| {
        let what = format!("cubic moves take {spent:.4} mm, all that rounding leaves of the tolerance");
        Error::new(Kind::Refused, what).remedy("ask for a wider --tolerance, or leave --as out")
    })?;
    let outline = |contour: &Contour| {
        let corners = clean::corners(&contour.path, &clean::roughness(&contour.path));
        let corners: Vec<usize> = corners.into_iter().map(|corner| corner.vertex).collect();
        fair::outline(&contour.path, &corners, tolerance, Effort::Full).ok_or_else(|| {
            Error::new(Kind::Refused, format!("contour {} has no fair curve", contour.id))
                .remedy("leave --as and --curvature out")
        })
    };
    prepared.cleaned.contours.par_iter().map(outline).collect()
}

/// What the arcs that stand for a cubic may be off, in mm.
fn standing_in(left: Tolerance) -> f64 {
    left.mm() * STANDING_IN
}

/// A contour's cubics, and the arcs that stand for them.
pub(super) struct Cubics {
    /// The arcs, as a path.
    pub(super) fitted: Fitted,
    /// The control points of each cubic, and how many of the arcs stand for it.
    pieces: Vec<([Point; 2], usize)>,
}

/// The cubics of every contour's fair curve; none where arcs are written.
pub(super) fn cubics(job: &Job, faired: &[fair::Outline], left: Tolerance) -> Vec<Cubics> {
    if job.moves == Moves::Arcs {
        return Vec::new();
    }
    let cubics = |outline: &fair::Outline| {
        let mut spans: Vec<Span> = Vec::new();
        let mut pieces = Vec::new();
        for cubic in outline.cubics() {
            let arcs = arcs_of(cubic, standing_in(left));
            let arcs = arcs.into_iter().filter(|span| span.start != span.end);
            let before = spans.len();
            spans.extend(arcs);
            pieces.push(([cubic.p1, cubic.p2], spans.len() - before));
        }
        let path = ArcSpline::from_spans(&spans, outline.closed);
        let off = outline.deviation.mm + standing_in(left);
        Cubics { fitted: Fitted { path, deviation: Deviation { mm: off, ..outline.deviation } }, pieces }
    };
    faired.iter().map(cubics).collect()
}

/// The cubics that are not straight on the paths as they are routed: those of every copy.
pub(super) fn routed(cubics: &[Cubics], routed: &[Routed], placing: &Placing) -> Vec<Cubic> {
    let all: Vec<&Cubics> = cubics.iter().collect();
    let placed: Vec<(&Cubics, Affine)> = placing.place(&all, |cubics, place| (*cubics, place)).collect();
    placed.iter().zip(routed).flat_map(|((cubics, place), routed)| cubics.on(routed, *place)).collect()
}

/// A cubic in the program's coordinates.
#[derive(Clone, Debug)]
pub(super) struct Cubic {
    /// The ends of the arcs that stand for it, in order.
    pub(super) ends: Vec<Point>,
    /// Its control points.
    pub(super) control: [Point; 2],
}

impl Cubics {
    /// How many cubics there are that are not straight.
    pub(super) fn count(&self) -> usize {
        let mut first = 0;
        let bent = self.pieces.iter().filter(|(_, arcs)| {
            first += arcs;
            *arcs > 1 || (*arcs == 1 && !self.fitted.path.span(first - 1).is_line())
        });
        bent.count()
    }

    /// The cubics that are not straight, where they are placed, on the path that is routed in place of the arcs.
    fn on(&self, routed: &Routed, place: Affine) -> Vec<Cubic> {
        let vertices = &routed.path.vertices;
        let mut first = 0;
        let mut bent = Vec::new();
        for (control, arcs) in &self.pieces {
            let ends = (first..=first + arcs).map(|k| vertices[k % vertices.len()].at).collect();
            let straight = *arcs == 0 || (*arcs == 1 && routed.path.span(first).is_line());
            first += arcs;
            if !straight {
                bent.push(Cubic { ends, control: control.map(|point| place * point) });
            }
        }
        bent
    }
}
