//! What a block does beside moving along a path: cutter, spindle, dwell, offsets, homing, stops.

use super::block::{Codes, Group, wrong};
use super::interpret::{AXES, Controller, g_word};
use super::program::What;
use crate::error::Error;
use crate::machine::Dwell;

impl Controller<'_> {
    /// Cutter change, spindle, coolant, overrides and dwell.
    pub(super) fn machine_functions(&mut self, codes: &mut Codes) -> Result<(), Error> {
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
    pub(super) fn turn(&mut self, clockwise: Option<bool>) {
        match clockwise {
            Some(clockwise) => self.happens(What::SpindleOn { rpm: self.rpm, clockwise }),
            None if self.turning.is_some() => self.happens(What::SpindleOff),
            None => {}
        }
        self.turning = clockwise;
    }

    /// G43 and G49.
    pub(super) fn length_offset(&mut self, codes: &mut Codes) -> Result<(), Error> {
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
    pub(super) fn work_offset(&mut self, codes: &mut Codes) -> Result<(), Error> {
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
    pub(super) fn once(&mut self, codes: &mut Codes) -> Result<(), Error> {
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
    pub(super) fn away(&mut self, moved: [bool; 3]) {
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

    /// M0, M1, M2 and M30.
    pub(super) fn stop(&mut self, codes: &Codes) {
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
}
