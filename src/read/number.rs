//! The one number grammar of the drawing readers, and the fault that places what a grammar trips over.

use nom::branch::alt;
use nom::character::complete::{char, digit0, digit1, one_of};
use nom::combinator::{opt, recognize};
use nom::error::{ErrorKind, ParseError};
use nom::{IResult, Parser};

/// Where a grammar stopped and what it found wrong there; an empty `what` only says that nothing fits.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) struct Fault<'a> {
    pub(super) rest: &'a str,
    pub(super) what: &'static str,
}

impl<'a> ParseError<&'a str> for Fault<'a> {
    fn from_error_kind(rest: &'a str, _: ErrorKind) -> Self {
        Self { rest, what: "" }
    }

    fn append(_: &'a str, _: ErrorKind, other: Self) -> Self {
        other
    }
}

/// What a grammar of this room returns.
pub(super) type Parsed<'a, T> = IResult<&'a str, T, Fault<'a>>;

/// A decimal number: optional sign, digits with an optional point (bare points before or after digits allowed),
/// optional exponent. No `nan`, no `inf`; a number too large for a double is a failure, not infinity.
pub(super) fn number(input: &str) -> Parsed<'_, f64> {
    let digits = alt((recognize((digit1, opt((char('.'), digit0)))), recognize((char('.'), digit1))));
    let exponent = opt((one_of("eE"), opt(one_of("+-")), digit1));
    let (rest, text) = recognize((opt(one_of("+-")), digits, exponent)).parse(input)?;
    match text.parse::<f64>() {
        Ok(value) if value.is_finite() => Ok((rest, value)),
        _ => Err(nom::Err::Failure(Fault { rest: input, what: "a number too large to be a coordinate" })),
    }
}

/// The fault of a grammar that did not succeed.
pub(super) fn fault(error: nom::Err<Fault<'_>>) -> Fault<'_> {
    match error {
        nom::Err::Error(fault) | nom::Err::Failure(fault) => fault,
        nom::Err::Incomplete(_) => Fault { rest: "", what: "" },
    }
}

/// The beginning of `text` as a message may show it: one line, at most 32 characters, control characters escaped.
pub(super) fn excerpt(text: &str) -> String {
    let line = text.lines().next().unwrap_or_default();
    let shown: String = line.chars().take(32).flat_map(char::escape_debug).collect();
    if line.chars().nth(32).is_some() { format!("\"{shown}...\"") } else { format!("\"{shown}\"") }
}
