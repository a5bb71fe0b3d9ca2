//! Sizes, places, thicknesses and clamps as they are typed.

use std::fmt;
use std::str::FromStr;

use serde::{Deserialize, Deserializer, Serialize, Serializer};

use crate::num::{Length, from_written};

/// A size from above as typed: `600x400mm`, `24inx18in`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct SizeWanted {
    /// Along X.
    pub width: Length,
    /// Along Y.
    pub height: Length,
}

/// A place as typed: `20mm,35mm`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Pair {
    /// Along X.
    pub x: Length,
    /// Along Y.
    pub y: Length,
}

/// A thickness as typed: `18mm`, or a range, `17.6..18.4mm`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ThicknessWanted {
    /// The least.
    pub thinnest: Length,
    /// The largest.
    pub thickest: Length,
}

/// A clamp as typed, `X0,Y0,X1,Y1,HEIGHT`, or, in a job file, with its ranges and its height.
#[derive(Clone, Copy, Debug, Deserialize, Serialize, PartialEq)]
#[serde(deny_unknown_fields)]
pub struct ClampWanted {
    /// From and to along X.
    pub x: [Length; 2],
    /// From and to along Y.
    pub y: [Length; 2],
    /// Above the stock's top.
    pub height: Length,
}

/// The lengths of a list; those without a unit are in the unit of the last one.
fn lengths<const N: usize>(text: &str, between: &str) -> Option<[Length; N]> {
    let parts: Vec<&str> = text.split(between).map(str::trim).collect();
    let unit: String = parts.last()?.chars().rev().take_while(char::is_ascii_alphabetic).collect();
    let unit: String = unit.chars().rev().collect();
    let length = |part: &&str| {
        let bare = !part.ends_with(|c: char| c.is_ascii_alphabetic());
        if bare { format!("{part}{unit}").parse().ok() } else { part.parse().ok() }
    };
    let lengths: Option<Vec<Length>> = parts.iter().map(length).collect();
    lengths?.try_into().ok()
}

impl FromStr for SizeWanted {
    type Err = String;

    fn from_str(text: &str) -> Result<Self, String> {
        let [width, height] =
            lengths(text, "x").ok_or("not a size; write width and height, such as 600x400mm")?;
        Ok(Self { width, height })
    }
}

impl FromStr for Pair {
    type Err = String;

    fn from_str(text: &str) -> Result<Self, String> {
        let [x, y] = lengths(text, ",").ok_or("not a place; write X and Y, such as 20,35mm")?;
        Ok(Self { x, y })
    }
}

impl FromStr for ThicknessWanted {
    type Err = String;

    fn from_str(text: &str) -> Result<Self, String> {
        if let Some([thinnest, thickest]) = lengths(text, "..") {
            return Ok(Self { thinnest, thickest });
        }
        let both =
            text.parse().map_err(|_| "not a thickness; write 18mm, or a range such as 17.6..18.4mm")?;
        Ok(Self { thinnest: both, thickest: both })
    }
}

impl FromStr for ClampWanted {
    type Err = String;

    fn from_str(text: &str) -> Result<Self, String> {
        let [x0, y0, x1, y1, height] = lengths(text, ",").ok_or(
            "not a clamp; write two corners and the height above the stock, such as 0,40,30,70,25mm",
        )?;
        Ok(Self { x: [x0, x1], y: [y0, y1], height })
    }
}

impl fmt::Display for SizeWanted {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}x{}", self.width, self.height)
    }
}

impl fmt::Display for Pair {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{},{}", self.x, self.y)
    }
}

impl fmt::Display for ThicknessWanted {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if self.thinnest == self.thickest {
            return self.thickest.fmt(f);
        }
        write!(f, "{}..{}", self.thinnest, self.thickest)
    }
}

impl<'de> Deserialize<'de> for SizeWanted {
    fn deserialize<D: Deserializer<'de>>(input: D) -> Result<Self, D::Error> {
        from_written(input)
    }
}

impl<'de> Deserialize<'de> for Pair {
    fn deserialize<D: Deserializer<'de>>(input: D) -> Result<Self, D::Error> {
        from_written(input)
    }
}

impl<'de> Deserialize<'de> for ThicknessWanted {
    fn deserialize<D: Deserializer<'de>>(input: D) -> Result<Self, D::Error> {
        from_written(input)
    }
}

impl Serialize for SizeWanted {
    fn serialize<S: Serializer>(&self, out: S) -> Result<S::Ok, S::Error> {
        out.collect_str(self)
    }
}

impl Serialize for Pair {
    fn serialize<S: Serializer>(&self, out: S) -> Result<S::Ok, S::Error> {
        out.collect_str(self)
    }
}

impl Serialize for ThicknessWanted {
    fn serialize<S: Serializer>(&self, out: S) -> Result<S::Ok, S::Error> {
        out.collect_str(self)
    }
}
