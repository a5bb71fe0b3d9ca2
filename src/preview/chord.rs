//! The chord error: how far the drawing is from the path that is cut last, all along it.
//!
//! Distances are to the nearest place, taken at every vertex of the drawing, at every joint of the path and in between:
//! they show where the deviation is. How large it is at most is what the check certifies.

use kurbo::Point;
use rayon::prelude::*;

use super::Scene;
use super::tour::Stage;
use crate::geom::{ArcSpline, Span, SpanIndex};

/// The chord error at one place of the path.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Station {
    /// The number of the move.
    pub of: usize,
    /// The fraction of its length.
    pub t: f64,
    /// The chord error in mm. On the line: the distance of the drawing, positive to the left of the path. Beside it: the
    /// distance of the drawing less the cutter's radius, positive where material is left.
    pub error: f64,
}

/// One contour and the moves that cut it last.
#[derive(Clone, Debug)]
pub struct Lap {
    /// The contour's id in the drawing.
    pub contour: usize,
    /// The numbers of the moves.
    pub moves: Vec<usize>,
    /// The chord error along them, in their order.
    pub stations: Vec<Station>,
    /// Stretches of the drawing that the cutter does not reach, in the program's coordinates.
    pub uncut: Vec<Span>,
}

impl Lap {
    /// The largest chord error, unsigned.
    pub fn largest(&self) -> f64 {
        self.stations.iter().map(|station| station.error.abs()).fold(0.0, f64::max)
    }
}

/// The chord error of a whole program.
#[derive(Clone, Debug, Default)]
pub struct Chord {
    /// The contours in the drawing's order, those that are cut.
    pub laps: Vec<Lap>,
}

/// How many stations stand between those at vertices and joints, in all.
const BETWEEN: f64 = 6000.0;
/// How many stations are kept at most, in all.
const MOST: usize = 24_000;

impl Chord {
    /// The chord error of the program in `scene`, whose moves have the `stages`.
    pub(super) fn of(scene: &Scene, stages: &[Stage]) -> Self {
        let contours: Vec<&ArcSpline> = scene.drawn.iter().map(|contour| &contour.path).collect();
        let step = contours.iter().map(|path| path.length()).sum::<f64>() / BETWEEN;
        let finishing = finishing(scene, stages, &contours);
        let measured = (0..contours.len()).into_par_iter().filter(|&c| !finishing[c].is_empty());
        let laps: Vec<Lap> = measured
            .map(|c| {
                let radius = beside(scene, contours[c], &finishing[c]);
                let measure = Measure { scene, contour: contours[c], moves: &finishing[c], radius, step };
                measure.lap(scene.drawn[c].id)
            })
            .collect();
        let all = laps.iter().map(|lap| lap.stations.len()).sum::<usize>();
        let every = (2 * all).div_ceil(MOST);
        let thinned = |lap: Lap| Lap { stations: thinned(lap.stations, every), ..lap };
        Self { laps: if all > MOST { laps.into_iter().map(thinned).collect() } else { laps } }
    }

    /// All stations, contour by contour.
    pub fn stations(&self) -> impl Iterator<Item = &Station> {
        self.laps.iter().flat_map(|lap| &lap.stations)
    }
}

/// For each contour the moves that cut it last: those of its deepest passes, or, beside the line, of the last of them.
fn finishing(scene: &Scene, stages: &[Stage], contours: &[&ArcSpline]) -> Vec<Vec<usize>> {
    let moves = &scene.program.toolpath.moves;
    let mut owners = Vec::new();
    for (c, contour) in contours.iter().enumerate() {
        owners.resize(owners.len() + contour.len(), c);
    }
    let index = SpanIndex::new(contours.iter().flat_map(|path| path.spans()));
    let mut passes: Vec<Vec<usize>> = Vec::new();
    for (i, stage) in stages.iter().enumerate() {
        if let Some(pass) = stage.pass {
            passes.resize(passes.len().max(pass + 1), Vec::new());
            passes[pass].push(i);
        }
    }
    let mut finishing: Vec<Vec<usize>> = vec![Vec::new(); contours.len()];
    let mut floors = vec![f64::INFINITY; contours.len()];
    for pass in passes.into_iter().filter(|pass| !pass.is_empty()) {
        let middle = pass[pass.len() / 2];
        let Some((nearest, _)) = index.nearest(moves[middle].span().at(0.5)) else { continue };
        let (c, floor) = (owners[nearest], stages[middle].floor);
        if floor < floors[c] || (floor <= floors[c] && scene.report.setup.side != "on") {
            finishing[c].clear();
        }
        if floor <= floors[c] {
            floors[c] = floor;
            finishing[c].extend(pass);
        }
    }
    finishing
}

/// How far the path should be from its contour, by where it is: 0 on the line, the cutter's radius beside it.
fn beside(scene: &Scene, contour: &ArcSpline, moves: &[usize]) -> f64 {
    let radius = scene.report.setup.cutter_mm / 2.0;
    let drawn = SpanIndex::new(contour.spans());
    let few = moves.iter().step_by(moves.len().div_ceil(64).max(1));
    let away = few.filter_map(|&i| {
        let middle = scene.program.toolpath.moves[i].span().at(0.5);
        Some(drawn.nearest(middle)?.1.nearest(middle).distance)
    });
    let mut away: Vec<f64> = away.collect();
    away.sort_by(f64::total_cmp);
    if away.get(away.len() / 2).is_some_and(|&middle| middle > radius / 2.0) { radius } else { 0.0 }
}

/// One contour beside the moves that cut it.
struct Measure<'a> {
    scene: &'a Scene<'a>,
    contour: &'a ArcSpline,
    moves: &'a [usize],
    /// How far the path should be from the contour.
    radius: f64,
    /// The longest way between two stations.
    step: f64,
}

impl Measure<'_> {
    fn lap(&self, contour: usize) -> Lap {
        let path = SpanIndex::new(self.moves.iter().map(|&i| self.span(i)));
        let drawn = SpanIndex::new(self.contour.spans());
        let mut keyed = Vec::new();
        let mut uncut = Vec::new();
        for span in self.contour.spans() {
            let fractions = self.fractions(&span);
            let measured: Vec<Option<(usize, Station)>> =
                fractions.iter().map(|&t| self.at_foot_of(&path, span.at(t))).collect();
            let piece = 1.0 / fractions.len() as f64;
            let missed = fractions.iter().zip(&measured).filter(|(_, station)| self.is_uncut(station));
            uncut.extend(missed.map(|(&t, _)| span.part(t, t + piece)));
            keyed.extend(measured.into_iter().filter(|station| !self.is_uncut(station)).flatten());
        }
        for (order, &of) in self.moves.iter().enumerate() {
            let span = self.span(of);
            let at = self.fractions(&span).into_iter().chain([1.0]);
            keyed.extend(at.filter_map(|t| Some((order, self.at_place_of(&drawn, of, t)?))));
        }
        keyed.sort_by(|a, b| a.0.cmp(&b.0).then(a.1.t.total_cmp(&b.1.t)));
        let stations = keyed.into_iter().map(|(_, station)| station).collect();
        Lap { contour, moves: self.moves.to_vec(), stations, uncut }
    }

    fn span(&self, of: usize) -> Span {
        self.scene.program.toolpath.moves[of].span()
    }

    /// The places of a span that are looked at, its end left out.
    fn fractions(&self, span: &Span) -> Vec<f64> {
        let pieces = (span.length() / self.step).ceil().clamp(1.0, BETWEEN);
        (0..pieces as usize).map(|k| k as f64 / pieces).collect()
    }

    /// The chord error at the foot of a place of the drawing, with the move's place in the lap.
    fn at_foot_of(&self, path: &SpanIndex, drawn: Point) -> Option<(usize, Station)> {
        let (order, span) = path.nearest(drawn)?;
        let foot = span.nearest(drawn);
        let error = self.error(&span, foot.t, drawn);
        Some((order, Station { of: self.moves[order], t: foot.t, error }))
    }

    /// The chord error at a place of the path, by the place of the drawing that is nearest to it.
    fn at_place_of(&self, drawn: &SpanIndex, of: usize, t: f64) -> Option<Station> {
        let span = self.span(of);
        let at = span.at(t);
        let (_, nearest) = drawn.nearest(at)?;
        Some(Station { of, t, error: self.error(&span, t, nearest.nearest(at).at) })
    }

    fn error(&self, span: &Span, t: f64, drawn: Point) -> f64 {
        let away = drawn - span.at(t);
        if self.radius > 0.0 {
            return away.hypot() - self.radius;
        }
        let left = span.tangent(t).cross(away);
        if left < 0.0 { -away.hypot() } else { away.hypot() }
    }

    /// True where a cutter beside the line stays further away than it may.
    fn is_uncut(&self, measured: &Option<(usize, Station)>) -> bool {
        let tolerance = self.scene.report.tolerance_mm;
        self.radius > 0.0 && measured.is_some_and(|(_, station)| station.error > tolerance)
    }
}

/// The least and the largest of every `every` stations, in their order.
fn thinned(stations: Vec<Station>, every: usize) -> Vec<Station> {
    let extremes = |few: &[Station]| {
        let by_error = |a: &&Station, b: &&Station| a.error.total_cmp(&b.error);
        let low = few.iter().min_by(by_error).copied();
        let high = few.iter().max_by(by_error).copied();
        let mut kept: Vec<Station> = low.into_iter().chain(high.filter(|_| high != low)).collect();
        kept.sort_by(|a, b| a.of.cmp(&b.of).then(a.t.total_cmp(&b.t)));
        kept
    };
    stations.chunks(every.max(1)).flat_map(extremes).collect()
}
