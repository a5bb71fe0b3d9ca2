//! The result does not hang on where a contour starts, which way it runs, or how it lies.

use kurbo::{Affine, Vec2};

use super::common::{cost, fitted, outlines};

const SOME: [&str; 5] = [
    "analytic/limacon-a-s20-clean",
    "analytic/superellipse-a-s05-n02",
    "glyph/liberation-serif-italic-u0066",
    "traced/coin1-subpx",
    "traced/nucleus1-stair",
];

#[test]
fn neither_the_first_vertex_nor_the_direction_matters() {
    for outline in outlines().iter().filter(|o| SOME.contains(&o.id.as_str())) {
        let contour = &outline.contours[0];
        let usual = fitted(contour, outline.tolerance);
        for first in [1, contour.len() / 3, contour.len() - 1] {
            for other in [contour.started_at(first), contour.started_at(first).reversed()] {
                let other = fitted(&other, outline.tolerance);
                assert_eq!(other.path.len(), usual.path.len(), "{} from vertex {first}", outline.id);
                let change = (other.deviation.mm / usual.deviation.mm - 1.0).abs();
                assert!(
                    change < 0.01,
                    "{}: deviation {} or {}",
                    outline.id,
                    other.deviation.mm,
                    usual.deviation.mm
                );
            }
        }
    }
}

#[test]
fn an_open_contour_is_the_same_backwards() {
    for outline in outlines().iter().filter(|o| o.id == "analytic/sine-a-rand-clean") {
        let there = fitted(&outline.contours[0], outline.tolerance);
        let back = fitted(&outline.contours[0].reversed(), outline.tolerance);
        assert_eq!(back.path.reversed(), there.path, "{}", outline.id);
    }
}

#[test]
fn moving_turning_and_mirroring_change_the_count_by_little() {
    let ways = [Affine::translate(Vec2::new(317.3, -41.9)), Affine::rotate(0.7), Affine::FLIP_Y];
    for outline in outlines().iter().filter(|o| SOME.contains(&o.id.as_str())) {
        let usual = cost(&fitted(&outline.contours[0], outline.tolerance));
        for way in ways {
            let other = cost(&fitted(&outline.contours[0].transformed(way), outline.tolerance));
            println!("{}: {usual} and {other}", outline.id);
            assert!(other.abs_diff(usual) <= 2, "{}: {usual} and {other}", outline.id);
        }
    }
}
