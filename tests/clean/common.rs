//! Small drawings, built in memory.

use kurbo::Point;
use ribband::geom::ArcSpline;
use ribband::sketch::{Contour, Place, Sketch, snap};

/// A point on the grid that coordinates are held on.
pub(crate) fn at(x: f64, y: f64) -> Point {
    Point::new(snap(x), snap(y))
}

/// A drawing of the given paths, numbered from 1.
pub(crate) fn sketch(paths: impl IntoIterator<Item = ArcSpline>) -> Sketch {
    let contours = (1..).zip(paths).map(|(id, path)| Contour {
        id,
        layer: String::new(),
        colour: String::new(),
        place: Place::default(),
        path,
    });
    Sketch {
        contours: contours.collect(),
        mm_per_unit: 1.0,
        scale_from: "the test".into(),
        ..Sketch::default()
    }
}

/// An open chain of straight lines.
pub(crate) fn open(points: &[(f64, f64)]) -> ArcSpline {
    ArcSpline::polyline(points.iter().map(|&(x, y)| at(x, y)), false)
}

/// A ring of straight lines; the first point is not repeated.
pub(crate) fn ring(points: &[(f64, f64)]) -> ArcSpline {
    ArcSpline::polyline(points.iter().map(|&(x, y)| at(x, y)), true)
}

/// Numbers without a pattern, the same in every run (a 64-bit linear congruential generator, constants from memory).
pub(crate) struct Dice(pub(crate) u64);

impl Dice {
    /// From 0 up to, not including, `n`.
    pub(crate) fn below(&mut self, n: usize) -> usize {
        (self.unit() * n as f64) as usize
    }

    /// From 0 up to, not including, 1.
    pub(crate) fn unit(&mut self) -> f64 {
        self.0 = self.0.wrapping_mul(6364136223846793005).wrapping_add(1442695040888963407);
        (self.0 >> 11) as f64 / (1_u64 << 53) as f64
    }

    /// Normal, mean 0 and deviation 1 (the sum of twelve uniform numbers less six).
    pub(crate) fn normal(&mut self) -> f64 {
        (0..12).map(|_| self.unit()).sum::<f64>() - 6.0
    }

    /// The items in another order.
    pub(crate) fn shuffle<T>(&mut self, items: &mut [T]) {
        for i in (1..items.len()).rev() {
            items.swap(i, self.below(i + 1));
        }
    }
}

/// One outline of the manifest.
pub(crate) struct Outline {
    pub(crate) id: String,
    /// The figures that the manifest gives.
    pub(crate) figures: serde_json::Value,
    pub(crate) paths: Vec<ArcSpline>,
}

/// The outlines of the fixtures.
pub(crate) fn outlines() -> Vec<Outline> {
    let manifest: serde_json::Value = serde_json::from_str(&fixture("manifest.json")).unwrap();
    let all = manifest["outlines"].as_array().unwrap();
    all.iter()
        .map(|figures| Outline {
            id: figures["id"].as_str().unwrap().to_string(),
            figures: figures.clone(),
            paths: points(&fixture(figures["csv"].as_str().unwrap())),
        })
        .collect()
}

/// A text among the outlines.
pub(crate) fn fixture(name: &str) -> String {
    let path = format!("{}/fixtures/outlines/{name}", env!("CARGO_MANIFEST_DIR"));
    std::fs::read_to_string(&path).unwrap_or_else(|e| panic!("{path}: {e}"))
}

/// The polylines of a point list: an empty line between them, closed where the first point is repeated.
fn points(text: &str) -> Vec<ArcSpline> {
    let point = |line: &str| {
        let (x, y) = line.split_once(',')?;
        Some(at(x.parse().ok()?, y.parse().ok()?))
    };
    let blocks = text.trim().split("\n\n").map(|block| block.lines().filter_map(point).collect::<Vec<_>>());
    blocks
        .map(|mut p| {
            let closed = p.len() > 2 && p.first() == p.last();
            if closed {
                p.pop();
            }
            ArcSpline::polyline(p, closed)
        })
        .collect()
}
