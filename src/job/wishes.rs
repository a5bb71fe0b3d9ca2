//! How a contour is wished to be cut: the settings that may differ from layer to layer, as typed.

use std::fmt;
use std::str::FromStr;

use clap::{Args, ValueEnum};
use schemars::JsonSchema;
use serde::{Deserialize, Deserializer, Serialize, Serializer};

use crate::num::{Feed, Length};

/// How a contour is cut, each setting of which may be absent.
#[derive(Args, Clone, Debug, Default, Deserialize, Serialize, PartialEq)]
#[serde(default, rename_all = "kebab-case")]
pub struct CutArgs {
    /// The side of the contour to cut on [default: on]
    #[arg(long, value_enum, help_heading = "Cut")]
    pub side: Option<Side>,
    /// Which way the cutter runs along a side [default: conventional]
    #[arg(long, value_enum, help_heading = "Cut")]
    pub direction: Option<Direction>,
    /// How the cutter passes corners that jut out towards it [default: round]
    #[arg(long, value_enum, help_heading = "Cut")]
    pub corners: Option<Corners>,
    /// Cut into inside corners up to the corner itself, so that a sharp one seats there
    #[arg(long, help_heading = "Cut", num_args = 0, default_missing_value = "true")]
    pub corner_relief: Option<bool>,
    /// Material to leave for a last pass at full depth [default: none]
    #[arg(long, value_name = "LEN", help_heading = "Cut")]
    pub leave: Option<Length>,

    /// How deep to cut, below the top of the stock
    #[arg(long, value_name = "LEN", help_heading = "Cut")]
    pub depth: Option<Length>,
    /// Cut through the stock and a little into the bed; needs --thickness
    #[arg(long, help_heading = "Cut", num_args = 0, default_missing_value = "true",
          conflicts_with_all = ["depth", "skin"])]
    pub through: Option<bool>,
    /// Cut all but a skin of this thickness; needs --thickness
    #[arg(long, value_name = "LEN", help_heading = "Cut", conflicts_with = "depth")]
    pub skin: Option<Length>,
    /// Deepest single pass [default: half the cutter's diameter]
    #[arg(long, value_name = "LEN", help_heading = "Cut")]
    pub pass: Option<Length>,
    /// Feed along the contour [default: the profile's]
    #[arg(long, value_name = "FEED", help_heading = "Cut")]
    pub feed: Option<Feed>,
    /// Feed straight down [default: a third of the feed]
    #[arg(long, value_name = "FEED", help_heading = "Cut")]
    pub plunge: Option<Feed>,
    /// How the cutter goes down [default: ramp]
    #[arg(long, value_enum, help_heading = "Cut")]
    pub entry: Option<Entry>,
    /// Material to leave on the drawn edge, for a looser or tighter fit [default: none]
    #[arg(long, value_name = "LEN", help_heading = "Cut", allow_hyphen_values = true)]
    pub allowance: Option<Length>,
    /// Spindle speed in rev/min [default: the profile's]
    #[arg(long, value_name = "RPM", help_heading = "Cut")]
    pub spindle: Option<f64>,
    /// The cutter: its diameter, or a name in the machine profile
    #[arg(long, value_name = "DIAMETER or NAME", help_heading = "Cut")]
    pub cutter: Option<String>,

    /// Tabs to leave on each closed contour: how many, or how far apart
    #[arg(long, value_name = "COUNT or LEN", help_heading = "Holding")]
    pub tabs: Option<TabsWanted>,
    /// Length of a tab at its top [default: 6mm]
    #[arg(long, value_name = "LEN", help_heading = "Holding")]
    pub tab_length: Option<Length>,
    /// Height of a tab above the stock's underside [default: 1.5mm, or half the stock]
    #[arg(long, value_name = "LEN", help_heading = "Holding")]
    pub tab_height: Option<Length>,
    /// How a part is held that the cut frees
    #[arg(long, value_enum, help_heading = "Holding")]
    pub held: Option<Held>,
}

/// The side of a contour that the cutter runs on.
#[derive(
    Clone, Copy, Debug, Default, Deserialize, Serialize, JsonSchema, PartialEq, Eq, PartialOrd, Ord, ValueEnum,
)]
#[serde(rename_all = "kebab-case")]
pub enum Side {
    /// On the line
    #[default]
    On,
    /// Inside: a hole keeps its size
    Inside,
    /// Outside: a part keeps its size
    Outside,
    /// By nesting: outer contours outside, holes inside
    Auto,
}

/// Which way the cutter runs along a side, for a spindle that turns clockwise.
#[derive(Clone, Copy, Debug, Default, Deserialize, Serialize, PartialEq, Eq, ValueEnum)]
#[serde(rename_all = "kebab-case")]
pub enum Direction {
    /// The chip begins thin
    #[default]
    Conventional,
    /// The chip begins thick
    Climb,
}

/// How the cutter passes corners that jut out towards it.
#[derive(Clone, Copy, Debug, Default, Deserialize, Serialize, PartialEq, Eq, ValueEnum)]
#[serde(rename_all = "kebab-case")]
pub enum Corners {
    /// About the corner, on an arc
    #[default]
    Round,
    /// Straight past it and back, where there is room
    Sharp,
}

/// How the cutter goes down.
#[derive(Clone, Copy, Debug, Default, Deserialize, Serialize, PartialEq, Eq, ValueEnum)]
#[serde(rename_all = "kebab-case")]
pub enum Entry {
    /// Along the contour
    #[default]
    Ramp,
    /// Straight down
    Plunge,
    /// Round and round, where there is room beside the part
    Helix,
}

/// How a part is held that the cut frees.
#[derive(Clone, Copy, Debug, Deserialize, Serialize, PartialEq, Eq, ValueEnum)]
#[serde(rename_all = "kebab-case")]
pub enum Held {
    /// By vacuum
    Vacuum,
    /// By screws
    Screws,
    /// By tape
    Tape,
}

/// Tabs as typed: `4` for so many on each contour, `150mm` for one so often.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum TabsWanted {
    /// That many.
    Count(usize),
    /// One for every such length.
    Spacing(Length),
}

impl Side {
    /// The side's name as typed.
    pub fn name(self) -> &'static str {
        match self {
            Self::On => "on",
            Self::Inside => "inside",
            Self::Outside => "outside",
            Self::Auto => "auto",
        }
    }
}

impl Direction {
    /// The direction's name as typed.
    pub fn name(self) -> &'static str {
        match self {
            Self::Conventional => "conventional",
            Self::Climb => "climb",
        }
    }
}

impl FromStr for TabsWanted {
    type Err = String;

    fn from_str(text: &str) -> Result<Self, String> {
        if let Ok(count) = text.trim().parse() {
            return Ok(Self::Count(count));
        }
        let has_unit = text.trim_end().ends_with(|c: char| c.is_ascii_alphabetic());
        let spacing = text.parse().ok().filter(|_| has_unit).map(Self::Spacing);
        spacing.ok_or_else(|| {
            "neither a number of tabs, such as 4, nor a spacing with its unit, such as 150mm or 6in".into()
        })
    }
}

impl fmt::Display for TabsWanted {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Count(count) => count.fmt(f),
            Self::Spacing(spacing) => spacing.fmt(f),
        }
    }
}

impl<'de> Deserialize<'de> for TabsWanted {
    fn deserialize<D: Deserializer<'de>>(input: D) -> Result<Self, D::Error> {
        #[derive(Deserialize)]
        #[serde(untagged, expecting = "a number of tabs, or a spacing such as \"150mm\"")]
        enum Written {
            Count(usize),
            Text(String),
        }
        match Written::deserialize(input)? {
            Written::Count(count) => Ok(Self::Count(count)),
            Written::Text(text) => {
                text.parse().map_err(|why| serde::de::Error::custom(format!("`{text}` is {why}")))
            }
        }
    }
}

impl Serialize for TabsWanted {
    fn serialize<S: Serializer>(&self, out: S) -> Result<S::Ok, S::Error> {
        match self {
            Self::Count(count) => out.serialize_u64(*count as u64),
            Self::Spacing(spacing) => spacing.serialize(out),
        }
    }
}

impl CutArgs {
    /// These settings, and where one is absent, that of `other`. Depth, through and skin are three ways to say one thing: whoever
    /// says one of them says all.
    #[must_use]
    pub(super) fn or(self, other: Self) -> Self {
        let says_depth = self.depth.is_some() || self.through.is_some() || self.skin.is_some();
        let depth = if says_depth { &self } else { &other };
        Self {
            depth: depth.depth,
            through: depth.through,
            skin: depth.skin,
            side: self.side.or(other.side),
            direction: self.direction.or(other.direction),
            corners: self.corners.or(other.corners),
            corner_relief: self.corner_relief.or(other.corner_relief),
            leave: self.leave.or(other.leave),
            pass: self.pass.or(other.pass),
            feed: self.feed.or(other.feed),
            plunge: self.plunge.or(other.plunge),
            entry: self.entry.or(other.entry),
            allowance: self.allowance.or(other.allowance),
            spindle: self.spindle.or(other.spindle),
            cutter: self.cutter.or(other.cutter),
            tabs: self.tabs.or(other.tabs),
            tab_length: self.tab_length.or(other.tab_length),
            tab_height: self.tab_height.or(other.tab_height),
            held: self.held.or(other.held),
        }
    }
}
