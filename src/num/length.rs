//! Lengths and feeds as people type them: a number, a fraction or both, and a unit.

use std::fmt;
use std::str::FromStr;

use nom::branch::alt;
use nom::bytes::complete::tag;
use nom::character::complete::{char, digit1, space0, space1};
use nom::combinator::{all_consuming, map_res, opt, recognize, value};
use nom::sequence::{pair, preceded, separated_pair, terminated};
use nom::{IResult, Parser};
use serde::{Deserialize, Deserializer, Serialize, Serializer};

/// A unit of length that a machine can work in.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub enum LengthUnit {
    /// Millimetres.
    #[serde(rename = "mm")]
    Mm,
    /// Inches of 25.4 mm.
    #[serde(rename = "in")]
    Inch,
}

impl LengthUnit {
    /// How many mm one unit is.
    pub fn mm(self) -> f64 {
        match self {
            Self::Mm => 1.0,
            Self::Inch => 25.4,
        }
    }

    /// The unit as it is written behind a number.
    pub fn symbol(self) -> &'static str {
        match self {
            Self::Mm => "mm",
            Self::Inch => "in",
        }
    }
}

/// A length as typed: `0.1mm`, `0.004in`, `3/4in`, `1 1/2in`, or a bare number whose unit the machine decides.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Length(Quantity);

/// A feed as typed: `1800mm/min`, `70in/min`, or a bare number whose unit the machine decides.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Feed(Quantity);

#[derive(Clone, Copy, Debug, PartialEq)]
struct Quantity {
    value: f64,
    unit: Option<LengthUnit>,
}

impl Quantity {
    fn mm(self, machine: LengthUnit) -> Option<f64> {
        match (self.unit, machine) {
            (Some(unit), _) => Some(self.value * unit.mm()),
            (None, LengthUnit::Mm) => Some(self.value),
            (None, LengthUnit::Inch) => (self.value == 0.0).then_some(0.0),
        }
    }
}

impl Length {
    /// A length of `value` mm.
    pub fn from_mm(value: f64) -> Self {
        Self(Quantity { value, unit: Some(LengthUnit::Mm) })
    }

    /// The length in mm. A bare number is mm on a machine that works in mm; on one that works in inches it could be
    /// either, so the answer is `None` (but nothing is nothing in any unit).
    pub fn mm(self, machine: LengthUnit) -> Option<f64> {
        self.0.mm(machine)
    }
}

impl Feed {
    /// The feed in mm/min; `None` for a bare number on a machine that works in inches.
    pub fn mm_min(self, machine: LengthUnit) -> Option<f64> {
        self.0.mm(machine)
    }
}

impl FromStr for Length {
    type Err = String;

    fn from_str(text: &str) -> Result<Self, String> {
        parse(text, "").map(Self).ok_or_else(|| {
            "not a length; write a number and a unit, such as 0.1mm, 0.004in, 3/4in or \"1 1/2in\"".into()
        })
    }
}

impl FromStr for Feed {
    type Err = String;

    fn from_str(text: &str) -> Result<Self, String> {
        parse(text, "/min")
            .map(Self)
            .ok_or_else(|| "not a feed; write a number and a unit, such as 1800mm/min or 70in/min".into())
    }
}

/// The quantity in the whole of `text`, its unit followed by `per`; `None` unless it is finite.
fn parse(text: &str, per: &str) -> Option<Quantity> {
    let unit =
        terminated(alt((value(LengthUnit::Mm, tag("mm")), value(LengthUnit::Inch, tag("in")))), |input| {
            tag(per).parse(input)
        });
    let quantity = pair(number, opt(preceded(space0, unit)));
    let (_, (value, unit)) = all_consuming(quantity).parse(text.trim()).ok()?;
    value.is_finite().then_some(Quantity { value, unit })
}

/// `1.5`, `3/4` or `1 1/2`, with an optional sign.
fn number(input: &str) -> IResult<&str, f64> {
    let (rest, sign) = opt(alt((value(-1.0, char('-')), value(1.0, char('+'))))).parse(input)?;
    let mixed = separated_pair(whole, space1, fraction).map(|(whole, part)| whole + part);
    let (rest, size) = alt((mixed, fraction, decimal)).parse(rest)?;
    Ok((rest, sign.unwrap_or(1.0) * size))
}

fn whole(input: &str) -> IResult<&str, f64> {
    map_res(digit1, str::parse).parse(input)
}

fn fraction(input: &str) -> IResult<&str, f64> {
    separated_pair(whole, char('/'), whole).map(|(over, under)| over / under).parse(input)
}

fn decimal(input: &str) -> IResult<&str, f64> {
    let with_whole = pair(digit1, opt(pair(char('.'), opt(digit1))));
    let bare_point = pair(char('.'), digit1);
    map_res(alt((recognize(with_whole), recognize(bare_point))), str::parse).parse(input)
}

impl fmt::Display for Quantity {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}{}", self.value, self.unit.map_or("", LengthUnit::symbol))
    }
}

impl fmt::Display for Length {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        self.0.fmt(f)
    }
}

impl fmt::Display for Feed {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}{}", self.0, if self.0.unit.is_some() { "/min" } else { "" })
    }
}

/// A number or a text, as a settings file may hold either.
#[derive(Deserialize)]
#[serde(untagged, expecting = "a number, or a text with a unit such as \"0.1mm\"")]
enum Written {
    Whole(i64),
    Number(f64),
    Text(String),
}

/// A quantity from a settings file, which may hold it as a number or as a text.
pub(crate) fn from_written<'de, D, T>(input: D) -> Result<T, D::Error>
where
    D: Deserializer<'de>,
    T: FromStr<Err = String>,
{
    let text = match Written::deserialize(input)? {
        Written::Whole(number) => number.to_string(),
        Written::Number(number) => number.to_string(),
        Written::Text(text) => text,
    };
    text.parse().map_err(|why| serde::de::Error::custom(format!("`{text}` is {why}")))
}

impl<'de> Deserialize<'de> for Length {
    fn deserialize<D: Deserializer<'de>>(input: D) -> Result<Self, D::Error> {
        from_written(input)
    }
}

impl<'de> Deserialize<'de> for Feed {
    fn deserialize<D: Deserializer<'de>>(input: D) -> Result<Self, D::Error> {
        from_written(input)
    }
}

impl Serialize for Length {
    fn serialize<S: Serializer>(&self, out: S) -> Result<S::Ok, S::Error> {
        out.collect_str(self)
    }
}

impl Serialize for Feed {
    fn serialize<S: Serializer>(&self, out: S) -> Result<S::Ok, S::Error> {
        out.collect_str(self)
    }
}
