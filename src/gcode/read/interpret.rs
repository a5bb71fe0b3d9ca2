//! Blocks to moves: the modal interpreter.
//!
//! Rules and order of execution are those of NISTIR 6556, 3.4 to 3.8 and table 8. What it does not know is
//! an error.

use super::block::{Codes, Group, wrong};
use super::program::{Event, Program, What};
use super::words::{Block, Text};
use crate::error::Error;
use crate::machine::{ArcStyle, Dwell, HelixFeed, Machine, Unit};
use crate::toolpath::Position;

/// What a text leaves open, and the controller decides.
#[derive(Clone, Debug, PartialEq)]
pub struct Dialect {
    /// The unit until the program states one.
    pub unit: Unit,
    /// True when the centre of an arc is given from zero until the program states it (G90.1, G91.1).
    pub centre_from_zero: bool,
    /// What the feed of a helix is measured along.
    pub helix_feed: HelixFeed,
    /// What the number of a dwell counts.
    pub dwell: Dwell,
    /// The words that the profile sets its path mode with; P and Q are read where they have them.
    pub path_word: Option<String>,
    /// Where the cutter is before the first block; `None` when it can be anywhere.
    pub start: Option<Position>,
    /// True when lines that start with a slash are skipped.
    pub skip_optional: bool,
}

impl Dialect {
    /// The dialect of `machine`'s controller, with the cutter anywhere and no line skipped.
    pub fn of(machine: &Machine) -> Self {
        Self {
            unit: machine.unit,
            centre_from_zero: machine.arcs.style == ArcStyle::CentreAbsolute,
            helix_feed: machine.arcs.helix_feed,
            dwell: machine.program.dwell,
            path_word: machine.path.word.clone(),
            start: None,
            skip_optional: false,
        }
    }
}

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
    unit: Option<Unit>,
    absolute: Option<bool>,
    centre_from_zero: Option<bool>,
    plane: Option<Plane>,
    inverse_time: Option<bool>,
    pub(super) back_to_start: Option<bool>,
    motion: Option<u16>,
    /// Where X, Y and Z are, in mm, from the zero that the program started with.
    pub(super) at: [Option<f64>; 3],
    /// What G92 adds to programmed places.
    offset: [f64; 3],
    saved_offset: [f64; 3],
    work: Option<u16>,
    /// The F word: mm/min, or 1/min in inverse time.
    pub(super) feed: Option<f64>,
    rpm: f64,
    turning: Option<bool>,
    cutter: Option<u32>,
    message: String,
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

    /// Cutter change, spindle, coolant, overrides and dwell.
    fn machine_functions(&mut self, codes: &mut Codes) -> Result<(), Error> {
        if codes.get(Group::Change).is_some() {
            self.turn(None);
            // The change may move any axis, and the next cutter has another length.
            self.at = [None; 3];
            self.happens(What::CutterChange { number: self.cutter });
        }
        match codes.get(Group::Spindle) {
            Some(50) => self.turn(None),
            Some(way) => self.turn(Some(way == 30)),
            None => {}
        }
        if let Some(coolant) = codes.get(Group::Mist) {
            self.happens(What::Coolant { on: coolant != 90 });
        }
        if let Some(overrides) = codes.get(Group::Overrides) {
            self.happens(What::Overrides { allowed: overrides == 480 });
        }
        if codes.get(Group::Once) == Some(40) {
            let number = codes.value(b'P').filter(|p| *p >= 0.0);
            let number = number.ok_or_else(|| wrong("G4 needs a P from zero"))?;
            let seconds = self.dwell_seconds(Some(number));
            self.happens(What::Dwell { seconds });
        }
        Ok(())
    }

    /// The spindle clockwise, counter-clockwise, or stopped.
    fn turn(&mut self, clockwise: Option<bool>) {
        match clockwise {
            Some(clockwise) => self.happens(What::SpindleOn { rpm: self.rpm, clockwise }),
            None if self.turning.is_some() => self.happens(What::SpindleOff),
            None => {}
        }
        self.turning = clockwise;
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

    /// G43 and G49.
    fn length_offset(&mut self, codes: &mut Codes) -> Result<(), Error> {
        let Some(code) = codes.get(Group::Length) else { return Ok(()) };
        let number = if code == 430 { codes.count(b'H')? } else { None };
        if code == 430 && number.is_none() {
            return Err(wrong("G43 needs an H"));
        }
        self.at[2] = None;
        self.assume("the length offset that the program sets is the one that Z was zeroed with");
        self.happens(What::LengthOffset { number });
        Ok(())
    }

    /// G54 to G59.3: which one is in force cannot change once places are stated.
    fn work_offset(&mut self, codes: &mut Codes) -> Result<(), Error> {
        let Some(code) = codes.get(Group::Work).filter(|code| self.work != Some(*code)) else {
            return Ok(());
        };
        if self.at.iter().any(Option::is_some) {
            let what = format!("{} changes the work offset after the program has moved", g_word(code));
            return Err(wrong(what)
                .remedy("how far the two zeros are apart is not in the program: check the parts apart"));
        }
        self.work = Some(code);
        self.happens(What::WorkOffset { word: g_word(code) });
        Ok(())
    }

    /// What is done once and uses the line's axis words: G28, G30, G92 and its kin.
    fn once(&mut self, codes: &mut Codes) -> Result<(), Error> {
        match codes.get(Group::Once) {
            Some(code @ (280 | 300)) => self.home(code, codes),
            Some(920) => self.move_zero(codes),
            Some(code @ (921 | 922)) => {
                self.saved_offset = if code == 921 { [0.0; 3] } else { self.offset };
                self.offset = [0.0; 3];
                self.happens(What::ZeroMoved);
                Ok(())
            }
            Some(923) => {
                self.offset = self.saved_offset;
                self.happens(What::ZeroMoved);
                Ok(())
            }
            _ => Ok(()),
        }
    }

    /// G28 and G30: by rapid to the place on the line, then to the machine's own.
    fn home(&mut self, code: u16, codes: &mut Codes) -> Result<(), Error> {
        if codes.get(Group::Motion).is_some() {
            return Err(wrong(format!("{} and a motion word stand on one line", g_word(code))));
        }
        let moved = AXES.map(|axis| codes.has(axis));
        if moved != [false; 3] {
            let to = self.target(codes)?;
            self.straight(moved, to, None);
        }
        self.away(if moved == [false; 3] { [true; 3] } else { moved });
        Ok(())
    }

    /// A rapid of the axes `moved` to a place that the program's zero says nothing of.
    fn away(&mut self, moved: [bool; 3]) {
        self.program.motion_blocks += 1;
        self.happens(What::MachineMove { moved });
        for (at, moved) in self.at.iter_mut().zip(moved) {
            *at = at.filter(|_| !moved);
        }
    }

    /// G92: the place where the cutter stands gets the numbers on the line.
    fn move_zero(&mut self, codes: &mut Codes) -> Result<(), Error> {
        if codes.get(Group::Motion).is_some() || !codes.has_axis() {
            return Err(wrong("G92 needs axis words, and no motion word beside it"));
        }
        for (axis, letter) in AXES.into_iter().enumerate() {
            let Some(value) = codes.value(letter) else { continue };
            let value = value * self.unit().mm();
            match self.at[axis] {
                Some(at) => self.offset[axis] = at - value,
                None => {
                    let axis_name = char::from(letter);
                    self.assume(&format!("the zero of {axis_name} is set where the cutter stands, by G92"));
                    self.offset[axis] = 0.0;
                    self.at[axis] = Some(value);
                }
            }
        }
        self.saved_offset = self.offset;
        self.happens(What::ZeroMoved);
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
            Some(code @ (810 | 820 | 830)) => self.drill(code, codes),
            _ => Err(wrong("the line has axis words and no motion word is in force")),
        }
    }

    /// M0, M1, M2 and M30.
    fn stop(&mut self, codes: &Codes) {
        match codes.get(Group::Stop) {
            Some(code @ (0 | 10)) => {
                let message = self.message.clone();
                self.happens(What::Stop { optional: code == 10, message });
            }
            Some(_) => {
                self.turn(None);
                self.happens(What::End);
                self.program.ended = Some(self.line);
            }
            None => {}
        }
    }

    /// How long a dwell of `number` is, where the profile says what the number counts.
    pub(super) fn dwell_seconds(&self, number: Option<f64>) -> Option<f64> {
        match self.dialect.dwell {
            Dwell::Seconds => number,
            Dwell::Milliseconds => number.map(|number| number / 1000.0),
            Dwell::Unknown => None,
        }
    }

    /// Notes an event.
    pub(super) fn happens(&mut self, what: What) {
        let before = self.program.toolpath.moves.len();
        self.program.events.push(Event { line: self.line, before, what });
    }

    /// Notes what the text did not say.
    pub(super) fn assume(&mut self, what: &str) {
        if !self.program.assumed.iter().any(|known| known == what) {
            self.program.assumed.push(what.to_string());
        }
    }

    /// The unit in force.
    pub(super) fn unit(&mut self) -> Unit {
        self.unit.unwrap_or_else(|| {
            let unit = self.dialect.unit;
            self.assume(&format!("numbers are in {}, as the profile says", unit.symbol()));
            self.program.unit = Some(unit);
            *self.unit.insert(unit)
        })
    }

    /// True when places are given from zero.
    pub(super) fn is_absolute(&mut self) -> bool {
        self.absolute.unwrap_or_else(|| {
            self.assume("places are given from zero (G90)");
            *self.absolute.insert(true)
        })
    }

    /// True when the centres of arcs are given from zero.
    pub(super) fn centre_is_from_zero(&mut self) -> bool {
        self.centre_from_zero.unwrap_or_else(|| {
            let from = if self.dialect.centre_from_zero { "zero" } else { "their start" };
            self.assume(&format!("the centres of arcs are given from {from}, as the profile says"));
            *self.centre_from_zero.insert(self.dialect.centre_from_zero)
        })
    }

    /// The plane of arcs.
    pub(super) fn arc_plane(&mut self) -> Plane {
        self.plane.unwrap_or_else(|| {
            self.assume("arcs are in the XY plane (G17)");
            *self.plane.insert(Plane::Xy)
        })
    }

    /// True when F is one over the minutes of a move.
    pub(super) fn in_inverse_time(&mut self) -> bool {
        self.inverse_time.unwrap_or_else(|| {
            self.assume("feeds are lengths a minute (G94)");
            *self.inverse_time.insert(false)
        })
    }

    /// The spindle's speed, 0 when it is stopped.
    pub(super) fn turning_rpm(&self) -> f64 {
        if self.turning.is_some() { self.rpm } else { 0.0 }
    }

    /// What G92 adds to the place of `axis`.
    pub(super) fn offset(&self, axis: usize) -> f64 {
        self.offset[axis]
    }
}

/// The G word with the number `code`, held times ten.
fn g_word(code: u16) -> String {
    if code.is_multiple_of(10) { format!("G{}", code / 10) } else { format!("G{}.{}", code / 10, code % 10) }
}
