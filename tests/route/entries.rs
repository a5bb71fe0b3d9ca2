//! Ramps, helices, leads and finishing passes.

use kurbo::Point;
use proptest::prelude::*;
use ribband::geom::ArcSpline;
use ribband::route::{Cut, Entry, Lead, Order, Routed, Setup, Work, route};
use ribband::toolpath::{Move, Toolpath};

use crate::{assert_safe, contour, cut, lowest_at, rectangle};

/// The steepest way down of all cuts that are not straight down, in degrees.
fn steepest(toolpath: &Toolpath) -> f64 {
    let down = toolpath.moves.iter().filter(|m| m.to.z < m.from.z && m.span().length() > 0.0);
    down.map(|m| (m.from.z - m.to.z).atan2(m.span().length()).to_degrees()).fold(0.0, f64::max)
}

/// Cuts straight down, the approach to the stock's top left out.
fn plunges(toolpath: &Toolpath) -> usize {
    let straight = |m: &&Move| m.from.xy == m.to.xy && m.to.z < m.from.z.min(0.0);
    toolpath.moves.iter().filter(straight).count()
}

fn ramped() -> Cut {
    Cut { entry: Entry::Ramp, ..cut() }
}

#[test]
fn a_closed_contour_is_ramped_down_and_cut_to_depth_all_round() {
    let setup = Setup::default();
    let square = Routed { cut: ramped(), ..rectangle(1, (10.0, 10.0), (60.0, 40.0)) };
    let toolpath = route(std::slice::from_ref(&square), &setup).expect("a square routes").toolpath;
    assert_safe(&toolpath, &setup);
    assert_eq!(plunges(&toolpath), 0);
    assert!((steepest(&toolpath) - 3.0).abs() < 1e-3, "{}", steepest(&toolpath));
    for span in square.path.spans() {
        for k in 0..10 {
            assert_eq!(lowest_at(&toolpath, span.at(f64::from(k) / 10.0)), -6.0);
        }
    }
    // Three rounds and 6 mm of height at 3 degrees, and no way cut twice beyond that.
    let along: f64 = toolpath.moves.iter().filter(|m| !m.is_rapid()).map(|m| m.span().length()).sum();
    assert!((along - 600.0 - 6.0 / 3.0_f64.to_radians().tan()).abs() < 0.1, "{along}");
    let last = toolpath.moves.iter().rfind(|m| !m.is_rapid()).expect("there are cuts").to.xy;
    assert_eq!(last, Point::new(10.0, 10.0), "the last round ends where it was entered");
}

#[test]
fn a_ramp_goes_down_no_faster_than_the_plunge_feed() {
    let steep = Cut { ramp_deg: 45.0, plunge: 300.0, ..ramped() };
    let square = Routed { cut: steep, ..rectangle(1, (10.0, 10.0), (60.0, 40.0)) };
    let toolpath = route(&[square], &Setup::default()).expect("a square routes").toolpath;
    for m in toolpath.moves.iter().filter(|m| !m.is_rapid() && m.to.z < m.from.z) {
        let down = m.feed.unwrap_or_default() * (m.from.z - m.to.z) / m.length();
        assert!(down <= 300.0 * (1.0 + 1e-12), "{m:?} goes down at {down}");
    }
}

#[test]
fn an_open_slot_is_ramped_to_and_fro() {
    let setup = Setup::default();
    for length in [200.0, 30.0, 8.0] {
        let slot = Routed { cut: ramped(), ..contour(1, &[(0.0, 0.0), (length, 0.0)], false) };
        let toolpath = route(&[slot], &setup).expect("a slot routes").toolpath;
        assert_safe(&toolpath, &setup);
        assert_eq!(plunges(&toolpath), 0);
        assert!(steepest(&toolpath) <= 3.0 + 1e-3, "{}", steepest(&toolpath));
        for k in 0..=20 {
            assert_eq!(lowest_at(&toolpath, Point::new(length * f64::from(k) / 20.0, 0.0)), -6.0);
        }
    }
    // No room to ramp 2 mm down on 1 mm: straight down.
    let dot = Routed { cut: ramped(), ..contour(1, &[(0.0, 0.0), (0.4, 0.0)], false) };
    assert_eq!(plunges(&route(&[dot], &setup).expect("a dot routes").toolpath), 3);
}

fn with_lead(entry: Entry, whole: bool) -> Routed {
    let lead = Some(Lead { radius_mm: 4.0, left: true, whole });
    let square = rectangle(1, (10.0, 10.0), (60.0, 40.0));
    // Entered in the middle of the lower side, running right; what is on the left is inside.
    let start = ArcSpline::polyline(
        [(40.0, 10.0), (70.0, 10.0), (70.0, 50.0), (10.0, 50.0), (10.0, 10.0)].map(Point::from),
        true,
    );
    Routed { path: start, cut: Cut { entry, ..cut() }, work: Work::Beside { lead, rough: None }, ..square }
}

#[test]
fn leads_touch_the_contour_tangentially() {
    let setup = Setup::default();
    let toolpath = route(&[with_lead(Entry::Plunge, false)], &setup).expect("a square routes").toolpath;
    assert_safe(&toolpath, &setup);
    let arcs: Vec<&Move> = toolpath.moves.iter().filter(|m| m.bulge != 0.0).collect();
    assert_eq!(arcs.len(), 6, "in and out for each of three passes");
    for pair in arcs.chunks(2) {
        assert_eq!(pair[0].to.xy, Point::new(40.0, 10.0));
        assert_eq!(pair[1].from.xy, Point::new(40.0, 10.0));
        assert!(pair[0].span().tangent(1.0).cross((1.0, 0.0).into()).abs() < 1e-12);
        assert!(pair[1].span().tangent(0.0).cross((1.0, 0.0).into()).abs() < 1e-12);
        assert!((pair[0].span().radius() - 4.0).abs() < 1e-12);
    }
}

#[test]
fn a_helix_goes_down_on_the_lead_circle() {
    let setup = Setup::default();
    let toolpath = route(&[with_lead(Entry::Helix, true)], &setup).expect("a square routes").toolpath;
    assert_safe(&toolpath, &setup);
    assert_eq!(plunges(&toolpath), 0);
    assert!(steepest(&toolpath) <= 3.0, "{}", steepest(&toolpath));
    let helix: Vec<&Move> = toolpath.moves.iter().filter(|m| m.bulge != 0.0 && m.to.z < m.from.z).collect();
    // 2 mm at 3 degrees is 38 mm of way: two turns of 25 mm, each in two halves, for each of three passes.
    assert_eq!(helix.len(), 12);
    let centre = Point::new(40.0, 14.0);
    for m in helix {
        assert!((m.to.xy.distance(centre) - 4.0).abs() < 1e-12, "{m:?}");
    }
    // Without room for the whole circle: a ramp.
    let toolpath = route(&[with_lead(Entry::Helix, false)], &setup).expect("a square routes").toolpath;
    assert_eq!(plunges(&toolpath), 0);
    assert!(toolpath.moves.iter().all(|m| m.bulge == 0.0 || m.to.z >= m.from.z), "no helix");
}

#[test]
fn a_finishing_pass_runs_at_full_depth_after_the_rough_cut() {
    let setup = Setup::default();
    let rough = rectangle(1, (9.5, 9.5), (61.0, 41.0)).path;
    let work = Work::Beside { lead: None, rough: Some(rough) };
    let square = Routed { work, ..rectangle(1, (10.0, 10.0), (60.0, 40.0)) };
    let toolpath = route(&[square], &setup).expect("a square routes").toolpath;
    assert_safe(&toolpath, &setup);
    let on_finish = |m: &&Move| {
        m.span().length() > 30.0
            && m.from.xy.x >= 10.0
            && m.from.xy.y >= 10.0
            && m.to.xy.x >= 10.0
            && m.to.xy.y >= 10.0
            && !m.is_rapid()
            && m.to.xy.x <= 70.0
            && m.to.xy.y <= 50.0
    };
    let levels: Vec<f64> = toolpath.moves.iter().filter(on_finish).map(|m| m.to.z).collect();
    assert_eq!(levels, [-6.0; 4]);
}

#[test]
fn pass_by_pass_cuts_every_contour_at_one_depth_before_the_next() {
    let setup = Setup { order: Order::ByPass, ..Setup::default() };
    let pair = [rectangle(1, (0.0, 0.0), (20.0, 20.0)), rectangle(2, (40.0, 0.0), (20.0, 20.0))];
    for entry in [Entry::Plunge, Entry::Ramp] {
        let pair = pair.clone().map(|r| Routed { cut: Cut { entry, ..cut() }, ..r });
        let routing = route(&pair, &setup).expect("a pair routes");
        assert_safe(&routing.toolpath, &setup);
        assert_eq!(routing.safe_starts.len(), 6, "each contour is begun once a pass");
        let levels = routing.safe_starts.iter().map(|&i| {
            let next = routing.safe_starts.iter().find(|&&j| j > i).copied();
            let moves = &routing.toolpath.moves[i..next.unwrap_or(routing.toolpath.moves.len())];
            moves.iter().map(|m| m.to.z).fold(f64::INFINITY, f64::min)
        });
        assert_eq!(levels.collect::<Vec<_>>(), [-2.0, -2.0, -4.0, -4.0, -6.0, -6.0]);
    }
}

#[test]
fn a_hole_of_the_cutters_size_is_drilled_in_pecks() {
    let setup = Setup::default();
    let hole = Routed { work: Work::Drill, ..rectangle(1, (7.0, 7.0), (6.0, 6.0)) };
    let toolpath = route(&[hole], &setup).expect("a hole is drilled").toolpath;
    assert_safe(&toolpath, &setup);
    let heights: Vec<f64> = toolpath.moves.iter().filter(|m| m.from.xy == m.to.xy).map(|m| m.to.z).collect();
    assert_eq!(heights, [-2.0, 5.0, -4.0, 5.0, -6.0, 5.0]);
    assert!(
        toolpath
            .moves
            .iter()
            .filter(|m| m.from.z < 5.0 || m.to.z < 5.0)
            .all(|m| m.from.xy == Point::new(10.0, 10.0))
    );
}

proptest! {
    /// Whatever the size, the angle and the passes: every place of the contour is cut to depth, no slope is steeper
    /// than asked, and the promises hold.
    #[test]
    fn ramps_of_all_sizes_are_safe_and_complete(
        (w, h) in (3.0..200.0_f64, 3.0..200.0_f64), ramp_deg in 1.0..30.0_f64, pass_mm in 0.5..6.0_f64,
        closed in any::<bool>(),
    ) {
        let setup = Setup::default();
        let cut = Cut { ramp_deg, pass_mm, ..ramped() };
        let shape = contour(1, &[(5.0, 5.0), (5.0 + w, 5.0), (5.0 + w, 5.0 + h), (5.0, 5.0 + h)], closed);
        let shape = Routed { cut, ..shape };
        let toolpath = route(std::slice::from_ref(&shape), &setup).expect("it routes").toolpath;
        assert_safe(&toolpath, &setup);
        prop_assert!(plunges(&toolpath) > 0 || steepest(&toolpath) <= ramp_deg + 0.2, "{}", steepest(&toolpath));
        for span in shape.path.spans() {
            for t in [0.0, 0.1, 0.37, 0.5, 0.9] {
                prop_assert!((lowest_at(&toolpath, span.at(t)) + 6.0).abs() < 1e-9, "at {:?}", span.at(t));
            }
        }
    }
}
