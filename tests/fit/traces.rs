//! Real traces against a count found by other means.

use rayon::prelude::*;

use super::common::{cost, fitted, furthest_apart, outlines};

/// `reference_cost` in the manifest is the least of a state search at the same tolerance, whose path was replayed and held
/// it, and of straight-line simplification; found apart from this project.
#[test]
fn few_spans_and_corners_on_real_traces() {
    let outlines = outlines();
    let chosen: Vec<_> = outlines.iter().filter(|o| o.reference_cost.is_some()).collect();
    let mut ratios: Vec<f64> = chosen
        .par_iter()
        .map(|outline| {
            let reference = outline.reference_cost.expect("chosen for it");
            let all: Vec<_> = outline.contours.iter().map(|c| fitted(c, outline.tolerance)).collect();
            let cost: usize = all.iter().map(cost).sum();
            let allowed = (1.15 * reference).max(reference + 2.0);
            assert!(cost as f64 <= allowed, "{}: {cost} where {reference} are known", outline.id);
            for (fitted, contour) in all.iter().zip(&outline.contours) {
                assert!(fitted.deviation.mm <= outline.tolerance, "{}", outline.id);
                let seen = furthest_apart(fitted, contour);
                assert!(seen <= fitted.deviation.mm, "{}: {seen} of {}", outline.id, fitted.deviation.mm);
            }
            cost as f64 / reference
        })
        .collect();
    assert!(ratios.len() > 100, "{} outlines", ratios.len());
    ratios.sort_by(f64::total_cmp);
    let median = ratios[ratios.len() / 2];
    println!("median {median:.3} of the reference, at worst {:.3}", ratios[ratios.len() - 1]);
    assert!(median <= 1.03, "median {median}");
}
