//! Headings to leave a place with, where the path may turn on the spot.

use kurbo::Vec2;

use super::reach::{Fan, reach};
use super::state::State;
use super::trace::Bead;

/// How many headings are kept for each place.
const KEPT: usize = 3;
/// Sideways aims at each bead, in bands.
const AIMS: [f64; 5] = [-0.9, -0.45, 0.0, 0.45, 0.9];

/// The state turned to the headings with which one arc goes furthest, best first, each with its reach in mm.
///
/// The headings tried aim at beads ahead, at growing distances and to either side of them.
pub(super) fn turned(state: &State, beads: &[Bead], fans: &mut Vec<Fan>) -> Vec<(f64, State)> {
    let mut found = aimed(state, beads, fans);
    found.truncate(KEPT);
    found
}

/// The state turned to all headings tried, best first, each with its reach in mm.
pub(super) fn aimed(state: &State, beads: &[Bead], fans: &mut Vec<Fan>) -> Vec<(f64, State)> {
    let mut found: Vec<(f64, State)> = Vec::new();
    let mut ahead = 1;
    let mut best = f64::NEG_INFINITY;
    while let Some(bead) = beads.get(state.bead + ahead) {
        let chord = bead.at - state.at;
        if chord.hypot2() > 0.0 {
            let along = chord.normalize();
            let left = Vec2::new(-along.y, along.x);
            for aim in AIMS {
                let turned = state.turned((chord + left * (aim * bead.band)).normalize());
                found.push((reach(&turned, beads, fans), turned));
            }
        }
        best = found.iter().map(|f| f.0).fold(best, f64::max);
        if bead.along > 2.0 * best - beads[state.bead].along {
            break;
        }
        ahead += 1 + ahead / 2;
    }
    found.sort_by(|a, b| b.0.total_cmp(&a.0));
    found
}
