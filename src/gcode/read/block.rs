//! The codes of one block, sorted by modal group and checked against the rules for a line (NISTIR 6556, 3.3
//! and 3.4).

use super::words::Word;
use crate::error::{Error, Kind};

/// A modal group of G or M words. At most one of each stands on a line.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Group {
    Motion,
    Plane,
    Distance,
    ArcCentre,
    FeedMode,
    Units,
    Compensation,
    Length,
    Return,
    Work,
    Path,
    Once,
    Stop,
    Change,
    Spindle,
    Mist,
    Overrides,
}

const GROUPS: usize = Group::Overrides as usize + 1;

/// The words of one block by letter and group. Codes are held times ten.
pub(super) struct Codes {
    values: [f64; 26],
    given: u32,
    used: u32,
    codes: [Option<u16>; GROUPS],
    any_code: bool,
}

impl Codes {
    /// A block without words.
    pub(super) fn new() -> Self {
        Self { values: [0.0; 26], given: 0, used: 0, codes: [None; GROUPS], any_code: false }
    }

    /// Takes the words of the next block instead.
    pub(super) fn fill(&mut self, words: &[Word]) -> Result<(), Error> {
        (self.given, self.used) = (0, 0);
        if self.any_code {
            self.codes = [None; GROUPS];
            self.any_code = false;
        }
        words.iter().try_for_each(|word| self.take(word))
    }

    fn take(&mut self, word: &Word) -> Result<(), Error> {
        match word.letter {
            b'G' | b'M' => return self.code(word),
            b'E' | b'U' | b'V' | b'W' => return Err(unknown(word)),
            b'A' | b'B' | b'C' => return Err(unknown(word).remedy("rotary axes are not read")),
            _ => {}
        }
        let bit = bit(word.letter);
        if self.given & bit != 0 {
            return Err(wrong(format!("{} stands twice on the line", char::from(word.letter))));
        }
        self.given |= bit;
        self.values[usize::from(word.letter - b'A')] = word.value;
        Ok(())
    }

    /// Sorts a G or M word into its group.
    fn code(&mut self, word: &Word) -> Result<(), Error> {
        let tenths = (word.value * 10.0).round();
        let whole = (word.value * 10.0 - tenths).abs() <= 0.001 && (0.0..1000.0).contains(&tenths);
        let code = tenths as u16;
        let group = if word.letter == b'G' { g_group(code) } else { m_group(code) };
        let group = group.filter(|_| whole).ok_or_else(|| unknown(word))?;
        let slot = &mut self.codes[group as usize];
        if slot.is_some() {
            let what = format!("{word} and another word of its group stand on one line");
            return Err(wrong(what).remedy("one of them would be ignored: put them on two lines"));
        }
        *slot = Some(code);
        self.any_code = true;
        Ok(())
    }

    /// True when the block has a G or M word.
    pub(super) fn any_code(&self) -> bool {
        self.any_code
    }

    /// The word of `group`, times ten.
    pub(super) fn get(&self, group: Group) -> Option<u16> {
        self.codes[group as usize]
    }

    /// True when the block has `letter`.
    pub(super) fn has(&self, letter: u8) -> bool {
        self.given & bit(letter) != 0
    }

    /// True when the block has any of X, Y and Z.
    pub(super) fn has_axis(&self) -> bool {
        self.given & (bit(b'X') | bit(b'Y') | bit(b'Z')) != 0
    }

    /// The number of `letter`, which counts as used from then on.
    pub(super) fn value(&mut self, letter: u8) -> Option<f64> {
        let bit = bit(letter);
        self.used |= bit;
        (self.given & bit != 0).then(|| self.values[usize::from(letter - b'A')])
    }

    /// The number of `letter` as a count.
    pub(super) fn count(&mut self, letter: u8) -> Result<Option<u32>, Error> {
        let Some(value) = self.value(letter) else { return Ok(None) };
        // Whole numbers may be off by 0.0001 (NISTIR 6556, 3.3.2.1).
        let near = (value - value.round()).abs() <= 1e-4 && (0.0..=1e6).contains(&value.round());
        let letter = char::from(letter);
        let whole = near.then(|| value.round() as u32);
        whole.map(Some).ok_or_else(|| wrong(format!("{letter}{value} is not a whole number from 0")))
    }

    /// The error for the first word that nothing on the line asked for.
    pub(super) fn unused(&self) -> Result<(), Error> {
        let left = self.given & !self.used;
        if left == 0 {
            return Ok(());
        }
        let letter = b'A' + left.trailing_zeros() as u8;
        let word = Word { letter, value: self.values[usize::from(letter - b'A')] };
        Err(wrong(format!("{word} belongs to nothing on its line")))
    }
}

/// The bit of `letter`.
fn bit(letter: u8) -> u32 {
    1 << (letter - b'A')
}

/// The error for a line that breaks a rule of the language.
pub(super) fn wrong(what: impl Into<String>) -> Error {
    Error::new(Kind::Refused, what)
}

/// The error for a word whose meaning is not known here.
pub(super) fn unknown(word: &Word) -> Error {
    let why = match (word.letter, (word.value * 10.0).round() as i64) {
        (b'G', 410 | 420) => {
            "compensation by the controller depends on its tables: compensate in the program"
        }
        (b'G', 100 | 382) => "it changes or reads what the program does not hold",
        (b'G', 51) => "curves of other kinds than the cubic move (G5) are not read",
        (b'E', _) => "numbers have no exponents in this language",
        (b'M', 980 | 990) => "calls of other programs are not read",
        _ => "what a program does after a word that is not known cannot be told",
    };
    Error::new(Kind::Refused, format!("{word} is not known")).remedy(why)
}

/// The group of the G word with the number `code`, times ten (NISTIR 6556, table 4; G90.1 and G91.1 from
/// common practice).
fn g_group(code: u16) -> Option<Group> {
    Some(match code {
        0 | 10 | 20 | 30 | 50 | 800 | 810 | 820 | 830 => Group::Motion,
        170 | 180 | 190 => Group::Plane,
        900 | 910 => Group::Distance,
        901 | 911 => Group::ArcCentre,
        930 | 940 => Group::FeedMode,
        200 | 210 => Group::Units,
        400 => Group::Compensation,
        430 | 490 => Group::Length,
        980 | 990 => Group::Return,
        540 | 550 | 560 | 570 | 580 | 590 | 591 | 592 | 593 => Group::Work,
        610 | 611 | 640 => Group::Path,
        40 | 280 | 300 | 530 | 920 | 921 | 922 | 923 => Group::Once,
        _ => return None,
    })
}

/// The group of the M word with the number `code`, times ten.
fn m_group(code: u16) -> Option<Group> {
    Some(match code {
        0 | 10 | 20 | 300 => Group::Stop,
        60 => Group::Change,
        30 | 40 | 50 => Group::Spindle,
        70 | 80 | 90 => Group::Mist,
        480 | 490 => Group::Overrides,
        _ => return None,
    })
}
