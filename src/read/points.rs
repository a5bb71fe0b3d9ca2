//! Point lists: an x and a y a line, a blank line between contours.
//!
//! Lines of two plain decimal numbers, nearly all lines of nearly all files, take a fast path; every other line goes
//! through the grammar. Files are cut into pieces by their size alone and read in parallel.

use kurbo::Point;
use nom::branch::alt;
use nom::character::complete::{one_of, space0, space1};
use nom::combinator::{eof, opt, recognize, rest};
use nom::{Parser, bytes::complete::tag};
use rayon::prelude::*;

use super::curve::{Chain, Curve, Drawing, Element};
use super::number::{Parsed, excerpt, fault, number};
use crate::error::{Error, Kind};
use crate::geom::Vertex;
use crate::sketch::Place;

const REMEDY: &str = "a point list has an x and a y on each line, with a comma, semicolon, tab or blanks between \
                      them and points as decimal marks; other drawings are read as SVG or ASCII DXF";

/// About so many bytes are read as one piece of parallel work.
const PIECE_BYTES: usize = 1 << 18;

/// Reads a point list.
pub(super) fn read(text: &[u8]) -> Result<Drawing, Error> {
    if !text.contains(&b'\n') && text.contains(&b'\r') {
        let lines: Vec<u8> = text.iter().map(|&b| if b == b'\r' { b'\n' } else { b }).collect();
        return read_lines(&lines);
    }
    read_lines(text)
}

fn read_lines(text: &[u8]) -> Result<Drawing, Error> {
    let (body, head_lines) = after_head(text);
    let pieces: Vec<Piece> = cut(body).into_par_iter().map(read_piece).collect();
    let mut contours = Contours::default();
    let mut line = head_lines;
    for piece in pieces {
        if let Some((at, what)) = &piece.error {
            return Err(Error::new(Kind::Input, what).on_line(line + at).remedy(REMEDY));
        }
        let lines = piece.lines;
        contours.push(piece, line);
        line += lines;
    }
    contours.finish()
}

/// The text after comments, blank lines and at most one header, and how many lines these were.
fn after_head(text: &[u8]) -> (&[u8], usize) {
    let mut body = text;
    let mut lines = 0;
    let mut header_seen = false;
    while !body.is_empty() {
        let (line, rest) = split_line(body);
        let line = String::from_utf8_lossy(line);
        let header = !header_seen && is_header(&line);
        if !header && !matches!(awkward_line(&line), Ok(Line::Comment | Line::Blank)) {
            break;
        }
        header_seen |= header;
        lines += 1;
        body = rest;
    }
    (body, lines)
}

/// A line of words: every field starts with a letter, a quote or a bracket, and none is a number's name.
fn is_header(line: &str) -> bool {
    let mut fields = line.split([',', ';', ' ', '\t', '\r']).filter(|f| !f.is_empty()).peekable();
    let word = |f: &str| f.starts_with(|c: char| c.is_alphabetic() || "\"'([".contains(c));
    let not_a_number = |f: &str| f.parse::<f64>().is_ok();
    fields.peek().is_some() && fields.all(|f| word(f) && !not_a_number(f))
}

fn split_line(text: &[u8]) -> (&[u8], &[u8]) {
    match text.iter().position(|&b| b == b'\n') {
        Some(end) => (&text[..end], &text[end + 1..]),
        None => (text, &[]),
    }
}

/// Cuts the text at line ends into pieces of about [`PIECE_BYTES`].
fn cut(mut text: &[u8]) -> Vec<&[u8]> {
    let mut pieces = Vec::with_capacity(text.len() / PIECE_BYTES + 1);
    while text.len() > PIECE_BYTES {
        let Some(end) = text[PIECE_BYTES..].iter().position(|&b| b == b'\n') else { break };
        let (piece, rest) = text.split_at(PIECE_BYTES + end + 1);
        pieces.push(piece);
        text = rest;
    }
    pieces.push(text);
    pieces
}

/// What one piece of the text holds. Lines count from 1 within the piece.
#[derive(Default)]
struct Piece {
    vertices: Vec<Vertex>,
    /// The line of the first point.
    first_line: usize,
    /// Where contours start after a blank line: index of the point, line.
    starts: Vec<(usize, usize)>,
    ends_blank: bool,
    lines: usize,
    error: Option<(usize, String)>,
}

fn read_piece(text: &[u8]) -> Piece {
    let mut piece = Piece { vertices: Vec::with_capacity(text.len() / 16), ..Piece::default() };
    let mut at = 0;
    while at < text.len() {
        piece.lines += 1;
        match next_line(text, &mut at) {
            Ok(Line::Point(point)) => piece.push(point),
            Ok(Line::Blank) => piece.ends_blank = true,
            Ok(Line::Comment) => {}
            Err(what) => {
                piece.error = Some((piece.lines, what));
                break;
            }
        }
    }
    piece
}

impl Piece {
    fn push(&mut self, at: Point) {
        if self.vertices.is_empty() {
            self.first_line = self.lines;
        }
        if std::mem::take(&mut self.ends_blank) {
            self.starts.push((self.vertices.len(), self.lines));
        }
        self.vertices.push(Vertex { at, bulge: 0.0 });
    }
}

/// The pieces joined: contours are runs of the points.
#[derive(Default)]
struct Contours {
    vertices: Vec<Vertex>,
    /// Index of the first point and its line.
    starts: Vec<(usize, usize)>,
    after_blank: bool,
}

impl Contours {
    /// Adds a piece that begins after `line` lines.
    fn push(&mut self, piece: Piece, line: usize) {
        let before = self.vertices.len();
        if piece.vertices.is_empty() {
            self.after_blank |= piece.ends_blank;
            return;
        }
        if before == 0 || (self.after_blank && piece.starts.first().is_none_or(|s| s.0 > 0)) {
            self.starts.push((before, line + piece.first_line));
        }
        let starts = piece.starts.iter().filter(|s| before + s.0 > 0);
        self.starts.extend(starts.map(|&(point, at)| (before + point, line + at)));
        self.after_blank = piece.ends_blank;
        if before == 0 { self.vertices = piece.vertices } else { self.vertices.extend(piece.vertices) }
    }

    fn finish(mut self) -> Result<Drawing, Error> {
        let mut drawing = Drawing::default();
        for (start, line) in std::mem::take(&mut self.starts).into_iter().rev() {
            let vertices =
                if start == 0 { std::mem::take(&mut self.vertices) } else { self.vertices.split_off(start) };
            match vertices.len() {
                1 => drawing
                    .notes
                    .push(format!("the single point on line {line} is no contour and is left out")),
                _ => drawing.elements.push(element(vertices, line)),
            }
        }
        drawing.elements.reverse();
        drawing.notes.reverse();
        if drawing.elements.is_empty() {
            let what = match drawing.notes.len() {
                0 => "the point list holds no points",
                1 => "the point list holds a single point; a contour needs two",
                _ => "the point list holds only single points with blank lines between them",
            };
            return Err(Error::new(Kind::Input, what).remedy(REMEDY));
        }
        Ok(drawing)
    }
}

/// A contour of the points, closed when its first point is repeated at the end of at least three others.
fn element(vertices: Vec<Vertex>, line: usize) -> Element {
    let closed = vertices.len() > 3 && vertices.first() == vertices.last();
    Element {
        chain: Chain::of(Curve::Spans(vertices), closed),
        layer: String::new(),
        colour: String::new(),
        place: Place { line, element: "point list".into() },
    }
}

/// What one line says.
enum Line {
    Point(Point),
    Comment,
    Blank,
}

/// Reads the line at `at` and moves `at` behind it.
fn next_line(text: &[u8], at: &mut usize) -> Result<Line, String> {
    if let Some((point, length)) = plain_line(&text[*at..]) {
        *at += length;
        return Ok(Line::Point(point));
    }
    let (line, _) = split_line(&text[*at..]);
    *at += line.len() + 1;
    awkward_line(&String::from_utf8_lossy(line))
}

/// The fast path: two plain numbers with one separator between them, then the end of the line; and the length of it
/// all. `None` for every other line.
fn plain_line(text: &[u8]) -> Option<(Point, usize)> {
    let (x, mut at) = plain_number(text)?;
    if !matches!(text.get(at)?, b',' | b';' | b'\t' | b' ') {
        return None;
    }
    at += 1;
    let (y, length) = plain_number(&text[at..])?;
    at += length;
    if text.get(at) == Some(&b'\r') {
        at += 1;
    }
    match text.get(at) {
        None => Some((Point::new(x, y), at)),
        Some(b'\n') => Some((Point::new(x, y), at + 1)),
        Some(_) => None,
    }
}

/// A number of digits with an optional sign and point, and its length. Exact: up to 15 digits and the power of ten are
/// both doubles, so that one division rounds correctly (Clinger 1990). `None` for every other number.
fn plain_number(text: &[u8]) -> Option<(f64, usize)> {
    const TENS: [f64; 16] =
        [1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15];
    let negative = text.first() == Some(&b'-');
    let mut at = usize::from(negative);
    let mut value = 0_u64;
    let mut digits = 0;
    let mut point = None;
    loop {
        match text.get(at) {
            Some(d @ b'0'..=b'9') => {
                value = value * 10 + u64::from(d - b'0');
                digits += 1;
                if digits > 15 {
                    return None;
                }
            }
            Some(b'.') if point.is_none() => point = Some(digits),
            _ => break,
        }
        at += 1;
    }
    if digits == 0 {
        return None;
    }
    let decimals = point.map_or(0, |before| digits - before);
    let size = value as f64 / TENS[decimals];
    Some((if negative { -size } else { size }, at))
}

/// The grammar of a line, for all that the fast path leaves.
fn awkward_line(line: &str) -> Result<Line, String> {
    let line = line.trim_matches(|c: char| c.is_ascii_whitespace() || c == '\u{1a}');
    if line.trim_matches([',', ';', ' ', '\t']).is_empty() {
        return Ok(Line::Blank);
    }
    match (alt((comment, point)), eof).parse(line) {
        Ok((_, (parsed, _))) => Ok(parsed),
        Err(error) => {
            let fault = fault(error);
            Err(complaint(line, fault.rest, fault.what))
        }
    }
}

fn comment(input: &str) -> Parsed<'_, Line> {
    (alt((tag("#"), tag(";"), tag("//"))), rest).map(|_| Line::Comment).parse(input)
}

fn point(input: &str) -> Parsed<'_, Line> {
    let separator = alt((recognize((space0, one_of(",;"), space0)), space1));
    // No semicolon here: in "1,5;2,5" it separates, and the second number must not pass for a comment.
    let remark = (space0, alt((tag("#"), tag("//"))), rest);
    (number, separator, number, opt(remark)).map(|(x, _, y, _)| Line::Point(Point::new(x, y))).parse(input)
}

/// Says what is wrong with a line, most likely cause first.
fn complaint(line: &str, rest: &str, what: &str) -> String {
    let shown = excerpt(line);
    let fields: Vec<&str> = line.split([',', ';', ' ', '\t']).filter(|f| !f.is_empty()).collect();
    let is_number = |f: &&str| f.parse::<f64>().is_ok_and(f64::is_finite);
    if !what.is_empty() {
        format!("{} is {what}", excerpt(rest.split([',', ';', ' ', '\t']).next().unwrap_or(rest)))
    } else if let Some(name) = fields.iter().find(|f| f.parse::<f64>().is_ok_and(|x| !x.is_finite())) {
        format!("{} is not a coordinate", excerpt(name))
    } else if fields.iter().all(is_number) && fields.len() != 2 {
        let decimal_commas = fields.len() == 4 && line.contains(',');
        let hint = if decimal_commas { " (decimal commas? write points instead)" } else { "" };
        let numbers = if fields.len() == 1 { "number" } else { "numbers" };
        format!("{shown} has {} {numbers} where x and y are wanted{hint}", fields.len())
    } else {
        format!("cannot read {shown} as an x and a y")
    }
}
