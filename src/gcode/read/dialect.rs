//! What a text leaves open, and how the controller fills it.

use super::interpret::{Controller, Plane};
use crate::machine::{ArcStyle, Dwell, HelixFeed, Machine, Unit};
use crate::toolpath::Position;

/// What a text leaves open, and the controller decides.
#[derive(Clone, Debug, PartialEq)]
pub struct Dialect {
    /// The unit until the program states one.
    pub unit: Unit,
    /// True when the centre of an arc is given from zero until the program states it (G90.1, G91.1).
    pub centre_from_zero: bool,
    /// What the feed of a helix is measured along.
    pub helix_feed: HelixFeed,
    /// What the number of a dwell counts.
    pub dwell: Dwell,
    /// The words that the profile sets its path mode with; P and Q are read where they have them.
    pub path_word: Option<String>,
    /// True when G5 is the cubic move by I, J, P and Q.
    pub cubic_moves: bool,
    /// Where the cutter is before the first block; `None` when it can be anywhere.
    pub start: Option<Position>,
    /// True when lines that start with a slash are skipped.
    pub skip_optional: bool,
}

impl Dialect {
    /// The dialect of `machine`'s controller, with the cutter anywhere and no line skipped.
    pub fn of(machine: &Machine) -> Self {
        Self {
            unit: machine.unit,
            centre_from_zero: machine.arcs.style == ArcStyle::CentreAbsolute,
            helix_feed: machine.arcs.helix_feed,
            dwell: machine.program.dwell,
            path_word: machine.path.word.clone(),
            cubic_moves: machine.program.spline.is_some(),
            start: None,
            skip_optional: false,
        }
    }
}

/// The modes in force; one that the text has not stated is assumed, and noted.
impl Controller<'_> {
    /// Notes what the text did not say.
    pub(super) fn assume(&mut self, what: &str) {
        if !self.program.assumed.iter().any(|known| known == what) {
            self.program.assumed.push(what.to_string());
        }
    }

    /// The unit in force.
    pub(super) fn unit(&mut self) -> Unit {
        self.unit.unwrap_or_else(|| {
            let unit = self.dialect.unit;
            self.assume(&format!("numbers are in {}, as the profile says", unit.symbol()));
            self.program.unit = Some(unit);
            *self.unit.insert(unit)
        })
    }

    /// True when places are given from zero.
    pub(super) fn is_absolute(&mut self) -> bool {
        self.absolute.unwrap_or_else(|| {
            self.assume("places are given from zero (G90)");
            *self.absolute.insert(true)
        })
    }

    /// True when the centres of arcs are given from zero.
    pub(super) fn centre_is_from_zero(&mut self) -> bool {
        self.centre_from_zero.unwrap_or_else(|| {
            let from = if self.dialect.centre_from_zero { "zero" } else { "their start" };
            self.assume(&format!("the centres of arcs are given from {from}, as the profile says"));
            *self.centre_from_zero.insert(self.dialect.centre_from_zero)
        })
    }

    /// The plane of arcs.
    pub(super) fn arc_plane(&mut self) -> Plane {
        self.plane.unwrap_or_else(|| {
            self.assume("arcs are in the XY plane (G17)");
            *self.plane.insert(Plane::Xy)
        })
    }

    /// True when F is one over the minutes of a move.
    pub(super) fn in_inverse_time(&mut self) -> bool {
        self.inverse_time.unwrap_or_else(|| {
            self.assume("feeds are lengths a minute (G94)");
            *self.inverse_time.insert(false)
        })
    }

    /// The spindle's speed, 0 when it is stopped.
    pub(super) fn turning_rpm(&self) -> f64 {
        if self.turning.is_some() { self.rpm } else { 0.0 }
    }

    /// What G92 adds to the place of `axis`.
    pub(super) fn offset(&self, axis: usize) -> f64 {
        self.offset[axis]
    }
}
