//! Program text to words and blocks, faithfully: every word as it stands, nothing skipped, no meaning yet.
//!
//! Lines, words, numbers and comments are those of NISTIR 6556, 3.1 and 3.3, with the semicolon comment of
//! common practice beside the bracketed one.

use crate::error::{Error, Kind};

/// The longest line the language has.
const LONGEST_LINE: usize = 256;

/// A program as words and blocks.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Text<'a> {
    /// The words of all blocks, one after the other.
    words: Vec<Word>,
    /// The lines that hold anything, in order.
    pub blocks: Vec<Block<'a>>,
    /// True when percent signs mark the start and the end.
    pub percent: bool,
}

/// A letter and its number.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Word {
    /// The letter, as a capital.
    pub letter: u8,
    /// The number, in the units in force.
    pub value: f64,
}

/// One line of the program.
#[derive(Clone, Debug, PartialEq)]
pub struct Block<'a> {
    /// The line, from 1.
    pub line: usize,
    /// Its N word.
    pub number: Option<u32>,
    /// True when it starts with a slash and may be skipped by a switch of the controller.
    pub optional: bool,
    /// Its last comment, without the marks.
    pub comment: Option<&'a str>,
    first: usize,
    end: usize,
}

impl Text<'_> {
    /// The words of `block`, without its N word.
    pub fn words(&self, block: &Block) -> &[Word] {
        &self.words[block.first..block.end]
    }
}

impl std::fmt::Display for Word {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{}{}", char::from(self.letter), self.value)
    }
}

/// The words and blocks of `text`.
///
/// # Errors
/// [`Kind::Input`], with the line, for anything that is not a line of the language: a character that starts
/// no word, a number without digits, a comment that does not close, a line of more than 256 characters, a
/// line number of more than five digits, an opening percent sign without its closing one, text without any
/// block.
pub fn read(text: &str) -> Result<Text<'_>, Error> {
    let text = text.strip_prefix('\u{feff}').unwrap_or(text);
    let mut reader = Reader { text, bytes: text.as_bytes(), at: 0, line: 1, read: Text::default() };
    reader.program()?;
    if reader.read.blocks.is_empty() {
        return Err(Error::new(Kind::Input, "there is no block in the program"));
    }
    Ok(reader.read)
}

/// Goes through the text byte by byte.
struct Reader<'a> {
    text: &'a str,
    bytes: &'a [u8],
    at: usize,
    line: usize,
    read: Text<'a>,
}

impl<'a> Reader<'a> {
    /// All lines, up to the closing percent sign if there is an opening one.
    fn program(&mut self) -> Result<(), Error> {
        while self.at < self.bytes.len() {
            let starts = self.at;
            self.blanks();
            if self.peek() == Some(b'%') {
                self.percent()?;
                if self.read.percent && !self.read.blocks.is_empty() {
                    return Ok(());
                }
            } else {
                self.block()?;
            }
            if self.at - starts > LONGEST_LINE {
                return Err(self.wrong(format!("the line has more than {LONGEST_LINE} characters")));
            }
            self.line_end();
        }
        let unclosed = self.read.percent;
        if unclosed { Err(self.wrong("the program opens with % and has no second one")) } else { Ok(()) }
    }

    /// A percent sign, alone on its line.
    fn percent(&mut self) -> Result<(), Error> {
        if !self.read.blocks.is_empty() && !self.read.percent {
            return Err(self.wrong("% ends a program that did not open with %"));
        }
        self.at += 1;
        self.blanks();
        if !matches!(self.peek(), None | Some(b'\n' | b'\r')) {
            return Err(self.wrong("% is not alone on its line"));
        }
        self.read.percent = true;
        Ok(())
    }

    /// One line.
    fn block(&mut self) -> Result<(), Error> {
        let first = self.read.words.len();
        let optional = self.peek() == Some(b'/');
        if optional {
            self.at += 1;
            self.blanks();
        }
        let number = match self.peek() {
            Some(b'N' | b'n') => Some(self.line_number()?),
            _ => None,
        };
        let comment = self.words()?;
        let end = self.read.words.len();
        if optional || number.is_some() || comment.is_some() || end > first {
            let block = Block { line: self.line, number, optional, comment, first, end };
            self.read.blocks.push(block);
        }
        Ok(())
    }

    /// The words up to the end of the line. Returns the last comment.
    fn words(&mut self) -> Result<Option<&'a str>, Error> {
        let mut comment = None;
        while let Some(byte) = self.peek() {
            match byte {
                b'\n' | b'\r' => break,
                b' ' | b'\t' => self.at += 1,
                b'(' => comment = Some(self.bracketed()?),
                b';' => comment = Some(self.rest_of_line()),
                _ if byte.is_ascii_alphabetic() => {
                    self.at += 1;
                    let letter = byte.to_ascii_uppercase();
                    let value = self.number(letter)?;
                    self.read.words.push(Word { letter, value });
                }
                _ => return Err(self.stray()),
            }
        }
        Ok(comment)
    }

    /// The number after an N: at most five digits.
    fn line_number(&mut self) -> Result<u32, Error> {
        self.at += 1;
        let (mut number, mut digits) = (0, 0);
        while let Some(byte) = self.peek() {
            match byte {
                b'0'..=b'9' if digits < 5 => {
                    number = number * 10 + u32::from(byte - b'0');
                    digits += 1;
                }
                b' ' | b'\t' => {}
                b'0'..=b'9' | b'.' => {
                    return Err(self.wrong("the line number is not a whole number of at most five digits"));
                }
                _ => break,
            }
            self.at += 1;
        }
        if digits == 0 { Err(self.wrong("N has no number")) } else { Ok(number) }
    }

    /// The number after `letter`: sign, digits and point, blanks anywhere between.
    fn number(&mut self, letter: u8) -> Result<f64, Error> {
        let starts = self.at;
        let (mut mantissa, mut digits, mut decimals) = (0_u64, 0_u32, 0_u32);
        let (mut negative, mut signed, mut point, mut any) = (false, false, false, false);
        while let Some(byte) = self.peek() {
            match byte {
                b'0'..=b'9' => {
                    mantissa = mantissa.wrapping_mul(10).wrapping_add(u64::from(byte - b'0'));
                    digits += u32::from(mantissa != 0 || digits > 0);
                    decimals += u32::from(point);
                    any = true;
                }
                b'.' if !point => point = true,
                b'-' | b'+' if !any && !point && !signed => (signed, negative) = (true, byte == b'-'),
                b' ' | b'\t' => {}
                _ => break,
            }
            self.at += 1;
        }
        if !any && matches!(self.peek(), Some(b'#' | b'[')) {
            return Err(self.stray());
        }
        if !any {
            return Err(self.wrong(format!("{} has no number", char::from(letter))));
        }
        let size = self.value(mantissa, (digits, decimals), starts)?;
        Ok(if negative { -size } else { size })
    }

    /// The number of `mantissa` with so many digits, so many of them decimals; rounded once.
    fn value(&self, mantissa: u64, (digits, decimals): (u32, u32), starts: usize) -> Result<f64, Error> {
        const POWERS: [f64; 16] =
            [1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15];
        // Both are exact up to here, so that their quotient is the number nearest to what is written.
        if digits <= 15 && decimals <= 15 {
            return Ok(mantissa as f64 / POWERS[decimals as usize]);
        }
        let written = &self.text[starts..self.at];
        let plain: String = written.chars().filter(|c| c.is_ascii_digit() || *c == '.').collect();
        let value = plain.parse().ok().filter(|value: &f64| value.is_finite());
        value.ok_or_else(|| self.wrong(format!("{} is no number that can be held", written.trim())))
    }

    /// A comment in brackets.
    fn bracketed(&mut self) -> Result<&'a str, Error> {
        let starts = self.at + 1;
        loop {
            self.at += 1;
            match self.peek() {
                Some(b')') => break,
                Some(b'(') => return Err(self.wrong("there is a bracket inside a comment")),
                None | Some(b'\n' | b'\r') => {
                    return Err(self.wrong("the comment does not close on its line"));
                }
                Some(_) => {}
            }
        }
        self.at += 1;
        Ok(self.text[starts..self.at - 1].trim())
    }

    /// A comment from a semicolon on.
    fn rest_of_line(&mut self) -> &'a str {
        let starts = self.at + 1;
        while !matches!(self.peek(), None | Some(b'\n' | b'\r')) {
            self.at += 1;
        }
        self.text[starts..self.at].trim()
    }

    /// Past the end of the line: a line feed, a carriage return, or both.
    fn line_end(&mut self) {
        if self.peek() == Some(b'\r') {
            self.at += 1;
        }
        if self.peek() == Some(b'\n') {
            self.at += 1;
        }
        self.line += 1;
    }

    fn blanks(&mut self) {
        while matches!(self.peek(), Some(b' ' | b'\t')) {
            self.at += 1;
        }
    }

    fn peek(&self) -> Option<u8> {
        self.bytes.get(self.at).copied()
    }

    /// The error for the character here, which starts no word.
    fn stray(&self) -> Error {
        let c = self.text[self.at..].chars().next().unwrap_or(' ');
        let shown = c.escape_debug();
        match c {
            '#' | '[' | '=' => self.wrong(format!("`{shown}`: parameters and expressions are not read")),
            '/' => self.wrong("`/` is not at the start of its line"),
            _ => self.wrong(format!("`{shown}` starts no word")),
        }
    }

    /// The error that says `what` is wrong on this line.
    fn wrong(&self, what: impl Into<String>) -> Error {
        let starts = self.text[..self.at].rfind(['\n', '\r']).map_or(0, |end| end + 1);
        let said = self.text[starts..].split(['\n', '\r']).next().unwrap_or("");
        let shown: String = said.trim().chars().take(60).flat_map(char::escape_debug).collect();
        Error::new(Kind::Input, what).on_line(self.line).remedy(format!("the line reads: {shown}"))
    }
}
