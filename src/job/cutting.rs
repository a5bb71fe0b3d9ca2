//! How a contour is cut: depth, passes, feeds and speed, from what was asked, the profile, and the built-in defaults.

use super::bounds::{self, at_most};
use super::{Entry, Held, LayerSettings, Settings, Units};
use crate::error::{Error, Kind};
use crate::machine::{Cutter, Machine};

/// Depth, passes, feeds and speed of a cut.
#[derive(Clone, Debug, PartialEq)]
pub struct Cutting {
    /// How deep, below the top of the stock, in mm.
    pub depth_mm: f64,
    /// The deepest single pass, in mm.
    pub pass_mm: f64,
    /// Feed along the contour, in mm/min.
    pub feed: f64,
    /// Feed straight down, in mm/min.
    pub plunge: f64,
    /// Spindle speed, in rev/min.
    pub spindle_rpm: f64,
    /// How the cutter goes down.
    pub entry: Entry,
    /// How a part is held that the cut frees.
    pub held: Option<Held>,
}

/// The feed for a cutter of which only the diameter is known, in mm/min: a cautious one for wood.
const DEFAULT_FEED: f64 = 1500.0;
/// The speed of a router spindle where nothing else is asked for, in rev/min.
const DEFAULT_RPM: f64 = 18000.0;
/// The most passes: more are a slip of unit.
const MOST_PASSES: f64 = 1000.0;

/// Works out cuttings for one machine and cutter.
pub(super) struct Maker<'a> {
    pub(super) machine: &'a Machine,
    pub(super) mm: Units,
    pub(super) cutter_mm: f64,
    pub(super) cutter: Option<&'a Cutter>,
}

impl Maker<'_> {
    /// The cutting that `all` asks for.
    pub(super) fn cutting(&self, all: &Settings) -> Result<Cutting, Error> {
        let depth_mm = self.depth(all)?;
        let pass = self.mm.length(&bounds::PASS, all.pass)?;
        let pass_mm = pass.unwrap_or(self.cutter_mm / 2.0);
        if depth_mm / pass_mm > MOST_PASSES {
            let what =
                format!("a depth of {depth_mm} mm in passes of {pass_mm} mm takes over {MOST_PASSES} passes");
            return Err(Error::new(Kind::Settings, what).remedy("give a deeper --pass"));
        }
        let spindle_rpm = self.spindle(all)?;
        let feed = self.feed(all, spindle_rpm)?;
        let plunge = self.plunge(all, feed)?;
        let entry = all.entry.unwrap_or_default();
        Ok(Cutting { depth_mm, pass_mm, feed, plunge, spindle_rpm, entry, held: all.held })
    }

    fn depth(&self, all: &Settings) -> Result<f64, Error> {
        let depth = self.mm.length(&bounds::DEPTH, all.depth)?.ok_or_else(|| {
            Error::new(Kind::Settings, "how deep to cut is not given")
                .remedy("give --depth, such as --depth 6mm")
        })?;
        at_most("depth", depth, self.machine.travel.z, "mm", "the machine's travel in Z")?;
        if let Some(cutter) = self.cutter {
            at_most("depth", depth, cutter.flute_length, "mm", &format!("the flutes of {}", cutter.name))?;
        }
        Ok(depth)
    }

    fn spindle(&self, all: &Settings) -> Result<f64, Error> {
        let spindle = &self.machine.spindle;
        let cutter_most = self.cutter.map_or(f64::INFINITY, |cutter| cutter.largest_rpm);
        let default = DEFAULT_RPM.min(cutter_most).clamp(spindle.slowest, spindle.fastest);
        let rpm = bounds::SPINDLE.hold(all.spindle.unwrap_or(default))?;
        at_most("spindle", rpm, spindle.fastest, "rev/min", "the machine")?;
        at_most("spindle", rpm, cutter_most, "rev/min", "the cutter")?;
        if rpm < spindle.slowest {
            let what =
                format!("spindle is {rpm} rev/min, and the machine turns no slower than {}", spindle.slowest);
            return Err(Error::new(Kind::Refused, what).remedy("raise --spindle"));
        }
        Ok(rpm)
    }

    fn feed(&self, all: &Settings, rpm: f64) -> Result<f64, Error> {
        let most = self.machine.feed.x.min(self.machine.feed.y);
        let by_chip = |c: &Cutter| rpm * f64::from(c.flutes) * cautious_chip(c);
        let default = self.cutter.map_or(DEFAULT_FEED, by_chip).round().min(most);
        let feed = self.mm.feed(&bounds::FEED, all.feed)?.unwrap_or(default);
        at_most("feed", feed, most, "mm/min", "the machine")?;
        Ok(feed)
    }

    fn plunge(&self, all: &Settings, feed: f64) -> Result<f64, Error> {
        let most = self.machine.feed.z;
        let plunge = self.mm.feed(&bounds::PLUNGE, all.plunge)?.unwrap_or((feed / 3.0).round().min(most));
        at_most("plunge", plunge, most, "mm/min", "the machine's Z")?;
        Ok(plunge)
    }
}

impl LayerSettings {
    /// The layer's wishes as settings.
    pub(super) fn settings(&self) -> Settings {
        Settings {
            depth: self.depth,
            pass: self.pass,
            feed: self.feed,
            plunge: self.plunge,
            entry: self.entry,
            held: self.held,
            ..Settings::default()
        }
    }
}

/// A chip on the light side of what the cutter takes, in mm: a quarter of the way up its range.
fn cautious_chip(cutter: &Cutter) -> f64 {
    cutter.least_chip + (cutter.most_chip - cutter.least_chip) / 4.0
}
