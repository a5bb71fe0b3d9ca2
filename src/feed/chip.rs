//! The chip that each cutting edge takes: feed over revolutions and edges (f = n z fz, ISO 3002-3, from memory).

use crate::machine::{Cutter, Spindle};
use crate::toolpath::{Move, Toolpath};

/// The chips of a toolpath's contour moves at the spindle speed chosen for them.
#[derive(Clone, Debug, PartialEq)]
pub struct ChipLoad {
    /// The spindle speed in rev/min.
    pub rpm: f64,
    /// The thinnest chip in mm per edge.
    pub thinnest_mm: f64,
    /// The thickest chip in mm per edge.
    pub thickest_mm: f64,
    /// What the operator has to know: one sentence each, none when every chip is in the cutter's range.
    pub told: Vec<String>,
}

/// The part of the cut, by length, whose chip may be too thin without lowering the spindle speed for it.
const SHORT_PART: f64 = 0.1;

/// Lowers the spindle speed with the feed, so that the chips of nine tenths of the cut are no thinner than the cutter
/// likes and none is thicker, and tells what stays outside its range. A spindle switched by hand keeps its speed.
///
/// `None` for a toolpath that cuts nothing with the spindle on.
pub fn hold_chip_load(toolpath: &mut Toolpath, cutter: &Cutter, spindle: &Spindle) -> Option<ChipLoad> {
    let mut cuts: Vec<Cut> = toolpath.moves.iter().filter_map(Cut::of).collect();
    cuts.sort_by(|a, b| a.feed.total_cmp(&b.feed));
    let asked = toolpath.moves.iter().map(|m| m.spindle_rpm).fold(0.0, f64::max);
    let (slowest, fastest) = (cuts.first()?.feed, cuts.last()?.feed);
    let whole: f64 = cuts.iter().map(|cut| cut.length).sum();
    let mut passed = 0.0;
    let low = cuts.iter().find(|cut| {
        passed += cut.length;
        passed >= SHORT_PART * whole
    })?;
    let edges = f64::from(cutter.flutes);
    let thin_above = low.feed / (edges * cutter.least_chip);
    let thick_below = fastest / (edges * cutter.most_chip);
    let held = asked.min(thin_above.max(thick_below).max(spindle.slowest));
    let rpm = if spindle.hand_switched { asked } else { held };
    toolpath.moves.iter_mut().filter(|m| m.spindle_rpm > 0.0).for_each(|m| m.spindle_rpm = rpm);
    let chip = |feed: f64| feed / (rpm * edges);
    let part = |outside: &dyn Fn(f64) -> bool| {
        cuts.iter().filter(|cut| outside(chip(cut.feed))).map(|cut| cut.length).sum::<f64>() / whole
    };
    // A speed that was chosen to meet a bound meets it up to rounding.
    let rounding = 1.0 + 8.0 * f64::EPSILON;
    let thin = part(&|chip| chip * rounding < cutter.least_chip);
    let thick = part(&|chip| chip > cutter.most_chip * rounding);
    let told = [
        (thin > 0.0).then(|| {
            let least = cutter.least_chip;
            format!(
                "on {} of the cut the chip is thinner than {least} mm: the cutter rubs there",
                percent(thin)
            )
        }),
        (thick > 0.0).then(|| {
            let most = cutter.most_chip;
            format!("on {} of the cut the chip is thicker than {most} mm: lower the feed", percent(thick))
        }),
    ];
    Some(ChipLoad {
        rpm,
        thinnest_mm: chip(slowest),
        thickest_mm: chip(fastest),
        told: told.into_iter().flatten().collect(),
    })
}

/// A share in words, never rounded down to nothing.
fn percent(share: f64) -> String {
    if share < 0.01 { "under 1 %".to_string() } else { format!("{:.0} %", share * 100.0) }
}

/// A contour move with the spindle on.
struct Cut {
    feed: f64,
    length: f64,
}

impl Cut {
    fn of(m: &Move) -> Option<Self> {
        let length = m.span().length();
        m.feed.filter(|_| length > 0.0 && m.spindle_rpm > 0.0).map(|feed| Self { feed, length })
    }
}
