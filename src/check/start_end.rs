//! How a program starts and ends, and whether its arcs are what the language allows.

use std::ops::Range;

use super::Asked;
use super::claim::{Claim, Spot, State, Worst};
use crate::gcode::read::{Program, What};
use crate::machine::{Machine, Unit};

const ARCS: &str = "the radii of every arc agree at both ends";
const START: &str = "the cutter is raised before it first goes across";
const END: &str = "the program ends raised, with the spindle off";

/// The claims about the program as a whole.
pub(super) fn judge(program: &Program, machine: &Machine, asked: &Asked) -> Vec<Claim> {
    vec![arcs(program), start(program, machine, asked), end(program, machine, asked)]
}

/// The moves of drilling cycles, whose rapids stay within the hole.
pub(super) fn drilled(program: &Program) -> Vec<Range<usize>> {
    let moves = |event: &crate::gcode::read::Event| match &event.what {
        What::Drilling { moves } => Some(moves.clone()),
        _ => None,
    };
    program.events.iter().filter_map(moves).collect()
}

/// Arc radii within 0.002 mm, or 0.0002 in for a program in inches (NISTIR 6556, 3.5.3.2).
fn arcs(program: &Program) -> Claim {
    let limit = match program.unit {
        Some(Unit::Inch) => 0.0002 * 25.4,
        _ => 0.002,
    };
    let mut worst = Worst::none();
    if let Some(arc) = program.worst_arc {
        worst.note(arc.mismatch, || Spot::line(arc.line));
    }
    let mut claim = Claim::at_most(ARCS, "mm", worst, limit, 0.0);
    claim.state = if program.arc_flaws.is_empty() { State::Holds } else { State::Fails };
    claim.because("a controller refuses such an arc, or cuts another one")
}

/// Before every place is stated, only moves that cannot do harm: up to the clearance height or by machine
/// coordinate in Z, then across by rapid.
fn start(program: &Program, machine: &Machine, asked: &Asked) -> Claim {
    let least = asked.clearance.unwrap_or(asked.stock_top) - machine.last_place();
    let mut raised = false;
    for event in &program.events {
        let (moved, safe) = match &event.what {
            What::Approach { moved, to, rapid } => (moved, *rapid && to[2].is_none_or(|z| z >= least)),
            What::MachineMove { moved } => (moved, true),
            _ => continue,
        };
        let across = moved[0] || moved[1];
        if !safe || (across && (moved[2] || !raised)) {
            let claim = Claim::none_of(START, 1, Some(Spot::line(event.line)));
            return claim
                .because("a move starts at a height that the program has not stated, or ends too low");
        }
        raised |= moved[2];
    }
    Claim::none_of(START, 0, None)
}

/// After the last cut the cutter is raised; the spindle is stopped; the end word is there.
fn end(program: &Program, machine: &Machine, asked: &Asked) -> Claim {
    let Some(line) = program.ended else {
        let last = program.toolpath.moves.last().map(Spot::end_of);
        return Claim::none_of(END, 1, last).because("the text stops without a word that ends the program");
    };
    let least = asked.clearance.unwrap_or(asked.stock_top) - machine.last_place();
    let by_machine = |what: &What| matches!(what, What::MachineMove { moved } if moved[2]);
    let moves = program.toolpath.moves.len();
    let lifted = program.events.iter().any(|event| event.before == moves && by_machine(&event.what));
    let low = program.toolpath.moves.last().filter(|m| m.to.z < least && !lifted);
    if let Some(low) = low {
        return Claim::none_of(END, 1, Some(Spot::end_of(low))).because("the cutter is left in the work");
    }
    let spindle = |what: &What| match what {
        What::SpindleOn { .. } => Some(true),
        What::SpindleOff => Some(false),
        _ => None,
    };
    // The end word stops it too, by the language; not every controller keeps to that.
    let before = program.events.iter().rev().filter(|event| event.line != line);
    let turning = before.filter_map(|event| spindle(&event.what)).next().unwrap_or(false);
    let found = usize::from(turning && !machine.spindle.hand_switched);
    Claim::none_of(END, found, Some(Spot::line(line))).because("no word stops the spindle before the end")
}
