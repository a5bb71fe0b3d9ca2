//! What was drawn twice is cut once.

use ribband::clean::{FlawKind, clean};
use ribband::geom::ArcSpline;

use super::common::{Dice, at, open, ring, sketch};

const JOIN: f64 = 0.1;

/// Kind, contour, other contour and size of a flaw.
type Told = (FlawKind, usize, usize, f64);

/// The cleaned paths and what is told.
fn cleaned(paths: impl IntoIterator<Item = ArcSpline>) -> (Vec<ArcSpline>, Vec<Told>) {
    let cleaned = clean(&sketch(paths), JOIN);
    let flaws =
        cleaned.flaws.iter().map(|f| (f.kind, f.contour, f.other.unwrap_or(0), (f.size * 1e3).round() / 1e3));
    (cleaned.contours.into_iter().map(|c| c.path).collect(), flaws.collect())
}

#[test]
fn a_contour_drawn_again_from_elsewhere_and_backwards_is_removed() {
    let part = ring(&[(0.0, 0.0), (10.0, 0.0), (7.0, 8.0), (1.0, 9.0)]);
    let again = part.reversed().started_at(2);
    let (paths, flaws) = cleaned([part.clone(), again]);
    assert_eq!(paths, std::slice::from_ref(&part));
    assert_eq!(flaws, [(FlawKind::Duplicate, 2, 1, 33.682)]);
    assert!((part.length() - 33.682).abs() < 1e-3);
}

#[test]
fn arcs_drawn_again_backwards_are_removed() {
    let mut arc = open(&[(0.0, 0.0), (10.0, 0.0)]);
    arc.vertices[0].bulge = 0.5;
    let (paths, flaws) = cleaned([arc.clone(), arc.reversed()]);
    assert_eq!(paths, std::slice::from_ref(&arc));
    assert_eq!(flaws.len(), 1);
    // The arc on the other side of the chord is another arc: the two make a ring.
    let mut other = arc.clone();
    other.vertices[0].bulge = -0.5;
    let (paths, flaws) = cleaned([arc, other]);
    assert_eq!((paths.len(), paths[0].len(), paths[0].closed), (1, 2, true));
    assert_eq!(flaws, []);
}

#[test]
fn a_line_on_a_part_of_a_longer_one_is_removed() {
    let (paths, flaws) = cleaned([open(&[(2.0, 2.0), (5.0, 5.0)]), open(&[(10.0, 10.0), (0.0, 0.0)])]);
    assert_eq!(paths, [open(&[(10.0, 10.0), (0.0, 0.0)])]);
    assert_eq!(flaws, [(FlawKind::Duplicate, 1, 2, 4.243)]);
}

#[test]
fn lines_that_overlap_are_cut_back_and_join() {
    let (paths, flaws) = cleaned([open(&[(0.0, 1.0), (10.0, 1.0)]), open(&[(15.0, 1.0), (7.0, 1.0)])]);
    assert_eq!(paths, [open(&[(0.0, 1.0), (10.0, 1.0), (15.0, 1.0)])]);
    assert_eq!(flaws, [(FlawKind::PartDuplicate, 2, 1, 3.0)]);
}

#[test]
fn arcs_that_overlap_are_cut_back_and_join() {
    // A quarter and a half of one circle of radius 10, sharing 45 degrees.
    let on = |degrees: f64| (10.0 * degrees.to_radians().cos(), 10.0 * degrees.to_radians().sin());
    let arc = |from: f64, to: f64| {
        let mut path = open(&[on(from), on(to)]);
        path.vertices[0].bulge = ((to - from).to_radians() / 4.0).tan();
        path
    };
    let (paths, flaws) = cleaned([arc(0.0, 180.0), arc(135.0, 225.0)]);
    assert_eq!(paths.len(), 1);
    assert!((paths[0].length() - 225_f64.to_radians() * 10.0).abs() < 1e-4, "{}", paths[0].length());
    assert_eq!(flaws, [(FlawKind::PartDuplicate, 2, 1, 7.854)]);
}

#[test]
fn lines_that_meet_cross_or_run_on_are_left_alone() {
    let tee = [open(&[(0.0, 0.0), (10.0, 0.0)]), open(&[(5.0, 0.0), (5.0, 4.0)])];
    let cross = [open(&[(0.0, 0.0), (10.0, 10.0)]), open(&[(0.0, 10.0), (9.0, 0.0)])];
    let beside = [open(&[(0.0, 0.0), (10.0, 0.0)]), open(&[(1.0, 0.5), (9.0, 0.5)])];
    for drawing in [tee, cross, beside] {
        let (paths, flaws) = cleaned(drawing.clone());
        assert_eq!(paths, drawing);
        assert_eq!(flaws, []);
    }
    let (paths, flaws) = cleaned([open(&[(0.0, 0.0), (10.0, 0.0)]), open(&[(10.0, 0.0), (15.0, 0.0)])]);
    assert_eq!(paths, [open(&[(0.0, 0.0), (10.0, 0.0), (15.0, 0.0)])]);
    assert_eq!(flaws, []);
}

#[test]
fn very_short_lines_in_a_row_are_not_each_others_duplicates() {
    let step = 0.002;
    let row = (0..50).map(|k| open(&[(step * f64::from(k), 0.0), (step * f64::from(k + 1), 0.0)]));
    let (paths, flaws) = cleaned(row);
    assert_eq!((paths.len(), paths[0].len()), (1, 50));
    assert_eq!(flaws, []);
}

#[test]
fn the_same_line_on_two_layers_is_meant() {
    let line = open(&[(0.0, 0.0), (10.0, 0.0)]);
    let mut drawing = sketch([line.clone(), line]);
    drawing.contours[1].layer = "engrave".into();
    let cleaned = clean(&drawing, JOIN);
    assert_eq!((cleaned.contours.len(), cleaned.flaws.len()), (2, 0));
}

#[test]
fn doubled_and_overlapping_sides_in_any_order_give_the_same_ring() {
    let square = ring(&[(0.0, 0.0), (8.0, 2.0), (6.0, 10.0), (-2.0, 8.0)]);
    for seed in 0..50 {
        let mut dice = Dice(seed);
        let mut sides: Vec<ArcSpline> = Vec::new();
        for side in square.spans() {
            sides.push(ArcSpline::from_spans(&[side], false));
            // Quarters of these sides are on the grid of coordinates, so that they lie on the side exactly.
            let (t0, t1) = [(0.0, 0.5), (0.25, 0.75), (0.5, 1.0), (1.0, 0.0)][dice.below(4)];
            sides.push(open(&[side.at(t0), side.at(t1)].map(|p| (p.x, p.y))));
        }
        dice.shuffle(&mut sides);
        let (paths, flaws) = cleaned(sides);
        assert_eq!(paths.len(), 1, "seed {seed}");
        assert!(paths[0].closed, "seed {seed}");
        assert_eq!(paths[0].vertices[0].at, at(-2.0, 8.0), "seed {seed}");
        assert_eq!((paths[0].len(), flaws.len()), (4, 4), "seed {seed}");
    }
}
