//! Every program that we write, read by a second parser (the `gcode` crate) and understood by a second,
//! little interpreter that shares nothing with the first: the same places, the same arcs, the same feeds.

use proptest::prelude::*;
use ribband::gcode::write;
use ribband::toolpath::Toolpath;

use crate::common::{Path, at, header, understood};
use crate::rounded::machines;
use crate::second_reader::agree;

/// A random job: contours of lines and arcs, each at its own depth.
fn jobs() -> impl Strategy<Value = Toolpath> {
    let step = (-100.0..100.0_f64, -100.0..100.0_f64, -1.0..1.0_f64, 50.0..2900.0_f64);
    let contour = (prop::collection::vec(step, 2..8), -8.0..-0.1_f64);
    prop::collection::vec(contour, 1..4).prop_map(|contours| {
        let mut path = Path::from(at(0.0, 0.0, 15.0));
        for (steps, depth) in contours {
            let (x, y, ..) = steps[0];
            path = path.rapid(x, y, 15.0).plunge(depth);
            for &(x, y, bulge, feed) in &steps[1..] {
                path = path.go(at(x, y, depth), if bulge.abs() < 0.2 { 0.0 } else { bulge }, Some(feed));
            }
            let (x, y, ..) = steps[steps.len() - 1];
            path = path.rapid(x, y, 15.0);
        }
        path.rapid(0.0, 0.0, 15.0).done()
    })
}

proptest! {
    #[test]
    fn both_read_the_same_moves(toolpath in jobs(), which in 0..11_usize) {
        let machine = &machines()[which];
        let text = write(&toolpath, &header(), machine).expect("can be written");
        let program = understood(&text, machine);
        let agreed = agree(&text, &program, machine, 1e-4);
        prop_assert!(agreed.is_ok(), "{}\n{text}", agreed.unwrap_err());
    }

    #[test]
    fn what_was_meant_is_read_back(toolpath in jobs(), which in 0..11_usize) {
        let machine = &machines()[which];
        let text = write(&toolpath, &header(), machine).expect("can be written");
        let program = understood(&text, machine);
        let place = machine.last_place();
        let read = &program.toolpath.moves;
        let ends = toolpath.moves.iter().filter(|m| !m.is_rapid() && m.from != m.to).map(|m| m.to);
        let mut rest = read.iter();
        for end in ends {
            let near = |at: f64, meant: f64| (at - meant).abs() <= 0.5001 * place;
            let (at, up) = (end.xy, end.z);
            let found = rest.find(|m| near(m.to.xy.x, at.x) && near(m.to.xy.y, at.y) && near(m.to.z, up));
            prop_assert!(found.is_some() || read.is_empty(), "{end:?} is not reached\n{text}");
        }
        let length = |moves: &[ribband::toolpath::Move]| -> f64 {
            moves.iter().filter(|m| !m.is_rapid()).map(|m| m.length()).sum()
        };
        let (meant, got) = (length(&toolpath.moves), length(read));
        prop_assert!((meant - got).abs() <= 1e-4 * meant + 20.0 * place, "{meant} {got}\n{text}");
        let slower = toolpath.moves.iter().filter_map(|m| m.feed).fold(0.0, f64::max);
        let fastest = read.iter().filter_map(|m| m.feed).fold(0.0, f64::max);
        prop_assert!(fastest <= slower + 1e-9 && fastest > slower - 0.3, "{fastest} for {slower}");
        let hand = machine.spindle.hand_switched;
        prop_assert!(hand || read.iter().all(|m| m.spindle_rpm > 0.0), "the spindle turns throughout");
    }
}
