//! One claim about a program, how it turned out, and where.

use std::fmt;

use kurbo::Point;

use crate::toolpath::{Move, Position};

/// How a claim turned out.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum State {
    /// It holds.
    Holds,
    /// It does not.
    Fails,
    /// It could not be checked.
    NotChecked,
}

/// One claim about a program.
#[derive(Clone, Debug, PartialEq)]
pub struct Claim {
    /// What is claimed, in words that stay the same from program to program.
    pub name: &'static str,
    /// How it turned out.
    pub state: State,
    /// The worst that was found, in `unit`.
    pub value: Option<f64>,
    /// What is allowed, in `unit`.
    pub limit: Option<f64>,
    /// True when the limit is the least that is allowed; else it is the most.
    pub least: bool,
    /// The unit of both: "mm", "mm/min", "rev/min" or "" for a count.
    pub unit: &'static str,
    /// Where the worst was found.
    pub at: Option<Spot>,
    /// Why it fails or was not checked, in one sentence without a full stop; may be empty.
    pub note: String,
}

/// A place in a program.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Spot {
    /// Line of the text, from 1; 0 when unknown.
    pub line: usize,
    /// The place in the program's coordinates, in mm; `None` where it is not stated.
    pub at: Option<Position>,
}

impl Spot {
    /// A line without a place.
    pub(super) fn line(line: usize) -> Self {
        Self { line, at: None }
    }

    /// Where a move ends.
    pub(super) fn end_of(m: &Move) -> Self {
        Self { line: m.line, at: Some(m.to) }
    }

    /// A place on a move.
    pub(super) fn on(m: &Move, xy: Point) -> Self {
        Self { line: m.line, at: Some(Position { xy, z: m.from.z.min(m.to.z) }) }
    }
}

impl fmt::Display for Spot {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let parts = (self.line, self.at);
        if let (line @ 1.., _) = parts {
            write!(f, "line {line}")?;
        }
        if let (line, Some(p)) = parts {
            let comma = if line > 0 { ", " } else { "" };
            write!(f, "{comma}X {:.3} Y {:.3} Z {:.3}", p.xy.x, p.xy.y, p.z)?;
        }
        Ok(())
    }
}

/// The worst of a kind that was met so far.
#[derive(Clone, Copy, Debug)]
pub(super) struct Worst {
    pub(super) value: f64,
    pub(super) at: Option<Spot>,
}

impl Worst {
    /// Nothing met yet; larger is worse.
    pub(super) fn none() -> Self {
        Self { value: f64::NEG_INFINITY, at: None }
    }

    /// Keeps the larger value; NaN is worse than any number.
    pub(super) fn note(&mut self, value: f64, spot: impl FnOnce() -> Spot) {
        if value > self.value || (value.is_nan() && !self.value.is_nan()) {
            *self = Self { value, at: Some(spot()) };
        }
    }

    fn found(self) -> Option<f64> {
        (self.value != f64::NEG_INFINITY).then_some(self.value)
    }
}

impl Claim {
    /// True when it was checked and holds.
    pub fn holds(&self) -> bool {
        self.state == State::Holds
    }

    /// The claim that the worst value is at most `limit`, `slack` forgiven.
    pub(super) fn at_most(
        name: &'static str,
        unit: &'static str,
        worst: Worst,
        limit: f64,
        slack: f64,
    ) -> Self {
        // NaN does not hold.
        let holds = worst.found().is_none_or(|value| value <= limit + slack);
        let state = if holds { State::Holds } else { State::Fails };
        Self {
            name,
            state,
            value: worst.found(),
            limit: Some(limit),
            least: false,
            unit,
            at: worst.at,
            note: String::new(),
        }
    }

    /// The claim that the worst value is at least `limit`, `slack` forgiven; the worst was noted with its sign turned.
    pub(super) fn at_least(
        name: &'static str,
        unit: &'static str,
        worst: Worst,
        limit: f64,
        slack: f64,
    ) -> Self {
        let mut claim = Self::at_most(name, unit, worst, -limit, slack);
        claim.value = claim.value.map(|value| -value);
        (claim.limit, claim.least) = (Some(limit), true);
        claim
    }

    /// The claim that nothing of a kind was met: `found` of them, the first at `at`.
    pub(super) fn none_of(name: &'static str, found: usize, at: Option<Spot>) -> Self {
        let state = if found == 0 { State::Holds } else { State::Fails };
        Self {
            name,
            state,
            value: Some(found as f64),
            limit: Some(0.0),
            least: false,
            unit: "",
            at,
            note: String::new(),
        }
    }

    /// A claim that could not be checked, and why.
    pub(super) fn open(name: &'static str, why: &str) -> Self {
        let note = why.to_string();
        Self {
            name,
            state: State::NotChecked,
            value: None,
            limit: None,
            least: false,
            unit: "",
            at: None,
            note,
        }
    }

    /// The same claim with a sentence, when it does not hold.
    pub(super) fn because(mut self, why: impl Into<String>) -> Self {
        if self.state != State::Holds {
            self.note = why.into();
        }
        self
    }
}
