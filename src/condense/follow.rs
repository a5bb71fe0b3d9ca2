//! Where the cutter stands before each block, as far as that can be told, whatever other words there are.
//!
//! The words are those of NISTIR 6556, 3.3 to 3.5. After a word that is not known the place counts as lost until the
//! program states it again; it is never guessed.

use std::collections::BTreeSet;

use super::words::{Effect, Words};
use crate::error::{Error, Kind};
use crate::gcode::Dialect;
use crate::gcode::read::{Block, Text};
use crate::machine::Unit;

/// The modes and the place at a block.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct State {
    /// Where X, Y and Z are, in mm from the program's zero; `None` where the text does not tell.
    pub(super) at: [Option<f64>; 3],
    /// The motion word in force, times ten.
    pub(super) motion: Option<u16>,
    pub(super) unit: Unit,
    pub(super) incremental: bool,
    pub(super) centre_from_zero: bool,
    /// One unit of the last place of the text's numbers, in mm or inches.
    step: f64,
    /// The F word in force, as it stands.
    pub(super) feed: Option<f64>,
    /// Whether arcs are in the XY plane, feeds a minute, and the controller compensates for no cutter.
    plain: [bool; 3],
}

/// One block as it was followed.
#[derive(Clone, Debug)]
pub(super) struct Seen {
    /// The line, from 1.
    pub(super) line: usize,
    /// Before the block.
    pub(super) before: State,
    /// After it.
    pub(super) after: State,
    /// The motion word that the block's axis words are carried out by, times ten; `None` without any.
    pub(super) moves: Option<u16>,
    /// True for a straight cut with nothing else on its line.
    pub(super) is_cut: bool,
    /// True when the block states its own motion word.
    pub(super) states_motion: bool,
    /// True when the block commands anything.
    pub(super) commands: bool,
}

impl Seen {
    /// True when the cutter comes to both blocks from one place, within `rounding` of its size, and both do the same.
    pub(super) fn is_as(&self, other: &Self, rounding: f64) -> bool {
        let near = |(a, b): (Option<f64>, Option<f64>)| match (a, b) {
            (Some(a), Some(b)) => (a - b).abs() <= rounding * a.abs().max(1.0),
            (a, b) => a.is_none() && b.is_none(),
        };
        let (here, there) = (&self.before, &other.before);
        let modes =
            |state: &State| (state.unit, state.incremental, state.centre_from_zero, state.feed, state.plain);
        here.at.into_iter().zip(there.at).all(near)
            && modes(here) == modes(there)
            && self.moves == other.moves
    }
}

/// A program as it was followed.
#[derive(Clone, Debug, Default)]
pub(super) struct Followed {
    pub(super) blocks: Vec<Seen>,
    /// The words that are not known here, in the order of the alphabet.
    pub(super) unknown: BTreeSet<String>,
    /// True when the text states its unit.
    pub(super) states_unit: bool,
}

/// Follows `text` from its first block to the word that ends it.
///
/// # Errors
/// [`Kind::Refused`] for calls, whose lines run from places that cannot be told.
pub(super) fn follow(text: &Text, dialect: &Dialect) -> Result<Followed, Error> {
    let mut state = State {
        at: [None; 3],
        motion: None,
        unit: dialect.unit,
        incremental: false,
        centre_from_zero: dialect.centre_from_zero,
        step: 10_f64.powi(-(decimals(text) as i32)),
        feed: None,
        plain: [true; 3],
    };
    let mut followed = Followed::default();
    for (i, block) in text.blocks.iter().enumerate() {
        let words = Words::of(text.words(block));
        if words.calls || (words.has(b'O') && i > 0) {
            let what = "a call of other lines: where they start from cannot be told";
            let error = Error::new(Kind::Refused, what).on_line(block.line);
            return Err(error.remedy("condense the called program by itself, or write its lines out"));
        }
        followed.unknown.extend(words.unknown.iter().map(ToString::to_string));
        followed.states_unit |= words.effects.iter().any(|effect| matches!(effect, Effect::Unit(_)));
        let seen = state.take(block, &words);
        followed.blocks.push(seen);
        if words.ends {
            break;
        }
    }
    Ok(followed)
}

impl State {
    /// True where a straight cut is what it seems to be.
    fn is_plain(&self) -> bool {
        self.plain == [true; 3]
    }

    /// Carries out a block.
    fn take(&mut self, block: &Block, words: &Words) -> Seen {
        let before = *self;
        let mut moving = words.has_axis();
        for effect in &words.effects {
            self.change(*effect, words, &mut moving);
        }
        if let Some(feed) = words.value(b'F') {
            self.feed = Some(feed);
        }
        if moving {
            self.go(words);
        }
        if block.optional || words.loses_place {
            (self.at, self.motion) = ([None; 3], None);
        }
        let stands_alone = words.is_cut_alone && !block.optional && block.comment.is_none();
        let known = before.at[0].is_some() && before.at[1].is_some();
        let is_cut = stands_alone && moving && known && self.motion == Some(10) && self.is_plain();
        let moves = if moving { self.motion } else { None };
        let states_motion = words.effects.iter().any(|effect| matches!(effect, Effect::Motion(_)));
        let commands = !words.is_empty();
        Seen { line: block.line, before, after: *self, moves, is_cut, states_motion, commands }
    }

    fn change(&mut self, effect: Effect, words: &Words, moving: &mut bool) {
        match effect {
            Effect::Motion(code) => self.motion = Some(code).filter(|code| *code != 800),
            Effect::Unit(unit) => self.unit = unit,
            Effect::Incremental(incremental) => self.incremental = incremental,
            Effect::CentreFromZero(from_zero) => self.centre_from_zero = from_zero,
            Effect::Plain(which, plain) => self.plain[which] = plain,
            Effect::AxisWordsElsewhere => *moving = false,
            Effect::Lost(axes) => {
                let lost = |axis: usize| axes[axis] && (!words.has_axis() || words.axis(axis).is_some());
                (0..3).filter(|&axis| lost(axis)).for_each(|axis| self.at[axis] = None);
                *moving = false;
            }
            Effect::AllLost => self.at = [None; 3],
            Effect::ZLost => self.at[2] = None,
            Effect::Zero => {
                let unit = self.unit.mm();
                for axis in 0..3 {
                    self.at[axis] = words.axis(axis).map(|value| value * unit).or(self.at[axis]);
                }
                *moving = false;
            }
        }
    }

    fn on_grid(&self, mm: f64) -> f64 {
        let step = self.step * self.unit.mm();
        (mm / step).round() * step
    }

    /// Where the axis words lead.
    fn go(&mut self, words: &Words) {
        let unit = self.unit.mm();
        for axis in 0..3 {
            let Some(value) = words.axis(axis) else { continue };
            let value = value * unit;
            self.at[axis] = match (self.motion, self.incremental) {
                (Some(0 | 10 | 20 | 30), false) => Some(value),
                // Sums stay on the grid of the text's numbers, whatever rounding does.
                (Some(0 | 10 | 20 | 30), true) => self.at[axis].map(|at| self.on_grid(at + value)),
                // A cycle goes to the hole, and ends at a height of its own; one that repeats ends elsewhere.
                (Some(_), false) if axis < 2 && !words.has(b'L') && !words.has(b'K') => Some(value),
                _ => None,
            };
        }
        if !matches!(self.motion, Some(0 | 10 | 20 | 30)) {
            self.at[2] = None;
        }
    }
}

/// How many decimals the places of the text have, at most.
pub(super) fn decimals(text: &Text) -> u32 {
    const MOST: u32 = 8;
    let words = text.blocks.iter().flat_map(|block| text.words(block));
    let places = words.filter(|word| matches!(word.letter, b'X' | b'Y' | b'Z')).map(|word| word.value);
    places.fold(0, |most, value| (most..MOST).find(|&d| has_decimals(value, d)).unwrap_or(MOST))
}

/// True when `value` is a number of `decimals` decimals.
fn has_decimals(value: f64, decimals: u32) -> bool {
    let counts = value * 10_f64.powi(decimals as i32);
    (counts - counts.round()).abs() <= 8.0 * f64::EPSILON * counts.abs()
}
