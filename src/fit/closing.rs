//! Runs that end at a given place: closed ones come back to the place, and where they can the heading, that they started
//! from; pinned ones keep the ends of an open trace.

use kurbo::{Point, Vec2};

use crate::geom::Span;

use super::beam::{Beam, Run, starts};
use super::effort::Effort;
use super::keeping::keeps;
use super::lines::Line;
use super::reach::reach;
use super::seeds;
use super::state::{SHORTEST, State};
use super::trace::{Bead, Trace};

/// How many levels a run warms up before the place to start from is chosen on it.
const WARM_UP: usize = 24;
/// The least that the last spans of a lap cost.
const CLOSING: usize = 1;
/// How many headings a pinned run starts with.
const STARTS: usize = 24;
/// Shares of the longest possible first tangent that are tried for the last two arcs.
const SHARES: [f64; 9] = [0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9];

/// The path of least cost around a closed trace.
pub(super) fn closed(trace: &Trace) -> Run {
    let (starts, wanted) = starts_on_a_run(trace);
    let laps = starts.into_iter().filter_map(|start| lap_from(trace, start)).take(wanted);
    let best = laps.reduce(|best, other| if other.0 < best.0 { other } else { best });
    best.map_or_else(|| Run::straight(trace.beads(), 0, trace.lap()), |(_, run)| run)
}

/// The cheapest lap from a start, with its cost.
fn lap_from(trace: &Trace, start: Start) -> Option<(usize, Run)> {
    let beads = &trace.beads()[..=start.state.bead + trace.lap()];
    let first = State { bulge: 0.0, parent: 0, corner: false, straight: 0.0, ..start.state };
    let starts = if start.corner {
        seeds::turned(&first, beads, &mut Vec::new()).into_iter().map(|(_, s)| s).collect()
    } else {
        vec![first]
    };
    let heading = (!start.corner).then_some(first.heading);
    around(
        &Goal {
            at: first.at,
            heading,
            beads,
            trace: trace.beads(),
            lines: trace.lines(),
            effort: trace.effort(),
        },
        starts,
    )
}

/// The path of least cost along an open trace from its first bead exactly to its last.
pub(super) fn pinned(trace: &Trace) -> Run {
    let beads = trace.beads();
    let last = beads.len() - 1;
    let first = State {
        at: beads[0].at,
        heading: trace.direction(0),
        bead: 0,
        bulge: 0.0,
        parent: 0,
        corner: false,
        straight: 0.0,
    };
    let starts = seeds::aimed(&first, beads, &mut Vec::new()).into_iter().map(|(_, s)| s);
    let starts = starts.take(STARTS).collect();
    let goal = Goal {
        at: beads[last].at,
        heading: None,
        beads,
        trace: beads,
        lines: trace.lines(),
        effort: trace.effort(),
    };
    around(&goal, starts).map_or_else(|| Run::straight(beads, 0, last), |(_, run)| run)
}

/// A place on a good path, and whether the path turns a corner there.
struct Start {
    state: State,
    corner: bool,
}

/// Joints of a run that has warmed up, and how many laps are wanted from them: the corner nearest to its middle where it has
/// one, else the end of a line, then the middle joint and others at a distance from it. More than one lap is wanted where the
/// run comes all the way round; the other joints are for where a lap from the first does not close.
fn starts_on_a_run(trace: &Trace) -> (Vec<Start>, usize) {
    let mut beam = Beam::new(trace.beads(), trace.lines(), trace.effort().warming_up(), starts(trace, 0));
    for _ in 0..WARM_UP {
        if !beam.step() || furthest(&beam).is_some_and(|id| beam.states[id].bead + 1 >= trace.beads().len()) {
            break;
        }
    }
    let end = (0..beam.states.len()).max_by_key(|&id| beam.states[id].bead).unwrap_or(0);
    let chain = beam.chain(end);
    let comes_round = beam.states[end].bead >= trace.lap();
    let middle = chain.len() / 2;
    let is_corner = |k: usize| chain.get(k + 1).is_some_and(|&next| beam.states[next].corner);
    let corner = (1..chain.len()).filter(|&k| is_corner(k)).min_by_key(|k| k.abs_diff(middle));
    let ends_line = |k: usize| beam.states[chain[k]].bulge == 0.0;
    let line = (1..chain.len()).filter(|&k| ends_line(k)).min_by_key(|k| k.abs_diff(middle));
    let others = [middle, middle / 2 + 1, middle + middle / 2];
    let mut joints: Vec<usize> = corner.or(line).into_iter().chain(others).collect();
    joints.dedup();
    joints.retain(|&k| k < chain.len());
    let wanted = if comes_round { trace.effort().tries } else { 1 };
    let start = |k: usize| {
        let mut state = beam.states[chain[k]];
        state.bead %= trace.lap();
        Start { state, corner: is_corner(k) }
    };
    (joints.into_iter().map(start).collect(), wanted)
}

/// The state of the last level that has come furthest.
fn furthest(beam: &Beam) -> Option<usize> {
    let level = beam.tangent.len() - 1;
    beam.level(level).max_by_key(|&id| beam.states[id].bead)
}

/// Where a run ends: a closed one where it started from.
struct Goal<'a> {
    at: Point,
    /// The heading to arrive with; `None` at a corner.
    heading: Option<Vec2>,
    /// All beads of the lap; the last is the one the run started from.
    beads: &'a [Bead],
    /// The beads beyond it too: the goal may lie past the last bead of the lap.
    trace: &'a [Bead],
    lines: &'a [Line],
    effort: Effort,
}

/// The cheapest way from the starts to the goal, for a closed run back to it, with its cost.
fn around(goal: &Goal, starts: Vec<State>) -> Option<(usize, Run)> {
    let mut beam = Beam::new(goal.beads, goal.lines, goal.effort, starts);
    let mut best: Option<Closed> = None;
    for level in 0.. {
        for id in beam.level(level).collect::<Vec<_>>() {
            let state = beam.states[id];
            if let Some((cost, last)) = goal.closed_from(&state) {
                let lines = last.spans.iter().filter(|s| s.is_line()).map(|s| s.length());
                let straight = state.straight + lines.sum::<f64>();
                let closed = Closed { cost: level + cost, straight, id, last };
                if best.as_ref().is_none_or(|b| closed.betters(b)) {
                    best = Some(closed);
                }
            }
        }
        if best.as_ref().is_some_and(|b| level + CLOSING >= b.cost) || !beam.step() {
            break;
        }
    }
    best.map(|closed| {
        let mut run = beam.run(closed.id);
        run.spans.extend(closed.last.spans);
        run.passed.extend(closed.last.passed);
        (closed.cost, run)
    })
}

/// A way home.
struct Closed {
    cost: usize,
    /// How much of the whole path is straight, in mm.
    straight: f64,
    /// The state it leaves from.
    id: usize,
    last: Run,
}

impl Closed {
    fn betters(&self, other: &Self) -> bool {
        self.cost < other.cost || self.cost == other.cost && self.straight > other.straight
    }
}

impl Goal<'_> {
    /// The cheapest last spans from `state` to the goal, with their cost: one that arrives with its heading; two arcs
    /// that do, or one and a corner, which costs the same; else a line between two corners.
    fn closed_from(&self, state: &State) -> Option<(usize, Run)> {
        let last = self.beads.len() - 1;
        let from = self.beads[state.bead].along;
        let reached = reach(state, self.beads, &mut Vec::new()) - from;
        if self.beads[last].along - from > 4.0 * reached {
            return None;
        }
        let one = |span: Span| {
            passes(&span, self.trace, state.bead, last).then(|| Run { spans: vec![span], passed: vec![last] })
        };
        let arc = Span::leaving(state.at, state.heading, self.at);
        let line = Span::line(state.at, self.at);
        if self.heading.is_some_and(|heading| arrives(&arc, heading)) {
            let tangent = if arrives(&line, state.heading) { line } else { arc };
            return one(tangent).map(|run| (1, run));
        }
        let two_arcs = || self.heading.and_then(|heading| self.two_arcs(state, heading));
        let cheap = two_arcs().or_else(|| one(arc)).map(|run| (2, run));
        cheap.or_else(|| one(line).map(|run| (3, run)))
    }

    /// Two tangent arcs from `state` to the goal and its heading.
    fn two_arcs(&self, state: &State, heading: Vec2) -> Option<Run> {
        let (ahead, last) = (&self.beads[state.bead + 1..], self.beads.len() - 1);
        let chord = self.at - state.at;
        let longest = chord.hypot2() / (2.0 * chord.dot(state.heading));
        SHARES.iter().find_map(|share| {
            let first = share * longest;
            let turn = 1.0 - state.heading.dot(heading);
            let second = (chord.hypot2() / 2.0 - first * chord.dot(state.heading))
                / (chord.dot(heading) + first * turn);
            if !(first > 0.0 && second > 0.0 && second.is_finite()) {
                return None;
            }
            let (a, b) = (state.at + state.heading * first, self.at - heading * second);
            let joint = a.lerp(b, first / (first + second));
            let spans = vec![
                Span::leaving(state.at, state.heading, joint),
                Span::leaving(self.at, -heading, joint).reversed(),
            ];
            let tangent = spans[0].tangent(1.0);
            let split = ahead.iter().position(|b| (b.at - joint).dot(tangent) >= 0.0).unwrap_or(ahead.len());
            let middle = state.bead + split;
            let holds = passes(&spans[0], self.beads, state.bead, middle)
                && passes(&spans[1], self.beads, middle, last);
            let passed = vec![middle, last];
            holds.then_some(Run { spans, passed })
        })
    }
}

/// True when `span` ends along `heading`, as nearly as places rounded for the program can tell.
fn arrives(span: &Span, heading: Vec2) -> bool {
    let turn = span.tangent(1.0).cross(heading);
    turn.abs() * span.chord().hypot() <= super::LAST_PLACE / 2.0 && span.tangent(1.0).dot(heading) > 0.0
}

/// True when `span` may be cut and keeps to the trace past the beads after `first` up to `last`.
fn passes(span: &Span, beads: &[Bead], first: usize, last: usize) -> bool {
    span.chord().hypot() >= SHORTEST && span.bulge.abs() <= 1.0 && keeps(span, beads, first, last)
}
