//! How the trace, its fair curve and the path bend.

use kurbo::{Affine, Point, Vec2};

use super::Plan;
use super::placing::Placing;
use crate::fair;
use crate::geom::ArcSpline;
use crate::job::Job;
use crate::preview::Bend;
use crate::report::{Curvature, Profile};

/// How many places of each piece of a fair curve are looked at: its second derivative is straight between knots.
const PLACES: usize = 8;

/// The curvature of every contour that was faired.
pub(super) fn of(plan: &Plan) -> Vec<Curvature> {
    let contours = plan.cleaned.contours.iter().zip(&plan.faired).zip(&plan.fitted);
    let told =
        |((contour, faired), fitted): ((&crate::sketch::Contour, &fair::Outline), &crate::fit::Fitted)| {
            Curvature { trace: traced(&contour.path), fair: faired_profile(faired), path: cut(&fitted.path) }
        };
    contours.map(told).collect()
}

/// The bends of the fair curves of every copy, where the job shows them.
pub(super) fn fair_bends(job: &Job, faired: &[fair::Outline], placing: &Placing) -> Vec<Bend> {
    let shown = if job.curvature { faired } else { &[] };
    placing.place(shown, bends).flatten().collect()
}

/// The bends of a contour's fair curves; a mirror turns left to right.
fn bends(outline: &fair::Outline, place: Affine) -> Vec<Bend> {
    let side = place.determinant().signum();
    let locals = outline.runs.iter().flat_map(|run| {
        let ts = places(run);
        run.spline.locals(&ts).collect::<Vec<_>>()
    });
    let bend = |local: fair::Local| Bend {
        at: place * local.at,
        left: (place * left(local.first.normalize()).to_point() - place * Point::ORIGIN) * side,
        curvature: local.curvature() * side,
    };
    locals.map(bend).filter(|bend| bend.curvature.is_finite() && bend.left.hypot().is_finite()).collect()
}

/// The turn at each vertex over half the lengths beside it.
fn traced(path: &ArcSpline) -> Profile {
    let mut profile = Profile::default();
    let mut along = 0.0;
    for i in 0..path.len() {
        let here = path.span(i);
        let before = path.span(if i == 0 { path.len() - 1 } else { i - 1 });
        if let Some(turn) = path.turn(i) {
            let beside = (before.length() + here.length()) / 2.0;
            profile.note(along, turn / beside);
            profile.bending += turn * turn / beside;
        }
        along += here.length();
    }
    profile
}

/// At the knots of the fair curves and evenly between, over the length of the trace.
fn faired_profile(outline: &fair::Outline) -> Profile {
    let mut profile = Profile { bending: outline.energy(), ..Profile::default() };
    let mut along = 0.0;
    for run in &outline.runs {
        let ts = places(run);
        for (t, local) in ts.iter().zip(run.spline.locals(&ts)) {
            profile.note(along + t, local.curvature());
        }
        along += ts.last().copied().unwrap_or_default();
    }
    profile
}

/// At both ends of every span: the curvature steps at the joints.
fn cut(path: &ArcSpline) -> Profile {
    let mut profile = Profile::default();
    let mut along = 0.0;
    for span in path.spans() {
        profile.note(along, span.curvature());
        along += span.length();
        profile.note(along, span.curvature());
        profile.bending += span.curvature().powi(2) * span.length();
    }
    profile
}

/// The parameters that a fair curve is looked at.
fn places(run: &fair::Fair) -> Vec<f64> {
    let pieces = run.spline.knots().windows(2);
    let within = pieces
        .flat_map(|knots| (0..PLACES).map(|k| knots[0] + (knots[1] - knots[0]) * k as f64 / PLACES as f64));
    within.chain(run.spline.knots().last().copied()).collect()
}

fn left(tangent: Vec2) -> Vec2 {
    Vec2::new(-tangent.y, tangent.x)
}
