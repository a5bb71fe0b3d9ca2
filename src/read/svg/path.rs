//! Path data: first the commands as written, then the curves they mean (SVG 2, "Path Data").

use kurbo::{CubicBez, Point, QuadBez, Vec2};
use nom::Parser;
use nom::bytes::complete::take_while;
use nom::character::complete::{char, one_of};
use nom::combinator::opt;

use super::super::curve::{Chain, Curve};
use super::super::number::{Fault, Parsed, fault, number};
use super::arc::{Arc, arc_to};
use crate::geom::Vertex;

/// One command with one set of arguments; repeated arguments are commands of their own.
#[derive(Clone, Copy, Debug, PartialEq)]
struct Command {
    letter: char,
    args: [f64; 7],
}

/// The subpaths of path data.
///
/// A subpath ended by `Z` is closed; one that only returns to its start is not. Data that breaks the grammar is a
/// fault as a whole: a cut along half a drawing helps nobody.
pub(super) fn subpaths(data: &str) -> Result<Vec<Chain>, Fault<'_>> {
    let mut pen = Pen::default();
    for command in commands(data)? {
        pen.draw(command);
    }
    pen.lift(false);
    Ok(pen.chains)
}

/// The numbers of a `points` attribute in pairs; an odd one out is dropped, as the standard says, and told.
pub(super) fn points(data: &str) -> Result<(Vec<Point>, bool), Fault<'_>> {
    let mut rest = spaces(data);
    let mut numbers = Vec::new();
    while !rest.is_empty() {
        let (after, value) = expect(rest, number(rest), "a number")?;
        numbers.push(value);
        let (after, comma) = separator(after);
        if comma && after.is_empty() {
            return Err(Fault { rest: after, what: "a number" });
        }
        rest = after;
    }
    let pairs = numbers.chunks_exact(2);
    let odd = !pairs.remainder().is_empty();
    Ok((pairs.map(|p| Point::new(p[0], p[1])).collect(), odd))
}

/// The arguments of a command: `n` a number, `f` a flag; `None` for what is no command.
fn signature(letter: char) -> Option<&'static str> {
    Some(match letter.to_ascii_uppercase() {
        'M' | 'L' | 'T' => "nn",
        'H' | 'V' => "n",
        'C' => "nnnnnn",
        'S' | 'Q' => "nnnn",
        'A' => "nnnffnn",
        'Z' => "",
        _ => return None,
    })
}

fn commands(data: &str) -> Result<Vec<Command>, Fault<'_>> {
    let mut commands = Vec::new();
    let mut rest = spaces(data);
    while let Some(letter) = rest.chars().next() {
        let known = signature(letter).filter(|_| !commands.is_empty() || matches!(letter, 'M' | 'm'));
        let what = if commands.is_empty() { "M or m" } else { "a path command" };
        let signature = known.ok_or(Fault { rest, what })?;
        rest = spaces(&rest[1..]);
        rest = repeated(letter, signature, rest, &mut commands)?;
    }
    Ok(commands)
}

/// One set of arguments after another until no number follows.
fn repeated<'a>(
    mut letter: char,
    signature: &str,
    mut rest: &'a str,
    commands: &mut Vec<Command>,
) -> Result<&'a str, Fault<'a>> {
    loop {
        let mut args = [0.0; 7];
        for (i, kind) in signature.chars().enumerate() {
            let after = if i == 0 { rest } else { separator(rest).0 };
            let (after, value) = argument(kind, after)?;
            args[i] = value;
            rest = after;
        }
        commands.push(Command { letter, args });
        let (after, comma) = separator(rest);
        if signature.is_empty() || !(comma || number_starts(after)) {
            return Ok(spaces(rest));
        }
        rest = after;
        letter = match letter {
            'M' => 'L',
            'm' => 'l',
            other => other,
        };
    }
}

fn argument(kind: char, input: &str) -> Result<(&str, f64), Fault<'_>> {
    match kind {
        'f' => {
            let flag = one_of::<_, _, Fault<'_>>("01").parse(input);
            expect(input, flag, "an arc flag, 0 or 1")
                .map(|(rest, flag)| (rest, f64::from(u8::from(flag == '1'))))
        }
        _ => expect(input, number(input), "a number"),
    }
}

/// The result of a grammar, or a fault that says what was expected.
fn expect<'a, T>(
    input: &'a str,
    parsed: Parsed<'a, T>,
    what: &'static str,
) -> Result<(&'a str, T), Fault<'a>> {
    parsed.map_err(|error| match fault(error) {
        Fault { what: "", .. } => Fault { rest: input, what },
        said => said,
    })
}

fn number_starts(text: &str) -> bool {
    text.starts_with(|c: char| c.is_ascii_digit() || matches!(c, '+' | '-' | '.'))
}

fn spaces(text: &str) -> &str {
    text.trim_start_matches([' ', '\t', '\n', '\r', '\u{c}'])
}

/// What follows optional white space with at most one comma in it, and whether there was one.
fn separator(text: &str) -> (&str, bool) {
    let blanks = || take_while::<_, _, Fault<'_>>(|c| matches!(c, ' ' | '\t' | '\n' | '\r' | '\u{c}'));
    match (blanks(), opt(char(',')), blanks()).parse(text) {
        Ok((rest, (_, comma, _))) => (rest, comma.is_some()),
        Err(_) => (text, false),
    }
}

/// Draws commands: where the pen is, where its subpath began, and the control point that S or T reflects.
#[derive(Default)]
struct Pen {
    at: Point,
    start: Point,
    cubic_control: Option<Point>,
    quad_control: Option<Point>,
    curves: Vec<Curve>,
    chains: Vec<Chain>,
}

impl Pen {
    fn draw(&mut self, Command { letter, args }: Command) {
        let origin = if letter.is_ascii_lowercase() { self.at.to_vec2() } else { Vec2::ZERO };
        let point = |i: usize| Point::new(args[i], args[i + 1]) + origin;
        let (cubic, quad) = (self.cubic_control.take(), self.quad_control.take());
        match letter.to_ascii_uppercase() {
            'M' => self.move_to(point(0)),
            'L' => self.line_to(point(0)),
            'H' => self.line_to(Point::new(args[0] + origin.x, self.at.y)),
            'V' => self.line_to(Point::new(self.at.x, args[0] + origin.y)),
            'C' => self.cubic_to(point(0), point(2), point(4)),
            'S' => self.cubic_to(self.reflected(cubic), point(0), point(2)),
            'Q' => self.quad_to(point(0), point(2)),
            'T' => self.quad_to(self.reflected(quad), point(0)),
            'A' => {
                let arc = Arc {
                    radii: Vec2::new(args[0], args[1]),
                    turn: args[2].to_radians(),
                    large: args[3] != 0.0,
                    positive: args[4] != 0.0,
                };
                self.arc_to(&arc, point(5));
            }
            _ => self.lift(true),
        }
    }

    /// The control point mirrored at the pen; without one, the pen itself.
    fn reflected(&self, control: Option<Point>) -> Point {
        control.map_or(self.at, |c| self.at + (self.at - c))
    }

    fn move_to(&mut self, to: Point) {
        self.lift(false);
        (self.at, self.start) = (to, to);
    }

    fn line_to(&mut self, to: Point) {
        self.span_to(0.0, to);
    }

    fn span_to(&mut self, bulge: f64, to: Point) {
        let end = Vertex { at: to, bulge: 0.0 };
        match self.curves.last_mut() {
            Some(Curve::Spans(vertices)) => {
                if let Some(last) = vertices.last_mut() {
                    last.bulge = bulge;
                }
                vertices.push(end);
            }
            _ => self.curves.push(Curve::Spans(vec![Vertex { at: self.at, bulge }, end])),
        }
        self.at = to;
    }

    fn cubic_to(&mut self, c1: Point, c2: Point, to: Point) {
        self.curves.push(Curve::Cubic(CubicBez::new(self.at, c1, c2, to)));
        (self.at, self.cubic_control) = (to, Some(c2));
    }

    fn quad_to(&mut self, control: Point, to: Point) {
        self.curves.push(Curve::Quad(QuadBez::new(self.at, control, to)));
        (self.at, self.quad_control) = (to, Some(control));
    }

    fn arc_to(&mut self, arc: &Arc, to: Point) {
        let Some(ellipse) = arc_to(self.at, arc, to) else {
            // No extent: the standard has a line, and nothing at all where the ends meet.
            if to != self.at {
                self.line_to(to);
            }
            return;
        };
        match ellipse.as_arcs() {
            // A circle's arc keeps its ends exactly as written.
            Some(arcs) => {
                for pair in arcs.windows(2).take(arcs.len() - 2) {
                    self.span_to(pair[0].bulge, pair[1].at);
                }
                self.span_to(arcs[0].bulge, to);
            }
            None => {
                self.curves.push(Curve::Ellipse(ellipse));
                self.at = to;
            }
        }
    }

    /// Ends the subpath; `closed` returns the pen to its start.
    fn lift(&mut self, closed: bool) {
        let curves = std::mem::take(&mut self.curves);
        if !curves.is_empty() {
            self.chains.push(Chain { curves, closed });
        }
        if closed {
            self.at = self.start;
        }
    }
}
