//! What a program says, in moves and events.

use std::ops::Range;

use crate::machine::Unit;
use crate::toolpath::Toolpath;

/// A program that was read and understood, every word of it.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Program {
    /// The moves from the first place that the program states, in mm. A move at a feed that was never set
    /// has a feed of 0. An arc over more than half a turn is two moves with the same line.
    pub toolpath: Toolpath,
    /// What happens between the moves, in order.
    pub events: Vec<Event>,
    /// Lines that command something.
    pub blocks: usize,
    /// Lines that move an axis.
    pub motion_blocks: usize,
    /// The unit of the last number; `None` when the program has none.
    pub unit: Option<Unit>,
    /// The largest difference, in mm, between an arc's radius at its start and at its end, with its line.
    pub worst_arc: Option<ArcFlaw>,
    /// Arcs whose radii differ by more than the language allows: 0.002 mm, or 0.0002 in for a program in
    /// inches (NISTIR 6556, 3.5.3.2).
    pub arc_flaws: Vec<ArcFlaw>,
    /// How far, in mm, moves may be from what the text says: 0 unless there are arcs across the XY plane,
    /// which become straight moves, or cubic moves, which become arcs with the same line.
    pub approximated: f64,
    /// What was not in the text and taken from the profile or from the language, one sentence each.
    pub assumed: Vec<String>,
    /// The line of the end word; `None` for a program that does not end.
    pub ended: Option<usize>,
}

/// An arc with radii that differ.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ArcFlaw {
    /// Line of the program, from 1.
    pub line: usize,
    /// The difference in mm.
    pub mismatch: f64,
}

/// Something that happens between moves.
#[derive(Clone, Debug, PartialEq)]
pub struct Event {
    /// Line of the program, from 1.
    pub line: usize,
    /// How many moves of the toolpath come before it.
    pub before: usize,
    /// What happens.
    pub what: What,
}

/// What can happen between moves.
#[derive(Clone, Debug, PartialEq)]
pub enum What {
    /// The spindle starts, or changes its speed while it turns.
    SpindleOn {
        /// Speed in rev/min.
        rpm: f64,
        /// Seen from above the spindle's nose downwards.
        clockwise: bool,
    },
    /// The spindle stops.
    SpindleOff,
    /// The program waits for the operator.
    Stop {
        /// True when a switch of the controller decides.
        optional: bool,
        /// The comment on its line or on the line before, if any.
        message: String,
    },
    /// The program waits.
    Dwell {
        /// How long; `None` when the profile does not say what the number counts.
        seconds: Option<f64>,
    },
    /// The cutter is changed.
    CutterChange {
        /// Its number, if one was chosen.
        number: Option<u32>,
    },
    /// Coolant goes on or off.
    Coolant {
        /// True for on.
        on: bool,
    },
    /// The overrides for feed and speed are allowed or not.
    Overrides {
        /// True for allowed.
        allowed: bool,
    },
    /// A work offset is chosen; the words G54 to G59.3.
    WorkOffset {
        /// Its word.
        word: String,
    },
    /// The zero of some axes is set or taken back by G92 to G92.3.
    ZeroMoved,
    /// A length offset is set, or cancelled.
    LengthOffset {
        /// Its number; `None` when cancelled.
        number: Option<u32>,
    },
    /// The path mode is set.
    PathMode {
        /// The word.
        word: String,
    },
    /// A move from a place that the program has not stated, for at least one axis; not in the toolpath.
    Approach {
        /// True for the axes X, Y, Z that are told to move.
        moved: [bool; 3],
        /// Where each axis is afterwards, in mm; `None` where that is still not stated.
        to: [Option<f64>; 3],
        /// True for a rapid.
        rapid: bool,
    },
    /// A rapid to a place in machine coordinates; where that is from the program's zero is not stated.
    MachineMove {
        /// True for the axes X, Y, Z that are told to move.
        moved: [bool; 3],
    },
    /// A drilling cycle.
    Drilling {
        /// Its moves in the toolpath. Its rapids go down inside the hole, never below what is drilled.
        moves: Range<usize>,
    },
    /// The program ends.
    End,
}
