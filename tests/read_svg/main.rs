//! SVG through the public door.
#![expect(clippy::float_cmp, reason = "numbers that are exact must come through exactly")]

mod bad_files;
mod drawings;
mod hidden;
mod page;
mod paths;
mod refused;
mod shapes;
mod three_formats;

use kurbo::Point;
use ribband::error::Error;
use ribband::geom::ArcSpline;
use ribband::read::{Scale, Unit, read};
use ribband::sketch::Sketch;

/// Millimetres where the drawing does not say.
fn mm() -> Scale {
    Scale { drawing_unit: Some(Unit::Mm), ..Scale::default() }
}

/// A page without a size, so that 1 unit is 1 mm and y is as written, negated.
fn svg(content: &str) -> String {
    format!(
        r#"<svg xmlns="http://www.w3.org/2000/svg" xmlns:xlink="http://www.w3.org/1999/xlink">{content}</svg>"#
    )
}

fn try_sketch(text: &str) -> Result<Sketch, Error> {
    read("t.svg", text.as_bytes(), &mm())
}

fn sketch(text: &str) -> Sketch {
    try_sketch(text).unwrap_or_else(|e| panic!("{e}\n{text}"))
}

/// The contours of a page's content.
fn contours(content: &str) -> Vec<ArcSpline> {
    sketch(&svg(content)).contours.into_iter().map(|c| c.path).collect()
}

/// The vertices as the file has them, y down.
fn corners(path: &ArcSpline) -> Vec<(f64, f64)> {
    path.vertices.iter().map(|v| (v.at.x, -v.at.y + 0.0)).collect()
}

/// The corners of the only contour.
fn only(content: &str) -> Vec<(f64, f64)> {
    let found = contours(content);
    assert_eq!(found.len(), 1, "one contour in {content}");
    corners(&found[0])
}

fn length(content: &str) -> f64 {
    contours(content).iter().map(ArcSpline::length).sum()
}

/// Centre as in the file (y down) and radius of each span.
fn circles(path: &ArcSpline) -> Vec<(Point, f64)> {
    path.spans()
        .filter_map(|s| Some((s.centre()?, s.radius())))
        .map(|(c, r)| (Point::new(c.x, -c.y), r))
        .collect()
}
