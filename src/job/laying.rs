//! How the drawing is laid on the stock: turned, mirrored, in copies.

use std::fmt;
use std::str::FromStr;

use clap::Args;
use serde::{Deserialize, Deserializer, Serialize, Serializer};

use super::{Units, bounds};
use crate::error::{Error, Kind};
use crate::num::Length;

/// How the drawing is laid on the stock, as typed.
#[derive(Args, Clone, Debug, Default, Deserialize, Serialize, PartialEq)]
#[serde(default, rename_all = "kebab-case")]
pub struct LayoutArgs {
    /// Mirror the drawing left to right, before it is turned: for a part that is cut from its back
    #[arg(long, help_heading = "Laying out", num_args = 0, default_missing_value = "true")]
    pub mirror: Option<bool>,
    /// Turn the drawing by so many degrees, counter-clockwise
    #[arg(long, value_name = "DEG", help_heading = "Laying out", allow_hyphen_values = true)]
    pub turn: Option<f64>,
    /// Copies side by side and above each other, such as 3x2
    #[arg(long, value_name = "COLUMNSxROWS", help_heading = "Laying out")]
    pub copies: Option<Grid>,
    /// Gap between the boxes around two copies
    #[arg(long, value_name = "LEN", help_heading = "Laying out")]
    pub gap: Option<Length>,
}

/// How many copies there are, side by side and above each other.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Grid {
    /// Side by side.
    pub columns: usize,
    /// Above each other.
    pub rows: usize,
}

/// How the drawing is laid on the stock, inside its bounds.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Layout {
    /// Mirrored left to right about the drawing's zero, before it is turned.
    pub mirror: bool,
    /// Turned about the drawing's zero by so many degrees, counter-clockwise.
    pub turn_deg: f64,
    /// The copies.
    pub copies: Grid,
    /// The gap between the boxes around two copies, in mm.
    pub gap_mm: f64,
}

/// More copies than this are a slip of the hand.
const MOST_COPIES: usize = 1000;

impl Grid {
    /// How many copies there are in all.
    pub fn count(self) -> usize {
        self.columns * self.rows
    }
}

impl Default for Grid {
    /// One.
    fn default() -> Self {
        Self { columns: 1, rows: 1 }
    }
}

impl Default for Layout {
    /// As drawn, once.
    fn default() -> Self {
        Self { mirror: false, turn_deg: 0.0, copies: Grid::default(), gap_mm: 0.0 }
    }
}

impl Layout {
    /// What was typed, judged.
    ///
    /// # Errors
    /// [`Kind::Settings`] for a setting out of its bounds, and for copies without a gap between them.
    pub(super) fn new(typed: &LayoutArgs, mm: Units) -> Result<Self, Error> {
        let copies = typed.copies.unwrap_or_default();
        let gap_mm = mm.length(&bounds::GAP, typed.gap)?;
        if copies.count() > 1 && gap_mm.is_none() {
            let what = format!("{copies} copies are asked for, and not how far apart");
            return Err(Error::new(Kind::Settings, what).remedy("give --gap, such as --gap 12mm"));
        }
        let turn_deg = bounds::TURN.hold(typed.turn.unwrap_or(0.0))?;
        Ok(Self { mirror: typed.mirror == Some(true), turn_deg, copies, gap_mm: gap_mm.unwrap_or(0.0) })
    }

    /// True for the drawing as it is, once.
    pub fn is_as_drawn(&self) -> bool {
        *self == Self { gap_mm: self.gap_mm, ..Self::default() }
    }
}

impl LayoutArgs {
    /// These settings, and where one is absent, that of `other`.
    #[must_use]
    pub(super) fn or(self, other: Self) -> Self {
        Self {
            mirror: self.mirror.or(other.mirror),
            turn: self.turn.or(other.turn),
            copies: self.copies.or(other.copies),
            gap: self.gap.or(other.gap),
        }
    }
}

impl FromStr for Grid {
    type Err = String;

    fn from_str(text: &str) -> Result<Self, String> {
        let grid = text.trim().split_once('x').and_then(|(columns, rows)| {
            Some(Self { columns: columns.trim().parse().ok()?, rows: rows.trim().parse().ok()? })
        });
        let count = grid.and_then(|grid| grid.columns.checked_mul(grid.rows));
        match (grid, count) {
            (Some(grid), Some(1..=MOST_COPIES)) => Ok(grid),
            (Some(_), _) => Err(format!("not from 1 to {MOST_COPIES} copies")),
            (None, _) => Err("not a grid of copies; write columns and rows, such as 3x2".into()),
        }
    }
}

impl fmt::Display for Grid {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}x{}", self.columns, self.rows)
    }
}

impl<'de> Deserialize<'de> for Grid {
    fn deserialize<D: Deserializer<'de>>(input: D) -> Result<Self, D::Error> {
        let text = String::deserialize(input)?;
        text.parse().map_err(|why| serde::de::Error::custom(format!("`{text}` is {why}")))
    }
}

impl Serialize for Grid {
    fn serialize<S: Serializer>(&self, out: S) -> Result<S::Ok, S::Error> {
        out.collect_str(self)
    }
}
