//! What the words of one block do to the place and the modes, each word by itself.

use crate::gcode::read::Word;
use crate::machine::Unit;

/// What a word changes.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Effect {
    /// The motion word, times ten; G80 is 800.
    Motion(u16),
    Unit(Unit),
    Incremental(bool),
    CentreFromZero(bool),
    /// Whether the plane (0), the feed mode (1) or the compensation (2) is the plain one.
    Plain(usize, bool),
    /// X, Y and Z of the line are no places.
    AxisWordsElsewhere,
    /// The axes that are named, or all of these when none is, go to a place that is not told.
    Lost([bool; 3]),
    /// All places change their numbers.
    AllLost,
    /// The height does.
    ZLost,
    /// The place where the cutter stands gets the numbers on the line.
    Zero,
}

/// The words of a block.
#[derive(Clone, Debug)]
pub(super) struct Words<'a> {
    words: &'a [Word],
    pub(super) effects: Vec<Effect>,
    /// The words that are not known.
    pub(super) unknown: Vec<Word>,
    /// True when nothing can be said of the place afterwards.
    pub(super) loses_place: bool,
    /// True for a word that calls other lines, or returns to them.
    pub(super) calls: bool,
    /// True for a word that ends the program.
    pub(super) ends: bool,
    /// True when there is nothing but G1, axis words and F, each once at most.
    pub(super) is_cut_alone: bool,
}

impl<'a> Words<'a> {
    /// Sorts the words of a block.
    pub(super) fn of(words: &'a [Word]) -> Self {
        let mut sorted = Self {
            words,
            effects: Vec::new(),
            unknown: Vec::new(),
            loses_place: false,
            calls: false,
            ends: false,
            is_cut_alone: true,
        };
        for (i, word) in words.iter().enumerate() {
            let once = !words[..i].iter().any(|other| other.letter == word.letter);
            let plain = matches!(word.letter, b'X' | b'Y' | b'Z' | b'F')
                || *word == Word { letter: b'G', value: 1.0 };
            sorted.is_cut_alone &= once && plain;
            sorted.take(word);
        }
        sorted
    }

    fn take(&mut self, word: &Word) {
        match word.letter {
            b'G' => self.take_g(word),
            b'M' => self.take_m(word),
            b'U' | b'V' | b'W' => self.take_unknown(word),
            _ => {}
        }
    }

    fn take_g(&mut self, word: &Word) {
        let effect = match tenths(word) {
            Some(code @ (0 | 10 | 20 | 30 | 730 | 800..=890)) => Effect::Motion(code),
            Some(170) => Effect::Plain(0, true),
            Some(180 | 190) => Effect::Plain(0, false),
            Some(940) => Effect::Plain(1, true),
            Some(930 | 950) => Effect::Plain(1, false),
            Some(400) => Effect::Plain(2, true),
            Some(410 | 420) => Effect::Plain(2, false),
            Some(200) => Effect::Unit(Unit::Inch),
            Some(210) => Effect::Unit(Unit::Mm),
            Some(code @ (900 | 910)) => Effect::Incremental(code == 910),
            Some(code @ (901 | 911)) => Effect::CentreFromZero(code == 901),
            Some(40) => Effect::AxisWordsElsewhere,
            Some(430 | 490) => Effect::ZLost,
            Some(540..=593 | 921..=923) => Effect::AllLost,
            Some(280 | 300 | 530) => Effect::Lost([true; 3]),
            Some(920) => Effect::Zero,
            // Path modes and the return level of cycles.
            Some(610 | 611 | 640 | 980 | 990) => return,
            Some(650 | 660 | 670) => return self.calls = true,
            _ => return self.take_unknown(word),
        };
        // The unit is in force before anything else on the line is (table 8).
        let at = if matches!(effect, Effect::Unit(_)) { 0 } else { self.effects.len() };
        self.effects.insert(at, effect);
    }

    fn take_m(&mut self, word: &Word) {
        match tenths(word) {
            Some(20 | 300) => self.ends = true,
            Some(0 | 10 | 30 | 40 | 50 | 70 | 80 | 90 | 480 | 490) => {}
            Some(60) => self.effects.push(Effect::AllLost),
            Some(970 | 980 | 990) => self.calls = true,
            _ => self.take_unknown(word),
        }
    }

    fn take_unknown(&mut self, word: &Word) {
        self.unknown.push(*word);
        self.loses_place = true;
    }

    /// The number of `letter`, the last where it stands more than once.
    pub(super) fn value(&self, letter: u8) -> Option<f64> {
        self.words.iter().rev().find(|word| word.letter == letter).map(|word| word.value)
    }

    pub(super) fn is_empty(&self) -> bool {
        self.words.is_empty()
    }

    pub(super) fn has(&self, letter: u8) -> bool {
        self.value(letter).is_some()
    }

    /// The number of X, Y or Z.
    pub(super) fn axis(&self, axis: usize) -> Option<f64> {
        self.value(b'X' + axis as u8)
    }

    pub(super) fn has_axis(&self) -> bool {
        (0..3).any(|axis| self.axis(axis).is_some())
    }
}

/// The number of a G or M word times ten, if it is one with at most one decimal.
fn tenths(word: &Word) -> Option<u16> {
    let tenths = (word.value * 10.0).round();
    let whole = (word.value * 10.0 - tenths).abs() <= 0.001 && (0.0..10_000.0).contains(&tenths);
    whole.then_some(tenths as u16)
}
