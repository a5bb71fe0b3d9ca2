//! DXF text as it stands: pairs of a group code and a value, each with its line, cut into records.

use nom::branch::alt;
use nom::bytes::complete::{tag, take_till};
use nom::character::complete::{i32 as whole, line_ending, space0};
use nom::combinator::{all_consuming, eof, not, opt};
use nom::sequence::{delimited, terminated};
use nom::{IResult, Parser};

use crate::error::{Error, Kind};

/// What to do about a file that is broken beyond reading.
const EXPORT_AGAIN: &str = "export the drawing again as ASCII DXF (R12 or later)";

/// One pair of a group code and its value.
#[derive(Clone, Copy, Debug)]
pub(super) struct Group<'a> {
    /// What the value means.
    pub(super) code: i32,
    /// The value as written, without its line end.
    pub(super) value: &'a str,
    /// The line of the value, from 1.
    pub(super) line: usize,
}

/// A group of code 0 with all that follows it up to the next one: a section, table entry, block or entity.
#[derive(Clone, Copy, Debug)]
pub(super) struct Record<'a> {
    /// The value of the group of code 0.
    pub(super) kind: &'a str,
    /// Its line, from 1.
    pub(super) line: usize,
    /// The groups after it.
    pub(super) groups: &'a [Group<'a>],
}

/// All groups of `text` up to the end-of-file mark, without comments (code 999).
pub(super) fn groups(text: &str) -> Result<Vec<Group<'_>>, Error> {
    let mut groups = Vec::with_capacity(text.len() / 16);
    let mut rest = text;
    let mut line = 0;
    while let Ok((after_code, code_text)) = text_line(rest) {
        line += 2;
        let Ok((_, code)) = group_code(code_text) else {
            if rest.trim().is_empty() {
                break;
            }
            return Err(no_code(code_text, line - 1));
        };
        let Ok((after_value, value)) = text_line(after_code) else { return Err(no_value(code, line - 1)) };
        rest = after_value;
        if code == 999 {
            continue;
        }
        groups.push(Group { code, value, line });
        if code == 0 && value.trim() == "EOF" {
            break;
        }
    }
    Ok(groups)
}

/// One line without its end; fails at the end of the text.
fn text_line(input: &str) -> IResult<&str, &str> {
    let end = opt(alt((line_ending, tag("\r"))));
    (not(eof), terminated(take_till(|c| c == '\n' || c == '\r'), end)).map(|((), line)| line).parse(input)
}

/// A whole number among blanks.
fn group_code(input: &str) -> IResult<&str, i32> {
    all_consuming(delimited(space0, whole, space0)).parse(input)
}

fn no_code(found: &str, line: usize) -> Error {
    let what = format!("expected a DXF group code (a whole number), found “{}”", excerpt(found));
    Error::new(Kind::Input, what).on_line(line).remedy(EXPORT_AGAIN)
}

fn no_value(code: i32, line: usize) -> Error {
    let what = format!("the file ends after group code {code}, before its value");
    Error::new(Kind::Input, what).on_line(line).remedy(format!("the file is cut short: {EXPORT_AGAIN}"))
}

/// Enough of a value to recognise it by.
fn excerpt(value: &str) -> String {
    let value = value.trim();
    match value.char_indices().nth(40) {
        None => value.to_owned(),
        Some((end, _)) => format!("{}…", &value[..end]),
    }
}

/// The records of `groups`.
pub(super) fn records<'a>(groups: &'a [Group<'a>]) -> Result<Vec<Record<'a>>, Error> {
    let mut records = Vec::new();
    let mut rest = groups;
    while let Some((first, after)) = rest.split_first() {
        if first.code != 0 {
            let what = format!("expected group code 0 (the start of a section), found code {}", first.code);
            return Err(Error::new(Kind::Input, what).on_line(first.line - 1).remedy(EXPORT_AGAIN));
        }
        let count = after.iter().position(|g| g.code == 0).unwrap_or(after.len());
        records.push(Record { kind: first.value.trim(), line: first.line, groups: &after[..count] });
        rest = &after[count..];
    }
    Ok(records)
}

impl Group<'_> {
    /// The value as a finite number.
    pub(super) fn real(&self) -> Result<f64, Error> {
        let text = self.value.trim();
        match text.parse::<f64>() {
            Ok(number) if number.is_finite() => Ok(number),
            _ => Err(self.no_number("a finite number")),
        }
    }

    /// The value as a whole number; `2.0` counts as one.
    pub(super) fn whole(&self) -> Result<i64, Error> {
        let text = self.value.trim();
        if let Ok(number) = text.parse() {
            return Ok(number);
        }
        match text.parse::<f64>() {
            Ok(number) if number.fract() == 0.0 && number.abs() < 1e15 => Ok(number as i64),
            _ => Err(self.no_number("a whole number")),
        }
    }

    fn no_number(&self, wanted: &str) -> Error {
        let what = format!("group {} should be {wanted}, found “{}”", self.code, excerpt(self.value));
        let remedy = format!("correct the value, or {EXPORT_AGAIN}");
        Error::new(Kind::Input, what).on_line(self.line).remedy(remedy)
    }
}

impl<'a> Record<'a> {
    /// An error about this record.
    pub(super) fn error(&self, what: impl Into<String>) -> Error {
        Error::new(Kind::Input, what).on_line(self.line).remedy(EXPORT_AGAIN)
    }

    /// The record's own groups: not those of other programs (between codes 102) nor of an object embedded in
    /// it (after code 101).
    pub(super) fn own(&self) -> impl Iterator<Item = &'a Group<'a>> + use<'a> {
        let mut foreign = false;
        self.groups.iter().take_while(|g| g.code != 101).filter(move |g| {
            if g.code == 102 {
                foreign = g.value.trim_start().starts_with('{');
            }
            !foreign && g.code != 102
        })
    }

    /// The first group with `code`.
    pub(super) fn first(&self, code: i32) -> Option<&'a Group<'a>> {
        self.own().find(|g| g.code == code)
    }

    /// The number of group `code`; `None` when it is left out.
    pub(super) fn real(&self, code: i32) -> Result<Option<f64>, Error> {
        self.first(code).map(Group::real).transpose()
    }

    /// The number of group `code`, or `default` when it is left out.
    pub(super) fn real_or(&self, code: i32, default: f64) -> Result<f64, Error> {
        Ok(self.real(code)?.unwrap_or(default))
    }

    /// The whole number of group `code`, or `default` when it is left out.
    pub(super) fn whole_or(&self, code: i32, default: i64) -> Result<i64, Error> {
        self.first(code).map_or(Ok(default), Group::whole)
    }

    /// The text of group `code` without blanks around it; empty when it is left out.
    pub(super) fn text(&self, code: i32) -> &'a str {
        self.first(code).map_or("", |g| g.value.trim())
    }
}
