//! Where a program can be taken up again, and the program that does.

use std::fmt;
use std::ops::Range;
use std::str::FromStr;

use kurbo::Point;

use super::checking::{self, Intended};
use super::programs::{CutterProgram, Part};
use super::{Plan, feeding, read_back};
use crate::check::{self, Claim};
use crate::error::{Error, Kind};
use crate::gcode::{self, Curve, Header, Mark, Program, Written};
use crate::job::Job;
use crate::machine::Comments;
use crate::route::{self, Restart, Routing};
use crate::toolpath::{Move, Toolpath};

/// A place where a program can be taken up again, as it is found in the text.
#[derive(Clone, Debug, PartialEq)]
pub struct Place {
    /// What begins there.
    pub restart: Restart,
    /// Which part it stands in, from 0; 0 for a program in one.
    pub part: usize,
    /// Its line in that text, from 1.
    pub line: usize,
    /// The number of that block, where blocks are numbered.
    pub block: Option<u32>,
    /// Where the cutter then is, in the program's coordinates.
    pub at: Point,
}

/// The block to take a program up at, as the person at the machine sees it: `57` for a line, `N570` for a block's own
/// number, and `2:57` in the second of several files.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Block {
    /// The file, from 1; `None` where there is one only.
    pub file: Option<usize>,
    /// What is counted.
    pub number: Number,
}

/// A line or a block.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Number {
    /// The line of the text, from 1.
    Line(usize),
    /// The block's own number.
    Block(u32),
}

/// A program that takes up another one.
#[derive(Clone, Debug)]
pub struct Resumed {
    /// Its text.
    pub text: String,
    /// The number of the file that it takes up, from 0, among all files of the job.
    pub file: usize,
    /// Where it takes it up.
    pub place: Place,
    /// What it was checked for.
    pub claims: Vec<Claim>,
}

/// The program with a comment where a cut begins, and its header; without them where the controller takes none or has
/// no room for them.
pub(super) fn marked(
    job: &Job,
    toolpath: &Toolpath,
    plain: &Header,
    restarts: &[Restart],
) -> Result<(Header, Written), Error> {
    // Amid a cut a comment would take the time of a block.
    let begins = restarts.iter().filter(|restart| restart.below.is_none());
    let mark = |r: &Restart| Mark { before: r.number, text: format!("cut {}: contour {}", r.cut, r.contour) };
    let marks = match job.machine.program.comments {
        Comments::None => Vec::new(),
        _ => begins.map(mark).collect(),
    };
    let header = Header { marks, ..plain.clone() };
    let written = gcode::write_lines(toolpath, &header, &job.machine)?;
    let memory = job.machine.controller.memory_bytes.map_or(usize::MAX, |bytes| bytes as usize);
    if written.text.len() <= memory {
        return Ok((header, written));
    }
    Ok((plain.clone(), gcode::write_lines(toolpath, plain, &job.machine)?))
}

/// The places as they are found in the text of a program or of its parts.
pub(super) fn places(
    restarts: &[Restart],
    lines: &[usize],
    (text, program): (&str, &Program),
    parts: &[Part],
) -> Vec<Place> {
    let of_whole = |restart: &Restart| place(restart, 0, lines[restart.number], (text, program));
    let of_part = |restart: &Restart| {
        let (k, part) = parts.iter().enumerate().find(|(_, part)| part.moves.contains(&restart.number))?;
        // The part's own start needs no place.
        let number = (restart.number - part.moves.start).checked_sub(1)? + 1;
        place(restart, k, part.lines[number], (&part.text, &part.program))
    };
    restarts.iter().filter_map(|r| if parts.is_empty() { of_whole(r) } else { of_part(r) }).collect()
}

/// The place of one restart; none where the text does not have a move there.
fn place(restart: &Restart, part: usize, line: usize, (text, program): (&str, &Program)) -> Option<Place> {
    let m = program.toolpath.moves.iter().find(|m| m.line == line)?;
    let at = if restart.below.is_none() { m.to.xy } else { m.from.xy };
    let written = text.lines().nth(line - 1)?;
    let digits = written.strip_prefix('N').map(|rest| rest.split(|c: char| !c.is_ascii_digit()).next());
    let block = digits.flatten().and_then(|digits| digits.parse().ok());
    Some(Place { restart: *restart, part, line, block, at })
}

/// The program that takes a plan's program up at a block.
///
/// # Errors
/// Refused for a block that is no place to start again, with the nearest that are; and for a program that fails its
/// check.
pub(super) fn resume(job: &Job, plan: &Plan, block: Block) -> Result<Resumed, Error> {
    let (file, made, part) = find_file(plan, block.file)?;
    let place = find_place(made, part, block.number)?.clone();
    let restart = place.restart;
    let end = made.parts.get(part).map_or(made.routing.toolpath.moves.len(), |part| part.moves.end);
    let rest = Routing {
        toolpath: Toolpath { moves: made.routing.toolpath.moves[..end].to_vec() },
        ..made.routing.clone()
    };
    let cut = made.routed.iter().find(|routed| routed.id == restart.contour).map(|routed| &routed.cut);
    let cut = cut.ok_or_else(|| Error::new(Kind::Refused, "the program has no such cut"))?;
    let mut toolpath = route::resume(&rest, restart.number, cut, &plan.setup)?;
    let title = format!("{}, taken up again at line {}", made.header.title, place.line);
    let curves = curves_from(&made.header.curves, restart.number..end, toolpath.moves.len());
    let header = Header { title, curves, marks: Vec::new(), ..made.header.clone() };
    feeding::suit(&mut toolpath, &header, job, made.cutter);
    let text = gcode::write(&toolpath, &header, &job.machine)?;
    let program = read_back(&text, &job.machine)?;
    let intended = Intended::of(made, plan);
    let mut claims = checking::check_again(job, &program, plan, &intended);
    let whole = made.parts.get(part).map_or(&made.program, |part| &part.program);
    let taken_up = |m: &&Move| m.line >= place.line;
    let before: Vec<Move> = whole.toolpath.moves.iter().filter(|m| !taken_up(m)).copied().collect();
    let after: Vec<Move> = whole.toolpath.moves.iter().filter(taken_up).copied().collect();
    let top = plan.setup.heights().top;
    claims.extend(check::check_resumed(&program, (&before, &after), &job.machine, top));
    checking::hold(&claims)?;
    Ok(Resumed { text, file, place, claims })
}

/// The curves among some moves, which end a toolpath of so many.
fn curves_from(curves: &[Curve], among: Range<usize>, moves: usize) -> Vec<Curve> {
    let within = |curve: &&Curve| among.start <= curve.moves.start && curve.moves.end <= among.end;
    let moved = |place: usize| place + moves - among.end;
    let curve = |c: &Curve| Curve { moves: moved(c.moves.start)..moved(c.moves.end), ..c.clone() };
    curves.iter().filter(within).map(curve).collect()
}

/// The file that a block stands in: its number among all, the program that it belongs to, and which part of it.
fn find_file(plan: &Plan, file: Option<usize>) -> Result<(usize, &CutterProgram, usize), Error> {
    let files: Vec<(&CutterProgram, usize)> =
        plan.programs.iter().flat_map(|made| (0..made.texts().len()).map(move |part| (made, part))).collect();
    let number = match (file, files.len()) {
        (None, 1) => 1,
        (Some(number), _) => number,
        (None, of) => {
            let what = format!("the job has {of} files, and it is not said in which the block stands");
            let remedy = format!("write its number first, such as --resume-at {of}:57");
            return Err(Error::new(Kind::Settings, what).remedy(remedy));
        }
    };
    let found = number.checked_sub(1).and_then(|k| files.get(k).map(|&(made, part)| (k, made, part)));
    found.ok_or_else(|| {
        let what = format!("there is no file {number}: the job has {}", files.len());
        Error::new(Kind::Settings, what).remedy("correct --resume-at")
    })
}

/// The place at a block; a comment stands for the block after it.
fn find_place(made: &CutterProgram, part: usize, number: Number) -> Result<&Place, Error> {
    let text = made.texts()[part];
    let is_comment =
        |line: usize| text.lines().nth(line.wrapping_sub(1)).is_some_and(|text| text.starts_with(['(', ';']));
    let here = |place: &&Place| place.part == part;
    let meant = |place: &&Place| match number {
        Number::Block(block) => place.block == Some(block),
        Number::Line(line) => line <= place.line && (line..place.line).all(is_comment),
    };
    let places = || made.restarts.iter().filter(here);
    places().find(meant).ok_or_else(|| no_place(places().collect(), number))
}

/// The refusal of a block, with the nearest that can be taken up.
fn no_place(places: Vec<&Place>, number: Number) -> Error {
    let counted = |place: &Place| match number {
        Number::Line(_) => place.line,
        Number::Block(_) => place.block.map_or(0, |block| block as usize),
    };
    let asked = match number {
        Number::Line(line) => line,
        Number::Block(block) => block as usize,
    };
    let before = places.iter().rfind(|place| counted(place) <= asked);
    let after = places.iter().find(|place| counted(place) > asked);
    let near: Vec<String> = [before, after].into_iter().flatten().map(|place| place.to_string()).collect();
    let what = format!("the program cannot be taken up again at {number}");
    let numbered = places.iter().any(|place| place.block.is_some());
    let remedy = if !numbered && matches!(number, Number::Block(_)) {
        "its blocks have no numbers: give the line, such as 57".to_owned()
    } else if near.is_empty() {
        "it has no place to start again but its beginning".to_owned()
    } else {
        format!("the nearest places are {}", near.join(" and "))
    };
    Error::new(Kind::Refused, what).remedy(remedy)
}

impl fmt::Display for Place {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "line {}", self.line)?;
        if let Some(block) = self.block {
            write!(f, " (N{block})")?;
        }
        write!(f, ", cut {} of contour {}", self.restart.cut, self.restart.contour)?;
        match self.restart.below {
            Some(z) => write!(f, " below Z {z:.2} mm"),
            None => Ok(()),
        }
    }
}

impl fmt::Display for Number {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Line(line) => write!(f, "line {line}"),
            Self::Block(block) => write!(f, "block N{block}"),
        }
    }
}

impl FromStr for Block {
    type Err = String;

    fn from_str(text: &str) -> Result<Self, String> {
        let (file, number) = match text.trim().split_once(':') {
            Some((file, number)) => (Some(file.trim().parse().ok()), number.trim()),
            None => (None, text.trim()),
        };
        let number = match number.strip_prefix(['N', 'n']) {
            Some(block) => block.parse().ok().map(Number::Block),
            None => number.parse().ok().map(Number::Line),
        };
        let file = file.map_or(Some(None), |file: Option<usize>| file.map(Some));
        let both = number.zip(file).map(|(number, file)| Self { file, number });
        both.ok_or_else(|| {
            "neither a line, such as 57, nor a block's number, such as N570, nor one in a file, such as 2:57"
                .into()
        })
    }
}
