//! Programs for a controller that holds little.

use ribband::gcode::write_parts;
use ribband::toolpath::Toolpath;

use crate::common::{Path, at, header, machine, understood};

/// `contours` zigzags of so many blocks, each cut in two passes with a retract between.
fn zigzags(contours: usize, blocks: usize) -> Toolpath {
    let mut path = Path::from(at(0.0, 0.0, 15.0));
    for c in 0..contours {
        let x = c as f64 * 20.0;
        for depth in [-2.0, -4.0] {
            path = path.rapid(x, 0.0, 15.0).plunge(depth);
            for k in 1..=blocks {
                path = path.cut(x + (k % 2) as f64 * 10.0, k as f64 * 0.123, depth);
            }
            path = path.rapid(x + (blocks % 2) as f64 * 10.0, blocks as f64 * 0.123, 15.0);
        }
    }
    path.rapid(0.0, 0.0, 15.0).done()
}

#[test]
fn parts_fit_the_memory_and_make_every_cut_once() {
    let old = machine("old-controller");
    let memory = old.controller.memory_bytes.expect("it has one") as usize;
    // One that fits, several contours a part, and contours that must be cut at their retract.
    for (contours, blocks, fewest, most) in [(2, 50, 1, 1), (12, 600, 6, 12), (3, 1500, 3, 6)] {
        let toolpath = zigzags(contours, blocks);
        let parts = write_parts(&toolpath, &header(), &old).expect("can be cut");
        assert!((fewest..=most).contains(&parts.len()), "{} parts", parts.len());
        let mut next = 0;
        let mut cut = 0.0;
        for part in &parts {
            assert!(part.text.len() <= memory, "{} bytes", part.text.len());
            assert_eq!(part.moves.start, next, "in order, none left out");
            next = part.moves.end;
            let program = understood(&part.text, &old);
            assert!(program.ended.is_some(), "complete by itself");
            let moves = program.toolpath.moves.iter().filter(|m| !m.is_rapid());
            cut += moves.map(|m| m.length()).sum::<f64>();
        }
        assert_eq!(next, toolpath.moves.len());
        let meant: f64 = toolpath.moves.iter().filter(|m| !m.is_rapid()).map(|m| m.length()).sum();
        assert!((cut - meant).abs() < 1e-3 * contours as f64, "{cut} of {meant} mm");
        assert_eq!(parts.len() > 1, parts[0].text.contains(&format!("part 1 of {}", parts.len())));
    }
}

#[test]
fn a_contour_longer_than_the_memory_is_refused() {
    let error = write_parts(&zigzags(1, 5000), &header(), &machine("old-controller")).expect_err("too long");
    insta::assert_snapshot!(error, @r"
    what is cut in one go from X 0.0 Y 0.0 mm is longer than the controller's 32768 bytes
      a wider tolerance gives fewer blocks; fewer passes are shorter too
    ");
}

#[test]
fn a_machine_without_a_limit_gets_one_program() {
    let parts = write_parts(&zigzags(3, 3000), &header(), &machine("shop-router")).expect("one");
    assert_eq!(parts.len(), 1);
}
