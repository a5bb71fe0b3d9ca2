//! Programs that were not written by us, in whole.

use std::fmt::Write as _;

use ribband::gcode::Program;

use crate::common::{machine, understood};

/// Moves and events in the order of the program.
fn listing(program: &Program) -> String {
    let mut text = String::new();
    let mut events = program.events.iter().peekable();
    for (i, m) in program.toolpath.moves.iter().enumerate() {
        while let Some(event) = events.next_if(|event| event.before <= i) {
            writeln!(text, "{:3} {:?}", event.line, event.what).expect("to a string");
        }
        let how = m.feed.map_or("rapid".to_string(), |feed| format!("feed {feed:.1}"));
        let (at, bend) = (m.to.xy, m.span().sweep().to_degrees());
        writeln!(text, "{:3} {how} to {:.4} {:.4} {:.4} by {bend:.3} degrees", m.line, at.x, at.y, m.to.z)
            .expect("to a string");
    }
    for event in events {
        writeln!(text, "{:3} {:?}", event.line, event.what).expect("to a string");
    }
    let (blocks, moving) = (program.blocks, program.motion_blocks);
    writeln!(text, "{blocks} blocks, {moving} move; ended {:?}", program.ended).expect("to a string");
    text + &program.assumed.join("\n")
}

#[test]
fn a_keyhole_in_inches_by_increments() {
    let text = include_str!("../../fixtures/programs/keyhole-inches.nc");
    insta::assert_snapshot!(listing(&understood(text, &machine("inch-gantry"))));
}

#[test]
fn a_plate_drilled_in_pecks() {
    let text = include_str!("../../fixtures/programs/drilled-plate.nc");
    insta::assert_snapshot!(listing(&understood(text, &machine("shop-router"))));
}
