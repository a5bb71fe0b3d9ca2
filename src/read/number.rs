//! The one number grammar of the drawing readers, and the fault that places what a grammar trips over.

use nom::IResult;
use nom::error::{ErrorKind, ParseError};

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
///
/// Scanned by hand: nom 8.0.0's `recognize` loses what its `digit0` took at the very end of the text.
pub(super) fn number(input: &str) -> Parsed<'_, f64> {
    let length = number_length(input.as_bytes());
    let (text, rest) = input.split_at(length);
    match text.parse::<f64>() {
        Ok(value) if value.is_finite() => Ok((rest, value)),
        Ok(_) => Err(nom::Err::Failure(Fault { rest: input, what: "a number too large to be a coordinate" })),
        Err(_) => Err(nom::Err::Error(Fault { rest: input, what: "" })),
    }
}

/// How many bytes of the text are a number; 0 where none starts.
fn number_length(text: &[u8]) -> usize {
    let digits = |from: usize| text[from..].iter().take_while(|b| b.is_ascii_digit()).count();
    let sign = |at: usize| usize::from(matches!(text.get(at), Some(b'+' | b'-')));
    let start = sign(0);
    let whole = digits(start);
    let mut at = start + whole;
    let mut decimals = 0;
    if text.get(at) == Some(&b'.') {
        decimals = digits(at + 1);
        if whole + decimals > 0 {
            at += 1 + decimals;
        }
    }
    if whole + decimals == 0 {
        return 0;
    }
    if matches!(text.get(at), Some(b'e' | b'E')) {
        let from = at + 1 + sign(at + 1);
        let exponent = digits(from.min(text.len()));
        if exponent > 0 {
            at = from + exponent;
        }
    }
    at
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
