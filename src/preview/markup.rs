//! Text for SVG and HTML: numbers, names, path data.

use kurbo::Point;

use crate::geom::Span;

/// `text` as it must stand in an element or in a quoted attribute, to be shown and not obeyed. Characters that
/// XML 1.0 has no place for (its section 2.2) are shown as the replacement character.
pub(crate) fn escaped(text: &str) -> String {
    let mut safe = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            '&' => safe.push_str("&amp;"),
            '<' => safe.push_str("&lt;"),
            '>' => safe.push_str("&gt;"),
            '"' => safe.push_str("&quot;"),
            '\'' => safe.push_str("&#39;"),
            '\t' | '\n' | '\r' => safe.push(c),
            c if c.is_control() || matches!(c, '\u{fffe}' | '\u{ffff}') => safe.push('\u{fffd}'),
            c => safe.push(c),
        }
    }
    safe
}

/// `value` with at most `places` decimals, none of them idle; `0` for what is not finite, which no path can hold.
pub(super) fn number(value: f64, places: usize) -> String {
    if !value.is_finite() {
        return "0".into();
    }
    let text = format!("{value:.places$}");
    let short = if places > 0 { text.trim_end_matches('0').trim_end_matches('.') } else { &text };
    if short == "-0" { "0".into() } else { short.into() }
}

/// Decimals of a length on the page: a micrometre.
const PLACES: usize = 3;

/// A length on the page.
pub(super) fn mm(value: f64) -> String {
    number(value, PLACES)
}

/// A place on the page, where y points down.
pub(super) fn place(p: Point) -> String {
    format!("{} {}", mm(p.x), mm(-p.y))
}

/// How many spans one path element holds at most: few enough to be left out as a whole when they are out of sight.
const CHUNK: usize = 400;

/// The path data of `spans` in pieces, a new subpath wherever a span does not start at the end of the one before.
pub(super) fn path_data(spans: impl IntoIterator<Item = Span>) -> Vec<String> {
    let mut chunks: Vec<String> = Vec::new();
    let mut filled = CHUNK;
    let mut end: Option<Point> = None;
    for span in spans {
        if filled == CHUNK {
            chunks.push(String::new());
            filled = 0;
            end = None;
        }
        let Some(data) = chunks.last_mut() else { continue };
        if end != Some(span.start) {
            *data += &format!("M{}", place(span.start));
        }
        *data += &segment(&span);
        end = Some(span.end);
        filled += 1;
    }
    chunks
}

/// One span as a path command.
fn segment(span: &Span) -> String {
    let radius = span.radius();
    // A radius that the page's decimals cannot hold apart from a line's is one.
    if !radius.is_finite() || span.sagitta() < 0.5 * 10_f64.powi(-(PLACES as i32)) {
        return format!("L{}", place(span.end));
    }
    let (large, clockwise) = (u8::from(span.bulge.abs() > 1.0), u8::from(span.bulge < 0.0));
    format!("A{r} {r} 0 {large} {clockwise} {}", place(span.end), r = mm(radius))
}

/// A path element for each piece of the data of `spans`.
pub(super) fn paths(spans: impl IntoIterator<Item = Span>, class: &str) -> String {
    path_data(spans).iter().map(|data| format!("<path class=\"{class}\" d=\"{data}\"/>\n")).collect()
}
