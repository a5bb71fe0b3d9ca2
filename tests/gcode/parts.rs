//! Programs for a controller that holds little.

use ribband::gcode::{Mark, lift, write_parts};
use ribband::toolpath::{Position, Toolpath};

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
fn a_contour_longer_than_the_memory_is_refused_as_it_is() {
    let error = write_parts(&zigzags(1, 5000), &header(), &machine("old-controller")).expect_err("too long");
    insta::assert_snapshot!(error, @r"
    what is cut in one go from X 0.0 Y 0.0 mm is longer than the controller's 32768 bytes
      a wider tolerance gives fewer blocks
    ");
}

#[test]
fn with_lifts_each_part_goes_on_where_the_one_before_it_ended() {
    let old = machine("old-controller");
    let meant = zigzags(1, 5000);
    let (mut lifted, mut header) = (meant.clone(), header());
    header.marks.push(Mark { before: 4990, text: "almost through".into() });
    let places = lift(&mut lifted, &mut header, &old).expect("it can be lifted");
    let parts = write_parts(&lifted, &header, &old).expect("each fits");
    // Some parts end between the two passes, the others at a lift.
    assert!(places.len() >= 2 && parts.len() <= places.len() + 2, "{} parts", parts.len());
    let mut ends: Vec<Position> = Vec::new();
    let mut cut = Vec::new();
    for part in &parts {
        assert!(part.text.len() <= 32768, "{} bytes", part.text.len());
        let moves = understood(&part.text, &old).toolpath.moves;
        let first = moves.iter().find(|m| !m.is_rapid()).expect("a cut");
        if let Some(end) = ends.last().filter(|end| places.iter().any(|place| near(**end, *place))) {
            assert!(
                near(first.to, *end) && first.from.xy == first.to.xy,
                "straight down to {end:?}: {first:?}"
            );
            assert!(first.from.z >= header.clearance && first.feed == Some(400.0), "{first:?}");
            cut.extend(moves.iter().filter(|m| !m.is_rapid()).skip(1).copied());
        } else {
            cut.extend(moves.iter().filter(|m| !m.is_rapid()).copied());
        }
        let up = moves.last().expect("a move");
        assert!(up.is_rapid() && up.to.z >= header.clearance, "it ends raised: {up:?}");
        ends.push(moves.iter().rfind(|m| !m.is_rapid()).expect("a cut").to);
    }
    let want: Vec<_> = meant.moves.iter().filter(|m| !m.is_rapid()).collect();
    assert_eq!(cut.len(), want.len(), "every cut once");
    assert!(cut.iter().zip(&want).all(|(cut, want)| near(cut.to, want.to) && cut.feed == want.feed));
    assert_eq!(parts.iter().filter(|part| part.text.contains("almost through")).count(), 1);
    let mut same = zigzags(3, 900);
    assert_eq!(lift(&mut same, &mut header, &old).expect("nothing to do"), []);
    assert_eq!(same, zigzags(3, 900));
}

/// True for one place within the last place of a program.
fn near(a: Position, b: Position) -> bool {
    a.xy.distance(b.xy) < 0.001 && (a.z - b.z).abs() < 0.001
}

#[test]
fn a_machine_without_a_limit_gets_one_program() {
    let parts = write_parts(&zigzags(3, 3000), &header(), &machine("shop-router")).expect("one");
    assert_eq!(parts.len(), 1);
}
