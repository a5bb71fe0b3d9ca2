//! Curvature as a comb: a tooth at each place, as long as the path bends there.

use kurbo::{Point, Rect, Vec2};

use super::Scene;
use super::chord::Chord;
use crate::geom::{ArcSpline, Span};

/// The length of the tooth for the strongest bend shown, as a share of the part's diagonal.
const LONGEST: f64 = 0.06;
/// How many teeth a comb has at most.
const TEETH: usize = 6000;

/// Curvature combs of the drawing as it was traced and of the path that is cut, to one scale.
#[derive(Clone, Debug)]
pub(super) struct Combs {
    /// As traced.
    pub(super) before: Vec<Span>,
    /// As cut.
    pub(super) after: Vec<Span>,
    /// As the fair curves bend; none where the scene has none.
    pub(super) fair: Vec<Span>,
    /// The bend, in 1/mm, that has the longest tooth; stronger ones are cut off there.
    pub(super) strongest: f64,
}

/// How a curve bends at a place.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Bend {
    /// The place, in the program's coordinates.
    pub at: Point,
    /// The direction to the left there.
    pub left: Vec2,
    /// Signed curvature in 1/mm, positive for a left turn.
    pub curvature: f64,
}

/// The combs of the program in `scene`.
pub(super) fn combs(scene: &Scene, chord: &Chord) -> Combs {
    let traced: Vec<Bend> = scene.drawn.iter().flat_map(|contour| traced(&contour.path)).collect();
    let moves = &scene.program.toolpath.moves;
    let step = chord.laps.iter().flat_map(|lap| &lap.moves).map(|&i| moves[i].span().length()).sum::<f64>()
        / (TEETH as f64 / 2.0);
    let cut: Vec<Bend> =
        chord.laps.iter().flat_map(|lap| &lap.moves).flat_map(|&i| cut(&moves[i].span(), step)).collect();
    let strongest = usual_strongest(&cut);
    let scale = LONGEST * diagonal(scene.part()) / strongest;
    let comb = |bends: &[Bend]| teeth(bends, scale, strongest);
    Combs { before: comb(&traced), after: comb(&cut), fair: comb(&scene.fair), strongest }
}

/// The bend that nineteen in twenty bent places of a cut stay below; never 0.
fn usual_strongest(cut: &[Bend]) -> f64 {
    let mut bends: Vec<f64> =
        cut.iter().map(|bend| bend.curvature.abs()).filter(|bend| *bend > 0.0).collect();
    bends.sort_by(f64::total_cmp);
    bends.get(bends.len() * 19 / 20).copied().unwrap_or(1.0)
}

/// The bends of a trace: the turn at each vertex over half of the lengths beside it.
fn traced(path: &ArcSpline) -> Vec<Bend> {
    let bend = |i: usize| {
        let turn = path.turn(i)?;
        let here = path.span(i);
        let before = path.span(if i == 0 { path.len() - 1 } else { i - 1 });
        let curvature = 2.0 * turn / (before.length() + here.length());
        let tangent = before.tangent(1.0) + here.tangent(0.0);
        (curvature.is_finite() && tangent.hypot() > 0.0).then(|| Bend {
            at: here.start,
            left: left(tangent.normalize()),
            curvature,
        })
    };
    (0..path.len()).filter_map(bend).collect()
}

/// The bends of a span that is cut, at both ends and a `step` apart.
fn cut(span: &Span, step: f64) -> Vec<Bend> {
    let pieces = (span.length() / step).ceil().clamp(1.0, TEETH as f64) as usize;
    let curvature = span.curvature();
    let at = |k: usize| {
        let t = k as f64 / pieces as f64;
        Bend { at: span.at(t), left: left(span.tangent(t)), curvature }
    };
    (0..=pieces).map(at).filter(|bend| bend.left.hypot().is_finite()).collect()
}

/// The teeth, towards the outside of each bend; where there are too many, the strongest of neighbours.
fn teeth(bends: &[Bend], scale: f64, strongest: f64) -> Vec<Span> {
    let every = bends.len().div_ceil(TEETH).max(1);
    let stronger = |a: &&Bend, b: &&Bend| a.curvature.abs().total_cmp(&b.curvature.abs());
    let strong = bends.chunks(every).filter_map(|few| few.iter().max_by(stronger));
    strong
        .map(|bend| {
            let length = bend.curvature.clamp(-strongest, strongest) * scale;
            Span::line(bend.at, bend.at - bend.left * length)
        })
        .collect()
}

fn left(tangent: Vec2) -> Vec2 {
    Vec2::new(-tangent.y, tangent.x)
}

fn diagonal(part: Rect) -> f64 {
    part.width().hypot(part.height())
}
