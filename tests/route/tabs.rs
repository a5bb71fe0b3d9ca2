//! Tabs: where they stand and what they leave.

use kurbo::{Point, Vec2};
use ribband::geom::{ArcSpline, Vertex};
use ribband::route::{Cut, Entry, Routed, Setup, TabNumber, Tabs, Thickness, route};
use ribband::toolpath::Toolpath;

use crate::{assert_safe, cut, rectangle};

const TABS: Tabs = Tabs { number: TabNumber::Count(4), length_mm: 8.0, height_mm: 2.0 };

fn setup() -> Setup {
    Setup { thickness: Some(Thickness { thinnest: 6.0, thickest: 6.0 }), ..Setup::default() }
}

fn tabbed(entry: Entry) -> Cut {
    Cut { depth_mm: 6.2, tabs: Some(TABS), entry, ..cut() }
}

/// The stretches of a closed path over which the cutter never goes below `z`: the ways where they begin and end.
fn bridges(toolpath: &Toolpath, path: &ArcSpline, z: f64) -> Vec<(Point, f64)> {
    const STEP: f64 = 0.02;
    let mut found: Vec<(Point, f64)> = Vec::new();
    let mut before = false;
    for span in path.spans() {
        let count = (span.length() / STEP).floor();
        for k in 0..count as usize {
            let at = span.at(k as f64 / count);
            let bridge = crate::lowest_at(toolpath, at) > z;
            if bridge && !before {
                found.push((at, 0.0));
            }
            if let (true, Some(last)) = (bridge, found.last_mut()) {
                last.1 += span.length() / count;
            }
            before = bridge;
        }
    }
    // A bridge over the path's first vertex is one.
    if before && found.len() > 1 && crate::lowest_at(toolpath, path.vertices[0].at) > z {
        found.swap_remove(0);
    }
    found
}

#[test]
fn tabs_keep_their_length_at_the_top_whatever_the_entry() {
    for entry in [Entry::Plunge, Entry::Ramp] {
        let square = Routed { cut: tabbed(entry), ..rectangle(1, (10.0, 10.0), (100.0, 80.0)) };
        let toolpath =
            route(std::slice::from_ref(&square), &setup()).expect("a tabbed square routes").toolpath;
        assert_safe(&toolpath, &setup());
        // At the tab's top (2 mm above the underside at -6) the centre stays up for the tab and a cutter's width.
        let found = bridges(&toolpath, &square.path, -4.0 - 1e-6);
        assert_eq!(found.len(), 4, "{found:?}");
        for (at, length) in found {
            assert!((length - 14.0).abs() < 0.1, "a tab at {at} is {length} mm along the centre's path");
        }
        // At the underside the slopes of 30 degrees add their feet.
        let feet = 2.0 * 2.0 / 30.0_f64.to_radians().tan();
        for (_, length) in bridges(&toolpath, &square.path, -6.0 - 1e-6) {
            assert!((length - 14.0 - feet).abs() < 0.1, "{length}");
        }
    }
}

#[test]
fn only_passes_that_reach_the_tabs_climb_over_them() {
    let square = Routed { cut: tabbed(Entry::Plunge), ..rectangle(1, (10.0, 10.0), (100.0, 80.0)) };
    let toolpath = route(&[square], &setup()).expect("a tabbed square routes").toolpath;
    let climbs = toolpath.moves.iter().filter(|m| m.to.z > m.from.z && m.span().length() > 0.0);
    let from: Vec<f64> = climbs.map(|m| m.from.z).collect();
    // Four passes of 1.55 mm; the third, at -4.65, and the fourth, at -6.2, are below the tabs' top at -4.
    assert_eq!(from.len(), 8, "{from:?}");
    assert!(from.iter().all(|&z| z < -4.0));
}

#[test]
fn tabs_stand_on_the_calm_sides_of_a_shape() {
    // A stadium: two straight sides of 60 and two half circles of radius 15.
    let vertex = |x, y, bulge| Vertex { at: Point::new(x, y), bulge };
    let path = ArcSpline {
        vertices: vec![
            vertex(0.0, 0.0, 0.0),
            vertex(60.0, 0.0, 1.0),
            vertex(60.0, 30.0, 0.0),
            vertex(0.0, 30.0, 1.0),
        ],
        closed: true,
    };
    let number = TabNumber::Count(2);
    let cut = Cut { tabs: Some(Tabs { number, ..TABS }), ..tabbed(Entry::Plunge) };
    let stadium = Routed { id: 1, path: path.clone(), cut, ..Routed::default() };
    let toolpath = route(&[stadium], &setup()).expect("a stadium routes").toolpath;
    for (at, length) in bridges(&toolpath, &path, -4.0 - 1e-6) {
        let straight =
            (at.y == 0.0 || at.y == 30.0) && at.x >= 0.0 && at.x + length * (1.0 - at.y / 15.0) <= 60.0;
        assert!(straight, "a tab of {length} begins at {at}");
    }
}

#[test]
fn tabs_stand_on_a_round_part_too() {
    let ring = (0..2).map(|k| Vertex {
        at: Point::new(50.0, 50.0) + Vec2::from_angle(f64::from(k) * std::f64::consts::PI) * 40.0,
        bulge: 1.0,
    });
    let path = ArcSpline { vertices: ring.collect(), closed: true };
    let number = TabNumber::Spacing(80.0);
    let cut = Cut { tabs: Some(Tabs { number, ..TABS }), ..tabbed(Entry::Ramp) };
    let disc = Routed { id: 1, path: path.clone(), cut, ..Routed::default() };
    let toolpath = route(&[disc], &setup()).expect("a disc routes").toolpath;
    assert_safe(&toolpath, &setup());
    assert_eq!(bridges(&toolpath, &path, -4.0 - 1e-6).len(), 3, "251 mm of contour, one tab every 80");
}
