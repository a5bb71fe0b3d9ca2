//! An existing program in fewer blocks: runs of straight cuts become arcs and lines, nothing else changes.
//!
//! Lines are kept byte for byte, whatever words they hold, unless they belong to a run that is cut in fewer blocks.

mod compose;
mod fitting;
mod follow;
mod judge;
mod runs;
mod space;
mod words;

use crate::error::{Error, Kind};
use crate::feed::{self, Limits};
use crate::gcode::{self, Dialect};
use crate::machine::{HelixFeed, Machine};
use crate::num::{Deviation, Tolerance};
use compose::Composed;
use fitting::{Fitter, Replaced};
use follow::Followed;

/// A program in fewer blocks.
#[derive(Clone, Debug)]
pub struct Condensed {
    /// The text; as it was where nothing was bettered.
    pub text: String,
    /// Why the program is returned as it was, in words; `None` for one that was bettered.
    pub unchanged: Option<String>,
    /// Its size before.
    pub before: Size,
    /// Its size afterwards.
    pub after: Size,
    /// Runs of straight cuts.
    pub runs: usize,
    /// Runs that are cut in fewer blocks now.
    pub bettered: usize,
    /// The largest certified distance between a run as it was and as it is; `None` where nothing was bettered.
    pub deviation: Option<Deviation>,
    /// What the person at the machine should know.
    pub notes: Vec<String>,
}

/// How large a program is.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Size {
    /// Lines that a controller must execute.
    pub blocks: usize,
    /// Those that move an axis.
    pub motion_blocks: usize,
    /// The size of the text.
    pub bytes: usize,
    /// Its planned time in seconds; `None` where it holds words that are not known.
    pub time_s: Option<f64>,
}

/// `text` with its runs of straight cuts in fewer blocks, each within `tolerance` of what it was.
///
/// Every bettered run is read back and measured, and the whole text is followed again: the cutter must come to every
/// other line from the same place, by the same motion and at the same feed.
///
/// # Errors
/// Those of the reader; [`Kind::Refused`] for calls of other lines.
pub fn condense(text: &str, machine: &Machine, tolerance: Tolerance) -> Result<Condensed, Error> {
    let read = gcode::read(text)?;
    let dialect = Dialect::of(machine);
    let followed = follow::follow(&read, &dialect)?;
    let before = size(text, &followed, machine);
    let mut condensed = Condensed {
        text: text.to_owned(),
        unchanged: None,
        before,
        after: before,
        runs: 0,
        bettered: 0,
        deviation: None,
        notes: notes(&followed, machine),
    };
    if let Some(comment) = compose::carried(&read) {
        condensed.unchanged = Some(format!("a tolerance is spent in it already: {comment}"));
        return Ok(condensed);
    }
    let lines = compose::lines(text);
    let level = !(machine.arcs.helices && machine.arcs.helix_feed == HelixFeed::Path);
    let place = machine.last_place();
    let runs = runs::runs(&followed.blocks, place, level);
    condensed.runs = runs.len();
    let fitter = Fitter { text: &read, lines: &lines, followed: &followed, machine, tolerance };
    let replaced = fitter.replaced(runs);
    if replaced.is_empty() {
        condensed.unchanged = Some("no run of straight cuts can be cut in fewer blocks".into());
        return Ok(condensed);
    }
    let composed = compose::compose(&read, &lines, &followed, &replaced, (machine, tolerance));
    held(&composed, &followed, &dialect)?;
    condensed.bettered = replaced.len();
    condensed.deviation = worst(&replaced);
    condensed.after =
        size(&composed.text, &follow::follow(&gcode::read(&composed.text)?, &dialect)?, machine);
    condensed.text = composed.text;
    Ok(condensed)
}

/// Holds the new text against the old one: every line that was kept is come to as before.
fn held(composed: &Composed, old: &Followed, dialect: &Dialect) -> Result<(), Error> {
    let read = gcode::read(&composed.text)?;
    let new = follow::follow(&read, dialect)?;
    let rounding = new.blocks.len().max(old.blocks.len()) as f64 * 16.0 * f64::EPSILON;
    let mut kept = composed.kept.iter().peekable();
    for seen in &new.blocks {
        let Some((_, was)) = kept.next_if(|(line, _)| *line == seen.line) else { continue };
        let was = &old.blocks[*was];
        if !seen.is_as(was, rounding) {
            let what = "the condensed program would come to this line in another way, so it was not written";
            return Err(Error::new(Kind::Refused, what).on_line(was.line).remedy("please report it"));
        }
    }
    match kept.next() {
        None => Ok(()),
        Some((_, was)) => {
            let what = "the condensed program would lose this line, so it was not written";
            Err(Error::new(Kind::Refused, what).on_line(old.blocks[*was].line).remedy("please report it"))
        }
    }
}

fn worst(replaced: &[Replaced]) -> Option<Deviation> {
    replaced.iter().map(|replaced| replaced.deviation).reduce(|a, b| if b.mm > a.mm { b } else { a })
}

fn size(text: &str, followed: &Followed, machine: &Machine) -> Size {
    let understood = gcode::read(text).and_then(|read| gcode::interpret(&read, &Dialect::of(machine)));
    let time = |program: gcode::Program| feed::time(&program.toolpath, &Limits::of(machine)).time_s;
    Size {
        blocks: followed.blocks.iter().filter(|seen| seen.commands).count(),
        motion_blocks: followed.blocks.iter().filter(|seen| seen.moves.is_some()).count(),
        bytes: text.len(),
        time_s: understood.ok().map(time),
    }
}

/// What the follower took for granted, or could not tell.
fn notes(followed: &Followed, machine: &Machine) -> Vec<String> {
    let mut notes = Vec::new();
    if !followed.unknown.is_empty() {
        let words: Vec<&str> = followed.unknown.iter().map(String::as_str).collect();
        notes.push(format!(
            "words that are not known stay where they are, and the place is not taken for known after them: {}",
            words.join(", ")
        ));
    }
    if !followed.states_unit {
        notes.push(format!("the program states no unit: {} as the profile says", machine.unit.symbol()));
    }
    notes
}
