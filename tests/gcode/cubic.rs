//! The cubic move, read and written.

use kurbo::{CubicBez, ParamCurve, Point};
use proptest::prelude::*;
use ribband::error::Kind;
use ribband::gcode::read::CUBIC_ERROR;
use ribband::gcode::{self, Curve, Dialect, Header, write};
use ribband::geom::{Span, arcs_of};

use crate::common::{Path, at, header, machine, understood};

const START: &str = "G17 G21 G90 G94\nG0 X10 Y0 Z5\nG1 Z-1 F300\n";

/// The places of a curve at a thousand parameters.
fn places(cubic: CubicBez) -> Vec<Point> {
    (0..=1000).map(|k| cubic.eval(f64::from(k) / 1000.0)).collect()
}

fn to_spans(spans: &[Span], p: Point) -> f64 {
    spans.iter().map(|span| span.nearest(p).distance).fold(f64::INFINITY, f64::min)
}

/// The largest sampled distance between a curve and spans, both ways.
fn apart(cubic: CubicBez, spans: &[Span]) -> f64 {
    let there = places(cubic).into_iter().map(|p| to_spans(spans, p)).fold(0.0, f64::max);
    let fine: Vec<Point> = (0..=20_000).map(|k| cubic.eval(f64::from(k) / 20_000.0)).collect();
    let on_curve = |p: Point| {
        fine.windows(2)
            .map(|ends| Span::line(ends[0], ends[1]).nearest(p).distance)
            .fold(f64::INFINITY, f64::min)
    };
    let back = spans.iter().flat_map(|span| (0..4).map(|k| span.at(f64::from(k) / 4.0))).map(on_curve);
    back.fold(there, f64::max)
}

/// A quarter circle of radius 10 as common practice draws it: control points (4/3)(sqrt 2 - 1) radii along the tangents,
/// whose radius is too large by 2.7253e-4 of it at most (Goldapp 1991, from memory).
#[test]
fn a_quarter_circle_is_read_as_the_curve_that_it_is() {
    let program = understood(
        &format!("{START}G5 X0 Y10 I0 J5.522847 P5.522847 Q0 F600\nM2\n"),
        &machine("fast-router"),
    );
    let moves = &program.toolpath.moves[1..];
    assert!(moves.len() > 2 && moves.iter().all(|m| m.line == 4 && m.feed == Some(600.0)));
    assert_eq!((moves[0].from, moves[moves.len() - 1].to), (at(10.0, 0.0, -1.0), at(0.0, 10.0, -1.0)));
    let radii =
        moves.iter().flat_map(|m| (0..=10).map(|k| m.span().at(f64::from(k) / 10.0).to_vec2().hypot()));
    let (least, most) = radii.fold((f64::INFINITY, 0.0_f64), |r, x| (r.0.min(x), r.1.max(x)));
    let over = 10.0 * 2.7253e-4;
    assert!(
        least > 10.0 - CUBIC_ERROR - 1e-6 && (most - 10.0 - over).abs() < CUBIC_ERROR + 1e-6,
        "{least} {most}"
    );
    assert!(moves.windows(2).all(|pair| pair[0].to == pair[1].from), "in one piece");
    assert!((program.approximated - CUBIC_ERROR).abs() < 1e-15);
    assert_eq!(program.motion_blocks, 3, "one line is one block");
}

#[test]
fn inches_and_increments_give_the_same_curve() {
    let of = |text: &str| understood(text, &machine("fast-router")).toolpath.moves;
    let absolute = of(&format!("{START}G5 X0 Y10 I0 J5 P5 Q0 F600\nM2\n"));
    let increments = of(&format!("{START}G91\nG5 X-10 Y10 I0 J5 P5 Q0 F600\nM2\n"));
    assert_eq!(absolute.len(), increments.len());
    for (a, b) in absolute.iter().zip(&increments) {
        assert!(a.to.xy.distance(b.to.xy) < 1e-12 && (a.bulge - b.bulge).abs() < 1e-12);
    }
    let inches = of("G17 G20 G90 G94\nG0 X10 Y0 Z5\nG1 Z-1 F300\nG5 X0 Y10 I0 J5 P5 Q0 F600\nM2\n");
    assert!((inches[inches.len() - 1].to.xy.y - 254.0).abs() < 1e-9);
    let middle = CubicBez::new((10.0, 0.0), (10.0, 5.0), (5.0, 10.0), (0.0, 10.0)).eval(0.5);
    let spans: Vec<Span> = inches[1..].iter().map(|m| m.span()).collect();
    assert!(to_spans(&spans, (middle.to_vec2() * 25.4).to_point()) <= CUBIC_ERROR);
}

#[test]
fn what_is_straight_is_one_line() {
    let program = understood(
        &format!("{START}G5 X13 Y4 I1 J1.3333333333 P-1 Q-1.3333333333 F600\nM2\n"),
        &machine("fast-router"),
    );
    assert_eq!(program.toolpath.moves.len(), 2);
    assert!(program.toolpath.moves[1].span().is_line());
}

#[test]
fn what_it_leaves_open_is_refused() {
    for (name, block, said) in [
        ("shop-router", "G5 X0 Y10 I0 J5 P5 Q0", "another thing on others"),
        ("fast-router", "G5 X0 Y10 I0 J5 P5", "needs I and J"),
        ("fast-router", "G5 X0 Y10 P5 Q0", "needs I and J"),
        ("fast-router", "G5 X0 Y10 Z-2 I0 J5 P5 Q0", "changes height"),
        ("fast-router", "G18 G5 X0 Y10 I0 J5 P5 Q0", "XY plane only"),
        ("fast-router", "G5 X0 Y10 I0 J5 P5 Q0 R2", "R2 belongs to nothing"),
        ("fast-router", "G5 X0 Y10 I0 J5e P5 Q0", "E"),
        ("fast-router", "G5 X0 Y10 I9999999999 J5 P5 Q0", "a thousand kilometres"),
        ("fast-router", "G5.1 X0 Y10 I0 J5", "not known"),
    ] {
        let text = format!("{START}{block} F600\nM2\n");
        let dialect = Dialect::of(&machine(name));
        let read = gcode::read(&text).and_then(|words| gcode::interpret(&words, &dialect));
        let error = read.map(|program| program.blocks).expect_err(block);
        assert!(error.to_string().contains(said), "{block}: {error}");
    }
    let unplaced = "G17 G21 G90 G94\nG5 X0 Y10 I0 J5 P5 Q0 F600\nM2\n";
    let words = gcode::read(unplaced).expect("words");
    let error = gcode::interpret(&words, &Dialect::of(&machine("fast-router"))).expect_err("no start");
    assert!(error.kind == Kind::Refused && error.to_string().contains("has not stated"), "{error}");
}

/// Moves that are one curve become one block, whose control points are rounded to the last place; others stay.
#[test]
fn a_curve_is_written_as_one_block() {
    let cubic = CubicBez::new((10.0, 10.0), (10.0, 15.12344), (14.0, 20.0), (20.0, 20.0));
    let spans = arcs_of(cubic, 0.001);
    let mut path = Path::from(at(0.0, 0.0, 15.0)).rapid(10.0, 10.0, 15.0).plunge(-1.0);
    for span in &spans {
        path = path.arc(span.end.x, span.end.y, span.bulge);
    }
    let toolpath = path.cut(30.0, 20.0, -1.0).rapid(30.0, 20.0, 15.0).done();
    let curve = Curve { moves: 2..2 + spans.len(), control: [cubic.p1, cubic.p2] };
    let header = Header { curves: vec![curve], ..header() };
    let text = write(&toolpath, &header, &machine("fast-router")).expect("a program");
    assert!(text.contains("\nG5 X20 Y20 I0 J5.1234 P-6 Q0 F1200\nG1 X30\n"), "{text}");
    let read = understood(&text, &machine("fast-router"));
    let bent: Vec<Span> =
        read.toolpath.moves.iter().map(|m| m.span()).filter(|span| !span.is_line()).collect();
    assert!(apart(cubic, &bent) <= CUBIC_ERROR + 0.0001, "{}", apart(cubic, &bent));
    let error = write(&toolpath, &header, &machine("shop-router")).expect_err("no word");
    assert!(error.to_string().contains("no word for a cubic move"), "{error}");
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(60))]

    /// Cusps, loops and points on one another among them: whole numbers in a small square.
    #[test]
    fn arcs_keep_to_any_cubic(c in prop::array::uniform8(-3..=3_i8), size in 0.01..40.0_f64, within in 0.0005..0.1_f64) {
        let p = |i: usize| Point::new(f64::from(c[i]), f64::from(c[i + 1])).to_vec2() * size;
        let cubic = CubicBez::new(p(0).to_point(), p(2).to_point(), p(4).to_point(), p(6).to_point());
        let spans = arcs_of(cubic, within);
        prop_assert_eq!((spans[0].start, spans[spans.len() - 1].end), (cubic.p0, cubic.p3));
        prop_assert!(spans.windows(2).all(|pair| pair[0].end == pair[1].start));
        prop_assert!(spans.iter().all(|span| span.bulge.abs() <= 1.0));
        let far = places(cubic).into_iter().map(|p| to_spans(&spans, p)).fold(0.0, f64::max);
        prop_assert!(far <= within * (1.0 + 1e-6), "{} of {}", far, within);
        // In order: the length of the spans is that of the curve, but for what the distance allows.
        let length: f64 = places(cubic).windows(2).map(|pair| pair[0].distance(pair[1])).sum();
        let spanned: f64 = spans.iter().map(|span| span.length()).sum();
        prop_assert!((spanned - length).abs() <= 0.01 * length + 4.0 * within, "{} for {}", spanned, length);
    }
}

/// Their number grows with the cube root of one over the distance, as theory has it for arcs.
#[test]
fn a_thousandth_of_the_distance_takes_ten_times_the_arcs() {
    let cubic = CubicBez::new((0.0, 0.0), (30.0, 0.0), (60.0, 20.0), (60.0, 60.0));
    let few = arcs_of(cubic, 0.01).len() as f64;
    let many = arcs_of(cubic, 0.000_01).len() as f64;
    assert!(many / few > 5.0 && many / few < 20.0, "{few} and {many}");
}
