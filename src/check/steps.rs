//! How much of the stock each move has above it, by all that was cut before at the same place.

use kurbo::Point;
use rstar::primitives::{GeomWithData, Rectangle};
use rstar::{AABB, RTree};

use super::claim::{Spot, Worst};
use crate::toolpath::{Move, Position};

type Boxed<'a> = GeomWithData<Rectangle<[f64; 2]>, &'a Move>;

/// The thickest layer that a move takes at once, in mm, at its ends or its middle. `moves` are the cuts in the order of
/// the program; a cut within `reach` mm of a place counts as cut there.
pub(super) fn deepest<'a>(moves: impl Iterator<Item = &'a Move>, stock_top: f64, reach: f64) -> Worst {
    fresh(std::iter::empty(), moves, stock_top, reach)
}

/// The same of `moves` alone, after the cuts of `before`.
pub(super) fn fresh<'a>(
    before: impl Iterator<Item = &'a Move>,
    moves: impl Iterator<Item = &'a Move>,
    stock_top: f64,
    reach: f64,
) -> Worst {
    let boxed = |m: &'a Move| {
        let bbox = m.span().bbox();
        GeomWithData::new(Rectangle::from_corners([bbox.x0, bbox.y0], [bbox.x1, bbox.y1]), m)
    };
    let mut done: RTree<Boxed> = RTree::bulk_load(before.map(boxed).collect());
    let mut worst = Worst::none();
    for m in moves {
        for t in [0.5, 1.0] {
            let place = m.span().at(t);
            let height = height(m, t);
            let above = floor(&done, place, reach).unwrap_or(stock_top).min(stock_top);
            worst.note(above - height, || Spot { line: m.line, at: Some(Position { xy: place, z: height }) });
        }
        done.insert(boxed(m));
    }
    worst
}

/// The lowest that was cut near a place.
fn floor(done: &RTree<Boxed>, place: Point, reach: f64) -> Option<f64> {
    let around = AABB::from_corners([place.x - reach, place.y - reach], [place.x + reach, place.y + reach]);
    let near = done.locate_in_envelope_intersecting(around).filter_map(|item| {
        let near = item.data.span().nearest(place);
        (near.distance <= reach).then(|| height(item.data, near.t))
    });
    near.reduce(f64::min)
}

fn height(m: &Move, t: f64) -> f64 {
    if m.from.xy == m.to.xy { m.to.z } else { m.from.z + (m.to.z - m.from.z) * t }
}
