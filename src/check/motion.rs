//! Whether the machine can do what the program says, and whether it is safe on the way.

use kurbo::{Rect, Vec2};

use super::claim::{Claim, Spot, Worst};
use super::{Asked, KeepOut};
use crate::gcode::read::{Program, What};
use crate::machine::{Axes, Machine};
use crate::toolpath::Move;

const TRAVEL: &str = "the moves fit the machine's travel";
const FEEDS: &str = "feeds are set, and none above what is allowed";
pub(super) const SPINDLE: &str = "the spindle turns at an allowed speed while cutting";
const RAPIDS: &str = "no rapid goes across or down below the clearance height";
const CLEAR: &str = "the cutter keeps clear of what it must";
pub(super) const LOWEST: &str = "nothing is cut deeper than asked";

/// The claims about single moves, in one walk along them.
pub(super) fn judge(program: &Program, machine: &Machine, asked: &Asked) -> Vec<Claim> {
    let mut walk = Walk::new(machine, asked);
    let drilled = super::start_end::drilled(program);
    let mut holes = drilled.iter().peekable();
    for (i, m) in program.toolpath.moves.iter().enumerate() {
        while holes.next_if(|hole| hole.end <= i).is_some() {}
        let in_hole = holes.peek().is_some_and(|hole| hole.contains(&i));
        walk.take(m, in_hole);
    }
    walk.conclude(machine, asked)
}

/// What is as high as the way across that starts where the program does not state: it may lead over anything.
pub(super) fn under_the_approach(program: &Program, asked: &Asked) -> Option<String> {
    let low = |keep_out: &&KeepOut| {
        program.events.iter().any(|event| match event.what {
            What::Approach { moved: [x, y, _], to: [.., Some(z)], .. } => (x || y) && z <= keep_out.top,
            _ => false,
        })
    };
    asked.keep_out.iter().find(low).map(|keep_out| {
        format!(
            "that the way to the first cut, from a place that the program does not state, keeps clear of {}",
            keep_out.name
        )
    })
}

struct Walk<'a> {
    machine: &'a Machine,
    asked: &'a Asked,
    clearance: f64,
    slack: f64,
    extent: Option<Rect>,
    heights: (f64, f64),
    lowest: Worst,
    /// How many times its limit a feed is, at worst.
    feed: Worst,
    feed_limit: f64,
    unset: Worst,
    rpm_low: Worst,
    rpm_high: Worst,
    rapid: Worst,
    /// The first move that comes into what must be kept clear of, with its name.
    inside: Option<(Spot, String)>,
}

impl<'a> Walk<'a> {
    fn new(machine: &'a Machine, asked: &'a Asked) -> Self {
        let none = Worst::none();
        Self {
            machine,
            asked,
            clearance: asked.clearance.unwrap_or(asked.stock_top),
            slack: machine.last_place(),
            extent: None,
            heights: (f64::INFINITY, f64::NEG_INFINITY),
            lowest: none,
            feed: none,
            feed_limit: f64::INFINITY,
            unset: none,
            rpm_low: none,
            rpm_high: none,
            rapid: none,
            inside: None,
        }
    }

    fn take(&mut self, m: &Move, in_hole: bool) {
        let low = m.from.z.min(m.to.z);
        self.grow(m);
        match m.feed {
            None if in_hole => {}
            None => self.take_rapid(m, low),
            Some(feed) => self.take_cut(m, feed, low),
        }
        for keep_out in self.asked.keep_out.iter().filter(|keep_out| low <= keep_out.top) {
            let room = keep_out.outline.inflate(self.asked.cutter / 2.0, self.asked.cutter / 2.0);
            // A rapid may take any way within the box of its ends; the box of a cut is a first sieve.
            let hit = overlaps(m.span().bbox(), room) && (m.is_rapid() || enters(m, room));
            if hit && self.inside.is_none() {
                self.inside = Some((Spot::end_of(m), keep_out.name.clone()));
            }
        }
    }

    fn grow(&mut self, m: &Move) {
        let bbox = if m.bulge == 0.0 { Rect::from_points(m.from.xy, m.to.xy) } else { m.span().bbox() };
        self.extent = Some(self.extent.map_or(bbox, |extent| extent.union(bbox)));
        self.heights.0 = self.heights.0.min(m.from.z).min(m.to.z);
        self.heights.1 = self.heights.1.max(m.from.z).max(m.to.z);
    }

    /// A rapid may go up from anywhere, straight; across and down only at or above the clearance height.
    fn take_rapid(&mut self, m: &Move, low: f64) {
        let straight_up = m.from.xy == m.to.xy && m.to.z >= m.from.z;
        if !straight_up {
            self.rapid.note(-low, || Spot::end_of(m));
        }
    }

    fn take_cut(&mut self, m: &Move, feed: f64, low: f64) {
        self.lowest.note(-low, || Spot::end_of(m));
        // Zero stands for a feed that was never set.
        if !(feed > 0.0 && feed.is_finite()) {
            self.unset.note(1.0, || Spot::end_of(m));
        }
        let limit = self.feed_limit_of(m);
        if feed / limit > self.feed.value {
            self.feed.note(feed / limit, || Spot::end_of(m));
            self.feed_limit = limit;
        }
        if low < self.clearance - self.slack {
            self.rpm_low.note(-m.spindle_rpm, || Spot::end_of(m));
        }
        self.rpm_high.note(m.spindle_rpm, || Spot::end_of(m));
    }

    /// The largest feed allowed on a move: by the axes of the machine in the directions of the move, and as asked.
    fn feed_limit_of(&self, m: &Move) -> f64 {
        let axes = &self.machine.feed;
        let machine = if m.bulge == 0.0 { straight_limit(m, axes) } else { arc_limit(m, axes) };
        let asked = self.asked.feeds.map_or(f64::INFINITY, |feeds| {
            // What goes down at all is held to the plunge feed in its downward part, which rounding may lengthen.
            let down = (m.from.z - m.to.z - self.slack).max(0.0) / m.length();
            feeds.cutting.min(feeds.plunge / down)
        });
        machine.min(asked)
    }

    fn conclude(self, machine: &Machine, asked: &Asked) -> Vec<Claim> {
        let mut claims = vec![self.travel_claim(machine), self.feed_claim(), self.spindle_claim(machine)];
        let rapids = Claim::at_least(RAPIDS, "mm", self.rapid, self.clearance, self.slack);
        claims.push(rapids.because("a rapid may run into the stock or what holds it"));
        claims.push(match asked.lowest_of_all() {
            Some(lowest) => Claim::at_least(LOWEST, "mm", self.lowest, lowest, self.slack)
                .because("the cutter goes below the height asked"),
            None => {
                Claim { value: Some(-self.lowest.value), ..Claim::open(LOWEST, "no depth was asked for") }
            }
        });
        claims.push(if asked.keep_out.is_empty() {
            Claim::open(CLEAR, "no clamps were declared")
        } else {
            let (at, name) = self.inside.unzip();
            let hits = usize::from(at.is_some());
            Claim::none_of(CLEAR, hits, at)
                .because(format!("the cutter runs into {}", name.unwrap_or_default()))
        });
        claims
    }

    /// The axis that is nearest to its travel, or furthest beyond it.
    fn travel_claim(&self, machine: &Machine) -> Claim {
        let extent = self.extent.unwrap_or(Rect::ZERO);
        if let Some(off) = self.asked.zero_at.and_then(|zero| off_the_machine(extent + zero, machine)) {
            return off;
        }
        let height = (self.heights.1 - self.heights.0).max(0.0);
        let travel = &machine.travel;
        let axes = [(extent.width(), travel.x), (extent.height(), travel.y), (height, travel.z)];
        let (size, limit) =
            axes.into_iter().fold((0.0, travel.x), |a, b| if b.0 / b.1 > a.0 / a.1 { b } else { a });
        let mut claim = Claim::at_most(TRAVEL, "mm", Worst { value: size, at: None }, limit, self.slack);
        if self.asked.zero_at.is_none() {
            claim.note = "by size alone: where zero lies on the machine was not said".into();
        }
        claim.because("the moves are larger than the machine")
    }

    fn feed_claim(&self) -> Claim {
        if self.unset.at.is_some() {
            return Claim::none_of(FEEDS, 1, self.unset.at).because("a cut has no feed, or one of zero");
        }
        let value = Worst { value: self.feed.value * self.feed_limit, at: self.feed.at };
        let value = if self.feed.at.is_none() { Worst::none() } else { value };
        // Feeds are written with few decimals: a tenth of a unit a minute is no breach.
        let claim = Claim::at_most(FEEDS, "mm/min", value, self.feed_limit, 0.1 * self.machine.unit.mm());
        claim.because("the feed is above what the machine, or the job, allows in that direction")
    }

    fn spindle_claim(&self, machine: &Machine) -> Claim {
        let spindle = &machine.spindle;
        if spindle.hand_switched {
            return Claim::open(
                SPINDLE,
                "the spindle is switched by hand: it must turn before the program starts",
            );
        }
        let low = Claim::at_least(SPINDLE, "rev/min", self.rpm_low, spindle.slowest, 0.5);
        let high = Claim::at_most(SPINDLE, "rev/min", self.rpm_high, spindle.fastest, 0.5);
        let worse = if high.state == super::State::Fails { high } else { low };
        worse.because("a cut runs with the spindle stopped, or at a speed it does not have")
    }
}

/// The claim about travel for moves that leave it, by their place on the machine.
fn off_the_machine(on_machine: Rect, machine: &Machine) -> Option<Claim> {
    let (travel, slack) = (&machine.travel, machine.last_place());
    let least = on_machine.x0.min(on_machine.y0);
    let low = Claim::at_least(TRAVEL, "mm", Worst { value: -least, at: None }, 0.0, slack);
    let high = |value, limit| Claim::at_most(TRAVEL, "mm", Worst { value, at: None }, limit, slack);
    let claims = [low, high(on_machine.x1, travel.x), high(on_machine.y1, travel.y)];
    let off = claims.into_iter().find(|claim| claim.state == super::State::Fails);
    off.map(|claim| claim.because("the moves leave the machine where the stock lies"))
}

/// Overlap that has an area, or touches along a side.
fn overlaps(a: Rect, b: Rect) -> bool {
    a.x0 <= b.x1 && b.x0 <= a.x1 && a.y0 <= b.y1 && b.y0 <= a.y1
}

/// Whether a move comes into a box, proven out where it says no: pieces whose own box stays out are out, and small
/// ones that do not are in.
fn enters(m: &Move, room: Rect) -> bool {
    let mut pieces = vec![m.span()];
    while let Some(piece) = pieces.pop() {
        if !overlaps(piece.bbox(), room) {
            continue;
        }
        let least = f64::max(room.width(), room.height()) / 1000.0;
        if room.contains(piece.start) || room.contains(piece.end) || piece.length() <= least {
            return true;
        }
        pieces.extend([piece.part(0.0, 0.5), piece.part(0.5, 1.0)]);
    }
    false
}

/// The feed at which the first axis of a straight move is at its limit.
fn straight_limit(m: &Move, axes: &Axes) -> f64 {
    let along = m.to.xy - m.from.xy;
    let rise = m.to.z - m.from.z;
    let length = along.hypot().hypot(rise);
    let by_axis = [(along.x, axes.x), (along.y, axes.y), (rise, axes.z)];
    by_axis.into_iter().map(|(d, limit)| limit * length / d.abs()).fold(f64::INFINITY, f64::min)
}

/// The same for an arc or helix, over all directions it passes through.
fn arc_limit(m: &Move, axes: &Axes) -> f64 {
    let span = m.span();
    let length = m.length();
    let flat = span.length() / length;
    let (start, end) = (span.tangent(0.0), span.tangent(1.0));
    let turn = span.sweep();
    let x = steepest(start, end, turn, Vec2::new(1.0, 0.0)) * flat;
    let y = steepest(start, end, turn, Vec2::new(0.0, 1.0)) * flat;
    let z = (m.to.z - m.from.z).abs() / length;
    (axes.x / x).min(axes.y / y).min(axes.z / z)
}

/// The largest part that a direction turning from `start` to `end` has along an axis.
fn steepest(start: Vec2, end: Vec2, turn: f64, axis: Vec2) -> f64 {
    let passes = |axis: Vec2| {
        let until = start.cross(axis).atan2(start.dot(axis)) * turn.signum();
        until.rem_euclid(std::f64::consts::TAU) <= turn.abs()
    };
    if passes(axis) || passes(-axis) { 1.0 } else { start.dot(axis).abs().max(end.dot(axis).abs()) }
}
