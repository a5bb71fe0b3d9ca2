//! Which moves of a toolpath are cubic moves together.

use std::collections::HashMap;

use kurbo::Point;

use super::fairing::Cubic;
use crate::gcode::Curve;
use crate::toolpath::{Move, Toolpath};

/// The moves that follow one of the `cubics` from its start to its end, either way, at one height. What a ramp, a tab or
/// the end of a lap cuts apart stays arcs.
pub(super) fn curves(toolpath: &Toolpath, cubics: &[Cubic]) -> Vec<Curve> {
    let both = cubics.iter().flat_map(|cubic| [cubic.clone(), cubic.reversed()]);
    let both: Vec<Cubic> = both.collect();
    let mut by_start: HashMap<[u64; 2], Vec<&Cubic>> = HashMap::new();
    for cubic in &both {
        by_start.entry(key(cubic.ends[0])).or_default().push(cubic);
    }
    let mut curves: Vec<Curve> = Vec::new();
    let mut first = 0;
    while first < toolpath.moves.len() {
        let rest = &toolpath.moves[first..];
        let starting = by_start.get(&key(rest[0].from.xy)).into_iter().flatten();
        let followed = starting.copied().find(|cubic| cubic.is_followed(rest));
        let Some(cubic) = followed else {
            first += 1;
            continue;
        };
        let moves = first..first + cubic.ends.len() - 1;
        first = moves.end;
        curves.push(Curve { moves, control: cubic.control });
    }
    curves
}

/// Gives all moves of each curve the least of their feeds: they are one block.
pub(super) fn share_feeds(toolpath: &mut Toolpath, curves: &[Curve]) {
    for curve in curves {
        let moves = &mut toolpath.moves[curve.moves.clone()];
        let least = moves.iter().filter_map(|m| m.feed).reduce(f64::min);
        moves.iter_mut().for_each(|m| m.feed = least);
    }
}

/// A place as a key; both zeros are one.
fn key(at: Point) -> [u64; 2] {
    [(at.x + 0.0).to_bits(), (at.y + 0.0).to_bits()]
}

impl Cubic {
    fn reversed(&self) -> Self {
        let [first, second] = self.control;
        Self { ends: self.ends.iter().rev().copied().collect(), control: [second, first] }
    }

    /// True when moves begin with this cubic's.
    fn is_followed(&self, moves: &[Move]) -> bool {
        let count = self.ends.len() - 1;
        let height = moves[0].from.z;
        let level = |m: &Move| m.feed.is_some() && m.from.z - height == 0.0 && m.to.z - height == 0.0;
        moves.len() >= count && moves.iter().zip(&self.ends[1..]).all(|(m, end)| level(m) && m.to.xy == *end)
    }
}
