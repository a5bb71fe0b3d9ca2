//! Puts words, lines and comments down in the form that the controller takes.

use super::decimal;
use crate::error::{Error, Kind};
use crate::machine::{Comments, Form, LineEnding};

/// The text so far.
pub(super) struct Pen<'a> {
    form: &'a Form,
    text: String,
    line_starts: usize,
    lines: usize,
    number: u32,
    too_long: Option<usize>,
}

impl<'a> Pen<'a> {
    /// An empty page.
    pub(super) fn new(form: &'a Form) -> Self {
        Self { form, text: String::new(), line_starts: 0, lines: 0, number: 0, too_long: None }
    }

    /// The text, once it is whole.
    pub(super) fn finish(self) -> Result<String, Error> {
        let Some(line) = self.too_long else { return Ok(self.text) };
        let longest = self.form.longest_line;
        let what = format!(
            "line {line} of the program is longer than the {longest} characters the controller takes"
        );
        Err(Error::new(Kind::Refused, what)
            .remedy("use a profile with fewer decimals or without line numbers"))
    }

    /// One word: a letter and `count` of the last of `decimals` places.
    pub(super) fn word(&mut self, letter: char, count: i64, decimals: u32) {
        self.start_word();
        self.text.push(letter);
        decimal::push(&mut self.text, count, decimals);
    }

    /// The number, from 1, of the line that is written next.
    pub(super) fn next_line(&self) -> usize {
        self.lines + 1
    }

    /// Words as they are.
    pub(super) fn words(&mut self, words: &str) {
        self.start_word();
        self.text.push_str(words);
    }

    /// A line of words as they are.
    pub(super) fn line(&mut self, words: &str) {
        self.words(words);
        self.end();
    }

    /// A line with a percent sign.
    pub(super) fn percent(&mut self) {
        if self.form.percent {
            self.text.push('%');
            self.end();
        }
    }

    /// Ends the line.
    pub(super) fn end(&mut self) {
        self.lines += 1;
        if self.text.len() - self.line_starts > self.form.longest_line as usize {
            self.too_long.get_or_insert(self.lines);
        }
        self.text.push_str(match self.form.line_ending {
            LineEnding::Lf => "\n",
            LineEnding::Crlf => "\r\n",
        });
        self.line_starts = self.text.len();
    }

    /// A comment, in plain characters, on as many lines as it needs; nothing where the controller takes none.
    pub(super) fn comment(&mut self, comment: &str) {
        let (open, close) = match self.form.comments {
            Comments::Brackets => ("(", ")"),
            Comments::Semicolon => ("; ", ""),
            Comments::None => return,
        };
        let room = self.form.longest_line as usize - open.len() - close.len();
        for part in wrapped(&plain(comment), room) {
            self.text.push_str(open);
            self.text.push_str(part);
            self.text.push_str(close);
            self.end();
        }
    }

    /// The line number before the first word of a line, a blank before the others.
    fn start_word(&mut self) {
        if self.text.len() > self.line_starts {
            if self.form.spaces {
                self.text.push(' ');
            }
        } else if self.form.line_numbers > 0 {
            self.number += self.form.line_numbers;
            if self.number > 99_999 {
                self.number = self.form.line_numbers;
            }
            self.text.push('N');
            decimal::push(&mut self.text, i64::from(self.number), 0);
            self.start_word();
        }
    }
}

/// `text` in the characters that no controller takes for anything else; others become underscores.
fn plain(text: &str) -> String {
    let keep = |c: char| c.is_ascii_alphanumeric() || " .,:+-*/='".contains(c);
    text.chars().map(|c| if keep(c) { c } else { '_' }).collect()
}

/// `text` in lines of at most `room` characters, broken between words where it can be.
fn wrapped(text: &str, room: usize) -> Vec<&str> {
    let mut lines = Vec::new();
    let mut rest = text.trim();
    while rest.len() > room {
        let cut = rest[..=room].rfind(' ').filter(|&at| at > 0).unwrap_or(room);
        lines.push(rest[..cut].trim_end());
        rest = rest[cut..].trim_start();
    }
    lines.push(rest);
    lines
}
