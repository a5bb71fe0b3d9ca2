//! Relief cuts: short ways into inside corners, up to the corner itself, so that a sharp one seats there. Told from
//! stray cuts by what the drawing has around them, whoever made the program.

use std::cmp::Ordering;
use std::collections::BTreeSet;

use kurbo::{Point, Vec2};

use super::Relieved;
use super::side::Judge;
use crate::geom::Span;
use crate::toolpath::Move;

/// How finely directions are tried for a wall, over a right angle.
const DIRECTIONS: u32 = 64;

/// A way into a corner and back.
#[derive(Clone, Copy, Debug)]
pub(super) struct Relief {
    /// The place on it from which the cutter comes too close to the sides of the corner.
    mouth: Point,
    /// Where it turns back.
    tip: Point,
    /// The corner, straight ahead.
    corner: Point,
}

/// Judges whether a way that turns back is a relief.
pub(super) struct Corners<'a> {
    pub(super) judge: &'a Judge,
    /// The contours for which reliefs were asked.
    pub(super) asked: &'a BTreeSet<usize>,
    /// How far rounding may move a place, in mm.
    pub(super) rounding: f64,
}

impl Corners<'_> {
    /// The reliefs among `moves`, which follow one another as in the program.
    pub(super) fn reliefs(&self, moves: &[&Move]) -> Vec<Relief> {
        if self.asked.is_empty() {
            return Vec::new();
        }
        let turns = moves.windows(2).filter(|pair| pair[0].to == pair[1].from);
        let turns = turns.map(|pair| (pair[0].span(), pair[1].span()));
        let mut reliefs: Vec<Relief> = turns
            .filter(|(into, out)| self.turns_back(into, out))
            .filter_map(|(into, _)| self.relief(&into))
            .collect();
        let place = |p: Point| (p.x, p.y);
        reliefs.sort_by(|a, b| place(a.tip).partial_cmp(&place(b.tip)).unwrap_or(Ordering::Equal));
        // Every pass makes the same ones.
        reliefs.dedup_by(|a, b| a.tip == b.tip);
        reliefs
    }

    /// True when the cutter goes straight in and comes back the same way.
    fn turns_back(&self, into: &Span, out: &Span) -> bool {
        let straight = into.is_line() && out.is_line();
        let (a, b) = (into.chord(), out.chord());
        straight && a.dot(b) < 0.0 && a.cross(b).abs() <= self.rounding * a.hypot().max(b.hypot())
    }

    /// The relief whose way in ends with `into`; `None` where that is a stray cut.
    fn relief(&self, into: &Span) -> Option<Relief> {
        let (tip, ahead) = (into.end, into.tangent(0.5));
        let mouth = self.mouth(tip, ahead)?;
        let corner = self.corner(tip, ahead)?;
        let relief = Relief { mouth, tip, corner };
        (self.is_out_of_reach(&relief) && self.is_between_walls(&relief) && self.is_no_deeper(&relief))
            .then_some(relief)
    }

    /// The first place back from the tip where the cutter keeps its distance, with half the tolerance to spare: the rest
    /// of the way is judged as any other.
    fn mouth(&self, tip: Point, ahead: Vec2) -> Option<Point> {
        let judge = self.judge;
        // As far as the corner of a thin wedge is from a cutter that touches both its sides.
        let farthest = 8.0 * judge.radius;
        let mut back = 0.0;
        while back <= farthest {
            let lack = judge.radius - judge.tolerance / 2.0 - judge.region.distance(tip - ahead * back);
            if lack <= 0.0 {
                return Some(tip - ahead * back);
            }
            back += lack.max(judge.fine());
        }
        None
    }

    /// The place of the drawing straight ahead of the cutter's edge at the tip: no nearer than the edge, and no
    /// further than what a pass leaves.
    fn corner(&self, tip: Point, ahead: Vec2) -> Option<Point> {
        let judge = self.judge;
        let edge = judge.radius - judge.tolerance;
        let farthest = judge.radius + judge.tolerance + judge.leave;
        let mut way = edge;
        while way <= farthest {
            let place = tip + ahead * way;
            let off = judge.region.distance(place);
            if off <= judge.tolerance {
                let asked = judge.contour_near(place).is_some_and(|id| self.asked.contains(&id));
                return asked.then_some(place);
            }
            if !judge.is_free(place) {
                return None;
            }
            way += off;
        }
        None
    }

    /// True when the corner stays uncut from the mouth.
    fn is_out_of_reach(&self, relief: &Relief) -> bool {
        relief.corner.distance(relief.mouth) > self.judge.radius + self.judge.tolerance
    }

    /// True when the cutter at the mouth has a wall on either hand, further round than half the angle at which it
    /// would touch the sides of a corner that far away.
    fn is_between_walls(&self, relief: &Relief) -> bool {
        let Judge { radius, tolerance, .. } = *self.judge;
        let way = relief.corner - relief.mouth;
        let touch = (radius / way.hypot()).acos();
        let wall = |hand: f64| {
            (0..=DIRECTIONS).any(|k| {
                let share = f64::from(k) / f64::from(DIRECTIONS);
                let angle = touch / 2.0 + (std::f64::consts::FRAC_PI_2 - touch / 2.0) * share;
                let edge = Vec2::from_angle(way.atan2() + hand * angle) * (radius + tolerance);
                let place = relief.mouth + edge;
                !self.judge.is_free(place) || self.judge.region.distance(place) <= tolerance
            })
        };
        wall(1.0) && wall(-1.0)
    }

    /// True when the cutter goes nowhere deeper into the sides than where they run straight from its edge at the mouth
    /// to the corner, the tolerance given to the sides and to the corner, and never across the border.
    fn is_no_deeper(&self, relief: &Relief) -> bool {
        let Judge { tolerance, .. } = *self.judge;
        let slope = self.judge.closest() / relief.corner.distance(relief.mouth);
        let mut pieces = vec![Span::line(relief.mouth, relief.tip)];
        while let Some(piece) = pieces.pop() {
            let (middle, half) = (piece.at(0.5), piece.length() / 2.0);
            let least = (relief.corner.distance(middle) * slope - 2.0 * tolerance).max(tolerance);
            let spare = self.judge.region.distance(middle) - least;
            if spare < 0.0 || (spare < 2.0 * half && half <= self.judge.finest()) {
                return false;
            }
            if spare < 2.0 * half {
                pieces.extend([piece.part(0.0, 0.5), piece.part(0.5, 1.0)]);
            }
        }
        true
    }

    /// What is left to judge of a move: all but its stretch on a relief.
    pub(super) fn beside(&self, reliefs: &[Relief], span: Span) -> Option<Span> {
        reliefs.iter().try_fold(span, |span, relief| self.without(relief, span))
    }

    /// The span without its stretch from the relief's mouth to its tip; `None` where nothing is left.
    fn without(&self, relief: &Relief, span: Span) -> Option<Span> {
        let way = relief.tip - relief.mouth;
        let along = |p: Point| (p - relief.mouth).dot(way) / way.hypot();
        let on_line = |p: Point| (p - relief.mouth).cross(way).abs() / way.hypot() <= self.rounding;
        let (from, to) = (along(span.start), along(span.end));
        let passes = on_line(span.start) && on_line(span.end) && from.max(to) <= way.hypot() + self.rounding;
        if !span.is_line() || !passes || from.max(to) <= 0.0 {
            return Some(span);
        }
        let mouth = (-from / (to - from)).clamp(0.0, 1.0);
        match (from < 0.0, to < 0.0) {
            (true, _) => Some(span.part(0.0, mouth)),
            (false, true) => Some(span.part(mouth, 1.0)),
            (false, false) => None,
        }
    }

    /// What is told of reliefs: each corner once, with how deep the cut goes into its sides.
    pub(super) fn told(&self, reliefs: &[Relief]) -> Vec<Relieved> {
        let Judge { radius, tolerance, leave, .. } = *self.judge;
        let mut told: Vec<Relieved> = Vec::new();
        for relief in reliefs {
            let into = radius - self.judge.region.distance(relief.tip);
            let same = |other: &&mut Relieved| other.at.distance(relief.corner) <= 2.0 * tolerance + leave;
            match told.iter_mut().find(same) {
                Some(other) => other.into = other.into.max(into),
                None => told.push(Relieved { at: relief.corner, into }),
            }
        }
        told
    }
}
