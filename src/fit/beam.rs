//! The search in levels of equal cost, keeping at each level the states that promise most.

use std::collections::HashSet;

use kurbo::Vec2;

use crate::geom::Span;

use super::effort::Effort;
use super::keeping::keeps;
use super::lines::Line;
use super::reach::{Fan, reach};
use super::refine::Refining;
use super::seeds;
use super::state::State;
use super::trace::{Bead, Trace};

/// By which share of the best reach theirs may be less.
const NEARLY: f64 = 0.3;
/// The least share of a reach at which an arc may end.
const LEAST_SHARE: f64 = 0.4;

/// A state with its promise.
#[derive(Clone, Copy)]
struct Candidate {
    state: State,
    /// How far the next arc can go, in mm along the trace.
    reach: f64,
}

/// All states of a run, level by level.
pub(super) struct Beam<'a> {
    beads: &'a [Bead],
    lines: &'a [Line],
    pub(super) states: Vec<State>,
    /// States of each cost that go on by a tangent arc.
    pub(super) tangent: Vec<Vec<usize>>,
    /// States of each cost that may turn a corner.
    corner: Vec<Vec<usize>>,
    effort: Effort,
    fans: Vec<Fan>,
    scratch: Vec<Fan>,
}

impl<'a> Beam<'a> {
    /// A run along `beads` from the given starts, all of cost 0.
    pub(super) fn new(beads: &'a [Bead], lines: &'a [Line], effort: Effort, starts: Vec<State>) -> Self {
        let all: Vec<usize> = (0..starts.len()).collect();
        let states = starts.into_iter().enumerate().map(|(i, s)| State { parent: i, ..s }).collect();
        let corner = vec![Vec::new()];
        Self {
            beads,
            lines,
            states,
            tangent: vec![all],
            corner,
            effort,
            fans: Vec::new(),
            scratch: Vec::new(),
        }
    }

    /// The states of cost `level`.
    pub(super) fn level(&self, level: usize) -> impl Iterator<Item = usize> + '_ {
        self.tangent[level].iter().chain(&self.corner[level]).copied()
    }

    /// Adds the next level and tells whether it has any states.
    pub(super) fn step(&mut self) -> bool {
        let mut candidates = Vec::new();
        let level = self.tangent.len();
        for i in 0..self.tangent[level - 1].len() {
            let state =
                State { parent: self.tangent[level - 1][i], ..self.states[self.tangent[level - 1][i]] };
            self.expand(state, false, &mut candidates);
        }
        if level >= 2 {
            for i in 0..self.corner[level - 2].len() {
                let id = self.corner[level - 2][i];
                let state = State { parent: id, ..self.states[id] };
                for (_, turned) in seeds::turned(&state, self.beads, &mut self.fans) {
                    self.expand(turned, true, &mut candidates);
                }
            }
        }
        self.keep(candidates);
        level < 2 || !self.tangent[level].is_empty() || !self.corner[level].is_empty()
    }

    /// The states that one arc reaches from `state`.
    fn expand(&mut self, state: State, corner: bool, candidates: &mut Vec<Candidate>) {
        reach(&state, self.beads, &mut self.fans);
        let count = self.fans.len();
        let from = self.beads[state.bead].along;
        let span = self.beads[state.bead + count].along - from;
        let mut next = count;
        for k in 0..self.effort.ends {
            let wanted = from + span * (1.0 - (1.0 - LEAST_SHARE) * k as f64 / self.effort.ends as f64);
            while next > 1 && self.beads[state.bead + next].along > wanted {
                next -= 1;
            }
            if next == 0 {
                break;
            }
            self.ends(&state, next, corner, candidates);
            next -= 1;
        }
        self.onto_lines(&state, corner, candidates);
    }

    /// The states on the straight runs ahead that one arc runs into.
    fn onto_lines(&mut self, state: &State, corner: bool, candidates: &mut Vec<Candidate>) {
        let reached = state.bead + self.fans.len();
        let after = self.lines.partition_point(|line| line.last <= state.bead);
        let refining = Refining { from: *state, beads: self.beads, fans: &self.fans };
        for line in
            self.lines[after..].iter().take_while(|line| line.first < reached.min(self.beads.len() - 1))
        {
            let end = line.joined_from(state).and_then(|(curvature, length)| {
                refining.end(curvature, length, line.first.max(state.bead), &mut self.scratch)
            });
            candidates
                .extend(end.map(|end| Candidate { state: State { corner, ..end.state }, reach: end.reach }));
        }
    }

    /// The states reached at the bead `ahead` of the state.
    fn ends(&mut self, state: &State, ahead: usize, corner: bool, candidates: &mut Vec<Candidate>) {
        let fan = self.fans[ahead - 1];
        let bead = state.bead + ahead;
        let straight = (fan.low <= 0.0 && fan.high >= 0.0).then_some(0.0);
        let places = self.effort.places.iter().map(|p| fan.low + (fan.high - fan.low) * p);
        for curvature in places.chain(straight) {
            if !curvature.is_finite() {
                continue;
            }
            let length = state.foot(curvature, self.beads[bead].at);
            if let Some(end) = state.moved(curvature, length, bead) {
                let reach = reach(&end, self.beads, &mut self.scratch);
                candidates.push(Candidate { state: State { corner, ..end }, reach });
            }
        }
    }

    /// Refines the ends of the most promising candidates, one for each start and bead.
    fn refine(&mut self, candidates: &mut Vec<Candidate>) {
        candidates.sort_by(|a, b| b.reach.total_cmp(&a.reach));
        let mut seen = HashSet::new();
        let chosen: Vec<State> = candidates
            .iter()
            .filter(|c| seen.insert((c.state.parent, c.state.bead)))
            .take(self.effort.refined)
            .map(|c| c.state)
            .collect();
        for to in chosen {
            let parent = self.states[to.parent];
            let heading = to.span_from(&parent).tangent(0.0);
            let from = State { parent: to.parent, ..parent.turned(heading) };
            reach(&from, self.beads, &mut self.fans);
            let refining = Refining { from, beads: self.beads, fans: &self.fans };
            if let Some(end) = refining.best_near(&to, self.effort.halvings, &mut self.scratch) {
                let state = State { corner: to.corner, ..end.state };
                candidates.push(Candidate { state, reach: end.reach });
            }
        }
    }

    /// Keeps the candidates that promise most, no two of them alike.
    fn keep(&mut self, mut candidates: Vec<Candidate>) {
        self.refine(&mut candidates);
        candidates.sort_by(|a, b| b.reach.total_cmp(&a.reach));
        let mut tangent = self.chosen(&candidates, self.effort.tangent);
        tangent.extend(self.straightest(&candidates));
        candidates.sort_by(|a, b| {
            b.state.bead.cmp(&a.state.bead).then(b.state.straight.total_cmp(&a.state.straight))
        });
        let corner = self.chosen(&candidates, self.effort.corner);
        self.tangent.push(tangent);
        self.corner.push(corner);
    }

    /// Of the candidates that promise nearly as much as the first, those with most straight path behind them.
    fn straightest(&mut self, candidates: &[Candidate]) -> Vec<usize> {
        let Some(first) = candidates.first() else { return Vec::new() };
        let from = self.beads[self.states[first.state.parent].bead].along;
        let enough = first.reach - NEARLY * (first.reach - from);
        let near = candidates.iter().take_while(|c| c.reach >= enough).filter(|c| c.state.straight > 0.0);
        let mut near: Vec<Candidate> = near.copied().collect();
        near.sort_by(|a, b| b.state.straight.total_cmp(&a.state.straight).then(b.reach.total_cmp(&a.reach)));
        self.chosen(&near, self.effort.lines)
    }

    /// The first `most` candidates that hold their beads in order and differ from those before.
    fn chosen(&mut self, candidates: &[Candidate], most: usize) -> Vec<usize> {
        let mut seen = HashSet::new();
        let mut chosen = Vec::new();
        for c in candidates {
            if chosen.len() == most {
                break;
            }
            let key = self.likeness(c);
            if seen.contains(&key) || !self.holds(&c.state) {
                continue;
            }
            seen.insert(key);
            chosen.push(self.states.len());
            self.states.push(c.state);
        }
        chosen
    }

    /// True when the span that led to `state` keeps to the trace.
    fn holds(&self, state: &State) -> bool {
        let parent = &self.states[state.parent];
        keeps(&state.span_from(parent), self.beads, parent.bead, state.bead)
    }

    /// Candidates with the same key are alike: the same bead, offset and heading, in steps of the band.
    fn likeness(&self, c: &Candidate) -> (usize, i64, i64) {
        let bead = self.beads[c.state.bead];
        let ahead = (c.reach - bead.along).max(bead.band);
        let offset = c.state.heading.cross(bead.at - c.state.at) / bead.band;
        let heading = c.state.heading.atan2() * ahead / bead.band;
        (c.state.bead, (offset * 4.0).round() as i64, (heading * 2.0).round() as i64)
    }

    /// The states that led to state `id`, from the start.
    pub(super) fn chain(&self, id: usize) -> Vec<usize> {
        let mut chain = vec![id];
        let mut here = id;
        while self.states[here].parent != here {
            here = self.states[here].parent;
            chain.push(here);
        }
        chain.reverse();
        chain
    }

    /// The run that led to state `id`.
    pub(super) fn run(&self, id: usize) -> Run {
        let chain = self.chain(id);
        let spans = chain.windows(2).map(|w| self.states[w[1]].span_from(&self.states[w[0]])).collect();
        let passed = chain.iter().map(|&id| self.states[id].bead).collect();
        Run { spans, passed }
    }
}

/// A path with the beads it passes.
pub(super) struct Run {
    pub(super) spans: Vec<Span>,
    /// The last bead passed before each span, and after the last one.
    pub(super) passed: Vec<usize>,
}

impl Run {
    /// The straight path from bead to bead.
    pub(super) fn straight(beads: &[Bead], first: usize, last: usize) -> Self {
        let spans = (first..last).map(|i| Span::line(beads[i].at, beads[i + 1].at)).collect();
        Self { spans, passed: (first..=last).collect() }
    }
}

/// Places to start from about the first bead: on it and to either side, with the headings that go furthest.
pub(super) fn starts(trace: &Trace, at: usize) -> Vec<State> {
    let bead = trace.beads()[at];
    let along = trace.direction(at);
    let left = Vec2::new(-along.y, along.x);
    let mut fans = Vec::new();
    let place = |k: i32| State {
        at: bead.at + left * (bead.band * f64::from(k) * 0.3),
        heading: along,
        bead: at,
        bulge: 0.0,
        parent: 0,
        corner: false,
        straight: 0.0,
    };
    (-3..=3).flat_map(|k| seeds::turned(&place(k), trace.beads(), &mut fans)).map(|(_, s)| s).collect()
}

/// The path of least cost along an open trace.
pub(super) fn open(trace: &Trace) -> Run {
    let last = trace.beads().len() - 1;
    let mut beam = Beam::new(trace.beads(), trace.lines(), trace.effort(), starts(trace, 0));
    loop {
        let goes_on = beam.step();
        let level = beam.tangent.len() - 1;
        let straight = |id: &usize| beam.states[*id].straight;
        let ends = beam.level(level).filter(|&id| beam.states[id].bead == last);
        if let Some(end) = ends.max_by(|a, b| straight(a).total_cmp(&straight(b))) {
            return beam.run(end);
        }
        if !goes_on {
            return Run::straight(trace.beads(), 0, last);
        }
    }
}
