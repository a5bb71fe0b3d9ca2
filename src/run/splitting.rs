//! Programs in parts, for a controller that holds little.

use super::{Part, checking, read_back};
use crate::error::{Error, Kind};
use crate::gcode::{self, Header, Mark, Program, write_parts};
use crate::job::Job;
use crate::route::Routing;
use crate::toolpath::{Move, Toolpath};

/// Lets the cutter go up and down again wherever what is cut in one go is longer than the controller's memory; tells
/// where.
pub(super) fn lift(job: &Job, routing: &mut Routing, header: &mut Header) -> Result<Option<String>, Error> {
    // The places where cuts begin move on with the moves.
    let mark = |&before: &usize| Mark { before, text: String::new() };
    header.marks = routing.safe_starts.iter().map(mark).collect();
    let lifts = gcode::lift(&mut routing.toolpath, header, &job.machine)?;
    routing.safe_starts = header.marks.drain(..).map(|mark| mark.before).collect();
    let Some(first) = lifts.first() else { return Ok(None) };
    let unit = job.machine.unit;
    Ok(Some(format!(
        "a cut is longer than the controller's memory: the cutter goes up and down again at {} (first at X {:.1} Y {:.1} \
         {}), where the next part goes on; leave the work and every zero as they are between the parts",
        if lifts.len() == 1 { "one place".into() } else { format!("{} places", lifts.len()) },
        first.xy.x / unit.mm(),
        first.xy.y / unit.mm(),
        unit.symbol()
    )))
}

/// The parts of a program whose `text` is longer than the controller's memory, each checked for what holds without the
/// drawing, and all together for making the cuts of the whole `program`; none where the whole fits.
pub(super) fn parts(
    job: &Job,
    toolpath: &Toolpath,
    header: &Header,
    whole: (&str, &Program),
    check: impl Fn(&Program) -> Vec<crate::check::Claim>,
) -> Result<Vec<Part>, Error> {
    let (text, program) = whole;
    let memory = job.machine.controller.memory_bytes.map_or(usize::MAX, |bytes| bytes as usize);
    if text.len() <= memory {
        return Ok(Vec::new());
    }
    let mut parts = Vec::new();
    for written in write_parts(toolpath, header, &job.machine)? {
        let program = read_back(&written.text, &job.machine)?;
        checking::hold(&check(&program))?;
        parts.push(Part { text: written.text, lines: written.lines, moves: written.moves, program });
    }
    let together = parts.iter().flat_map(|part| cuts(&part.program));
    if cuts(program).eq(together) {
        return Ok(parts);
    }
    Err(Error::new(
        Kind::Refused,
        "the parts of the program do not make the cuts of the whole, so none was written",
    )
    .remedy("please report it; a wider tolerance makes a shorter program"))
}

/// The moves at feed, wherever they stand in the text.
fn cuts(program: &Program) -> impl Iterator<Item = Move> + '_ {
    program.toolpath.moves.iter().filter(|m| !m.is_rapid()).map(|m| Move { line: 0, ..*m })
}
