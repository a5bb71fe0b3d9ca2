//! What the machine is set up with, from above: the stock and the clamps that were declared.

use kurbo::{Point, Rect};

use super::Scene;
use super::figures::length;
use super::markup::{escaped, mm, paths};
use crate::geom::Span;
use crate::report::{Clamp, Setup};

/// A box of the report: least x and y, largest x and y.
pub(super) fn rect([x0, y0, x1, y1]: [f64; 4]) -> Rect {
    Rect::new(x0, y0, x1, y1)
}

/// The sides of a box.
pub(super) fn frame(around: Rect) -> [Span; 4] {
    let [a, b, c, d] = corners(around);
    [Span::line(a, b), Span::line(b, c), Span::line(c, d), Span::line(d, a)]
}

fn corners(r: Rect) -> [Point; 4] {
    [(r.x0, r.y0), (r.x1, r.y0), (r.x1, r.y1), (r.x0, r.y1)].map(Point::from)
}

/// The edge of the stock; nothing where it is not given.
pub(super) fn stock(scene: &Scene) -> String {
    let stock = scene.report.setup.stock.as_ref();
    stock.map_or_else(String::new, |stock| paths(frame(rect(stock.box_mm)), "stock"))
}

/// The clamps, each a crossed box with its number and its height; `letter` is the height of a letter in mm.
pub(super) fn clamps(scene: &Scene, letter: f64) -> String {
    let setup = &scene.report.setup;
    let drawn = |(number, clamp): (usize, &Clamp)| {
        let place = rect(clamp.box_mm);
        let [a, b, c, d] = corners(place);
        let crossed = frame(place).into_iter().chain([Span::line(a, c), Span::line(b, d)]);
        let told = setup.clamp_words(|mm| shown(setup, mm));
        let line = |y: f64, said: &str| {
            let (x, y, size) = (mm(place.center().x), mm(-y), mm(letter));
            format!("<text text-anchor=\"middle\" x=\"{x}\" y=\"{y}\" font-size=\"{size}\">{said}</text>")
        };
        format!(
            "<g><title>clamp {}</title>{}{}{}</g>\n",
            escaped(told.get(number - 1).map_or("", String::as_str)),
            paths(crossed, "clamp"),
            line(place.y1 + 0.4 * letter, &format!("clamp {number}")),
            line(place.y0 - 1.1 * letter, &format!("{} high", length(clamp.height_mm, setup.unit == "in")))
        )
    };
    (1..).zip(&setup.clamps).map(drawn).collect()
}

/// A length in the machine's unit, without it.
pub(super) fn shown(setup: &Setup, mm: f64) -> String {
    let unit = length(mm, setup.unit == "in");
    unit.split(' ').next().unwrap_or_default().to_owned()
}

/// Zero, stock, bed and clamps in words, each under its term: as far as they are known, and of the clamps so many, each on
/// a line of its own.
pub(super) fn terms(setup: &Setup, clamps: usize) -> Vec<(&'static str, String)> {
    let show = |mm: f64| shown(setup, mm);
    let mut told = setup.clamp_words(show);
    if told.len() > clamps {
        let more = told.split_off(clamps).len();
        told.push(format!("and {more} more in the program's opening comments"));
    }
    let clamps = if told.is_empty() { "none declared".into() } else { told.join("\n") };
    let mut terms = vec![
        ("Zero of X and Y", setup.origin.words().to_owned()),
        ("Zero of Z", setup.zero.words().to_owned()),
        ("Stock", setup.stock_words(show).unwrap_or_else(|| "size and thickness not given".into())),
    ];
    terms.extend(setup.bed_words(show).map(|told| ("Bed", told)));
    terms.push(("Clamps", clamps));
    terms
}
