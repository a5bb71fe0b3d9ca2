//! Arcs on the grid of the program's numbers, so that what the controller is told is the arc that was meant.
//!
//! End points are rounded first; the centre goes to the perpendicular bisector of the rounded chord, as
//! near to the true centre as that allows, and is rounded then. The radii at the two ends differ by at most
//! 1.41 counts that way, where rounding every number by itself reaches 2.83 and breaks the rule of NISTIR
//! 6556, 3.5.3.2.

use std::f64::consts::TAU;

use kurbo::{Point, Vec2};

use super::decimal::{Grid, Place};
use crate::geom::Span;
use crate::machine::{ArcStyle, Arcs, Machine};
use crate::toolpath::{Move, Position};

/// A chord shorter than this many counts could be rounded to nothing, and a block of it read as a whole
/// circle.
const SHORTEST_CHORD: f64 = 10.0;

/// Near half a turn a radius says little about where the arc is: at a third of a turn one half count of
/// radius moves the arc by half a count, at half a turn without bound.
const WIDEST_BY_RADIUS: f64 = TAU / 3.0;

/// A chord bends by less than half a count: the arc is a straight line on the grid.
const STRAIGHT: f64 = 0.5;

/// How far, in counts, the middle of a rounded arc may stray: ends and centre each cost 0.71, and that is
/// 1.41.
const STRAY: f64 = 1.5;

/// One motion block, in counts.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Block {
    pub(super) to: Place,
    pub(super) bend: Bend,
}

/// How a block gets to its end.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Bend {
    /// Straight.
    Straight,
    /// About a centre, given from the start.
    Centre { i: i64, j: i64, clockwise: bool },
    /// With a radius, by less than half a turn.
    Radius { radius: i64, clockwise: bool },
}

/// A piece of a move, between two fractions of its length.
#[derive(Clone, Copy)]
struct Piece {
    span: Span,
    from: f64,
    to: f64,
}

/// Rounds arcs for one machine.
#[derive(Clone, Copy)]
pub(super) struct Rounder<'a> {
    grid: Grid,
    arcs: &'a Arcs,
    /// What an arc that the machine cannot take may lose as straight blocks, in counts.
    chord_error: f64,
}

impl<'a> Rounder<'a> {
    /// For `machine`; arcs that it cannot take become straight blocks within `chord_error` mm, or half a
    /// count.
    pub(super) fn new(machine: &'a Machine, chord_error: f64) -> Self {
        let grid = Grid::of(machine);
        Self { grid, arcs: &machine.arcs, chord_error: grid.exact(chord_error).max(STRAIGHT) }
    }

    /// The blocks of the cut `m` from `at`, where the controller stands, onto `blocks`.
    pub(super) fn blocks(&self, m: &Move, at: Place, blocks: &mut Vec<Block>) {
        let span = m.span();
        let widest = if self.arcs.style == ArcStyle::Radius { WIDEST_BY_RADIUS } else { TAU };
        let pieces = (span.sweep().abs() / widest).ceil().max(1.0) as usize;
        let mut at = at;
        for k in 0..pieces {
            let (from, to) = (k as f64 / pieces as f64, (k + 1) as f64 / pieces as f64);
            let span = if pieces == 1 { span } else { span.part(from, to) };
            at = self.piece(m, Piece { span, from, to }, at, blocks);
        }
    }

    /// The blocks of a piece of `m`. Returns where they end.
    fn piece(&self, m: &Move, piece: Piece, at: Place, blocks: &mut Vec<Block>) -> Place {
        let span = piece.span;
        let to = self.place(m, span.end, piece.to);
        if self.grid.exact(span.sagitta()) <= STRAIGHT {
            blocks.push(Block { to, bend: Bend::Straight });
        } else if let Some(bend) = self.bend(span, at, to) {
            blocks.push(Block { to, bend });
        } else {
            let chords = self.chords(span);
            for k in 1..=chords {
                let t = k as f64 / chords as f64;
                let to = self.place(m, span.at(t), piece.from + (piece.to - piece.from) * t);
                blocks.push(Block { to, bend: Bend::Straight });
            }
        }
        to
    }

    /// The place on the grid of the point `xy`, at the fraction `t` of the move's length.
    fn place(&self, m: &Move, xy: Point, t: f64) -> Place {
        let z = if t >= 1.0 { m.to.z } else { m.from.z + (m.to.z - m.from.z) * t };
        self.grid.place(Position { xy, z })
    }

    /// How many chords keep within the chord error of `part`.
    fn chords(&self, part: Span) -> usize {
        let radius = self.grid.exact(part.radius());
        let half_step = (1.0 - (self.chord_error / radius).min(1.0)).acos();
        (part.sweep().abs() / (2.0 * half_step)).ceil().max(1.0) as usize
    }

    /// How the controller is told to run along `part` from `at` to `to`; `None` when it cannot be, or when
    /// the arc that it would read is not the one that is meant.
    fn bend(&self, part: Span, at: Place, to: Place) -> Option<Bend> {
        let limits = self.arcs.smallest..=self.arcs.largest;
        let chord = to.xy() - at.xy();
        let level = at.z == to.z || self.arcs.helices;
        if !level || !limits.contains(&part.radius()) || chord.hypot() < SHORTEST_CHORD {
            return None;
        }
        let centre = self.grid.point(part.centre()?);
        let left = Vec2::new(-chord.y, chord.x) / chord.hypot();
        let height = (centre - at.xy().midpoint(to.xy())).dot(left);
        let from_start = chord / 2.0 + left * height;
        match self.arcs.style {
            ArcStyle::CentreIncremental | ArcStyle::CentreAbsolute => self.by_centre(part, chord, from_start),
            ArcStyle::Radius => self.by_radius(part, chord, from_start.hypot()),
            ArcStyle::None => None,
        }
    }

    /// The bend about the centre nearest to `from_start`, if it is the arc that is meant.
    fn by_centre(&self, part: Span, chord: Vec2, from_start: Vec2) -> Option<Bend> {
        let centre = Vec2::new(from_start.x.round(), from_start.y.round());
        let mismatch = (centre.hypot() - (chord - centre).hypot()).abs();
        let turn = (-centre).cross(chord - centre).atan2((-centre).dot(chord - centre));
        let clockwise = part.bulge < 0.0;
        let sweep = if clockwise { (-turn).rem_euclid(TAU) } else { turn.rem_euclid(TAU) };
        let sagitta = chord.hypot() / 2.0 * (sweep / 4.0).tan();
        let fits = self.grid.mm(mismatch) <= self.arcs.end_radii && self.is_meant(part, sagitta);
        fits.then_some(Bend::Centre { i: centre.x as i64, j: centre.y as i64, clockwise })
    }

    /// The bend with the radius nearest to `radius`, if it is the arc that is meant.
    fn by_radius(&self, part: Span, chord: Vec2, radius: f64) -> Option<Bend> {
        let radius = radius.round();
        let half = chord.hypot() / 2.0;
        // NaN, and so refused, where the rounded radius does not reach across the chord.
        let sagitta = radius - (radius * radius - half * half).sqrt();
        let clockwise = part.bulge < 0.0;
        self.is_meant(part, sagitta).then_some(Bend::Radius { radius: radius as i64, clockwise })
    }

    /// True when an arc that bends by `sagitta` counts is `part` within rounding.
    fn is_meant(&self, part: Span, sagitta: f64) -> bool {
        (sagitta - self.grid.exact(part.sagitta())).abs() <= STRAY
    }

    /// The bend of the whole circle that is made of the half circles `first` and `second`; `None` when they
    /// are not such, or the machine takes none.
    pub(super) fn circle(&self, first: &Move, second: &Move, at: Place) -> Option<Block> {
        let half = |m: &Move| (1.0 - m.bulge.abs()).abs() <= 8.0 * f64::EPSILON;
        let joined = first.to == second.from && first.from.xy == second.to.xy;
        let alike = first.bulge - second.bulge == 0.0 && first.feed == second.feed;
        let steady = first.to.z - first.from.z - (second.to.z - second.from.z) == 0.0;
        let kept = first.spindle_rpm - second.spindle_rpm == 0.0;
        let to = self.grid.place(second.to);
        let level = at.z == to.z || self.arcs.helices;
        let limits = self.arcs.smallest..=self.arcs.largest;
        let radius = first.span().radius();
        let allowed = self.arcs.whole_circles && level && limits.contains(&radius);
        if !(allowed && half(first) && half(second) && joined && alike && steady && kept && to.same_xy(at)) {
            return None;
        }
        // Half way to the far side, so that the far side strays no more than the start does.
        let centre = (self.grid.point(first.to.xy) - at.xy()) / 2.0;
        let (i, j) = (centre.x.round() as i64, centre.y.round() as i64);
        let large = centre.hypot() >= SHORTEST_CHORD;
        large.then_some(Block { to, bend: Bend::Centre { i, j, clockwise: first.bulge < 0.0 } })
    }
}
