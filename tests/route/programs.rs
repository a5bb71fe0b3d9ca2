//! Whole programs, as they are written.

use insta::assert_snapshot;
use kurbo::Point;
use ribband::gcode::{Header, write};
use ribband::geom::ArcSpline;
use ribband::machine::Machine;
use ribband::route::{
    Cut, Entry, Held, Outline, Routed, Setup, Side, TabNumber, Tabs, Thickness, air_cut, beside, frame, route,
};
use ribband::toolpath::Toolpath;

use crate::sides::{circle, outline};
use crate::{assert_safe, cut};

fn setup() -> Setup {
    Setup { thickness: Some(Thickness { thinnest: 6.0, thickest: 6.0 }), ..Setup::default() }
}

/// The program for some lines on the machine that is built in.
fn program(title: &str, routed: &[Routed]) -> String {
    let setup = setup();
    let routing = route(routed, &setup).expect("it routes");
    assert_safe(&routing.toolpath, &setup);
    written(title, &routing.toolpath, setup.heights().clearance, routing.notes)
}

fn written(title: &str, toolpath: &Toolpath, clearance: f64, notes: Vec<String>) -> String {
    let header = Header {
        title: title.into(),
        xy_zero: "lower left of the finished parts".into(),
        z_zero: "top of the stock".into(),
        cutter: "6 mm".into(),
        clearance,
        chord_error: 0.0,
        notes,
        marks: Vec::new(),
        curves: Vec::new(),
    };
    let machine = Machine::named("shop-router").expect("it is built in");
    write(toolpath, &header, &machine).expect("it writes")
}

fn box_of(x: f64, y: f64, w: f64, h: f64) -> ArcSpline {
    ArcSpline::polyline([(x, y), (x + w, y), (x + w, y + h), (x, y + h)].map(Point::from), true)
}

fn through(side: Side) -> Cut {
    Cut { depth_mm: 6.2, pass_mm: 3.1, side, held: Some(Held::Vacuum), ..cut() }
}

#[test]
fn a_nested_part() {
    let cut = through(Side::Outside);
    let paths = [box_of(0.0, 0.0, 80.0, 60.0), circle(40.0, 30.0, 20.0), box_of(34.0, 24.0, 12.0, 12.0)];
    let outlines: Vec<Outline> =
        paths.into_iter().zip(1..).map(|(path, id)| Outline { id, path, cut: cut.clone() }).collect();
    assert_snapshot!(program("nested part", &beside(&outlines, 0.01).expect("it has sides").routed));
}

#[test]
fn a_tabbed_part() {
    let tabs = Some(Tabs { number: TabNumber::Count(2), length_mm: 6.0, height_mm: 1.5 });
    let cut = Cut { tabs, held: None, entry: Entry::Ramp, ramp_deg: 5.0, ..through(Side::Outside) };
    let outlines = [Outline { id: 1, path: box_of(0.0, 0.0, 80.0, 40.0), cut }];
    assert_snapshot!(program("tabbed part", &beside(&outlines, 0.01).expect("it has sides").routed));
}

#[test]
fn a_ramped_slot() {
    let path = ArcSpline::polyline([(0.0, 0.0), (60.0, 0.0), (60.0, 25.0)].map(Point::from), false);
    let cut = Cut { depth_mm: 4.0, pass_mm: 2.0, entry: Entry::Ramp, ..cut() };
    assert_snapshot!(program("ramped slot", &[Routed { id: 1, path, cut, ..Routed::default() }]));
}

#[test]
fn a_drilled_plate() {
    let holes = [(10.0, 10.0), (50.0, 10.0), (10.0, 30.0)];
    let mut outlines: Vec<Outline> = holes
        .into_iter()
        .zip(2..)
        .map(|((x, y), id)| outline(id, circle(x, y, 3.0), Side::Outside))
        .collect();
    outlines.push(outline(1, box_of(0.0, 0.0, 60.0, 40.0), Side::Outside));
    outlines.iter_mut().for_each(|o| o.cut = through(Side::Outside));
    assert_snapshot!(program("drilled plate", &beside(&outlines, 0.01).expect("it has sides").routed));
}

#[test]
fn dry_runs_are_programs_whose_spindle_never_turns() {
    let path = ArcSpline::polyline([(0.0, 0.0), (60.0, 0.0), (60.0, 25.0)].map(Point::from), false);
    let slot = Routed { id: 1, path, cut: Cut { depth_mm: 4.0, ..cut() }, ..Routed::default() };
    let setup = setup();
    let routing = route(std::slice::from_ref(&slot), &setup).expect("it routes");
    let air = air_cut(&routing.toolpath, &setup);
    let text = written("air cut", &air.toolpath, setup.heights().clearance + air.lift_mm, Vec::new());
    assert!(!text.contains(" M3"), "{text}");
    let framed = frame(&routing.toolpath, &slot.cut, &setup).expect("a frame is traced");
    let text = written("frame", &framed, setup.heights().clearance, Vec::new());
    assert!(!text.contains(" M3") && !text.contains("Z-"), "{text}");
}
