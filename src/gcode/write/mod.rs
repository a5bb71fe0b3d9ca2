//! Toolpath to program text, in the form that the machine's controller takes.

mod arc;
mod count;
mod decimal;
mod header;
mod lift;
mod motion;
mod parts;
mod pen;
mod run;

use crate::error::{Error, Kind};
use crate::machine::{Dwell, Machine, RetractBy};
use crate::toolpath::Toolpath;

pub use count::blocks_of;
pub use header::{Curve, Header, Mark};
pub use lift::lift;
pub use parts::{Part, write_parts};
pub use run::{Amid, run};

use motion::Motion;
use pen::Pen;

/// The program that moves the cutter along `toolpath` on `machine`.
///
/// The cutter goes up to the clearance height before anything else moves, and no rapid goes across or down
/// below it. Ends are rounded to the last decimal and arcs as that allows: the path moves by less than 1.5
/// units of the last place, or by `header.chord_error` where the machine cannot take an arc.
///
/// # Errors
/// [`Kind::Refused`] for a toolpath that is empty or broken, has numbers that are not finite or a feed that
/// is not above zero, an arc or a descent below the clearance height by rapid, or a line too long for the
/// controller.
pub fn write(toolpath: &Toolpath, header: &Header, machine: &Machine) -> Result<String, Error> {
    write_lines(toolpath, header, machine).map(|written| written.text)
}

/// A program's text, and where in it each move of the toolpath begins.
#[derive(Clone, Debug, PartialEq)]
pub struct Written {
    /// The text.
    pub text: String,
    /// The line, from 1, of each move's first block; of the block after it, where rounding leaves none of the move.
    pub lines: Vec<usize>,
}

/// Like [`write()`], with the lines of the moves.
///
/// # Errors
/// Those of [`write()`].
pub fn write_lines(toolpath: &Toolpath, header: &Header, machine: &Machine) -> Result<Written, Error> {
    sound(toolpath, header)?;
    let mut pen = Pen::new(&machine.program);
    pen.percent();
    for comment in header.comments(toolpath, machine) {
        pen.comment(&comment);
    }
    preamble(&mut pen, machine);
    let mut motion = Motion::new(pen, machine, header);
    motion.start(toolpath)?;
    for i in 0..toolpath.moves.len() {
        motion.follow(&toolpath.moves, i)?;
    }
    let (mut pen, lines) = motion.stop();
    machine.program.end.iter().for_each(|line| pen.line(line));
    pen.percent();
    Ok(Written { text: pen.finish()?, lines })
}

/// Refuses what cannot be written at all.
fn sound(toolpath: &Toolpath, header: &Header) -> Result<(), Error> {
    let refused = |what: String| Err(Error::new(Kind::Refused, what));
    if toolpath.moves.is_empty() {
        return refused("there is nothing to cut".into());
    }
    let far = |v: f64| v.is_nan() || v.abs() > 1e6;
    for (i, m) in toolpath.moves.iter().enumerate() {
        let ends = [m.from.xy.x, m.from.xy.y, m.from.z, m.to.xy.x, m.to.xy.y, m.to.z];
        if ends.into_iter().any(far) || m.bulge.is_nan() || m.bulge.abs() > 1.0 + 1e-9 {
            return refused(format!(
                "move {} of the toolpath is not a move within a kilometre of zero",
                i + 1
            ));
        }
        if m.feed.is_some_and(|feed| !(feed > 0.0 && feed.is_finite())) {
            return refused(format!("move {} of the toolpath has no feed above zero", i + 1));
        }
        if !(m.spindle_rpm >= 0.0 && m.spindle_rpm.is_finite()) {
            return refused(format!("move {} of the toolpath has no spindle speed from zero", i + 1));
        }
    }
    if far(header.clearance) || header.chord_error.is_nan() {
        return refused("the clearance height or the chord error is not a number".into());
    }
    Ok(())
}

/// The modes that the profile names, and no others: what the user has set otherwise stays.
fn preamble(pen: &mut Pen, machine: &Machine) {
    let program = &machine.program;
    let modes = program.modes.iter().map(String::as_str);
    let chosen =
        [&machine.arcs.mode_word, &machine.offsets.length, &machine.offsets.work, &machine.path.word];
    if !program.modes.is_empty() {
        modes.for_each(|word| pen.words(word));
        pen.end();
    }
    chosen.into_iter().flatten().for_each(|words| pen.line(words));
    program.start.iter().for_each(|line| pen.line(line));
}

/// Gets the cutter up by machine coordinate; nothing where the clearance height serves.
fn machine_retract(pen: &mut Pen, machine: &Machine, grid: decimal::Grid) {
    if let (RetractBy::MachineCoordinate, Some(z)) = (machine.retract.by, machine.retract.machine_z) {
        pen.words("G53");
        pen.words("G0");
        pen.word('Z', grid.count(z), grid.decimals);
        pen.end();
    }
}

/// Takes the cutter to the machine's parking place, if the profile has one; it must be up.
fn park(pen: &mut Pen, machine: &Machine, grid: decimal::Grid) {
    if let Some(place) = machine.retract.park {
        pen.words("G53");
        pen.words("G0");
        pen.word('X', grid.count(place.x), grid.decimals);
        pen.word('Y', grid.count(place.y), grid.decimals);
        pen.end();
    }
}

/// Waits until the spindle has its speed.
fn spin_up(pen: &mut Pen, machine: &Machine) {
    let seconds = machine.spindle.spin_up;
    let milliseconds = (seconds * 1000.0).ceil() as i64;
    match machine.program.dwell {
        _ if seconds == 0.0 => {}
        Dwell::Seconds => {
            pen.words("G4");
            pen.word('P', milliseconds, 3);
            pen.end();
        }
        Dwell::Milliseconds => {
            pen.words("G4");
            pen.word('P', milliseconds, 0);
            pen.end();
        }
        Dwell::Unknown => {
            pen.comment("MSG,wait for the spindle to reach its speed, then go on");
            pen.line("M0");
        }
    }
}
