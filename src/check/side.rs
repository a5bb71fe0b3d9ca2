//! A cut beside the line: the cutter keeps its radius from the region to keep, and reaches all of it that it can.
//!
//! Closeness of two curves does not bound closeness of their offsets, so the path is judged by what the cutter
//! touches. Clearance: every point of the path is at least radius less tolerance from the region. Coverage: a place
//! of the border is reachable if a disc of radius plus tolerance, on the cutter's side, touches it and crosses no
//! border; every reachable place is within radius plus tolerance of the path.

use std::cmp::Ordering;
use std::collections::HashSet;

use kurbo::{Point, Vec2};

use super::claim::{Claim, Spot, State, Worst};
use super::cuts::{Cuts, Pass};
use super::place::{Drawn, Placed};
use super::region::Region;
use super::relief::{Corners, Relief};
use super::rings::in_rings;
use super::shape::{self, Shape};
use super::{Asked, Relieved, Side, Uncut, steps};
use crate::geom::{ArcSpline, Span, SpanIndex};
use crate::machine::Machine;
use crate::num::Deviation;
use crate::toolpath::Move;

const CLEARANCE: &str = "the cutter stays off what is kept";
const COVERAGE: &str = "the cutter reaches all of the drawing that it can";
const STRAY: &str = "every cut comes to the drawing";
const DEPTH: &str = "some pass goes to the depth asked";
const PASSES: &str = "no pass is deeper than asked";

/// How many directions the touching disc is tried in at a corner.
const DIRECTIONS: usize = 9;

/// What came of judging the cuts beside the line.
pub(super) struct Beside {
    pub(super) shape: Shape,
    pub(super) uncut: Vec<Uncut>,
    pub(super) relieved: Vec<Relieved>,
}

/// Judges the cuts beside the closed contours; open ones are cut on the line.
pub(super) fn judge(cuts: &Cuts, placed: &Placed, side: Side, machine: &Machine, asked: &Asked) -> Beside {
    let band = Band::of(cuts, machine, asked);
    if band.tolerance >= band.radius {
        let claims = vec![Claim::open(CLEARANCE, "a side needs a cutter larger than the tolerance")];
        let claims = claims.into_iter().map(|claim| Claim { state: State::Fails, ..claim }).collect();
        let shape = Shape { deviation: None, claims };
        return Beside { shape, uncut: Vec::new(), relieved: Vec::new() };
    }
    let (closed, mut open) = bordering(placed, asked);
    open.retain(|drawn| asked.wants(drawn.id));
    let lines = SpanIndex::new(open.iter().flat_map(|drawn| drawn.path.spans()));
    let on_line = |m: &Move| {
        !open.is_empty() && lines.farthest(&m.span(), asked.tolerance.mm()).0 <= asked.tolerance.mm()
    };
    // The ways down to a cut on the line run on that line.
    let ways_down: Vec<&Move> =
        cuts.ramps.iter().chain(&cuts.plunges).copied().filter(|m| !on_line(m)).collect();
    let (shape, beside) = match open.is_empty() {
        true => (None, cuts.passes.iter().collect()),
        false => {
            let (shape, beside) = shape::judge(cuts, open, false, machine, asked);
            (Some(shape), beside)
        }
    };
    let judge = Judge::new(closed, band, side, asked);
    let corners = Corners { judge: &judge, asked: &asked.relieved, rounding: 2.0 * machine.last_place() };
    let reliefs = corners.reliefs(&in_order(&beside, &ways_down));
    let mut clearance = judge.clearance((&beside, &ways_down), &corners, &reliefs);
    let (mut coverage, uncut) = judge.coverage(&beside, &ways_down, (machine, asked));
    clearance.value += cuts.unsure;
    coverage.value += cuts.unsure;
    let relieved = corners.told(&reliefs);
    let mut claims = vec![judge.clearance_claim(clearance, &relieved), judge.coverage_claim(coverage)];
    claims.push(judge.touch_claim(&beside));
    let wanted: Vec<Owner> = judge.owners.iter().copied().filter(|owner| asked.wants(owner.id)).collect();
    claims.push(depth_claim(&beside, machine, asked, &wanted));
    claims.push(pass_claim(&beside, &ways_down, machine, asked));
    let deviation = judge.deviation(clearance, coverage);
    let on_line = shape.as_ref().and_then(|shape| shape.deviation);
    let worst = [deviation, on_line].into_iter().flatten().reduce(|a, b| if b.mm > a.mm { b } else { a });
    claims.extend(shape.map_or_else(Vec::new, |shape| shape.claims));
    Beside { shape: Shape { deviation: worst, claims }, uncut, relieved }
}

/// The contours that bound the region, closed or drawn in pieces, and the open ones, which are cut on the line.
fn bordering(placed: &Placed, asked: &Asked) -> (Vec<Drawn>, Vec<Drawn>) {
    let on_line = |drawn: &Drawn| asked.on_line.contains(&drawn.id);
    let (mut border, open): (Vec<Drawn>, Vec<Drawn>) =
        placed.contours.iter().cloned().partition(|drawn| drawn.path.closed && !on_line(drawn));
    let (on_line, open): (Vec<Drawn>, Vec<Drawn>) = open.into_iter().partition(on_line);
    let paths: Vec<&ArcSpline> = open.iter().map(|drawn| &drawn.path).collect();
    let mut in_ring = in_rings(&paths, asked.tolerance.mm()).into_iter();
    let (pieces, mut open): (Vec<Drawn>, Vec<Drawn>) =
        open.into_iter().partition(|_| in_ring.next().unwrap_or(false));
    border.extend(pieces);
    open.extend(on_line);
    (border, open)
}

/// How far from the edge the cutter's centre is to be.
#[derive(Clone, Copy)]
struct Band {
    /// The distance meant, in mm.
    radius: f64,
    /// How far it may be off.
    allowed: f64,
    /// How far it may be off as it was read.
    tolerance: f64,
    /// How far from the edge the cutter's edge is meant to be.
    beyond: f64,
}

impl Band {
    fn of(cuts: &Cuts, machine: &Machine, asked: &Asked) -> Self {
        let whole = asked.tolerance.mm();
        // On the waste side all the tolerance lies beyond the edge, and a hair is kept so that no path touches it.
        let (beyond, allowed) =
            if asked.waste { (whole / 2.0, whole / 2.0 - machine.last_place()) } else { (0.0, whole) };
        let radius = asked.cutter / 2.0 + asked.allowance + beyond;
        Self { radius, allowed, tolerance: (allowed - cuts.unsure).max(allowed / 2.0), beyond }
    }
}

/// The region with the cutter that keeps to one side of it.
pub(super) struct Judge {
    /// The contour, and its copy, of each span of the region's border.
    owners: Vec<Owner>,
    pub(super) region: Region,
    band: Band,
    /// How much further than usual the cutter keeps off each of these spans.
    extra: Vec<f64>,
    pub(super) radius: f64,
    pub(super) tolerance: f64,
    /// How much further the passes run that leave something for a last one.
    pub(super) leave: f64,
    side: Side,
}

/// What a span of the border belongs to.
#[derive(Clone, Copy)]
struct Owner {
    id: usize,
    copy: usize,
}

/// A piece of the border.
struct Piece {
    span: Span,
    owner: Owner,
    extra: f64,
}

impl Judge {
    fn new(closed: Vec<Drawn>, band: Band, side: Side, asked: &Asked) -> Self {
        let mut owners = Vec::new();
        let mut spans = Vec::new();
        for drawn in &closed {
            spans.extend(drawn.path.spans());
            owners.resize(spans.len(), Owner { id: drawn.id, copy: drawn.copy });
        }
        let extra: Vec<f64> = owners.iter().map(|owner: &Owner| asked.extra(owner.id)).collect();
        Self {
            owners,
            region: Region::new(spans, &extra),
            extra,
            band,
            radius: band.radius,
            tolerance: band.tolerance,
            leave: asked.leave,
            side,
        }
    }

    /// The least distance that the cutter's centre may have from the border.
    pub(super) fn closest(&self) -> f64 {
        self.radius - self.tolerance
    }

    /// The id of the contour that is nearest to a place.
    pub(super) fn contour_near(&self, place: Point) -> Option<usize> {
        self.region.nearest(place).map(|k| self.owners[k].id)
    }

    /// Half the length of pieces that are short enough to report their distance.
    pub(super) fn fine(&self) -> f64 {
        self.tolerance / 8.0
    }

    /// Half the length of pieces that are not cut further even where the verdict hangs on it.
    pub(super) fn finest(&self) -> f64 {
        self.tolerance / 500.0
    }

    /// True for places where the cutter's centre may be, as far as the side goes.
    pub(super) fn is_free(&self, p: Point) -> bool {
        self.region.contains(p) == (self.side == Side::Inside)
    }

    /// The least distance of the cutter's centre from the border, reliefs left out, turned in sign; negative of zero on
    /// the wrong side.
    fn clearance(
        &self,
        (beside, ways_down): (&[&Pass], &[&Move]),
        corners: &Corners,
        reliefs: &[Relief],
    ) -> Worst {
        let mut worst = Worst::none();
        let mut seen = HashSet::new();
        for pass in beside {
            // A pass that keeps its distance does not change sides: one place tells.
            let start = pass.moves[0];
            if !self.is_free(start.from.xy) {
                worst.note(0.0, || Spot::on(start, start.from.xy));
            }
        }
        for m in ways_down.iter().filter(|m| !self.is_free(m.to.xy)) {
            worst.note(0.0, || Spot::end_of(m));
        }
        for m in beside.iter().flat_map(|pass| &pass.moves).chain(ways_down) {
            let Some(span) = corners.beside(reliefs, m.span()) else { continue };
            let numbers = [span.start.x, span.start.y, span.end.x, span.end.y, span.bulge];
            // The same way in every pass is judged once.
            if seen.insert(numbers.map(f64::to_bits)) {
                let (least, at) = self.least_distance(span);
                worst.note(-least, || Spot::on(m, at));
            }
        }
        worst
    }

    /// A lower bound of the distance of a span from the border, with its place: exact enough to tell whether it is
    /// below what is allowed.
    fn least_distance(&self, span: Span) -> (f64, Point) {
        let limit = self.closest();
        let mut least = (f64::INFINITY, span.start);
        let mut pieces = vec![span];
        while let Some(piece) = pieces.pop() {
            let middle = piece.at(0.5);
            let here = self.region.distance(middle);
            let half = piece.length() / 2.0;
            if here < limit {
                least = if here < least.0 { (here, middle) } else { least };
            } else if here - half >= self.radius.min(least.0) {
                // No worse than what is known, or than no deviation at all.
                least = if here - half < least.0 { (here - half, middle) } else { least };
            } else if half <= self.finest() || (half <= self.fine() && here - half >= limit) {
                least = (here - half, middle);
            } else {
                pieces.extend([piece.part(0.0, 0.5), piece.part(0.5, 1.0)]);
            }
        }
        least
    }

    /// The largest distance of a reachable place of the border from the path that is as deep as asked there, and what
    /// is not reached.
    fn coverage(
        &self,
        beside: &[&Pass],
        ways_down: &[&Move],
        (machine, asked): (&Machine, &Asked),
    ) -> (Worst, Vec<Uncut>) {
        let wanted = self.owners.iter().filter(|owner| asked.wants(owner.id));
        let mut floors: Vec<Option<f64>> = wanted.map(|owner| asked.lowest_of(owner.id)).collect();
        floors.sort_by(|a, b| a.partial_cmp(b).unwrap_or(Ordering::Equal));
        floors.dedup();
        let (mut worst, mut uncut) = (Worst::none(), Vec::new());
        for floor in floors {
            let slack = machine.last_place();
            let deep = |z: f64| floor.is_none_or(|floor| z <= floor + slack);
            let along = beside.iter().filter(|pass| deep(pass.z)).flat_map(|pass| pass.moves.iter());
            // A hole of the cutter's own size is drilled.
            let drilled = ways_down.iter().filter(|m| m.from.xy == m.to.xy && deep(m.to.z));
            let path = SpanIndex::new(along.chain(drilled).map(|m| m.span()));
            for (k, (&span, &owner)) in self.region.spans().iter().zip(&self.owners).enumerate() {
                if asked.wants(owner.id) && asked.lowest_of(owner.id) == floor {
                    self.cover_corner(k, &path, &mut worst);
                    let piece = Piece { span, owner, extra: self.extra[k] };
                    self.cover(&piece, &path, &mut worst, &mut uncut);
                }
            }
        }
        (worst, uncut)
    }

    /// Judges the places of one span: near enough to the path, or else reachable or not.
    fn cover(&self, piece: &Piece, path: &SpanIndex, worst: &mut Worst, uncut: &mut Vec<Uncut>) {
        let limit = self.radius + self.tolerance;
        let mut pieces = vec![piece.span];
        while let Some(part) = pieces.pop() {
            let middle = part.at(0.5);
            let here = path.distance(middle) - piece.extra;
            let half = part.length() / 2.0;
            let bound = here + half;
            if bound <= self.radius.max(worst.value) {
                // No worse than what is known, or than no deviation at all.
                worst.note(bound, || spot(middle));
            } else if half > self.fine() || (here <= limit && bound > limit && half > self.finest()) {
                pieces.extend([part.part(0.0, 0.5), part.part(0.5, 1.0)]);
            } else if self.touches(middle, piece.extra, normals(&part).into_iter()) {
                worst.note(bound, || spot(middle));
            } else if bound > limit {
                let Owner { id: contour, copy } = piece.owner;
                let gap = here - self.radius;
                note_uncut(uncut, Uncut { contour, copy, length: part.length(), at: middle, gap });
            }
        }
    }

    /// Judges the corner at the start of span `k`: a disc may touch it in any direction between the normals of the
    /// spans that meet there.
    fn cover_corner(&self, k: usize, path: &SpanIndex, worst: &mut Worst) {
        let spans = self.region.spans();
        let corner = spans[k].start;
        let here = path.distance(corner) - self.extra[k];
        if here <= self.radius + self.tolerance {
            return;
        }
        let before = spans[..k].iter().rev().chain(spans[k..].iter().rev()).find(|span| span.end == corner);
        let Some(before) = before else { return };
        let (from, to) = (before.tangent(1.0), spans[k].tangent(0.0));
        let turn = from.cross(to).atan2(from.dot(to));
        let outward = |i: usize| {
            let angle = from.atan2() + turn * i as f64 / (DIRECTIONS - 1) as f64;
            Vec2::from_angle(angle - std::f64::consts::FRAC_PI_2 * turn.signum())
        };
        if self.touches(corner, self.extra[k], (0..DIRECTIONS).map(outward)) {
            worst.note(here, || spot(corner));
        }
    }

    /// True when a disc of radius plus tolerance touches the border at `p`, or stays off it by what is kept there
    /// further, in one of the directions, on the cutter's side, without crossing it.
    fn touches(&self, p: Point, extra: f64, mut directions: impl Iterator<Item = Vec2>) -> bool {
        let reach = self.radius + self.tolerance;
        directions.any(|direction| {
            let centre = p + direction * (reach + extra);
            // A hair for the rounding of the touch itself.
            let rounding = 64.0 * f64::EPSILON * (reach + p.to_vec2().hypot());
            self.region.distance(centre) >= reach - rounding && self.is_free(centre)
        })
    }

    /// Every pass comes within the cutter's reach of the border somewhere.
    fn touch_claim(&self, beside: &[&Pass]) -> Claim {
        let mut astray = beside.iter().filter(|pass| !pass.moves.iter().any(|m| self.comes_near(m.span())));
        let first = astray.next().map(|pass| Spot::end_of(pass.moves[0]));
        let found = astray.count() + usize::from(first.is_some());
        Claim::none_of(STRAY, found, first).because("the cutter goes down where nothing is drawn")
    }

    /// True when some place of a span is as near to the border as a cut beside it must be.
    fn comes_near(&self, span: Span) -> bool {
        let reach = self.radius + self.tolerance + self.leave;
        let mut pieces = vec![span];
        while let Some(piece) = pieces.pop() {
            let here = self.region.distance(piece.at(0.5));
            let half = piece.length() / 2.0;
            if here <= reach {
                return true;
            }
            if here - half <= reach && half > self.fine() {
                pieces.extend([piece.part(0.0, 0.5), piece.part(0.5, 1.0)]);
            }
        }
        false
    }

    fn clearance_claim(&self, clearance: Worst, relieved: &[Relieved]) -> Claim {
        let claim = Claim::at_least(CLEARANCE, "mm", clearance, self.radius - self.band.allowed, 0.0);
        let note = Relieved::told(relieved).map_or(String::new(), |told| format!("left out: {told}"));
        Claim { note, ..claim }.because("the cutter cuts into the part, or runs on its wrong side")
    }

    fn coverage_claim(&self, coverage: Worst) -> Claim {
        let claim = Claim::at_most(COVERAGE, "mm", coverage, self.radius + self.band.allowed, 0.0);
        claim.because("a part of the drawing that the cutter fits to is not cut to its edge")
    }

    /// How far the cutter's edge is off the drawn one at worst.
    fn deviation(&self, clearance: Worst, coverage: Worst) -> Option<Deviation> {
        let edge = self.radius - self.band.beyond;
        let place = |worst: Worst| worst.at.and_then(|spot| spot.at).map_or(Point::ZERO, |at| at.xy);
        let into = Deviation { mm: edge + clearance.value, at: place(clearance), certified: true };
        let short = Deviation { mm: coverage.value - edge, at: place(coverage), certified: true };
        let worse = if short.mm > into.mm { short } else { into };
        worse.mm.is_finite().then_some(Deviation { mm: worse.mm.max(0.0), ..worse })
    }
}

/// The directions square to a span at its middle.
fn normals(span: &Span) -> [Vec2; 2] {
    let along = span.tangent(0.5);
    [Vec2::new(-along.y, along.x), Vec2::new(along.y, -along.x)]
}

fn spot(xy: Point) -> Spot {
    Spot { line: 0, at: Some(crate::toolpath::Position { xy, z: 0.0 }) }
}

fn note_uncut(uncut: &mut Vec<Uncut>, more: Uncut) {
    let same = |last: &&mut Uncut| (last.contour, last.copy) == (more.contour, more.copy);
    match uncut.last_mut().filter(same) {
        Some(last) => {
            last.length += more.length;
            if more.gap > last.gap {
                (last.at, last.gap) = (more.at, more.gap);
            }
        }
        None => uncut.push(more),
    }
}

/// The lowest pass is at the height asked.
fn depth_claim(beside: &[&Pass], machine: &Machine, asked: &Asked, owners: &[Owner]) -> Claim {
    let asked_for = owners.iter().filter_map(|owner| asked.lowest_of(owner.id)).reduce(f64::min);
    let Some(lowest) = asked_for.or(asked.lowest) else {
        return Claim::open(DEPTH, "no depth was asked for");
    };
    let mut floor = Worst::none();
    for pass in beside {
        floor.note(-pass.z, || Spot::end_of(pass.moves[0]));
    }
    // The other way round than usual: the lowest floor must be as low as asked.
    let reached = floor.at.is_some() && -floor.value <= lowest + machine.last_place();
    let state = if reached { State::Holds } else { State::Fails };
    let value = floor.at.map(|_| -floor.value);
    let claim =
        Claim { state, value, limit: Some(lowest), unit: "mm", at: floor.at, ..Claim::open(DEPTH, "") };
    claim.because("no pass reaches the height asked")
}

/// The thickest layer that is taken at once.
fn pass_claim(beside: &[&Pass], ways_down: &[&Move], machine: &Machine, asked: &Asked) -> Claim {
    let Some(limit) = asked.pass else { return Claim::open(PASSES, "no depth of pass was asked for") };
    let moves = in_order(beside, ways_down);
    // A last pass runs so far beside those before it; in a sharp inside corner further, but within the cutter.
    let beside_rough = (4.0 * asked.leave).min(asked.cutter / 2.0);
    let step = steps::deepest(moves.into_iter(), asked.stock_top, asked.tolerance.mm() + beside_rough);
    Claim::at_most(PASSES, "mm", step, limit, 2.0 * machine.last_place())
        .because("a pass takes more than one pass may")
}

/// All moves in the order of the program.
fn in_order<'a>(beside: &[&Pass<'a>], ways_down: &[&'a Move]) -> Vec<&'a Move> {
    let mut moves: Vec<&Move> = beside.iter().flat_map(|pass| pass.moves.iter().copied()).collect();
    moves.extend(ways_down);
    moves.sort_by_key(|m| m.line);
    moves
}
