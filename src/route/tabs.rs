//! Where tabs stand, and how the cutter climbs over them.

use std::f64::consts::FRAC_PI_6;

use kurbo::Point;

use crate::error::Error;
use crate::job::Tabs;

use super::cut::Cut;
use super::profile::Profile;
use super::setup::{Heights, refused, settings};
use super::track::Track;

/// The slope at both ends of a tab: steep enough to stay short, gentle enough to feed.
const SLOPE: f64 = FRAC_PI_6;

/// A sharper break than this, 15 degrees, is a corner: no place for a tab.
const CORNER: f64 = FRAC_PI_6 / 2.0;

/// The tabs of one contour: the ways of their middles, and their shape.
#[derive(Clone, Debug)]
pub(super) struct Placed {
    /// The ways along the track, within one lap.
    pub(super) middles: Vec<f64>,
    /// Height of their tops.
    top: f64,
    /// Where their slopes end.
    bottom: f64,
    /// Half the way that the cutter's centre runs level over one.
    half_flat: f64,
}

/// Places the tabs of a contour: evenly, each moved to where the track is calmest, clear of corners and of the start.
///
/// # Errors
/// Refused where the stock's thickness is unknown, the tabs are as high as the stock, or they do not fit.
pub(super) fn place(
    id: usize,
    track: &Track,
    cut: &Cut,
    tabs: &Tabs,
    heights: Heights,
) -> Result<Placed, Error> {
    let Some(underside) = heights.underside else {
        return Err(settings(
            "tabs stand on the stock's underside, and its thickness is not known",
            "pass --thickness",
        ));
    };
    let (top, bottom) = (underside + tabs.height_mm, heights.top - cut.depth_mm);
    if top >= heights.top {
        return Err(refused(
            format!(
                "a tab {:.2} mm high is not lower than the stock, which is {:.2} mm thick",
                tabs.height_mm,
                heights.top - underside
            ),
            "make the tabs lower",
        ));
    }
    let half_flat = (tabs.length_mm + cut.cutter_mm) / 2.0;
    let mut placed = Placed { middles: Vec::new(), top, bottom, half_flat };
    if top > bottom {
        placed.settle(id, track, cut, tabs)?;
    }
    Ok(placed)
}

impl Placed {
    /// The whole way that a tab takes, from the foot of one slope to the foot of the other, halved.
    fn half_foot(&self) -> f64 {
        self.half_flat + (self.top - self.bottom) / SLOPE.tan()
    }

    /// Finds the calmest place for each tab in its share of the track.
    fn settle(&mut self, id: usize, track: &Track, cut: &Cut, tabs: &Tabs) -> Result<(), Error> {
        let (length, count) = (track.length(), tabs.count(track.length()));
        let share = length / count as f64;
        let half = self.half_foot();
        // The start keeps a cutter's width to itself, and neighbours do not meet.
        let margin = cut.cutter_mm;
        for k in 0..count {
            let (low, high) = (share * k as f64 + half, share * (k + 1) as f64 - half);
            let low = if k == 0 { low + margin } else { low };
            let high = if k + 1 == count { high - margin } else { high };
            if low > high {
                return Err(does_not_fit(id, count, 2.0 * half, share));
            }
            let middle = calmest(track, low, high, half);
            if track.turning(middle - half, middle + half).sharpest > CORNER {
                return Err(on_corner(id, track.place(middle)));
            }
            self.middles.push(middle);
        }
        Ok(())
    }

    /// The heights that the cutter must not go below between two ways, the tabs repeated on every lap.
    pub(super) fn profile(&self, track: &Track, from: f64, to: f64) -> Profile {
        let run = (self.top - self.bottom) / SLOPE.tan();
        let mut breaks = Vec::new();
        let mut lap = ((from / track.length()).floor() - 1.0) * track.length();
        while lap <= to {
            for middle in self.middles.iter().map(|m| m + lap) {
                let flat = self.half_flat;
                breaks.push((middle - flat - run, self.bottom));
                breaks.push((middle - flat, self.top));
                breaks.push((middle + flat, self.top));
                breaks.push((middle + flat + run, self.bottom));
            }
            lap += track.length();
        }
        if breaks.is_empty() { Profile::level(self.bottom) } else { Profile::through(breaks) }
    }

    /// The same tabs beside another track, which runs alongside.
    pub(super) fn beside(&self, track: &Track, other: &Track) -> Self {
        let mut middles: Vec<f64> = self.middles.iter().map(|&m| other.way_of(track.place(m))).collect();
        middles.sort_by(f64::total_cmp);
        Self { middles, ..*self }
    }
}

/// The middle between `low` and `high` about which the track turns least within `half`; of equals the most central.
fn calmest(track: &Track, low: f64, high: f64, half: f64) -> f64 {
    const TRIES: u32 = 48;
    let central = (low + high) / 2.0;
    let tries = (0..=TRIES).map(|k| low + (high - low) * f64::from(k) / f64::from(TRIES)).chain([central]);
    // Corners first; then a degree of bending weighs as much as going to the end of the share.
    let cost = |s: &f64| {
        let off = if high > low { (s - central).abs() / (high - low) } else { 0.0 };
        let turning = track.turning(s - half, s + half);
        let corner = if turning.sharpest > CORNER { 360.0 + turning.sharpest } else { 0.0 };
        corner + turning.bend.to_degrees() + off
    };
    tries.min_by(|a, b| cost(a).total_cmp(&cost(b))).unwrap_or(central)
}

fn on_corner(id: usize, at: Point) -> Error {
    refused(
        format!("a tab of contour {id} near ({:.1}, {:.1}) would stand on a corner", at.x, at.y),
        "ask for another number of tabs or shorter ones, or hold the part otherwise",
    )
}

fn does_not_fit(id: usize, count: usize, needed: f64, share: f64) -> Error {
    refused(
        format!(
            "{count} tabs do not fit on contour {id}: each takes {needed:.1} mm with its slopes, of {share:.1} mm"
        ),
        "ask for fewer, shorter or lower tabs, or hold the part otherwise",
    )
}
