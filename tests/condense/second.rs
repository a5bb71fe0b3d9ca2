//! What condensing makes for machines of every kind, read the same by a second parser.

use kurbo::{Point, Vec2};
use ribband::condense::condense;
use ribband::gcode::{Dialect, interpret, read};
use ribband::geom::ArcSpline;
use ribband::machine::{self, ArcStyle, Machine};
use ribband::num::Tolerance;

use crate::emit::{Arcs, Form, program};
use crate::second_reader::agree;

/// A wavy ring in short lines, and an open stroke.
fn paths() -> [ArcSpline; 2] {
    let ring = |k: u32| {
        let angle = std::f64::consts::TAU * f64::from(k) / 100.0;
        Point::new(60.0, 60.0) + Vec2::from_angle(angle) * (40.0 + 6.0 * (3.0 * angle).sin())
    };
    let stroke = |k: u32| Point::new(20.0 + f64::from(k), 120.0 + 8.0 * (f64::from(k) / 9.0).sin());
    [ArcSpline::polyline((0..100).map(ring), true), ArcSpline::polyline((0..40).map(stroke), false)]
}

/// The built-in machines, and the first with each style of arcs.
fn machines() -> Vec<Machine> {
    let mut all: Vec<Machine> =
        machine::names().map(|name| Machine::named(name).expect("built in")).collect();
    for style in [ArcStyle::CentreAbsolute, ArcStyle::Radius] {
        let mut machine = all[0].clone();
        machine.name = format!("{} {style:?}", machine.name);
        machine.arcs.style = style;
        machine.arcs.whole_circles &= style != ArcStyle::Radius;
        all.push(machine);
    }
    all
}

#[test]
fn condensed_programs_of_every_form_read_the_same_by_both_parsers() {
    let tolerance = Tolerance::new(0.05).expect("above zero");
    let forms = [(false, false), (true, true), (false, true), (true, false)];
    for (k, machine) in machines().into_iter().enumerate() {
        for (inches, incremental) in forms.into_iter().cycle().skip(k).take(1) {
            let from_zero = machine.arcs.style == ArcStyle::CentreAbsolute;
            let arcs = if from_zero { Arcs::CentreFromZero } else { Arcs::Centre };
            let form = Form { inches, incremental, arcs };
            let condensed = condense(&program(&paths(), form), &machine, tolerance).expect("it is condensed");
            let what = format!("{}, {form:?}:\n{}", machine.name, condensed.text);
            assert!(condensed.bettered >= 6, "{what}");
            let words = read(&condensed.text).expect("it reads");
            let program = interpret(&words, &Dialect::of(&machine)).expect("every word is known");
            assert_eq!(agree(&condensed.text, &program, &machine, 1e-3), Ok(()), "{what}");
        }
    }
}
