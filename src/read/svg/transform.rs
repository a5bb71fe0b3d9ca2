//! Transform lists, as attribute (unitless) and as style property (with units).

use kurbo::{Affine, Vec2};
use nom::Parser;
use nom::bytes::complete::{take_while, take_while1};
use nom::character::complete::{char, multispace0};

use super::super::number::{Fault, Parsed, fault, number};

/// Reads a transform list; the first one written is applied last. Says what is wrong otherwise.
pub(super) fn parse(text: &str) -> Result<Affine, String> {
    let mut map = Affine::IDENTITY;
    let mut rest = separator(text);
    if rest.trim_end() == "none" {
        return Ok(map);
    }
    while !rest.is_empty() {
        let (after, (name, args)) = function(rest).map_err(|error| {
            let shown = super::super::number::excerpt(fault(error).rest);
            format!("the transform breaks off at {shown}")
        })?;
        let one = affine(name, &args).ok_or_else(|| {
            format!("the transform \"{name}\" with {} numbers is not understood", args.len())
        })?;
        map *= one;
        rest = separator(after);
    }
    Ok(map)
}

fn separator(text: &str) -> &str {
    text.trim_start_matches([' ', '\t', '\n', '\r', '\u{c}', ','])
}

/// A name and its arguments, lengths in px, angles in degrees.
fn function(input: &str) -> Parsed<'_, (&str, Vec<f64>)> {
    let name = take_while1(|c: char| c.is_ascii_alphanumeric());
    let (mut rest, (name, _, _)) = (name, multispace0, char('(')).parse(input)?;
    let mut args = Vec::new();
    loop {
        rest = separator(rest);
        if let Some(after) = rest.strip_prefix(')') {
            return Ok((after, (name, args)));
        }
        let (after, value) = argument(rest)?;
        args.push(value);
        rest = after;
    }
}

fn argument(input: &str) -> Parsed<'_, f64> {
    let unit = take_while(|c: char| c.is_ascii_alphabetic() || c == '%');
    let (rest, (value, unit)) = (number, unit).parse(input)?;
    let factor = match unit {
        "" | "px" | "deg" => 1.0,
        "rad" => 180.0 / std::f64::consts::PI,
        "grad" => 0.9,
        "turn" => 360.0,
        "in" => 96.0,
        "mm" => 96.0 / 25.4,
        "cm" => 960.0 / 25.4,
        "pt" => 96.0 / 72.0,
        "pc" => 16.0,
        _ => return Err(nom::Err::Failure(Fault { rest: input, what: "" })),
    };
    Ok((rest, value * factor))
}

/// The map of one function (CSS Transforms 1); `None` for a name or a count of numbers that there is not.
fn affine(name: &str, args: &[f64]) -> Option<Affine> {
    let skew = |x: f64, y: f64| Affine::new([1.0, y.to_radians().tan(), x.to_radians().tan(), 1.0, 0.0, 0.0]);
    Some(match (name, args) {
        ("matrix", &[a, b, c, d, e, f]) => Affine::new([a, b, c, d, e, f]),
        ("translate", &[x]) | ("translateX", &[x]) => Affine::translate(Vec2::new(x, 0.0)),
        ("translate", &[x, y]) => Affine::translate(Vec2::new(x, y)),
        ("translateY", &[y]) => Affine::translate(Vec2::new(0.0, y)),
        ("scale", &[s]) => Affine::scale(s),
        ("scale", &[x, y]) => Affine::scale_non_uniform(x, y),
        ("scaleX", &[x]) => Affine::scale_non_uniform(x, 1.0),
        ("scaleY", &[y]) => Affine::scale_non_uniform(1.0, y),
        ("rotate", &[angle]) => rotation(angle),
        ("rotate", &[angle, x, y]) => {
            let centre = Vec2::new(x, y);
            Affine::translate(centre) * rotation(angle) * Affine::translate(-centre)
        }
        ("skewX", &[x]) | ("skew", &[x]) => skew(x, 0.0),
        ("skewY", &[y]) => skew(0.0, y),
        ("skew", &[x, y]) => skew(x, y),
        _ => return None,
    })
}

/// A rotation by degrees, exact for quarter turns.
fn rotation(degrees: f64) -> Affine {
    let quarter = degrees / 90.0;
    let (sin, cos) = if quarter.fract() == 0.0 {
        [(0.0, 1.0), (1.0, 0.0), (0.0, -1.0), (-1.0, 0.0)][quarter.rem_euclid(4.0) as usize]
    } else {
        degrees.to_radians().sin_cos()
    };
    Affine::new([cos, sin, -sin, cos, 0.0, 0.0])
}
