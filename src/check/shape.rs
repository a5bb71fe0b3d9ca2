//! Whether what is cut is what is drawn: every contour in order from end to end, and nothing elsewhere.

use kurbo::{Point, Rect};

use super::Asked;
use super::claim::{Claim, Spot, State, Worst};
use super::cuts::{Cuts, Pass};
use super::place::Drawn;
use crate::geom::{Along, ArcSpline, Span, SpanIndex, Vertex, frechet_within};
use crate::machine::Machine;
use crate::num::Deviation;

const DEVIATION: &str = "the cut is within the tolerance of the drawing";
const ALL_CUT: &str = "every contour is cut";
const STRAY: &str = "nothing is cut off the drawing";
const DEPTH: &str = "every contour is cut to the depth asked";
const PASSES: &str = "no pass is deeper than asked";

/// What came of comparing shapes.
pub(super) struct Shape {
    /// The worst, in the program's coordinates.
    pub(super) deviation: Option<Deviation>,
    pub(super) claims: Vec<Claim>,
}

/// A contour of the drawing, in the program's coordinates, and how it is cut.
struct Target {
    path: ArcSpline,
    bbox: Rect,
    /// The height that it is to be cut down to; `None` where it was not said.
    lowest: Option<f64>,
    /// The heights of the passes that follow it within tolerance, in the order of the program.
    floors: Vec<f64>,
    /// The nearest that any pass comes to it in order, with a spot of that pass.
    best: Option<(Deviation, Spot)>,
}

/// Compares the cuts with `contours`. With `alone`, all cuts must be theirs; else those that follow none are handed back.
pub(super) fn judge<'a, 'b>(
    cuts: &'b Cuts<'a>,
    contours: Vec<Drawn>,
    alone: bool,
    machine: &Machine,
    asked: &Asked,
) -> (Shape, Vec<&'b Pass<'a>>) {
    let mut comparison = Comparison::new(contours, cuts.unsure, asked);
    let mut others = Vec::new();
    for group in Pass::groups(&cuts.passes) {
        let whole = Pass::joined(group);
        let gap = comparison.tolerance / 100.0;
        if whole.is_some_and(|whole| comparison.take(&whole, &whole.chain(gap))) {
            continue;
        }
        for pass in group {
            let chain = pass.chain(gap);
            if !comparison.take(pass, &chain) {
                others.push(pass);
                if alone {
                    comparison.take_unfitting(pass, &chain);
                }
            }
        }
    }
    if alone {
        comparison.take_ramps(cuts);
    }
    (comparison.conclude(machine, asked), others)
}

struct Comparison {
    /// How far from the drawing a move may be as it was read.
    tolerance: f64,
    /// How far that may be from what the text says.
    unsure: f64,
    targets: Vec<Target>,
    /// The targets in the order of the left sides of their boxes.
    by_left: Vec<usize>,
    /// The spans of all targets; built when a cut is off the drawing, or there are many to look at.
    index: Option<SpanIndex>,
    /// How many more spans may be looked at one by one before that.
    patience: usize,
    stray: Worst,
    worst: Option<(Deviation, Spot)>,
}

impl Comparison {
    fn new(contours: Vec<Drawn>, unsure: f64, asked: &Asked) -> Self {
        let target = |Drawn { id, path, .. }: Drawn| {
            let bbox = path.bbox()?;
            let lowest = asked.lowest_of(id);
            Some(Target { path, bbox, lowest, floors: Vec::new(), best: None })
        };
        let targets: Vec<Target> = contours.into_iter().filter_map(target).collect();
        let mut by_left: Vec<usize> = (0..targets.len()).collect();
        by_left.sort_by(|&a, &b| targets[a].bbox.x0.total_cmp(&targets[b].bbox.x0));
        let allowed = asked.tolerance.mm();
        let tolerance = (allowed - unsure).max(allowed / 2.0);
        let patience = LOOKS * targets.iter().map(|target| target.path.len()).sum::<usize>();
        let stray = Worst::none();
        Self { tolerance, unsure, targets, by_left, index: None, patience, stray, worst: None }
    }

    /// Compares one pass with the contours whose boxes it fits; true when it follows one.
    fn take(&mut self, pass: &Pass, chain: &ArcSpline) -> bool {
        let mut follows = false;
        for target in chain.bbox().map_or_else(Vec::new, |bbox| self.fitting(bbox)) {
            let deviation = frechet_within(chain, &self.targets[target].path, self.tolerance);
            follows |= self.note(target, deviation, pass);
        }
        follows
    }

    /// The contours that a pass with this box may follow within tolerance.
    fn fitting(&self, bbox: Rect) -> Vec<usize> {
        let left = |&target: &usize| self.targets[target].bbox.x0;
        let from = self.by_left.partition_point(|target| left(target) < bbox.x0 - self.tolerance);
        let near = self.by_left[from..].iter().take_while(|target| left(target) <= bbox.x0 + self.tolerance);
        let fits = |&&target: &&usize| misfit(self.targets[target].bbox, bbox) <= self.tolerance;
        near.filter(fits).copied().collect()
    }

    /// Keeps how near a pass comes to a contour; true when that is within tolerance.
    fn note(&mut self, target: usize, deviation: Deviation, pass: &Pass) -> bool {
        let spot = Spot::on(pass.move_near(deviation.at), deviation.at);
        let follows = deviation.mm <= self.tolerance;
        let target = &mut self.targets[target];
        if follows {
            target.floors.push(pass.z);
        }
        if target.best.is_none_or(|(best, _)| deviation.mm < best.mm) {
            target.best = Some((deviation, spot));
        }
        if follows {
            self.note_worst(deviation, spot);
        }
        follows
    }

    fn note_worst(&mut self, deviation: Deviation, spot: Spot) {
        if self.worst.is_none_or(|(worst, _)| deviation.mm > worst.mm) {
            self.worst = Some((deviation, spot));
        }
    }

    /// A pass that follows no contour as a whole. Its way must still be on the drawing everywhere. Open contours may
    /// be parts of it: one contour that was drawn in pieces. Else it is the failed cut of the contour it fits best.
    fn take_unfitting(&mut self, pass: &Pass, chain: &ArcSpline) {
        let Some(bbox) = chain.bbox() else { return };
        for m in &pass.moves {
            self.note_stray(m);
        }
        let places = SpanIndex::new(chain.spans());
        let mut follows = false;
        for target in 0..self.targets.len() {
            let candidate = &self.targets[target];
            let inside = bbox.inflate(self.tolerance, self.tolerance).contains_rect(candidate.bbox);
            if inside && !candidate.path.closed && !candidate.path.is_empty() {
                let deviation = part_deviation(chain, &places, &candidate.path, self.tolerance);
                follows |= self.note(target, deviation, pass);
            }
        }
        let laps = || first_laps(chain, self.tolerance / 100.0);
        let lap = if follows { None } else { laps().into_iter().find(|lap| self.take(pass, lap)) };
        if !follows && lap.is_none() {
            self.take_failed(pass, chain, bbox);
        }
    }

    /// A pass of about the box of a contour is taken for its cut, however far it is off.
    fn take_failed(&mut self, pass: &Pass, chain: &ArcSpline, bbox: Rect) {
        let fit = |&target: &usize| misfit(self.targets[target].bbox, bbox);
        let nearest = (0..self.targets.len()).min_by(|a, b| fit(a).total_cmp(&fit(b)));
        let Some(target) =
            nearest.filter(|&t| fit(&t) <= self.targets[t].bbox.size().to_vec2().hypot() / 2.0)
        else {
            return;
        };
        let deviation = frechet_within(chain, &self.targets[target].path, self.tolerance);
        self.note(target, deviation, pass);
        self.note_worst(deviation, Spot::on(pass.move_near(deviation.at), deviation.at));
    }

    /// Ramps go along a contour too.
    fn take_ramps(&mut self, cuts: &Cuts) {
        for ramp in &cuts.ramps {
            self.note_stray(ramp);
        }
        for plunge in &cuts.plunges {
            self.note_stray(plunge);
        }
    }

    fn note_stray(&mut self, m: &crate::toolpath::Move) {
        let span = m.span();
        let near = self.near(span.bbox().inflate(self.tolerance, self.tolerance));
        let (mut distance, mut at) = SpanIndex::new(near).farthest(&span, self.tolerance);
        if distance > self.tolerance {
            let targets = &self.targets;
            let all = || SpanIndex::new(targets.iter().flat_map(|target| target.path.spans()));
            (distance, at) = self.index.get_or_insert_with(all).farthest(&span, self.tolerance);
        }
        self.stray.note(distance, || Spot::on(m, at));
    }

    /// The spans of the drawing whose boxes meet `area`; none once the patience for looking is spent.
    fn near(&mut self, area: Rect) -> Vec<Span> {
        let mut near = Vec::new();
        for target in self.targets.iter().filter(|target| meet(target.bbox, area)) {
            if self.patience < target.path.len() {
                return Vec::new();
            }
            self.patience -= target.path.len();
            near.extend(target.path.spans().filter(|span| meet(span.bbox(), area)));
        }
        near
    }

    fn conclude(mut self, machine: &Machine, asked: &Asked) -> Shape {
        let allowed = asked.tolerance.mm();
        self.stray.value += self.unsure;
        let uncut: Vec<&Target> = self.targets.iter().filter(|target| target.floors.is_empty()).collect();
        let missed = uncut.iter().filter_map(|target| target.best);
        let worst = missed.chain(self.worst).reduce(|a, b| if b.0.mm > a.0.mm { b } else { a });
        let worst = worst.map(|(found, spot)| (Deviation { mm: found.mm + self.unsure, ..found }, spot));
        let deviation = worst.map(|(deviation, _)| deviation);
        let mut claims = vec![deviation_claim(worst, allowed), all_cut(&uncut)];
        let strays = Claim::at_most(STRAY, "mm", self.stray, allowed, 0.0);
        claims.push(strays.because("the cutter goes down where nothing is drawn"));
        claims.push(self.depth_claim(machine, asked));
        claims.push(self.pass_claim(machine, asked));
        Shape { deviation, claims }
    }

    /// The highest floor among the deepest passes of the contours: each must reach the height asked, none go below.
    fn depth_claim(&self, machine: &Machine, asked: &Asked) -> Claim {
        if asked.lowest.is_none() {
            return Claim::open(DEPTH, "no depth was asked for");
        }
        let mut short = Worst::none();
        let mut limit = asked.lowest;
        for target in &self.targets {
            let Some(lowest) = target.lowest else { continue };
            let floor = target.floors.iter().copied().fold(f64::INFINITY, f64::min);
            if let Some((_, spot)) = target.best.filter(|_| floor.is_finite()) {
                short.note((floor - lowest).abs(), || {
                    limit = Some(lowest);
                    spot
                });
            }
        }
        let mut claim = Claim::at_most(DEPTH, "mm", short, 0.0, machine.last_place());
        claim.value = claim.value.zip(limit).map(|(off, lowest)| lowest + off);
        claim.limit = limit;
        claim.because("the deepest pass of a contour is not at the height asked")
    }

    /// The largest step from one pass of a contour to the next.
    fn pass_claim(&self, machine: &Machine, asked: &Asked) -> Claim {
        let Some(pass) = asked.pass else { return Claim::open(PASSES, "no depth of pass was asked for") };
        let mut step = Worst::none();
        for target in &self.targets {
            let mut above = asked.stock_top;
            for &floor in &target.floors {
                if let Some((_, spot)) = target.best {
                    step.note(above - floor, || spot);
                }
                above = above.min(floor);
            }
        }
        let slack = 2.0 * machine.last_place();
        Claim::at_most(PASSES, "mm", step, pass, slack).because("a pass takes more than one pass may")
    }
}

fn deviation_claim(worst: Option<(Deviation, Spot)>, allowed: f64) -> Claim {
    let mut found = Worst::none();
    if let Some((deviation, spot)) = worst {
        found.note(deviation.mm, || spot);
    }
    let claim = Claim::at_most(DEVIATION, "mm", found, allowed, 0.0);
    if worst.is_none() {
        return Claim { state: State::Fails, note: "no cut follows a contour".into(), ..claim };
    }
    claim.because("the cut leaves the contour")
}

fn all_cut(uncut: &[&Target]) -> Claim {
    let first = uncut.first().map(|target| Spot {
        line: 0,
        at: Some(crate::toolpath::Position { xy: target.bbox.center(), z: 0.0 }),
    });
    Claim::none_of(ALL_CUT, uncut.len(), first).because("no pass follows the contour within the tolerance")
}

/// The closed chains that an open one makes each time it comes back to within `gap` mm of its start: a lap that runs
/// on over its start is one of them.
fn first_laps(chain: &ArcSpline, gap: f64) -> Vec<ArcSpline> {
    const FEW: usize = 4;
    let vertices = &chain.vertices;
    let back = |&k: &usize| vertices[k].at.distance(vertices[0].at) <= gap;
    let returns = (2..vertices.len()).filter(back).take(if chain.closed { 0 } else { FEW });
    let closing = |k: usize| Vertex { at: vertices[k].at, bulge: 0.0 };
    let lap = |k: usize| vertices[..k].iter().copied().chain([closing(k)]).collect();
    returns.map(|k| ArcSpline { vertices: lap(k), closed: true }).collect()
}

/// How often every span of the drawing may be looked at before an index of them is worth its making.
const LOOKS: usize = 8;

fn meet(a: Rect, b: Rect) -> bool {
    a.x0 <= b.x1 && b.x0 <= a.x1 && a.y0 <= b.y1 && b.y0 <= a.y1
}

/// How far the sides of two boxes are apart at most: chains within a distance of each other differ by no more.
fn misfit(a: Rect, b: Rect) -> f64 {
    let sides = [a.x0 - b.x0, a.x1 - b.x1, a.y0 - b.y0, a.y1 - b.y1];
    sides.into_iter().map(f64::abs).fold(0.0, f64::max)
}

/// The distance of an open contour from the part of the chain between the feet of its ends.
fn part_deviation(chain: &ArcSpline, places: &SpanIndex, contour: &ArcSpline, tolerance: f64) -> Deviation {
    let foot = |end: Point| {
        let (span, near) = places.nearest(end)?;
        Some(Along { span, t: near.nearest(end).t })
    };
    let ends = contour.vertices.first().zip(contour.vertices.last());
    let feet = ends.and_then(|(first, last)| foot(first.at).zip(foot(last.at)));
    let Some((a, b)) = feet else { return frechet_within(chain, contour, tolerance) };
    let (first, last) = if a <= b { (a, b) } else { (b, a) };
    let direct = frechet_within(&chain.part(first, last), contour, tolerance);
    if !chain.closed {
        return direct;
    }
    let around = frechet_within(&chain.part(last, first), contour, tolerance);
    if around.mm < direct.mm { around } else { direct }
}
