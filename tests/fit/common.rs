//! Curves to fit, and a reading of the result that shares nothing with the fitter.

use kurbo::Point;
use ribband::fit::{Fitted, Pace, fit};
use ribband::geom::ArcSpline;
use ribband::num::Tolerance;

/// The last place of a program in mm: a smaller break of tangent is no corner.
pub(crate) const LAST_PLACE: f64 = 0.001;

pub(crate) fn tolerance(mm: f64) -> Tolerance {
    Tolerance::new(mm).expect("a tolerance above zero")
}

pub(crate) fn fitted(contour: &ArcSpline, mm: f64) -> Fitted {
    fit(contour, tolerance(mm), Pace::Thorough)
}

/// Spans plus corners.
pub(crate) fn cost(fitted: &Fitted) -> usize {
    fitted.path.len() + fitted.path.corners(LAST_PLACE).count()
}

/// A curve sampled at equal steps of its parameter, to five decimals.
pub(crate) fn sampled(
    curve: impl Fn(f64) -> (f64, f64),
    (from, to): (f64, f64),
    steps: usize,
    closed: bool,
) -> ArcSpline {
    let round = |v: f64| (v * 1e5).round() / 1e5;
    let place = |i: usize| {
        let (x, y) = curve(from + (to - from) * i as f64 / steps as f64);
        Point::new(round(x), round(y))
    };
    ArcSpline::polyline((0..if closed { steps } else { steps + 1 }).map(place), closed)
}

/// The largest distance from any vertex of the contour to the path, and from any of many places on the path to the
/// contour: a lower bound of the deviation, by exact nearest places.
pub(crate) fn furthest_apart(fitted: &Fitted, contour: &ArcSpline) -> f64 {
    let distance = |p: Point, chain: &ArcSpline| {
        chain.spans().map(|s| s.nearest(p).distance).fold(f64::INFINITY, f64::min)
    };
    let there = contour.vertices.iter().map(|v| distance(v.at, &fitted.path));
    let places = fitted.path.spans().flat_map(|s| (0..=8).map(move |k| s.at(f64::from(k) / 8.0)));
    let back: Vec<f64> = places.map(|p| distance(p, contour)).collect();
    there.chain(back).fold(0.0, f64::max)
}

/// The contours of a point list, closed where the first point is repeated.
pub(crate) fn contours(text: &str) -> Vec<ArcSpline> {
    let point = |line: &str| {
        let (x, y) = line.split_once(',')?;
        Some(Point::new(x.parse().ok()?, y.parse().ok()?))
    };
    let blocks = text.split("\n\n").map(|block| block.lines().filter_map(point).collect::<Vec<_>>());
    blocks
        .filter(|points| points.len() > 1)
        .map(|mut points| {
            let closed = points.first() == points.last();
            if closed {
                points.pop();
            }
            ArcSpline::polyline(points, closed)
        })
        .collect()
}

/// An outline of the fixtures with the figures of the manifest.
pub(crate) struct Outline {
    pub(crate) id: String,
    pub(crate) tolerance: f64,
    pub(crate) reference_cost: Option<f64>,
    pub(crate) contours: Vec<ArcSpline>,
}

pub(crate) fn outlines() -> Vec<Outline> {
    let folder = concat!(env!("CARGO_MANIFEST_DIR"), "/fixtures/outlines/");
    let text = std::fs::read_to_string(format!("{folder}manifest.json")).expect("the manifest is there");
    let manifest: serde_json::Value = serde_json::from_str(&text).expect("the manifest is JSON");
    let outline = |o: &serde_json::Value| Outline {
        id: o["id"].as_str().expect("an id").to_owned(),
        tolerance: o["tolerance_mm"].as_f64().expect("a tolerance"),
        reference_cost: o["reference_cost"].as_f64(),
        contours: contours(
            &std::fs::read_to_string(format!("{folder}{}", o["csv"].as_str().expect("a file")))
                .expect("a list"),
        ),
    };
    manifest["outlines"].as_array().expect("outlines").iter().map(outline).collect()
}
