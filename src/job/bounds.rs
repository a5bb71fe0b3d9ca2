//! The bounds of the settings: each with its name, its range and the reason for it.

use crate::error::{Error, Kind};

/// A range that a setting must lie in, whatever the machine. Outside it the setting is a slip of unit or of the hand.
pub(super) struct Bound {
    /// The setting's name.
    pub(super) name: &'static str,
    /// The unit the range is in.
    pub(super) unit: &'static str,
    /// The smallest value.
    pub(super) least: f64,
    /// The largest value.
    pub(super) most: f64,
    /// Why not beyond.
    pub(super) reason: &'static str,
}

pub(super) const TOLERANCE: Bound =
    Bound { name: "tolerance", unit: "mm", least: 1e-5, most: 10.0, reason: "shapes are lost beyond it" };
pub(super) const FROM: Bound = Bound { name: "from", ..TOLERANCE };
pub(super) const TO: Bound = Bound { name: "to", ..TOLERANCE };
pub(super) const JOIN: Bound = Bound {
    name: "join",
    unit: "mm",
    least: 0.0,
    most: 100.0,
    reason: "a longer gap is not a slip of drawing",
};
pub(super) const FIT_WIDTH: Bound =
    Bound { name: "fit-width", unit: "mm", least: 0.01, most: 1e5, reason: "no machine cuts such a part" };
pub(super) const SCALE: Bound =
    Bound { name: "scale", unit: "", least: 1e-6, most: 1e6, reason: "no drawing is that far off its size" };
pub(super) const SIZE_LIMIT: Bound = Bound {
    name: "size-limit",
    unit: "",
    least: 1e-6,
    most: 1000.0,
    reason: "no memory holds such a drawing",
};
pub(super) const DEPTH: Bound =
    Bound { name: "depth", unit: "mm", least: 0.01, most: 1e3, reason: "no cutter cuts such a depth" };
pub(super) const PASS: Bound =
    Bound { name: "pass", unit: "mm", least: 0.01, most: 1e3, reason: "no cutter cuts such a depth" };
pub(super) const FEED: Bound =
    Bound { name: "feed", unit: "mm/min", least: 1.0, most: 1e5, reason: "no cutter works at such a feed" };
pub(super) const PLUNGE: Bound =
    Bound { name: "plunge", unit: "mm/min", least: 1.0, most: 1e5, reason: "no cutter works at such a feed" };
pub(super) const SPINDLE: Bound = Bound {
    name: "spindle",
    unit: "rev/min",
    least: 1.0,
    most: 1e6,
    reason: "no spindle turns at such a speed",
};
pub(super) const CUTTER: Bound =
    Bound { name: "cutter", unit: "mm", least: 0.05, most: 200.0, reason: "no router takes such a cutter" };
pub(super) const THICKNESS: Bound =
    Bound { name: "thickness", unit: "mm", least: 0.01, most: 1e3, reason: "no router takes such stock" };
pub(super) const CLEARANCE: Bound = Bound {
    name: "clearance",
    unit: "mm",
    least: 0.5,
    most: 500.0,
    reason: "closer above the stock chips are hit",
};

pub(super) const STOCK: Bound =
    Bound { name: "stock", unit: "mm", least: 1.0, most: 1e5, reason: "no router takes such stock" };
pub(super) const STOCK_AT: Bound =
    Bound { name: "stock-at", unit: "mm", least: -1e5, most: 1e5, reason: "no machine reaches so far" };
pub(super) const PARTS_AT: Bound =
    Bound { name: "parts-at", unit: "mm", least: -1e5, most: 1e5, reason: "no stock is so large" };
pub(super) const CLAMP: Bound =
    Bound { name: "clamp", unit: "mm", least: -1e5, most: 1e5, reason: "no machine reaches so far" };
pub(super) const CLAMP_HEIGHT: Bound =
    Bound { name: "clamp", unit: "mm high", least: 0.0, most: 500.0, reason: "no clamp rises so far" };
pub(super) const GAP: Bound =
    Bound { name: "gap", unit: "mm", least: 0.0, most: 1e4, reason: "no machine holds copies so far apart" };
pub(super) const TURN: Bound = Bound {
    name: "turn",
    unit: "degrees",
    least: -360.0,
    most: 360.0,
    reason: "that is more than all round",
};
pub(super) const BED_CUT: Bound = Bound {
    name: "bed-cut",
    unit: "mm",
    least: 0.0,
    most: 20.0,
    reason: "a deeper cut goes through the bed's sheet",
};
pub(super) const SKIN: Bound =
    Bound { name: "skin", unit: "mm", least: 0.01, most: 100.0, reason: "that is no skin" };
pub(super) const TAB_LENGTH: Bound =
    Bound { name: "tab-length", unit: "mm", least: 0.1, most: 1e3, reason: "no tab is of such a length" };
pub(super) const TAB_HEIGHT: Bound =
    Bound { name: "tab-height", unit: "mm", least: 0.05, most: 1e3, reason: "no tab is of such a height" };
pub(super) const TAB_SPACING: Bound =
    Bound { name: "tabs", unit: "mm", least: 1.0, most: 1e5, reason: "tabs so close together leave no cut" };
pub(super) const ALLOWANCE: Bound = Bound {
    name: "allowance",
    unit: "mm",
    least: -20.0,
    most: 20.0,
    reason: "that is another size of the part, not a fit",
};
pub(super) const LEAVE: Bound =
    Bound { name: "leave", unit: "mm", least: 0.0, most: 10.0, reason: "a last pass takes a little only" };

impl Bound {
    /// `value`, if it lies in the range.
    pub(super) fn hold(&self, value: f64) -> Result<f64, Error> {
        if (self.least..=self.most).contains(&value) {
            return Ok(value);
        }
        let Self { name, unit, least, most, reason } = self;
        let gap = if unit.is_empty() { "" } else { " " };
        let what =
            format!("{name} is {value}{gap}{unit}, and must be from {least} to {most}{gap}{unit}: {reason}");
        Err(Error::new(Kind::Settings, what).remedy(format!("correct --{name}, and look at its unit")))
    }
}

/// Refuses a value that the machine or the cutter cannot do.
pub(super) fn at_most(name: &str, value: f64, most: f64, unit: &str, whose: &str) -> Result<(), Error> {
    if value <= most {
        return Ok(());
    }
    let what = format!("{name} is {value} {unit}, and {whose} allows {most} {unit}");
    Err(Error::new(Kind::Refused, what).remedy(format!("lower --{name}")))
}
