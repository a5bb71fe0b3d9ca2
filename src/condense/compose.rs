//! The new text from kept lines and replaced runs.

use super::fitting::Replaced;
use super::follow::Followed;
use crate::gcode::read::Text;
use crate::machine::{Comments, Machine};
use crate::num::Tolerance;

/// How the comment starts that names the tolerance spent.
const SPENT: &str = "condensed within";
/// How the comment starts that programs made from drawings carry.
const MADE: &str = "made by ribband";

/// The new text.
#[derive(Clone, Debug)]
pub(super) struct Composed {
    pub(super) text: String,
    /// The lines of the new text, from 1, that hold kept blocks, with the index of the block.
    pub(super) kept: Vec<(usize, usize)>,
}

/// The comment by which a program says that a tolerance is spent in it, if it does.
pub(super) fn carried<'a>(text: &Text<'a>) -> Option<&'a str> {
    let comments = text.blocks.iter().filter_map(|block| block.comment);
    comments.into_iter().find(|comment| comment.starts_with(SPENT) || comment.starts_with(MADE))
}

/// The lines of `text` with their ends: a line feed, a carriage return, or both.
pub(super) fn lines(text: &str) -> Vec<&str> {
    let mut lines = Vec::new();
    let mut rest = text;
    while let Some(at) = rest.find(['\n', '\r']) {
        let end = at + if rest[at..].starts_with("\r\n") { 2 } else { 1 };
        lines.push(&rest[..end]);
        rest = &rest[end..];
    }
    if !rest.is_empty() {
        lines.push(rest);
    }
    lines
}

/// The lines put together, the replaced runs in their places, and the comment that names the tolerance.
pub(super) fn compose(
    read: &Text,
    lines: &[&str],
    followed: &Followed,
    replaced: &[Replaced],
    (machine, tolerance): (&Machine, Tolerance),
) -> Composed {
    let mut page = Page { text: String::new(), line: 0, ending: ending(lines), kept: Vec::new() };
    let (heading, comment) = (heading(read), comment(machine, tolerance));
    let mut replaced = replaced.iter().peekable();
    let mut blocks = followed.blocks.iter().enumerate().peekable();
    // The block that the last replaced run ends before, and the motion word it left, where that is not G1.
    let (mut until, mut word) = (0, None);
    for (i, line) in lines.iter().enumerate() {
        if i + 1 == heading {
            comment.iter().for_each(|comment| page.put(comment));
        }
        let Some((block, seen)) = blocks.next_if(|(_, seen)| seen.line == i + 1) else {
            page.raw(line);
            continue;
        };
        if let Some(run) = replaced.next_if(|replaced| replaced.run.blocks.start == block) {
            run.lines.iter().for_each(|line| page.put(line));
            until = run.run.blocks.end;
            word = run.word.filter(|word| *word != 10);
        }
        if block < until {
            continue;
        }
        if word.is_some() && seen.moves.is_some() && !seen.states_motion {
            page.put("G1");
        }
        if seen.moves.is_some() || seen.states_motion {
            word = None;
        }
        page.kept.push((page.line + 1, block));
        page.raw(line);
    }
    Composed { text: page.text, kept: page.kept }
}

/// Text under way.
struct Page<'a> {
    text: String,
    /// Lines so far.
    line: usize,
    ending: &'a str,
    kept: Vec<(usize, usize)>,
}

impl Page<'_> {
    /// A line of the old text with its end.
    fn raw(&mut self, line: &str) {
        self.text.push_str(line);
        self.line += 1;
    }

    /// A new line.
    fn put(&mut self, line: &str) {
        self.raw(line);
        self.text.push_str(self.ending);
    }
}

/// How the first line ends.
fn ending<'a>(lines: &[&'a str]) -> &'a str {
    let first = lines.first().copied().unwrap_or_default();
    let end = first.trim_end_matches(['\n', '\r']).len();
    if end < first.len() { &first[end..] } else { "\n" }
}

/// The line, from 1, that the comment comes before: the first that holds anything, a program's number left in front.
fn heading(read: &Text) -> usize {
    let Some(first) = read.blocks.first() else { return 1 };
    let is_number = read.words(first).iter().any(|word| word.letter == b'O');
    first.line + usize::from(is_number)
}

/// The comment that names the tolerance spent; none where the controller takes no comments.
fn comment(machine: &Machine, tolerance: Tolerance) -> Option<String> {
    let spent = format!("{SPENT} {} mm", tolerance.mm());
    match machine.program.comments {
        Comments::Brackets => Some(format!("({spent})")),
        Comments::Semicolon => Some(format!("; {spent}")),
        Comments::None => None,
    }
}
