//! From centre lines to moves, through the public door.
#![allow(clippy::float_cmp, reason = "heights of a toolpath are copied, not computed: equality is exact")]

mod demo;
mod dry;
mod entries;
mod passes;
mod programs;
mod refusals;
mod sides;
mod tabs;

use kurbo::Point;
use ribband::geom::ArcSpline;
use ribband::route::{Cut, Entry, Routed, Setup};
use ribband::toolpath::{Move, Toolpath};

/// A cut 6 mm deep in passes of 2 mm, by a cutter of 6 mm that plunges.
pub(crate) fn cut() -> Cut {
    Cut {
        depth_mm: 6.0,
        pass_mm: 2.0,
        feed: 1800.0,
        plunge: 600.0,
        spindle_rpm: 18000.0,
        cutter_mm: 6.0,
        entry: Entry::Plunge,
        ..Cut::default()
    }
}

/// The closed or open polyline through `points`.
pub(crate) fn contour(id: usize, points: &[(f64, f64)], closed: bool) -> Routed {
    let path = ArcSpline::polyline(points.iter().map(|&p| Point::from(p)), closed);
    Routed { id, path, cut: cut(), ..Routed::default() }
}

/// An upright rectangle from its lower left corner, counter-clockwise.
pub(crate) fn rectangle(id: usize, (x, y): (f64, f64), (w, h): (f64, f64)) -> Routed {
    contour(id, &[(x, y), (x + w, y), (x + w, y + h), (x, y + h)], true)
}

/// The promises that every toolpath keeps: no gap between moves, rapids level at the clearance height or straight up
/// to it, a feed and a turning spindle elsewhere, no arc over half a turn, the end at the park position.
pub(crate) fn assert_safe(toolpath: &Toolpath, setup: &Setup) {
    let clearance = setup.heights().clearance;
    for pair in toolpath.moves.windows(2) {
        assert_eq!(pair[0].to, pair[1].from, "a gap between two moves");
    }
    for m in &toolpath.moves {
        assert!(m.bulge.abs() <= 1.0, "an arc over half a turn: {m:?}");
        match m.feed {
            None => assert!(safe_rapid(m, clearance), "an unsafe rapid: {m:?}"),
            Some(feed) => assert!(feed > 0.0 && m.spindle_rpm > 0.0, "a cut without feed or spindle: {m:?}"),
        }
    }
    let end = toolpath.moves.last().expect("a toolpath has moves").to;
    assert_eq!((end.xy, end.z), (setup.park, clearance), "the end is at the park position");
}

/// The lowest that the cutter comes at a place on its path.
pub(crate) fn lowest_at(toolpath: &Toolpath, place: Point) -> f64 {
    let near = toolpath.moves.iter().filter_map(|m| {
        let near = m.span().nearest(place);
        (near.distance < 1e-6).then_some(m.from.z + (m.to.z - m.from.z) * near.t)
    });
    near.fold(f64::INFINITY, f64::min)
}

fn safe_rapid(m: &Move, clearance: f64) -> bool {
    let level = m.from.z == clearance && m.to.z == clearance;
    let straight_up = m.from.xy == m.to.xy && m.to.z == clearance && m.from.z < clearance;
    m.bulge == 0.0 && (level || straight_up)
}
