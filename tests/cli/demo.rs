//! The demo drawings of a small shop: a paddle blade, a sign, a router template. Made up here, and traced as a scanner
//! would: a step of about a third of a millimetre, jagged by a tenth.

use std::fs;
use std::path::{Path, PathBuf};

use kurbo::Point;

use crate::formats::Contours;

/// A closed uniform cubic B-spline; a control point given three times running is a corner.
fn spline(control: &[(f64, f64)]) -> Vec<Point> {
    let at = |i: usize| Point::from(control[i % control.len()]).to_vec2();
    (0..control.len())
        .flat_map(|i| {
            let [a, b, c, d] = [at(i), at(i + 1), at(i + 2), at(i + 3)];
            (0..400).map(move |k| {
                let t = f64::from(k) / 400.0;
                let u = 1.0 - t;
                let weights = [
                    u * u * u,
                    3.0 * t * t * t - 6.0 * t * t + 4.0,
                    -3.0 * t * t * t + 3.0 * t * t + 3.0 * t + 1.0,
                    t * t * t,
                ];
                ((a * weights[0] + b * weights[1] + c * weights[2] + d * weights[3]) / 6.0).to_point()
            })
        })
        .collect()
}

/// Straight from corner to corner.
fn polygon(corners: &[(f64, f64)]) -> Vec<Point> {
    spline(&corners.iter().flat_map(|&corner| [corner; 3]).collect::<Vec<_>>())
}

/// A round hole or letter bowl: the spline of an octagon, which is an oval within a hundredth of its radius.
fn oval(centre: (f64, f64), radii: (f64, f64)) -> Vec<Point> {
    use std::f64::consts::FRAC_1_SQRT_2 as D;
    let octagon = [(1.0, 0.0), (D, D), (0.0, 1.0), (-D, D), (-1.0, 0.0), (-D, -D), (0.0, -1.0), (D, -D)];
    // The spline passes (4 + 2 cos 45 deg) / 6 as far from the centre as its control points.
    let reach = 6.0 / (4.0 + 2.0 * D);
    spline(&octagon.map(|(x, y)| (centre.0 + radii.0 * reach * x, centre.1 + radii.1 * reach * y)))
}

/// The outline as a scanner gives it: a point each 0.35 mm, shaken by up to 0.04 mm, on a grid of 0.05 mm.
fn traced(outline: &[Point], seed: u64) -> (Vec<Point>, bool) {
    let mut state = seed;
    let mut shake = || {
        // Marsaglia's xorshift generator (2003).
        state ^= state << 13;
        state ^= state >> 7;
        state ^= state << 17;
        ((state >> 40) as f64 / f64::from(1 << 24) - 0.5) * 0.08
    };
    let grid = |v: f64| (v * 20.0).round() / 20.0;
    let mut points: Vec<Point> = Vec::new();
    let mut last: Option<Point> = None;
    for &p in outline {
        if last.is_none_or(|last| last.distance(p) >= 0.35) {
            points.push(Point::new(grid(p.x + shake()), grid(p.y + shake())));
            last = Some(p);
        }
    }
    points.dedup();
    (points, true)
}

fn paddle_blade() -> Contours {
    let blade = [
        (8.0, 62.0),
        (8.0, 62.0),
        (8.0, 62.0),
        (60.0, 60.0),
        (120.0, 50.0),
        (210.0, 20.0),
        (320.0, 6.0),
        (420.0, 4.0),
        (474.0, 30.0),
        (486.0, 78.0),
        (462.0, 132.0),
        (380.0, 160.0),
        (280.0, 160.0),
        (190.0, 132.0),
        (120.0, 104.0),
        (60.0, 94.0),
        (8.0, 92.0),
        (8.0, 92.0),
        (8.0, 92.0),
    ];
    Contours(vec![traced(&spline(&blade), 11)])
}

/// The sign's plaque.
const PLAQUE: &[(f64, f64)] = &[
    (10.0, 30.0),
    (10.0, 30.0),
    (10.0, 30.0),
    (80.0, 8.0),
    (150.0, 30.0),
    (220.0, 8.0),
    (290.0, 30.0),
    (290.0, 30.0),
    (290.0, 30.0),
    (282.0, 75.0),
    (290.0, 120.0),
    (290.0, 120.0),
    (290.0, 120.0),
    (220.0, 142.0),
    (150.0, 122.0),
    (80.0, 142.0),
    (10.0, 120.0),
    (10.0, 120.0),
    (10.0, 120.0),
    (18.0, 75.0),
];

/// Its letter A.
const A: &[(f64, f64)] = &[
    (124.0, 46.0),
    (136.0, 46.0),
    (141.0, 60.0),
    (159.0, 60.0),
    (164.0, 46.0),
    (176.0, 46.0),
    (156.0, 104.0),
    (144.0, 104.0),
];

/// Its letter R.
const R: &[(f64, f64)] = &[
    (192.0, 46.0),
    (192.0, 46.0),
    (192.0, 46.0),
    (203.0, 46.0),
    (203.0, 46.0),
    (203.0, 46.0),
    (203.0, 68.0),
    (203.0, 68.0),
    (203.0, 68.0),
    (210.0, 68.0),
    (210.0, 68.0),
    (210.0, 68.0),
    (224.0, 46.0),
    (224.0, 46.0),
    (224.0, 46.0),
    (236.0, 46.0),
    (236.0, 46.0),
    (236.0, 46.0),
    (220.0, 70.0),
    (220.0, 70.0),
    (220.0, 70.0),
    (236.0, 76.0),
    (238.0, 96.0),
    (224.0, 105.0),
    (210.0, 104.0),
    (192.0, 104.0),
    (192.0, 104.0),
    (192.0, 104.0),
];

fn sign() -> Contours {
    let outlines = [
        spline(PLAQUE),
        oval((86.0, 75.0), (27.0, 30.0)),
        oval((86.0, 75.0), (15.0, 18.5)),
        polygon(A),
        polygon(&[(144.5, 70.0), (155.5, 70.0), (150.0, 87.0)]),
        spline(R),
        oval((214.0, 86.0), (9.0, 8.0)),
        oval((32.0, 75.0), (3.0, 3.0)),
        oval((268.0, 75.0), (3.0, 3.0)),
    ];
    Contours(outlines.iter().zip(21..).map(|(outline, seed)| traced(outline, seed)).collect())
}

fn template() -> Contours {
    let edge = [
        (10.0, 20.0),
        (10.0, 20.0),
        (10.0, 20.0),
        (40.0, 20.0),
        (60.0, 12.0),
        (80.0, 24.0),
        (100.0, 12.0),
        (120.0, 24.0),
        (140.0, 12.0),
        (170.0, 20.0),
        (200.0, 20.0),
        (200.0, 20.0),
        (200.0, 20.0),
        (206.0, 60.0),
        (180.0, 84.0),
        (150.0, 70.0),
        (105.0, 64.0),
        (60.0, 70.0),
        (30.0, 84.0),
        (4.0, 60.0),
    ];
    let outlines = [spline(&edge), oval((32.0, 46.0), (4.0, 4.0)), oval((178.0, 46.0), (4.0, 4.0))];
    Contours(outlines.iter().zip(31..).map(|(outline, seed)| traced(outline, seed)).collect())
}

/// The demo drawings: file name and text.
pub(crate) fn drawings() -> [(PathBuf, String); 3] {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/demo");
    [
        (folder.join("paddle-blade.svg"), paddle_blade().svg()),
        (folder.join("sign.dxf"), sign().dxf()),
        (folder.join("template.csv"), template().csv()),
    ]
}

/// With `RIBBAND_WRITE_DEMO` set, writes them; always demands that they stand as they are made here.
#[test]
fn the_demo_drawings_stand_as_they_were_made() {
    for (path, text) in drawings() {
        if std::env::var_os("RIBBAND_WRITE_DEMO").is_some() {
            fs::write(&path, &text).expect("the demo folder can be written");
        }
        assert!(fs::read_to_string(&path).is_ok_and(|kept| kept == text), "{} differs", path.display());
    }
}
