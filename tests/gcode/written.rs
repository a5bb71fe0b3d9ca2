//! What the writer puts down, whole.

use ribband::gcode::{Mark, write};
use ribband::machine::{self, HelixFeed};
use ribband::toolpath::Toolpath;

use crate::common::{Path, at, header, machine, understood};

/// A slot with round ends, and a disc, each in one pass.
fn plate() -> Toolpath {
    let slot = Path::from(at(0.0, 0.0, 15.0)).rapid(10.0, 10.0, 15.0).rapid(10.0, 10.0, 15.0).plunge(-3.0);
    let slot = slot.cut(50.0, 10.0, -3.0).arc(50.0, 20.0, 1.0).cut(10.0, 20.0, -3.0).arc(10.0, 10.0, 1.0);
    let disc = slot.rapid(10.0, 10.0, 15.0).rapid(80.0, 15.0, 15.0).plunge(-3.0);
    let disc = disc.arc(70.0, 15.0, -1.0).arc(80.0, 15.0, -1.0);
    disc.rapid(80.0, 15.0, 15.0).rapid(0.0, 0.0, 15.0).done()
}

#[test]
fn every_machine_gets_its_own_program() {
    let mut header = header();
    header.marks = vec![Mark { before: 7, text: "disc (the second part)".into() }];
    for name in machine::names() {
        let text = write(&plate(), &header, &machine(name)).expect("can be written");
        insta::assert_snapshot!(name, text);
        let program = understood(&text, &machine(name));
        assert!(program.ended.is_some() && program.arc_flaws.is_empty(), "{name}");
    }
}

/// The refusal of `path` on the default machine.
fn refused(path: Path) -> String {
    let error = write(&path.done(), &header(), &machine("shop-router")).expect_err("not to be written");
    assert_eq!(error.exit_status(), 1);
    error.to_string()
}

#[test]
fn unsafe_or_broken_toolpaths_are_refused() {
    let start = || Path::from(at(0.0, 0.0, 15.0)).rapid(10.0, 10.0, 15.0);
    let gap = |mut toolpath: Toolpath| {
        toolpath.moves[1].from = at(11.0, 10.0, 15.0);
        write(&toolpath, &header(), &machine("shop-router")).expect_err("a gap").to_string()
    };
    let said = [
        refused(Path::from(at(0.0, 0.0, 15.0))),
        refused(start().rapid(10.0, 10.0, -3.0)),
        refused(start().plunge(-3.0).rapid(20.0, 10.0, -3.0)),
        refused(start().plunge(-3.0).rapid(20.0, 10.0, 14.0)),
        refused(start().rapid(20.0, 10.0, 2.0)),
        refused(Path::from(at(0.0, 0.0, -3.0)).cut(5.0, 0.0, -3.0)),
        refused(start().go(at(20.0, 10.0, 15.0), 0.5, None)),
        refused(start().go(at(20.0, 10.0, 15.0), 0.0, Some(0.0))),
        refused(start().go(at(20.0, 10.0, 15.0), 0.0, Some(0.01))),
        refused(start().go(at(20.0, 10.0, 15.0), 0.0, Some(f64::NAN))),
        refused(start().cut(f64::NAN, 0.0, 15.0)),
        refused(start().cut(0.0, f64::INFINITY, 15.0)),
        refused(start().arc(20.0, 10.0, 2.4)),
        gap(start().plunge(-3.0).done()),
    ];
    insta::assert_snapshot!(said.join("\n"));
}

#[test]
fn the_cutter_goes_up_before_it_goes_across() {
    let path = Path::from(at(0.0, 0.0, 15.0)).rapid(10.0, 10.0, 30.0).rapid(10.0, 10.0, 15.0).plunge(-3.0);
    let text =
        write(&path.cut(20.0, 10.0, -3.0).rapid(40.0, 40.0, 30.0).done(), &header(), &machine("shop-router"));
    let moves: Vec<_> =
        text.expect("writes").lines().skip_while(|l| *l != "G0 Z15").map(str::to_string).collect();
    assert_eq!(
        moves,
        [
            "G0 Z15",
            "S18000 M3",
            "G4 P4",
            "G0 X10 Y10",
            "Z30",
            "Z15",
            "G1 Z-3 F400",
            "X20 F1200",
            "G0 Z30",
            "X40 Y40",
            "M5",
            "M30"
        ]
    );
}

#[test]
fn a_program_that_ends_low_is_brought_up() {
    let path = Path::from(at(0.0, 0.0, 15.0)).rapid(5.0, 5.0, 15.0).plunge(-3.0).cut(9.0, 5.0, -3.0);
    let text = write(&path.done(), &header(), &machine("shop-router")).expect("writes");
    assert!(text.ends_with("X9 F1200\nG0 Z15\nM5\nM30\n"), "{text}");
}

#[test]
fn comments_are_plain_and_short() {
    let mut header = header();
    header.title = "Schild (\"Müller\"); 50% #1\n\u{7}G0 X0".into();
    header.notes = vec!["word ".repeat(100), "x".repeat(300)];
    for name in machine::names() {
        let machine = machine(name);
        let text = write(&plate(), &header, &machine).expect("writes");
        assert!(text.is_ascii(), "{text}");
        for line in text.lines() {
            assert!(line.len() <= machine.program.longest_line as usize, "{line}");
            let inner = line.trim_start_matches('(').trim_end_matches(')');
            let plain = line.starts_with(';') || !inner.contains(['(', ')', ';', '#']);
            assert!(plain && (line == "%" || !line.contains('%')), "{line}");
        }
    }
}

#[test]
fn line_numbers_start_again_before_they_get_six_digits() {
    let mut machine = machine("inch-gantry");
    machine.program.line_numbers = 1000;
    let mut path = Path::from(at(0.0, 0.0, 15.0)).rapid(0.0, 0.0, 15.0).plunge(-1.0);
    for k in 0..300 {
        path = path.cut(f64::from(k % 7), f64::from(k % 5), -1.0);
    }
    let text = write(&path.done(), &header(), &machine).expect("writes");
    let words = ribband::gcode::read(&text).expect("reads");
    let numbers: Vec<_> = words.blocks.iter().filter_map(|b| b.number).collect();
    assert!(numbers.len() > 200 && numbers.iter().all(|n| (1000..=99_999).contains(n)));
}

/// A helix of half a turn: the plane's length is 5 pi, the rise 4 mm.
#[test]
fn a_helix_has_the_feed_that_the_controller_measures() {
    let path = || Path::from(at(0.0, 0.0, 15.0)).rapid(10.0, 0.0, 15.0).plunge(0.0);
    let helix = path().go(at(0.0, 0.0, -4.0), 1.0, Some(1000.0)).done();
    let mut machine = machine("shop-router");
    let mut words = Vec::new();
    for along in [HelixFeed::Path, HelixFeed::Plane] {
        machine.arcs.helix_feed = along;
        let text = write(&helix, &header(), &machine).expect("writes");
        let line = text.lines().find(|l| l.starts_with("G3")).expect("an arc").to_string();
        let program = understood(&text, &machine);
        let read = program.toolpath.moves.iter().find(|m| m.bulge != 0.0).and_then(|m| m.feed);
        approx::assert_relative_eq!(read.expect("a cut"), 1000.0, epsilon = 0.2);
        words.push(line);
    }
    assert_eq!(words, ["G3 X0 Z-4 I-5 J0 F1000", "G3 X0 Z-4 I-5 J0 F969"]);
    machine.arcs.helices = false;
    let text = write(&helix, &header(), &machine).expect("writes");
    let straight = understood(&text, &machine).toolpath.moves.iter().filter(|m| !m.is_rapid()).count();
    assert!(straight > 50 && !text.contains("G3"), "straight blocks where it takes no helix");
}

/// The feed word is rounded down, and never below what converts exactly.
#[test]
fn feeds_never_come_out_higher() {
    for k in 1..2000 {
        let feed = f64::from(k) * 1.737;
        for name in ["shop-router", "inch-gantry"] {
            let machine = machine(name);
            let path =
                Path::from(at(0.0, 0.0, 15.0)).rapid(1.0, 1.0, 15.0).go(at(9.0, 9.0, 15.0), 0.0, Some(feed));
            let text = write(&path.done(), &header(), &machine).expect("writes");
            let read =
                understood(&text, &machine).toolpath.moves.iter().find_map(|m| m.feed).expect("a feed");
            assert!(read <= feed + 1e-9 && read > feed - 0.26, "{read} for {feed} on {name}");
        }
    }
    let inch = machine("inch-gantry");
    let path =
        Path::from(at(0.0, 0.0, 15.0)).rapid(1.0, 1.0, 15.0).go(at(9.0, 9.0, 15.0), 0.0, Some(47.24 * 25.4));
    assert!(write(&path.done(), &header(), &inch).expect("writes").contains("F47.24\r\n"));
}
