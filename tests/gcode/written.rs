//! What the writer puts down, whole.

use ribband::gcode::{Mark, write};
use ribband::machine;
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
