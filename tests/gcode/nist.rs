//! The worked arcs and tables of NISTIR 6556, and its rules for modes and the order within a line.

use approx::assert_relative_eq;
use ribband::gcode::read::What;
use ribband::gcode::{Dialect, Program, interpret, read};

use crate::common::{machine, understood};

/// What `text` says on the default machine.
fn shop(text: &str) -> Program {
    understood(text, &machine("shop-router"))
}

/// The error for `text` on the default machine.
pub(crate) fn refusal(text: &str) -> String {
    let dialect = Dialect::of(&machine("shop-router"));
    let error = read(text).and_then(|words| interpret(&words, &dialect)).expect_err(text);
    error.to_string().replace('\n', " /")
}

/// Length and area of the cutting moves, closed by their chord.
fn length_and_area(program: &Program) -> (f64, f64) {
    let cuts = program.toolpath.moves.iter().filter(|m| !m.is_rapid());
    cuts.fold((0.0, 0.0), |(length, area), m| (length + m.length(), area + m.span().double_area() / 2.0))
}

/// NISTIR 6556, 3.5.3.2: centre (10, 11), radius 5. Sweep and length follow from them.
#[test]
fn the_worked_arc_by_centre() {
    let program = shop("g21 g90 g94 g0 x7 y7 z0\ng17 g2 x10 y16 i3 j4 f100\nm2");
    let arc = program.toolpath.moves[0].span();
    let centre = arc.centre().expect("an arc");
    assert_relative_eq!(centre.x, 10.0, epsilon = 1e-12);
    assert_relative_eq!(centre.y, 11.0, epsilon = 1e-12);
    assert_relative_eq!(arc.radius(), 5.0, epsilon = 1e-12);
    assert_relative_eq!(arc.sweep().to_degrees(), -143.130_102_35, epsilon = 1e-8);
    assert_relative_eq!(arc.length(), 12.490_457_724, epsilon = 1e-9);
}

/// NISTIR 6556, table 10: the interpreter's centre is printed as (1.5000, 7.8476).
#[test]
fn the_worked_helix_by_radius() {
    let program = shop("g21 g90 g17 g94 g0 x3 y1 z0\ng2 x0 r7.01 z0.5 f100\nm2");
    let helix = program.toolpath.moves[0];
    let centre = helix.span().centre().expect("an arc");
    assert_relative_eq!(centre.x, 1.5, epsilon = 1e-12);
    assert_relative_eq!(centre.y, 7.847_634_628, epsilon = 1e-9);
    assert_relative_eq!(helix.span().sweep().to_degrees(), -24.711_389_417, epsilon = 1e-9);
    assert_eq!((helix.from.z, helix.to.z), (0.0, 0.5));
}

/// NISTIR 6556, tables 12 and 13: an edge, and the path of a one-inch cutter around it. Lengths and areas
/// are the closed forms of a 3-4-5 triangle grown by 1 and by 1.5.
#[test]
fn the_edge_and_the_cutters_path_around_it() {
    use std::f64::consts::PI;
    let edge = "g20 g90 g17 g94 g0 x2 y3 z0\ng2 x3 y2 j-1 f20\ng1 y-1\ng2 x2 y-2 i-1\ng1 x-2\n\
                g2 x-2.6 y-0.2 j1\ng1 x1.4 y2.8\ng2 x2 y3 i0.6 j-0.8\nm2";
    let around = "g20 g90 g17 g94 g0 x2 y3.5 z0\ng2 x3.5 y2 j-1.5 f20\ng1 y-1\ng2 x2 y-2.5 i-1.5\ng1 x-2\n\
                  g2 x-2.9 y0.2 j1.5\ng1 x1.1 y3.2\ng2 x2 y3.5 i0.9 j-1.2\nm2";
    for (text, length, area) in
        [(edge, 12.0 + 2.0 * PI, 18.0 + PI), (around, 12.0 + 3.0 * PI, 24.0 + 2.25 * PI)]
    {
        let program = shop(text);
        let (read_length, read_area) = length_and_area(&program);
        assert_relative_eq!(read_length, length * 25.4, epsilon = 1e-9);
        assert_relative_eq!(read_area, -area * 25.4 * 25.4, epsilon = 1e-8);
        assert_eq!((program.motion_blocks, program.arc_flaws.len()), (8, 0));
    }
}

#[test]
fn whole_circles_and_long_arcs_are_two_moves() {
    let program = shop("G21 G90 G17 G94 G0 X10 Y0 Z0\nG3 X10 Y0 I-10 J0 F100\nG2 X0 Y10 I-10 J0\nM2");
    let moves = &program.toolpath.moves;
    assert_eq!(moves.iter().map(|m| m.line).collect::<Vec<_>>(), [2, 2, 3, 3]);
    assert_relative_eq!(moves[0].to.xy.x, -10.0, epsilon = 1e-12);
    assert_relative_eq!(moves[0].bulge, 1.0, epsilon = 1e-12);
    // From 0 clockwise to 90 degrees is three quarters of a turn.
    let sweep: f64 = moves[2..].iter().map(|m| m.span().sweep().to_degrees()).sum();
    assert_relative_eq!(sweep, -270.0, epsilon = 1e-9);
    assert_eq!(program.motion_blocks, 3);
}

#[test]
fn a_negative_radius_is_the_long_way_round() {
    let long = shop("G21 G90 G17 G94 G0 X0 Y0 Z0\nG3 X10 Y0 R-10 F100\nM2");
    let sweep: f64 = long.toolpath.moves.iter().map(|m| m.span().sweep().to_degrees()).sum();
    assert_relative_eq!(sweep, 300.0, epsilon = 1e-9);
}

/// NISTIR 6556, 3.5.3: clockwise as seen from the positive end of the plane's normal. In G18 that is from
/// +Y, where X points down when Z points right.
#[test]
fn arcs_in_the_other_planes() {
    let program = shop("G21 G90 G94 G0 X0 Y0 Z0\nG18 G3 X10 Z0 I5 K0 F100\nM2");
    let half = program.toolpath.moves.iter().find(|m| (m.to.xy.x - 5.0).abs() < 0.2).expect("the middle");
    assert!(half.to.z > 4.9, "counter-clockwise from Z towards X is over the top: {half:?}");
    let length: f64 = program.toolpath.moves.iter().map(|m| m.length()).sum();
    assert_relative_eq!(length, 5.0 * std::f64::consts::PI, max_relative = 2e-4);
    assert!(program.approximated > 0.0 && program.toolpath.moves.iter().all(|m| m.span().is_line()));
}

#[test]
fn the_order_within_a_line_is_that_of_the_table() {
    let program = shop("G21 G90 G94 G0 Z5\nX0 Y0\nG1 X10 G4 P2 F100 M3 S9000 T4 M6\nM2");
    let events: Vec<_> = program.events.iter().map(|e| (e.line, e.what.clone())).collect();
    let third = |what| (3, what);
    assert!(events.contains(&third(What::CutterChange { number: Some(4) })), "{events:?}");
    let place = |what: &What| events.iter().position(|(_, other)| other == what).expect("there");
    let on = place(&What::SpindleOn { rpm: 9000.0, clockwise: true });
    assert!(
        place(&What::CutterChange { number: Some(4) }) < on,
        "the change stops the spindle, so it comes first"
    );
    assert!(on < place(&What::Dwell { seconds: Some(2.0) }));
}

#[test]
fn inverse_time_is_one_over_minutes() {
    let program = shop("G21 G90 G0 X0 Y0 Z0\nG93 G1 X10 F60\nM2");
    assert_relative_eq!(program.toolpath.moves[0].feed.expect("a cut"), 600.0, epsilon = 1e-9);
    assert_eq!(
        refusal("G21 G90 G0 X0 Y0 Z0\nG93 G1 X10 F60\nX20\nM2"),
        "line 3: in inverse time (G93) every move needs its own F"
    );
}

#[test]
fn increments_units_and_a_moved_zero() {
    let program =
        shop("G20 G91 G94 G28 Z0\nG90 G0 Z1\nX1 Y1\nG91 G1 X1 F10\nG21 X-25.4\nG92 X0\nG90 X10\nM2");
    let ends: Vec<_> = program.toolpath.moves.iter().map(|m| m.to.xy.x).collect();
    for (end, expected) in ends.iter().zip([50.8, 25.4, 35.4]) {
        assert_relative_eq!(*end, expected, epsilon = 1e-9);
    }
    assert_eq!(ends.len(), 3);
}

#[test]
fn what_the_text_leaves_open_is_listed() {
    let program = shop("G0 Z5\nX0 Y0\nG1 X5 F100\nG2 X10 I2.5\nM2");
    insta::assert_snapshot!(program.assumed.join("\n"), @r"
    numbers are in mm, as the profile says
    places are given from zero (G90)
    feeds are lengths a minute (G94)
    arcs are in the XY plane (G17)
    the centres of arcs are given from their start, as the profile says
    ");
    assert!(matches!(program.events[0].what, What::Approach { rapid: true, to: [None, None, Some(_)], .. }));
}

#[test]
fn drilling_goes_down_and_back_for_every_hole() {
    let text = "G21 G90 G94 G17 G98 G0 X0 Y0 Z10\nG83 X5 Y0 Z-4 R1 Q2.5 F200\nG91 X5 R-9 Z-5 L2\nG80\nG90 G0 Z20\nM2";
    let program = shop(text);
    let lows: Vec<_> =
        program.toolpath.moves.iter().filter(|m| !m.is_rapid()).map(|m| (m.to.xy.x, m.to.z)).collect();
    // In increments, R counts from the height before the cycle and Z from R (NISTIR 6556, 3.5.16).
    let expected = [5.0, 10.0, 15.0].into_iter().flat_map(|x| [(x, -1.5), (x, -4.0)]);
    assert_eq!(lows, expected.collect::<Vec<_>>());
    let holes = program.events.iter().filter(|e| matches!(e.what, What::Drilling { .. })).count();
    assert_eq!(holes, 2, "one for each line");
    assert!(program.toolpath.moves.windows(2).all(|w| w[0].to == w[1].from), "one chain");
}

/// NISTIR 6556, 3.5.16.2: the two worked cycles, from (1, 2, 3), with the moves that the report lists (in mm here).
#[test]
fn the_worked_drilling_cycles() {
    let once = [[4.0, 5.0, 3.0], [4.0, 5.0, 2.8], [4.0, 5.0, 1.5], [4.0, 5.0, 3.0]].to_vec();
    let mut thrice = vec![[1.0, 2.0, 4.8]];
    for (x, y) in [(5.0, 7.0), (9.0, 12.0), (13.0, 17.0)] {
        thrice.extend([[x, y, 4.8], [x, y, 4.2], [x, y, 4.8]]);
    }
    for (line, expected) in
        [("G90 G81 G98 X4 Y5 Z1.5 R2.8", once), ("G91 G81 G98 X4 Y5 Z-0.6 R1.8 L3", thrice)]
    {
        let program = shop(&format!("G21 G90 G94 G17 F100 G0 X1 Y2 Z3\n{line}\nG80\nM2"));
        let moves = &program.toolpath.moves;
        let ends: Vec<_> = moves.iter().map(|m| [m.to.xy.x, m.to.xy.y, m.to.z]).collect();
        assert_eq!(ends.len(), expected.len(), "{line}: {ends:?}");
        for (m, (end, expected)) in moves.iter().zip(ends.iter().zip(&expected)) {
            assert!(
                end.iter().zip(expected).all(|(a, b)| (a - b).abs() < 1e-12),
                "{line}: {end:?} {expected:?}"
            );
            let bottom = m.to.z < 1.6 || (4.1..4.3).contains(&m.to.z);
            assert_eq!(m.is_rapid(), !bottom, "{line}: {m:?}");
        }
    }
}

#[test]
fn nothing_counts_after_the_end() {
    let program = shop("%\nG21 G90 G0 X0 Y0 Z0\nM30\nG1 X5 F100\n%\nthis is not read");
    assert_eq!((program.ended, program.toolpath.moves.len()), (Some(3), 0));
}
