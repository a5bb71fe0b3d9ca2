//! Blocks to moves: the modal interpreter.
//!
//! Rules and order of execution are those of NISTIR 6556, 3.4 to 3.8 and table 8. What it does not know is
//! an error.

use super::block::{Codes, Group, wrong};
use super::dialect::Dialect;
use super::program::{Event, Program, What};
use super::words::{Block, Text};
use crate::error::Error;
use crate::machine::Unit;

/// What `text` says on a controller of the given dialect.
///
/// # Errors
/// [`Kind::Refused`](crate::error::Kind::Refused), with the line and the word, for a word that is not
/// known, for one that belongs to nothing on its line, for words that exclude each other, and for moves
/// that the text leaves open.
pub fn interpret(text: &Text, dialect: &Dialect) -> Result<Program, Error> {
    let mut controller = Controller::new(dialect);
    let mut codes = Codes::new();
    for block in &text.blocks {
        if block.optional && dialect.skip_optional {
            controller.assume("lines that start with a slash are skipped");
            continue;
        }
        if block.optional {
            controller.assume("lines that start with a slash are run");
        }
        let words = text.words(block);
        controller.line = block.line;
        let done = codes.fill(words).and_then(|()| controller.execute(block, words.is_empty(), &mut codes));
        done.map_err(|error| error.on_line(block.line))?;
        if controller.program.ended.is_some() {
            break;
        }
    }
    Ok(controller.program)
}

/// A plane of arcs.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Plane {
    Xy,
    Zx,
    Yz,
}

/// The modes and the place, as the blocks so far leave them. A mode is `None` until it is stated or assumed.
pub(super) struct Controller<'a> {
    pub(super) dialect: &'a Dialect,
    pub(super) program: Program,
    pub(super) line: usize,
    pub(super) unit: Option<Unit>,
    pub(super) absolute: Option<bool>,
    pub(super) centre_from_zero: Option<bool>,
    pub(super) plane: Option<Plane>,
    pub(super) inverse_time: Option<bool>,
    pub(super) back_to_start: Option<bool>,
    pub(super) motion: Option<u16>,
    /// Where X, Y and Z are, in mm, from the zero that the program started with.
    pub(super) at: [Option<f64>; 3],
    /// What G92 adds to programmed places.
    pub(super) offset: [f64; 3],
    pub(super) saved_offset: [f64; 3],
    pub(super) work: Option<u16>,
    /// The F word: mm/min, or 1/min in inverse time.
    pub(super) feed: Option<f64>,
    pub(super) rpm: f64,
    pub(super) turning: Option<bool>,
    pub(super) cutter: Option<u32>,
    pub(super) message: String,
    pub(super) hole: super::cycle::Hole,
}

pub(super) const AXES: [u8; 3] = [b'X', b'Y', b'Z'];

impl<'a> Controller<'a> {
    fn new(dialect: &'a Dialect) -> Self {
        let at = dialect.start.map_or([None; 3], |at| [Some(at.xy.x), Some(at.xy.y), Some(at.z)]);
        let mut controller = Self {
            dialect,
            program: Program::default(),
            line: 0,
            unit: None,
            absolute: None,
            centre_from_zero: None,
            plane: None,
            inverse_time: None,
            back_to_start: None,
            motion: None,
            at,
            offset: [0.0; 3],
            saved_offset: [0.0; 3],
            work: None,
            feed: None,
            rpm: 0.0,
            turning: None,
            cutter: None,
            message: String::new(),
            hole: super::cycle::Hole::default(),
        };
        if let Some(at) = dialect.start {
            controller.assume(&format!("the cutter starts at X {} Y {} Z {} mm", at.xy.x, at.xy.y, at.z));
        }
        controller
    }

    /// One block, in the order of table 8.
    fn execute(&mut self, block: &Block, empty: bool, codes: &mut Codes) -> Result<(), Error> {
        if let Some(comment) = block.comment {
            self.message = comment.strip_prefix("MSG,").unwrap_or(comment).trim().to_string();
        }
        if empty {
            return Ok(());
        }
        self.program.blocks += 1;
        if self.is_program_number(codes) {
            return Ok(());
        }
        if codes.any_code() {
            self.before_feed(codes)?;
        }
        self.feed_and_speed(codes)?;
        if codes.any_code() {
            self.machine_functions(codes)?;
            self.modes(codes)?;
            self.once(codes)?;
        }
        self.motion(codes)?;
        codes.unused()?;
        self.stop(codes);
        if block.comment.is_none() {
            self.message.clear();
        }
        Ok(())
    }

    /// True for an O word at the start: the program's number, which commands nothing (common practice).
    fn is_program_number(&self, codes: &mut Codes) -> bool {
        self.program.blocks == 1 && codes.value(b'O').is_some() && codes.unused().is_ok() && !codes.any_code()
    }

    /// The unit that F is in, and what F counts.
    fn before_feed(&mut self, codes: &mut Codes) -> Result<(), Error> {
        let unit = match codes.get(Group::Units) {
            Some(200) => Some(Unit::Inch),
            Some(_) => Some(Unit::Mm),
            None => None,
        };
        if let Some(unit) = unit {
            if codes.has(b'F') && self.unit.is_some_and(|known| known != unit) {
                let what = "F and a change of unit stand on one line";
                return Err(
                    wrong(what).remedy("controllers differ in which unit F has then: put F on its own line")
                );
            }
            self.unit = Some(unit);
            self.program.unit = Some(unit);
        }
        if let Some(mode) = codes.get(Group::FeedMode) {
            if self.inverse_time != Some(mode == 930) {
                self.feed = None;
            }
            self.inverse_time = Some(mode == 930);
        }
        Ok(())
    }

    /// F, S and T.
    fn feed_and_speed(&mut self, codes: &mut Codes) -> Result<(), Error> {
        if let Some(feed) = codes.value(b'F') {
            if feed < 0.0 {
                return Err(wrong(format!("F{feed} is below zero")));
            }
            let unit = if self.in_inverse_time() { 1.0 } else { self.unit().mm() };
            self.feed = Some(feed * unit);
        }
        if let Some(rpm) = codes.value(b'S') {
            if rpm < 0.0 {
                return Err(wrong(format!("S{rpm} is below zero")));
            }
            self.rpm = rpm;
            if let (Some(clockwise), None) = (self.turning, codes.get(Group::Spindle)) {
                self.happens(What::SpindleOn { rpm, clockwise });
            }
        }
        if let Some(number) = codes.count(b'T')? {
            self.cutter = Some(number);
        }
        Ok(())
    }

    /// Plane, length offset, work offset, path mode, distance modes and return level.
    fn modes(&mut self, codes: &mut Codes) -> Result<(), Error> {
        if let Some(plane) = codes.get(Group::Plane) {
            self.plane = Some(match plane {
                170 => Plane::Xy,
                180 => Plane::Zx,
                _ => Plane::Yz,
            });
        }
        self.length_offset(codes)?;
        self.work_offset(codes)?;
        if let Some(path) = codes.get(Group::Path) {
            let word = g_word(path);
            // P and Q are dialect: read only where the profile's own path word has them.
            let own =
                self.dialect.path_word.as_deref().filter(|own| own.split(' ').next() == Some(word.as_str()));
            for letter in [b'P', b'Q'] {
                if own.is_some_and(|own| own.contains(&format!(" {}", char::from(letter)))) {
                    codes.value(letter);
                }
            }
            self.happens(What::PathMode { word });
        }
        if let Some(mode) = codes.get(Group::Distance) {
            self.absolute = Some(mode == 900);
        }
        if let Some(mode) = codes.get(Group::ArcCentre) {
            self.centre_from_zero = Some(mode == 901);
        }
        if let Some(mode) = codes.get(Group::Return) {
            self.back_to_start = Some(mode == 980);
        }
        Ok(())
    }

    /// The motion of the line, if it has any.
    fn motion(&mut self, codes: &mut Codes) -> Result<(), Error> {
        let stated = codes.get(Group::Motion);
        let spoken_for = matches!(codes.get(Group::Once), Some(280 | 300 | 920));
        if let Some(code) = stated {
            if self.motion != Some(code) {
                self.hole = super::cycle::Hole::default();
            }
            self.motion = Some(code);
        }
        let centre = [b'I', b'J', b'K', b'R'].into_iter().any(|letter| codes.has(letter));
        if spoken_for || !(codes.has_axis() || centre) {
            if stated.is_some_and(|code| code != 800) {
                self.assume("a motion word on a line without axes sets the mode and moves nothing");
            }
            return Ok(());
        }
        let by_machine = codes.get(Group::Once) == Some(530);
        match self.motion {
            Some(0) if by_machine => {
                self.away(AXES.map(|axis| codes.value(axis).is_some()));
                Ok(())
            }
            _ if by_machine => Err(wrong("G53 goes by rapid only here: put G0 on its line")),
            Some(code @ (0 | 10)) => self.line_to(code == 10, codes),
            Some(code @ (20 | 30)) => self.arc_to(code == 20, codes),
            Some(50) => self.cubic_to(codes),
            Some(code @ (810 | 820 | 830)) => self.drill(code, codes),
            _ => Err(wrong("the line has axis words and no motion word is in force")),
        }
    }

    /// Notes an event.
    pub(super) fn happens(&mut self, what: What) {
        let before = self.program.toolpath.moves.len();
        self.program.events.push(Event { line: self.line, before, what });
    }
}

/// The G word with the number `code`, held times ten.
pub(super) fn g_word(code: u16) -> String {
    if code.is_multiple_of(10) { format!("G{}", code / 10) } else { format!("G{}.{}", code / 10, code % 10) }
}
