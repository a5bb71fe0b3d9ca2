//! How a contour is cut: depth, passes, feeds and speed, from what was asked, the profile, and the built-in defaults.

use super::bounds::{self, at_most};
use super::{
    ChosenCutter, Corners, CutArgs, Direction, Entry, Held, Side, Stock, TabsWanted, Thickness, Units, cutter,
};
use crate::error::{Error, Kind};
use crate::machine::{Cutter, Machine};

/// Depth, passes, feeds and speed of a cut.
#[derive(Clone, Debug, PartialEq)]
pub struct Cutting {
    /// Which of the job's cutters cuts, from 0.
    pub cutter: usize,
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
    /// The side of the contour that it is cut on.
    pub side: Side,
    /// Which way the cutter runs along a side.
    pub direction: Direction,
    /// How it passes corners that jut out towards it.
    pub corners: Corners,
    /// Material left on the drawn edge, in mm; negative for a looser fit.
    pub allowance_mm: f64,
    /// True when it goes into inside corners up to the corner itself.
    pub relief: bool,
    /// What the passes leave for a last one at full depth, in mm.
    pub leave_mm: f64,
    /// Tabs to leave.
    pub tabs: Option<Tabs>,
    /// How a part is held that the cut frees.
    pub held: Option<Held>,
}

/// Tabs to leave on each closed contour.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Tabs {
    /// How many there are.
    pub number: TabNumber,
    /// Length of a tab at its top, in mm.
    pub length_mm: f64,
    /// Height of a tab above the stock's underside, in mm.
    pub height_mm: f64,
}

/// How many tabs a contour gets.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum TabNumber {
    /// That many.
    Count(usize),
    /// One for every so many mm.
    Spacing(f64),
}

/// The feed for a cutter of which only the diameter is known, in mm/min: a cautious one for wood.
const DEFAULT_FEED: f64 = 1500.0;
/// The speed of a router spindle where nothing else is asked for, in rev/min.
const DEFAULT_RPM: f64 = 18000.0;
/// The most passes: more are a slip of unit.
const MOST_PASSES: f64 = 1000.0;
/// How far a cut through the stock goes into the bed where that is allowed, in mm: enough for a sheet that does not lie flat
/// (common practice, from memory).
const PAST_THROUGH_MM: f64 = 0.2;
/// Length and height of a tab, in mm, where nothing else is asked for (common practice in wood, from memory).
const TAB_MM: (f64, f64) = (6.0, 1.5);

/// Works out cuttings for one machine, and gathers the cutters that they take.
pub(super) struct Maker<'a> {
    pub(super) machine: &'a Machine,
    pub(super) mm: Units,
    pub(super) stock: &'a Stock,
    pub(super) cutters: Vec<ChosenCutter>,
}

impl Maker<'_> {
    /// The cutting that `cut` asks for.
    pub(super) fn cutting(&mut self, cut: &CutArgs) -> Result<Cutting, Error> {
        let number = self.number(cutter(cut.cutter.as_deref(), self.machine, self.mm)?);
        let ChosenCutter { diameter_mm, ref entry } = self.cutters[number];
        let entry = entry.as_ref();
        let depth_mm = self.depth(cut, entry)?;
        let pass = self.mm.length(&bounds::PASS, cut.pass)?;
        let pass_mm = pass.unwrap_or(diameter_mm / 2.0);
        if depth_mm / pass_mm > MOST_PASSES {
            let what =
                format!("a depth of {depth_mm} mm in passes of {pass_mm} mm takes over {MOST_PASSES} passes");
            return Err(Error::new(Kind::Settings, what).remedy("give a deeper --pass"));
        }
        let spindle_rpm = self.spindle(cut, entry)?;
        let feed = self.feed(cut, entry, spindle_rpm)?;
        Ok(Cutting {
            cutter: number,
            depth_mm,
            pass_mm,
            feed,
            plunge: self.plunge(cut, feed)?,
            spindle_rpm,
            entry: cut.entry.unwrap_or_default(),
            side: cut.side.unwrap_or_default(),
            direction: cut.direction.unwrap_or_default(),
            corners: cut.corners.unwrap_or_default(),
            allowance_mm: self.mm.length(&bounds::ALLOWANCE, cut.allowance)?.unwrap_or(0.0),
            relief: relief(cut)?,
            leave_mm: self.leave(cut)?,
            tabs: self.tabs(cut)?,
            held: cut.held,
        })
    }

    /// The cutter's place among those of the job.
    fn number(&mut self, cutter: ChosenCutter) -> usize {
        self.cutters.iter().position(|known| *known == cutter).unwrap_or_else(|| {
            self.cutters.push(cutter);
            self.cutters.len() - 1
        })
    }

    fn depth(&self, cut: &CutArgs, cutter: Option<&Cutter>) -> Result<f64, Error> {
        let depth = match (cut.through == Some(true), self.mm.length(&bounds::SKIN, cut.skin)?) {
            (true, _) => self.through()?,
            (false, Some(skin)) => {
                let thickness = self.thickness("--skin")?;
                at_most("skin", skin, thickness.thinnest, "mm", "the stock's thickness")?;
                thickness.thickest - self.stock.play_mm() - skin
            }
            (false, None) => self.mm.length(&bounds::DEPTH, cut.depth)?.ok_or_else(|| {
                Error::new(Kind::Settings, "how deep to cut is not given")
                    .remedy("give --depth, such as --depth 6mm, or --thickness with --through or --skin")
            })?,
        };
        // Sums of decimal lengths, without the last bit's noise.
        let depth = bounds::DEPTH.hold((depth * 1e9).round() / 1e9)?;
        at_most("depth", depth, self.machine.travel.z, "mm", "the machine's travel in Z")?;
        if let Some(cutter) = cutter {
            at_most("depth", depth, cutter.flute_length, "mm", &format!("the flutes of {}", cutter.name))?;
        }
        Ok(depth)
    }

    /// The depth that goes through the thickest stock and a little further, but not too far into a bed that lies higher
    /// under the thinnest.
    fn through(&self) -> Result<f64, Error> {
        let Thickness { thinnest, thickest } = self.thickness("--through")?;
        let (play, allowed) = (self.stock.play_mm(), self.stock.bed_cut_mm);
        // Differences of decimal lengths, without the last bit's noise.
        let play = (play * 1e9).round() / 1e9;
        if play <= allowed {
            return Ok(thickest + PAST_THROUGH_MM.min(allowed - play));
        }
        let what = format!(
            "a cut through stock of {thickest} mm goes {play} mm into the bed under stock of {thinnest} mm, and {allowed} \
             mm is allowed"
        );
        Err(Error::new(Kind::Refused, what)
            .remedy("set zero on the bed with --zero bed, or allow a deeper --bed-cut"))
    }

    /// The stock's thickness, which `option` needs.
    fn thickness(&self, option: &str) -> Result<Thickness, Error> {
        self.stock.thickness.ok_or_else(|| {
            let what = format!("{option} needs to know how thick the stock is");
            Error::new(Kind::Settings, what).remedy("give --thickness, such as --thickness 18mm")
        })
    }

    /// What is left for a last pass; on the line there is no edge to leave it on.
    fn leave(&self, cut: &CutArgs) -> Result<f64, Error> {
        let leave = self.mm.length(&bounds::LEAVE, cut.leave)?.unwrap_or(0.0);
        if leave > 0.0 && cut.side.unwrap_or_default() == Side::On {
            let what = "--leave keeps material for a last pass along an edge, and the cut is on the line";
            return Err(Error::new(Kind::Settings, what).remedy("choose a --side, or leave --leave out"));
        }
        Ok(leave)
    }

    fn tabs(&self, cut: &CutArgs) -> Result<Option<Tabs>, Error> {
        let length = self.mm.length(&bounds::TAB_LENGTH, cut.tab_length)?;
        let height = self.mm.length(&bounds::TAB_HEIGHT, cut.tab_height)?;
        let number = match cut.tabs {
            None if length.or(height).is_some() => {
                let what = "the size of tabs is given, and not how many there are";
                return Err(Error::new(Kind::Settings, what).remedy("give --tabs too, such as --tabs 4"));
            }
            None | Some(TabsWanted::Count(0)) => return Ok(None),
            Some(TabsWanted::Count(count)) => TabNumber::Count(count),
            Some(TabsWanted::Spacing(spacing)) => {
                let spacing = self.mm.length(&bounds::TAB_SPACING, Some(spacing))?;
                TabNumber::Spacing(spacing.unwrap_or_default())
            }
        };
        let thickness = self.thickness("--tabs")?;
        Ok(Some(Tabs {
            number,
            length_mm: length.unwrap_or(TAB_MM.0),
            height_mm: height.unwrap_or(TAB_MM.1.min(thickness.thinnest / 2.0)),
        }))
    }

    fn spindle(&self, cut: &CutArgs, cutter: Option<&Cutter>) -> Result<f64, Error> {
        let spindle = &self.machine.spindle;
        let cutter_most = cutter.map_or(f64::INFINITY, |cutter| cutter.largest_rpm);
        let default = DEFAULT_RPM.min(cutter_most).clamp(spindle.slowest, spindle.fastest);
        let rpm = bounds::SPINDLE.hold(cut.spindle.unwrap_or(default))?;
        at_most("spindle", rpm, spindle.fastest, "rev/min", "the machine")?;
        at_most("spindle", rpm, cutter_most, "rev/min", "the cutter")?;
        if rpm < spindle.slowest {
            let what =
                format!("spindle is {rpm} rev/min, and the machine turns no slower than {}", spindle.slowest);
            return Err(Error::new(Kind::Refused, what).remedy("raise --spindle"));
        }
        Ok(rpm)
    }

    fn feed(&self, cut: &CutArgs, cutter: Option<&Cutter>, rpm: f64) -> Result<f64, Error> {
        let most = self.machine.feed.x.min(self.machine.feed.y);
        let by_chip = |c: &Cutter| rpm * f64::from(c.flutes) * cautious_chip(c);
        let default = cutter.map_or(DEFAULT_FEED, by_chip).round().min(most);
        let feed = self.mm.feed(&bounds::FEED, cut.feed)?.unwrap_or(default);
        at_most("feed", feed, most, "mm/min", "the machine")?;
        Ok(feed)
    }

    fn plunge(&self, cut: &CutArgs, feed: f64) -> Result<f64, Error> {
        let most = self.machine.feed.z;
        let plunge = self.mm.feed(&bounds::PLUNGE, cut.plunge)?.unwrap_or(third_of(feed).min(most));
        at_most("plunge", plunge, most, "mm/min", "the machine's Z")?;
        Ok(plunge)
    }
}

/// True when corners are relieved; a cut on the line has none to relieve.
fn relief(cut: &CutArgs) -> Result<bool, Error> {
    let relief = cut.corner_relief == Some(true);
    if relief && cut.side.unwrap_or_default() == Side::On {
        let what = "--corner-relief cuts into corners that a cutter beside the line does not reach, and the cut is on the line";
        return Err(Error::new(Kind::Settings, what).remedy("choose a --side, or leave --corner-relief out"));
    }
    Ok(relief)
}

/// A chip on the light side of what the cutter takes, in mm: a quarter of the way up its range.
fn cautious_chip(cutter: &Cutter) -> f64 {
    cutter.least_chip + (cutter.most_chip - cutter.least_chip) / 4.0
}

/// The plunge that goes with a feed, in mm/min: a third of it, in whole numbers where that is not nothing.
fn third_of(feed: f64) -> f64 {
    let third = feed / 3.0;
    if third < 1.0 { third } else { third.round() }
}
