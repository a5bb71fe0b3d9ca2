//! Inputs made of kept ones.

/// Marsaglia's xorshift generator (2003): the same seed gives the same inputs on every machine.
pub(crate) struct Random(u64);

impl Random {
    pub(crate) fn new(seed: u64) -> Self {
        Self(seed.wrapping_mul(0x9E37_79B9_7F4A_7C15) | 1)
    }

    fn next(&mut self) -> u64 {
        self.0 ^= self.0 << 13;
        self.0 ^= self.0 >> 7;
        self.0 ^= self.0 << 17;
        self.0
    }

    /// A number below `end`; 0 where that is 0.
    fn below(&mut self, end: usize) -> usize {
        if end == 0 { 0 } else { (self.next() >> 11) as usize % end }
    }
}

/// Words that readers stumble over.
const WORDS: [&str; 40] = [
    "nan",
    "inf",
    "-inf",
    "1e400",
    "-1e308",
    "1e-320",
    "0",
    "-0",
    "99999999999999999999",
    "0x10",
    "1/0",
    "\0",
    "\u{feff}",
    "é",
    "%",
    "(",
    ")",
    ";",
    "\n",
    "\r\n",
    "&#0;",
    "<g>",
    "</g>",
    "<use href=\"#a\"/>",
    " A1 1 0 0 1 0 0",
    "Z",
    "M",
    "0\nINSERT\n2\nA\n",
    "0\nSECTION\n",
    "0\nENDSEC\n",
    "42\n1e9\n",
    "70\n32767\n",
    "72\n-1\n",
    "G2 X0 I0 J0",
    "G91 X1",
    "G20",
    "R-1",
    "[a]",
    "= \"",
    "[[cutters]]",
];

/// The largest input made, in bytes.
const LARGEST: usize = 1 << 16;

/// Mutates a corpus.
pub(crate) struct Mutator {
    random: Random,
    corpus: Vec<Vec<u8>>,
}

impl Mutator {
    pub(crate) fn new(random: Random, corpus: Vec<Vec<u8>>) -> Self {
        assert!(!corpus.is_empty(), "a target needs a corpus");
        Self { random, corpus }
    }

    /// Input number `run`: the kept ones as they are, then one of them changed up to eight times.
    pub(crate) fn next_input(&mut self, run: u64) -> Vec<u8> {
        if let Some(kept) = usize::try_from(run).ok().and_then(|run| self.corpus.get(run)) {
            return kept.clone();
        }
        let mut input = self.pick().to_vec();
        for _ in 0..=self.random.below(8) {
            self.change(&mut input);
        }
        input.truncate(LARGEST);
        input
    }

    fn pick(&mut self) -> &[u8] {
        let chosen = self.random.below(self.corpus.len());
        &self.corpus[chosen]
    }

    fn change(&mut self, input: &mut Vec<u8>) {
        let (from, to) = self.range(input.len());
        match self.random.below(8) {
            0 if !input.is_empty() => {
                let at = self.random.below(input.len());
                input[at] ^= 1 << self.random.below(8);
            }
            1 => drop(input.drain(from..to)),
            2 => input.truncate(from),
            3 => {
                let times = 1 + self.random.below(64).min(LARGEST / (to - from + 1));
                let part = input[from..to].repeat(times);
                input.splice(to..to, part);
            }
            4 => {
                let part = input[from..to].to_vec();
                let at = self.random.below(input.len());
                input.splice(at..at, part);
            }
            5 => {
                let (from, to) = self.number(input);
                let word = WORDS[self.random.below(WORDS.len())];
                input.splice(from..to, word.bytes());
            }
            6 => {
                let other = self.pick().to_vec();
                let (other_from, other_to) = self.range(other.len());
                input.splice(from..to, other[other_from..other_to].iter().copied());
            }
            _ => {
                let word = WORDS[self.random.below(WORDS.len())];
                input.splice(from..from, word.bytes());
            }
        }
    }

    /// A range of `length` places, short more often than long.
    fn range(&mut self, length: usize) -> (usize, usize) {
        let from = self.random.below(length);
        let reach = 1 << self.random.below(12);
        (from, (from + self.random.below(reach) + 1).min(length))
    }

    /// Where some number stands in the input; an empty range where none does after a random place.
    fn number(&mut self, input: &[u8]) -> (usize, usize) {
        let begin = self.random.below(input.len());
        let numeric = |b: &u8| b.is_ascii_digit() || *b == b'.' || *b == b'-';
        let from = input[begin..].iter().position(numeric).map_or(begin, |ahead| begin + ahead);
        let to = input[from..].iter().position(|b| !numeric(b)).map_or(input.len(), |ahead| from + ahead);
        (from, to)
    }
}

/// A short name for an input (Fowler, Noll and Vo's FNV-1a).
pub(crate) fn digest(input: &[u8]) -> u64 {
    input.iter().fold(0xCBF2_9CE4_8422_2325, |hash, b| (hash ^ u64::from(*b)).wrapping_mul(0x0100_0000_01B3))
}
