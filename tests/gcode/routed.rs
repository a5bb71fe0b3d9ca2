//! Real outlines, routed, written for every machine, and read back: the cut is the outline, within rounding.

use kurbo::Point;
use ribband::gcode::{Header, write};
use ribband::geom::{ArcSpline, Span};
use ribband::machine;
use ribband::route::{Cut, Entry, Held, Routed, Setup, route};

use crate::common::{machine, understood};

/// A fixture's vertices, moved to stand beside the origin.
fn outline(name: &str) -> ArcSpline {
    let file = format!("{}/fixtures/outlines/{name}.csv", env!("CARGO_MANIFEST_DIR"));
    let text = std::fs::read_to_string(&file).expect(&file);
    let numbers =
        |line: &str| line.split_once(',').and_then(|(x, y)| x.trim().parse().ok().zip(y.trim().parse().ok()));
    let mut points: Vec<Point> = text.lines().filter_map(numbers).map(|(x, y)| Point::new(x, y)).collect();
    let closed = points.first() == points.last();
    if closed {
        points.pop();
    }
    let corner = ArcSpline::polyline(points.clone(), closed).bbox().expect("points").origin();
    ArcSpline::polyline(points.into_iter().map(|p| p - corner.to_vec2()), closed)
}

#[test]
fn outlines_come_back_from_every_machine() {
    for name in ["analytic/keyhole-a-s05-n02", "analytic/star-a-s05-clean", "analytic/logspiral-a-s05-q01"] {
        let path = outline(name);
        let cut = Cut {
            depth_mm: 5.0,
            pass_mm: 3.0,
            feed: 1500.0,
            plunge: 500.0,
            spindle_rpm: 16_000.0,
            cutter_mm: 3.0,
            entry: Entry::Plunge,
            held: Some(Held::Vacuum),
            ..Cut::default()
        };
        let setup = Setup::default();
        let routed = Routed { id: 1, path: path.clone(), cut, ..Routed::default() };
        let toolpath = route(&[routed], &setup).expect("can be routed").toolpath;
        let header = Header { clearance: setup.heights().clearance, ..Header::default() };
        for machine in machine::names().map(machine) {
            let text = write(&toolpath, &header, &machine).expect("can be written");
            let program = understood(&text, &machine);
            for depth in [-2.5, -5.0] {
                let at_depth =
                    |m: &&ribband::toolpath::Move| (m.from.z - depth).abs() < 0.002 && !m.is_rapid();
                let cuts: Vec<Span> =
                    program.toolpath.moves.iter().filter(at_depth).map(|m| m.span()).collect();
                let off = |p: Point| cuts.iter().map(|s| s.nearest(p).distance).fold(f64::INFINITY, f64::min);
                let worst = path.vertices.iter().map(|v| off(v.at)).fold(0.0, f64::max);
                assert!(worst <= 1.5 * machine.last_place(), "{name} on {}: {worst} mm", machine.name);
                let length: f64 = cuts.iter().map(Span::length).sum();
                let slack = cuts.len() as f64 * machine.last_place();
                assert!((length - path.length()).abs() <= slack, "{name} on {}: once around", machine.name);
            }
            let low =
                |m: &&ribband::toolpath::Move| m.is_rapid() && m.to.z.min(m.from.z) < header.clearance - 0.01;
            let falling = program.toolpath.moves.iter().filter(low).filter(|m| m.to.z <= m.from.z).count();
            assert_eq!(falling, 0, "no rapid goes down or across below the clearance height");
        }
    }
}
