//! A short tour between the contours.

use kurbo::Point;
use rstar::RTree;
use rstar::primitives::GeomWithData;

use super::{Routed, Setup};

/// One stop of the tour: a contour, and the vertex at which it is entered.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(super) struct Stop {
    pub(super) contour: usize,
    pub(super) entry: usize,
}

type Entrance = GeomWithData<[f64; 2], Stop>;

/// A tour from the park position, always on to the nearest entrance that is left.
pub(super) fn tour(contours: &[Routed], setup: &Setup) -> Vec<Stop> {
    let entrances: Vec<Vec<Entrance>> =
        contours.iter().enumerate().map(|(i, contour)| entrances(i, contour, setup.step_mm)).collect();
    let mut left = RTree::bulk_load(entrances.concat());
    let mut at = setup.park;
    let mut stops = Vec::with_capacity(contours.len());
    while let Some(stop) = nearest(&left, at) {
        for entrance in &entrances[stop.contour] {
            left.remove(entrance);
        }
        at = leaves_at(&contours[stop.contour], stop.entry);
        stops.push(stop);
    }
    stops
}

/// The nearest entrance; of several equally near the one that stands first in the drawing.
fn nearest(left: &RTree<Entrance>, at: Point) -> Option<Stop> {
    left.nearest_neighbors(&[at.x, at.y]).into_iter().map(|e| e.data).min()
}

fn entrances(index: usize, contour: &Routed, step_mm: f64) -> Vec<Entrance> {
    let entrance = |entry| {
        let place = contour.place(entry);
        GeomWithData::new([place.x, place.y], Stop { contour: index, entry })
    };
    contour.entries(step_mm).into_iter().map(entrance).collect()
}

/// Where the cutter is when the contour is done.
fn leaves_at(contour: &Routed, entry: usize) -> Point {
    let last = contour.path.vertices.len() - 1;
    let to_and_fro = contour.cut.passes().len().is_multiple_of(2);
    if contour.path.closed || to_and_fro { contour.place(entry) } else { contour.place(last - entry) }
}
