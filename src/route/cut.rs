//! How one contour is cut.

use crate::error::Error;
use crate::job::{Corners, Direction, Entry, Held, TabNumber, Tabs};

use super::setup::{Setup, positive, refused, settings};

/// On which side the cutter runs of the region that contours bound together by even and odd.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Default)]
pub enum Side {
    /// Its centre on the contour: the part comes out smaller by the cutter's radius.
    #[default]
    On,
    /// Within the region, which is a hole or a pocket: outer contours inside, islands in them outside.
    Inside,
    /// Outside the region, which is the part: outer contours outside, holes inside, islands in holes outside.
    Outside,
}

/// How one contour is cut.
#[derive(Clone, Debug, PartialEq)]
pub struct Cut {
    /// Which cutter runs, by its number in the job: one program for each.
    pub cutter: usize,
    /// How far below the stock's top the cut reaches, in mm, above zero.
    pub depth_mm: f64,
    /// The deepest pass, in mm; holes are drilled in pecks as deep.
    pub pass_mm: f64,
    /// Feed along the contour, in mm/min.
    pub feed: f64,
    /// Feed straight down, in mm/min.
    pub plunge: f64,
    /// Spindle speed in rev/min.
    pub spindle_rpm: f64,
    /// The cutter's diameter, in mm.
    pub cutter_mm: f64,
    /// On which side of the contour it runs.
    pub side: Side,
    /// How it passes corners that jut out towards it.
    pub corners: Corners,
    /// How much material stays on the drawn edge, in mm; negative for a part that fits more loosely, or a hole that is
    /// wider.
    pub allowance_mm: f64,
    /// How much the passes leave for a last one at full depth, in mm.
    pub leave_mm: f64,
    /// True when inside corners get a way in, so that a sharp corner seats in them.
    pub relief: bool,
    /// How the cutter goes down.
    pub entry: Entry,
    /// The angle of ramps and helices, in degrees.
    pub ramp_deg: f64,
    /// Which way the cutter runs where a side is cut.
    pub direction: Direction,
    /// Bridges to leave.
    pub tabs: Option<Tabs>,
    /// How a part that is cut free is held otherwise.
    pub held: Option<Held>,
}

impl Default for Cut {
    /// Nothing is known of depth, feeds and cutter, and a cut without them is refused; ramps of 3 degrees (1 to 5 in
    /// wood are common practice), conventional, no tabs.
    fn default() -> Self {
        Self {
            cutter: 0,
            depth_mm: 0.0,
            pass_mm: 0.0,
            feed: 0.0,
            plunge: 0.0,
            spindle_rpm: 0.0,
            cutter_mm: 0.0,
            side: Side::On,
            corners: Corners::Round,
            allowance_mm: 0.0,
            leave_mm: 0.0,
            relief: false,
            entry: Entry::Ramp,
            ramp_deg: 3.0,
            direction: Direction::Conventional,
            tabs: None,
            held: None,
        }
    }
}

impl Cut {
    /// The depths of the passes below the stock's top, in mm, the deepest last: equal, none deeper than the pass.
    pub fn passes(&self) -> Vec<f64> {
        let count = (self.depth_mm / self.pass_mm * (1.0 - f64::EPSILON)).ceil().max(1.0);
        (1..=count as usize).map(|k| self.depth_mm * k as f64 / count).collect()
    }

    /// How far the cutter's centre runs from the drawn contour, in mm, before anything is left for a last pass.
    pub fn distance(&self) -> f64 {
        self.cutter_mm / 2.0 + self.allowance_mm
    }

    /// How far a ramp runs to go down by `height`, in mm.
    pub(super) fn ramp_length(&self, height: f64) -> f64 {
        height / self.ramp_deg.to_radians().tan()
    }

    /// The feed of a move of `run` mm in the plane that rises by `rise` mm: going down, no more than the plunge's share.
    pub(super) fn sloping_feed(&self, run: f64, rise: f64) -> f64 {
        if rise >= 0.0 {
            return self.feed;
        }
        self.feed.min(self.plunge * run.hypot(rise) / -rise)
    }

    /// Every setting inside its bounds.
    pub(super) fn validate(&self) -> Result<(), Error> {
        positive("depth", self.depth_mm)?;
        positive("pass", self.pass_mm)?;
        positive("feed", self.feed)?;
        positive("plunge", self.plunge)?;
        positive("spindle", self.spindle_rpm)?;
        positive("cutter", self.cutter_mm)?;
        if !(self.ramp_deg > 0.0 && self.ramp_deg <= 45.0) {
            let what = format!("a ramp of {} degrees is not between 0 and 45", self.ramp_deg);
            return Err(settings(what, "common practice in wood is 1 to 5"));
        }
        if !(self.distance() > 0.0 && self.leave_mm >= 0.0 && self.leave_mm.is_finite()) {
            let what = format!(
                "an allowance of {} mm, leaving {} mm, is more than a cutter of {} mm can do",
                self.allowance_mm, self.leave_mm, self.cutter_mm
            );
            return Err(settings(
                what,
                "keep --allowance above minus half the cutter, and --leave at 0 or more",
            ));
        }
        self.tabs.map_or(Ok(()), |tabs| tabs.validate())
    }

    /// The job is refused where a closed cut frees a part that nothing holds, or goes too far into the bed.
    pub(super) fn hold(&self, id: usize, closed: bool, setup: &Setup) -> Result<(), Error> {
        let into_bed = setup.bed_cut(self.depth_mm).unwrap_or(0.0);
        if into_bed > setup.bed_cut_mm + setup.step_mm / 2.0 {
            return Err(refused(
                format!(
                    "contour {id} cuts {into_bed:.2} mm into the bed, and {:.2} mm is allowed",
                    setup.bed_cut_mm
                ),
                "lower --depth or --through, or allow more with --bed-cut",
            ));
        }
        let frees = closed && setup.is_through(self.depth_mm) == Some(true);
        if frees && self.tabs.is_none() && self.held.is_none() {
            return Err(refused(
                format!("contour {id} is cut free, and nothing is said to hold what it frees"),
                "leave --tabs or a --skin, or say how it is held with --held vacuum, screws or tape",
            ));
        }
        Ok(())
    }
}

impl Tabs {
    fn validate(&self) -> Result<(), Error> {
        positive("tab length", self.length_mm)?;
        positive("tab height", self.height_mm)?;
        match self.number {
            TabNumber::Count(0) => {
                Err(settings("0 tabs hold nothing", "ask for 1 or more, or leave --tabs out"))
            }
            TabNumber::Count(_) => Ok(()),
            TabNumber::Spacing(mm) => positive("tab spacing", mm),
        }
    }

    /// How many tabs a contour of `length` mm gets.
    pub(super) fn count(&self, length: f64) -> usize {
        match self.number {
            TabNumber::Count(count) => count,
            TabNumber::Spacing(spacing) => ((length / spacing).round() as usize).max(2),
        }
    }
}
