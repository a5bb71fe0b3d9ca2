//! The moves themselves, one block after the other, with no modal word said twice.

use std::iter::Peekable;
use std::slice::Iter;

use super::arc::{Bend, Block, Rounder};
use super::decimal::{Grid, Place};
use super::header::{Curve, Header, Mark};
use super::pen::Pen;
use super::{machine_retract, park, spin_up};
use crate::error::{Error, Kind};
use crate::machine::{ArcStyle, HelixFeed, Machine, Unit};
use crate::toolpath::{Move, Toolpath};

/// The controller's state as the text leaves it.
pub(super) struct Motion<'a> {
    pen: Pen<'a>,
    machine: &'a Machine,
    grid: Grid,
    rounder: Rounder<'a>,
    marks: Peekable<Iter<'a, Mark>>,
    curves: Peekable<Iter<'a, Curve>>,
    clearance: i64,
    /// Where the controller stands.
    at: Place,
    /// False until the text has said where in X and Y.
    xy_known: bool,
    /// The motion word in force: 0, 1, 2 or 3.
    word: Option<i64>,
    /// The feed word in force, in its last place.
    feed: Option<i64>,
    rpm: i64,
    /// Moves of the toolpath that the blocks already cover.
    covered: usize,
    blocks: Vec<Block>,
    /// The line of each move's first block.
    lines: Vec<usize>,
}

impl<'a> Motion<'a> {
    /// At an unknown place, spindle off.
    pub(super) fn new(pen: Pen<'a>, machine: &'a Machine, header: &'a Header) -> Self {
        let grid = Grid::of(machine);
        Self {
            pen,
            machine,
            grid,
            rounder: Rounder::new(machine, header.chord_error),
            marks: header.marks.iter().peekable(),
            curves: header.curves.iter().peekable(),
            clearance: grid.count(header.clearance),
            at: Place { x: 0, y: 0, z: 0 },
            xy_known: false,
            word: None,
            feed: None,
            rpm: 0,
            covered: 0,
            blocks: Vec::new(),
            lines: Vec::new(),
        }
    }

    /// Up first, spindle on, then above the place where the toolpath starts.
    pub(super) fn start(&mut self, toolpath: &Toolpath) -> Result<(), Error> {
        let Some(first) = toolpath.moves.first() else { return Ok(()) };
        let from = self.grid.place(first.from);
        self.at.z = self.clearance.max(from.z);
        machine_retract(&mut self.pen, self.machine, self.grid);
        let by_machine = self.machine.retract.machine_z.is_some();
        if !by_machine {
            self.up(self.at.z);
        }
        self.spindle(first.spindle_rpm.round() as i64);
        let aim = if first.is_rapid() { self.grid.place(first.to) } else { from };
        self.across(aim);
        if by_machine {
            self.up(self.at.z);
        }
        if first.is_rapid() { Ok(()) } else { self.descend(from.z) }
    }

    /// The blocks of move `i`.
    pub(super) fn follow(&mut self, moves: &[Move], i: usize) -> Result<(), Error> {
        if i < self.covered {
            self.lines.push(self.pen.next_line() - 1);
            return Ok(());
        }
        while let Some(mark) = self.marks.next_if(|mark| mark.before <= i) {
            self.pen.comment(&mark.text);
        }
        let m = &moves[i];
        let gap = i > 0 && self.grid.place(m.from) != self.grid.place(moves[i - 1].to);
        if gap {
            let what = format!("move {} of the toolpath does not start where the one before it ends", i + 1);
            return Err(Error::new(Kind::Refused, what));
        }
        self.spindle(m.spindle_rpm.round() as i64);
        self.lines.push(self.pen.next_line());
        let Some(feed) = m.feed else { return self.rapid(m) };
        if let Some(curve) = self.curves.next_if(|curve| curve.moves.start == i) {
            self.covered = curve.moves.end;
            return self.cubic(curve, self.grid.place(moves[self.covered - 1].to), feed);
        }
        let mut blocks = std::mem::take(&mut self.blocks);
        let marked = self.marks.peek().is_some_and(|mark| mark.before == i + 1);
        let second = moves.get(i + 1).filter(|_| !marked);
        let circle = second.and_then(|second| self.rounder.circle(m, second, self.at));
        match circle {
            Some(circle) => {
                blocks.push(circle);
                self.covered = i + 2;
            }
            None => self.rounder.blocks(m, self.at, &mut blocks),
        }
        let along = self.along_path(m);
        let done = blocks.drain(..).try_for_each(|block| self.cut(block, feed * along));
        self.blocks = blocks;
        done
    }

    /// Clear of the work, spindle off; the page, and the lines of the moves.
    pub(super) fn stop(mut self) -> (Pen<'a>, Vec<usize>) {
        if self.at.z < self.clearance {
            self.up(self.clearance);
        }
        machine_retract(&mut self.pen, self.machine, self.grid);
        self.spindle(0);
        park(&mut self.pen, self.machine, self.grid);
        (self.pen, self.lines)
    }

    /// What the feed along the path is multiplied by to give the feed that the controller wants to be told.
    fn along_path(&self, m: &Move) -> f64 {
        let by_plane = m.bulge != 0.0 && self.machine.arcs.helix_feed == HelixFeed::Plane;
        if by_plane { m.span().length() / m.length() } else { 1.0 }
    }

    /// A rapid: up before across, across before down.
    fn rapid(&mut self, m: &Move) -> Result<(), Error> {
        if m.bulge != 0.0 {
            return Err(Error::new(Kind::Refused, "a rapid along an arc cannot be written"));
        }
        let to = self.grid.place(m.to);
        let across = !self.at.same_xy(to);
        if to.z > self.at.z {
            self.up(to.z);
        }
        if across && self.at.z < self.clearance {
            return Err(self.too_low("across at", self.at.z));
        }
        if across {
            self.across(to);
        }
        self.descend(to.z)
    }

    /// Down to `z` by rapid, which must not be below the clearance height.
    fn descend(&mut self, z: i64) -> Result<(), Error> {
        if z >= self.at.z {
            return Ok(());
        }
        if z < self.clearance {
            return Err(self.too_low("down to", z));
        }
        self.up(z);
        Ok(())
    }

    /// The refusal of a rapid at or to a height below the clearance.
    fn too_low(&self, way: &str, z: i64) -> Error {
        let (z, clearance) = (self.grid.mm(z as f64), self.grid.mm(self.clearance as f64));
        let what =
            format!("a rapid {way} Z {z:.3} mm would pass below the clearance height of {clearance:.3} mm");
        Error::new(Kind::Refused, what).remedy("retract first, and go down by the plunge feed")
    }

    /// To the height `z`, straight, by rapid.
    fn up(&mut self, z: i64) {
        self.motion_word(0);
        self.pen.word('Z', z, self.grid.decimals);
        self.pen.end();
        self.at.z = z;
    }

    /// To the X and Y of `to` by rapid, at the height where the cutter is.
    fn across(&mut self, to: Place) {
        if self.xy_known && self.at.same_xy(to) {
            return;
        }
        self.motion_word(0);
        self.plane_words(to, !self.xy_known);
        self.pen.end();
        self.xy_known = true;
        (self.at.x, self.at.y) = (to.x, to.y);
    }

    /// One cutting block; nothing for one that goes nowhere.
    fn cut(&mut self, block: Block, feed: f64) -> Result<(), Error> {
        let to = block.to;
        if to == self.at && block.bend == Bend::Straight {
            return Ok(());
        }
        let feed = self.feed_count(feed)?;
        let decimals = self.grid.decimals;
        let word = match block.bend {
            Bend::Straight => 1,
            Bend::Centre { clockwise, .. } | Bend::Radius { clockwise, .. } => 3 - i64::from(clockwise),
        };
        self.motion_word(word);
        self.plane_words(to, to.same_xy(self.at) && word != 1);
        if to.z != self.at.z {
            self.pen.word('Z', to.z, decimals);
        }
        match block.bend {
            Bend::Straight => {}
            Bend::Radius { radius, .. } => self.pen.word('R', radius, decimals),
            Bend::Centre { i, j, .. } => {
                let absolute = self.machine.arcs.style == ArcStyle::CentreAbsolute;
                let from = if absolute { (self.at.x, self.at.y) } else { (0, 0) };
                self.pen.word('I', i + from.0, decimals);
                self.pen.word('J', j + from.1, decimals);
            }
        }
        self.end_cut(feed, to);
        Ok(())
    }

    /// One cubic move to `to`. Its word is said every time: whether it stays in force differs between controllers.
    fn cubic(&mut self, curve: &Curve, to: Place, feed: f64) -> Result<(), Error> {
        let Some(word) = &self.machine.program.spline else {
            let what = format!("{} has no word for a cubic move", self.machine.name);
            return Err(Error::new(Kind::Refused, what));
        };
        let feed = self.feed_count(feed)?;
        let decimals = self.grid.decimals;
        self.word = None;
        self.pen.words(word);
        self.plane_words(to, true);
        for (point, from, letters) in
            [(curve.control[0], self.at, ['I', 'J']), (curve.control[1], to, ['P', 'Q'])]
        {
            self.pen.word(letters[0], self.grid.count(point.x) - from.x, decimals);
            self.pen.word(letters[1], self.grid.count(point.y) - from.y, decimals);
        }
        self.end_cut(feed, to);
        Ok(())
    }

    /// The feed word, where it changes, and the end of a cutting block.
    fn end_cut(&mut self, feed: i64, to: Place) {
        if self.feed.replace(feed) != Some(feed) {
            self.pen.word('F', feed, feed_decimals(self.machine.unit));
        }
        self.pen.end();
        self.at = to;
    }

    /// The X and Y words that `to` needs, or both.
    fn plane_words(&mut self, to: Place, both: bool) {
        if both || to.x != self.at.x {
            self.pen.word('X', to.x, self.grid.decimals);
        }
        if both || to.y != self.at.y {
            self.pen.word('Y', to.y, self.grid.decimals);
        }
    }

    /// The motion word, where it is not in force.
    fn motion_word(&mut self, word: i64) {
        if self.word.replace(word) != Some(word) {
            self.pen.word('G', word, 0);
        }
    }

    /// `feed` in mm/min as a feed word, rounded down so that no limit is passed.
    fn feed_count(&self, feed: f64) -> Result<i64, Error> {
        let exact = feed / self.machine.unit.mm() * 10_f64.powi(feed_decimals(self.machine.unit) as i32);
        // A number that was converted to mm and back comes out a hair low.
        let count = (exact * (1.0 + 4.0 * f64::EPSILON)).floor() as i64;
        let refused =
            || Error::new(Kind::Refused, format!("a feed of {feed} mm/min is too slow to be written"));
        (count > 0).then_some(count).ok_or_else(refused)
    }

    /// The spindle at `rpm`, by the program or by hand.
    fn spindle(&mut self, rpm: i64) {
        if rpm == self.rpm {
            return;
        }
        let started = self.rpm == 0;
        self.rpm = rpm;
        self.word = None;
        if self.machine.spindle.hand_switched {
            let order = if rpm > 0 {
                format!("switch the spindle on at {rpm}")
            } else {
                "switch the spindle off".into()
            };
            self.pen.comment(&format!("MSG,{order}, then go on"));
            self.pen.line("M0");
        } else if rpm == 0 {
            self.pen.line("M5");
        } else {
            self.pen.word('S', rpm, 0);
            if started {
                self.pen.words("M3");
            }
            self.pen.end();
            if started {
                spin_up(&mut self.pen, self.machine);
            }
        }
    }
}

/// Decimals of a feed word: a tenth of a mm, a hundredth of an inch.
fn feed_decimals(unit: Unit) -> u32 {
    match unit {
        Unit::Mm => 1,
        Unit::Inch => 2,
    }
}
