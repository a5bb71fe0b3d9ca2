//! Arcs on the grid of a program's numbers: never a mismatch over the limit, never another arc than was
//! meant.

use kurbo::Point;
use proptest::prelude::*;
use ribband::gcode::{Program, write};
use ribband::geom::Span;
use ribband::machine::{ArcStyle, Machine, Unit};

use crate::common::{Path, at, header, machine, understood};

/// Machines of every arc style in both units.
pub(crate) fn machines() -> Vec<Machine> {
    let mut all = Vec::new();
    for base in ["shop-router", "inch-gantry"] {
        for style in [ArcStyle::CentreIncremental, ArcStyle::CentreAbsolute, ArcStyle::Radius, ArcStyle::None]
        {
            let mut m = machine(base);
            m.name = format!("{base} {style:?}");
            m.arcs.style = style;
            m.arcs.mode_word = (style == ArcStyle::CentreAbsolute).then(|| "G90.1".to_string());
            m.arcs.whole_circles &= style != ArcStyle::Radius && style != ArcStyle::None;
            m.arcs.helices &= style != ArcStyle::None;
            all.push(m);
        }
    }
    all.extend(["old-controller", "fast-router", "benchtop-router"].map(machine));
    all
}

/// The program of one cut along `span`, read back.
fn round_trip(span: Span, machine: &Machine) -> Program {
    let (from, to) = (span.start, span.end);
    let path =
        Path::from(at(from.x, from.y, 15.0)).plunge(-1.0).go(at(to.x, to.y, -1.0), span.bulge, Some(900.0));
    let text = write(&path.rapid(to.x, to.y, 15.0).done(), &header(), machine).expect("can be written");
    understood(&text, machine)
}

/// The cuts at the height of the work.
fn cuts(program: &Program) -> Vec<Span> {
    let cut = program.toolpath.moves.iter().filter(|m| !m.is_rapid() && m.from.z < 0.0);
    cut.map(|m| m.span()).collect()
}

/// The largest distance of points of `one` from `other`, sampled.
fn stray(one: &[Span], other: &[Span]) -> f64 {
    let points = one.iter().flat_map(|span| (0..=16).map(move |k| span.at(f64::from(k) / 16.0)));
    let off = |p: Point| other.iter().map(|s| s.nearest(p).distance).fold(f64::INFINITY, f64::min);
    points.map(off).fold(0.0, f64::max)
}

/// A span with a length, bend and place that are likely to make trouble.
fn spans() -> impl Strategy<Value = Span> {
    let near = prop_oneof![3 => -300.0..300.0_f64, 1 => Just(0.0)];
    let length =
        prop_oneof![4 => (-4.0..2.5_f64).prop_map(|e| 10_f64.powf(e)), 1 => Just(0.001), 1 => Just(0.0254)];
    let bend = prop_oneof![
        4 => -1.0..1.0_f64,
        2 => (-7.0..0.0_f64).prop_map(|e| 10_f64.powf(e)),
        1 => Just(1.0), 1 => Just(-1.0), 1 => Just(0.0), 1 => Just(0.999_999),
    ];
    let angle = prop_oneof![4 => 0.0..std::f64::consts::TAU, 1 => Just(0.0)];
    (near.clone(), near, length, angle, bend).prop_map(|(x, y, length, angle, bulge)| {
        let start = Point::new(x, y);
        Span::arc(start, start + kurbo::Vec2::from_angle(angle) * length, bulge)
    })
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(800))]

    #[test]
    fn an_arc_comes_back_as_it_was_meant(span in spans(), which in 0..11_usize) {
        let machine = &machines()[which];
        let program = round_trip(span, machine);
        prop_assert!(program.arc_flaws.is_empty(), "{:?}", program.arc_flaws);
        let read = cuts(&program);
        let place = machine.last_place();
        prop_assert!(!read.is_empty() || span.chord().hypot() < 1.5 * place);
        if read.is_empty() {
            return Ok(());
        }
        let off = stray(&[span], &read).max(stray(&read, &[span]));
        prop_assert!(off <= 1.5 * place, "{} of the last place on {}: {read:?}", off / place, machine.name);
        let length: f64 = read.iter().map(Span::length).sum();
        let close = (length - span.length()).abs() <= 4.0 * place + 0.01 * span.length();
        prop_assert!(close, "another way round: {read:?}");
    }

    /// check-values 1.5: rounding every number by itself breaks the limit in one arc of five thousand.
    #[test]
    fn no_mismatch_passes_the_limit(x in -50.0..50.0_f64, y in -50.0..50.0_f64, r in 0.5..200.0_f64,
                                    a in 0.0..6.2_f64, sweep in 0.1..3.1_f64, inch in any::<bool>()) {
        let machine = machine(if inch { "inch-gantry" } else { "shop-router" });
        let centre = Point::new(x, y);
        let on = |angle: f64| centre + kurbo::Vec2::from_angle(angle) * r;
        let span = Span::arc(on(a), on(a + sweep), (sweep / 4.0).tan());
        prop_assume!(span.sagitta() > machine.last_place());
        let worst = round_trip(span, &machine).worst_arc.expect("an arc");
        prop_assert!(worst.mismatch <= 1.42 * machine.last_place(), "{worst:?}");
    }
}

#[test]
fn a_whole_circle_keeps_its_place_in_either_form() {
    for machine in machines() {
        for k in 0..200 {
            let angle = f64::from(k) * 0.731;
            let centre = Point::new(angle * 3.1, -angle * 1.7);
            let out = kurbo::Vec2::from_angle(angle) * (0.3 + angle / 10.0);
            let (near, far) = (centre + out, centre - out);
            let path = Path::from(at(near.x, near.y, 15.0))
                .plunge(-1.0)
                .arc(far.x, far.y, 1.0)
                .arc(near.x, near.y, 1.0);
            let text = write(&path.rapid(near.x, near.y, 15.0).done(), &header(), &machine).expect("writes");
            let read = cuts(&understood(&text, &machine));
            let meant = [Span::arc(near, far, 1.0), Span::arc(far, near, 1.0)];
            let off = stray(&meant, &read).max(stray(&read, &meant)) / machine.last_place();
            assert!(off <= 1.5, "{off} of the last place on {}\n{text}", machine.name);
            let blocks =
                text.lines().filter(|line| !line.starts_with(['(', ';']) && line.contains('I')).count();
            assert!(!machine.arcs.whole_circles || blocks == 1, "one block\n{text}");
        }
    }
}

#[test]
fn the_last_place_is_that_of_the_unit() {
    let places = machines().into_iter().map(|m| (m.unit, m.program.decimals, m.last_place()));
    for (unit, decimals, place) in places {
        let expected = match (unit, decimals) {
            (Unit::Mm, 3) => 0.001,
            (Unit::Mm, 4) => 0.0001,
            (Unit::Inch, 4) => 0.00254,
            other => panic!("no such machine: {other:?}"),
        };
        approx::assert_relative_eq!(place, expected, epsilon = 1e-15);
    }
}
