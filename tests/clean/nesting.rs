//! Which contour lies in which, and where contours cross.

use kurbo::Point;
use ribband::clean::{FlawKind, Role, clean, crossings, nesting};
use ribband::geom::{ArcSpline, Span};
use ribband::sketch::Contour;

use super::common::{Dice, at, open, outlines, ring, sketch};

fn contours(paths: impl IntoIterator<Item = ArcSpline>) -> Vec<Contour> {
    sketch(paths).contours
}

fn square(x: f64, y: f64, side: f64) -> ArcSpline {
    ring(&[(x, y), (x + side, y), (x + side, y + side), (x, y + side)])
}

/// A full circle of two half arcs.
fn circle(x: f64, y: f64, radius: f64) -> ArcSpline {
    let mut path = ring(&[(x - radius, y), (x + radius, y)]);
    path.vertices.iter_mut().for_each(|v| v.bulge = 1.0);
    path
}

/// Kind, contour, other contour, and place of each flaw.
fn found(paths: impl IntoIterator<Item = ArcSpline>) -> Vec<(FlawKind, usize, usize, (f64, f64))> {
    let flaws = crossings(&contours(paths));
    let places = flaws.iter().map(|f| ((f.at.x * 1e3).round() / 1e3, (f.at.y * 1e3).round() / 1e3));
    flaws.iter().zip(places).map(|(f, place)| (f.kind, f.contour, f.other.unwrap(), place)).collect()
}

#[test]
fn outlines_holes_and_islands() {
    let paths = [
        square(0.0, 0.0, 100.0),
        circle(50.0, 50.0, 30.0),
        square(40.0, 40.0, 20.0),
        circle(50.0, 50.0, 2.0),
    ];
    let nests = nesting(&contours(paths.clone()));
    let roles: Vec<_> = nests.iter().map(|n| (n.role, n.parent)).collect();
    let expected =
        [(Role::Outer, None), (Role::Hole, Some(0)), (Role::Island, Some(1)), (Role::Hole, Some(2))];
    assert_eq!(roles, expected);
    // The other way round, the same.
    let backwards = nesting(&contours(paths.into_iter().rev()));
    assert_eq!(backwards.iter().map(|n| n.depth).collect::<Vec<_>>(), [3, 2, 1, 0]);
}

#[test]
fn parts_that_touch_lie_beside_each_other() {
    let paths =
        [square(0.0, 0.0, 10.0), square(10.0, 0.0, 10.0), square(10.0, 10.0, 5.0), circle(-5.0, 5.0, 5.0)];
    assert!(nesting(&contours(paths)).iter().all(|n| n.role == Role::Outer));
}

#[test]
fn an_open_contour_holds_nothing() {
    let nests =
        nesting(&contours([open(&[(0.0, 0.0), (9.0, 0.0), (9.0, 9.0), (0.0, 9.0)]), square(2.0, 2.0, 3.0)]));
    assert_eq!((nests[0].role, nests[1].role), (Role::Open, Role::Outer));
}

#[test]
fn places_between_chord_and_arc_are_told_from_places_beyond() {
    // A half disc: the arc bulges right of the chord from (0, -10) to (0, 10).
    let mut half = ring(&[(0.0, -10.0), (0.0, 10.0)]);
    half.vertices[0].bulge = 1.0;
    // The corners of a square in the arc's box but outside the arc are no part of it.
    let paths = [half, square(1.0, -1.0, 2.0), square(8.5, 8.5, 1.0), square(-2.0, -1.0, 1.0)];
    let depths: Vec<_> = nesting(&contours(paths)).iter().map(|n| n.depth).collect();
    assert_eq!(depths, [0, 1, 0, 0]);
}

/// A disc of two half arcs has its chords on a level line, and so does a contour within it that has edges at that
/// height.
#[test]
fn a_contour_as_high_as_the_chords_of_the_arcs_around_it_lies_within_them() {
    let level = ring(&[(-2.0, 0.0), (-1.0, 0.0), (1.0, 0.0), (2.0, 0.0), (2.0, 2.0), (-2.0, 2.0)]);
    for path in [level.clone(), level.reversed()] {
        for disc in [circle(0.0, 0.0, 10.0), circle(0.0, 0.0, 10.0).reversed()] {
            let nests = nesting(&contours([disc, path.clone()]));
            assert_eq!((nests[0].depth, nests[1].depth), (0, 1));
        }
    }
}

#[test]
fn nesting_agrees_with_winding_numbers() {
    let mut dice = Dice(7);
    let mut paths = Vec::new();
    // Discs on a lattice, each with a random number of smaller ones inside it, in random order.
    for cell in 0..64 {
        let (x, y) = (f64::from(cell % 8) * 20.0, f64::from(cell / 8) * 20.0);
        for ring in 0..1 + dice.below(4) {
            paths.push(circle(x, y, 9.0 - 2.0 * ring as f64));
        }
    }
    dice.shuffle(&mut paths);
    let nests = nesting(&contours(paths.clone()));
    for (i, nest) in nests.iter().enumerate() {
        let probe = paths[i].vertices[0].at;
        let around = (0..paths.len()).filter(|&j| j != i && paths[j].winding(probe) != 0).count();
        assert_eq!(nest.depth, around, "contour {i}");
    }
}

#[test]
fn crossings_are_placed() {
    let bow_tie = ring(&[(0.0, 0.0), (10.0, 10.0), (10.0, 0.0), (0.0, 10.0)]);
    assert_eq!(found([bow_tie]), [(FlawKind::Crossing, 1, 1, (5.0, 5.0))]);
    let line_and_disc = [circle(0.0, 0.0, 5.0), open(&[(-9.0, 3.0), (9.0, 3.0)])];
    let expected = [(FlawKind::Crossing, 1, 2, (4.0, 3.0)), (FlawKind::Crossing, 1, 2, (-4.0, 3.0))];
    let mut both = found(line_and_disc);
    both.sort_by(|a, b| b.3.0.total_cmp(&a.3.0));
    assert_eq!(both, expected);
    let discs = [circle(0.0, 0.0, 5.0), circle(6.0, 0.0, 5.0)];
    assert_eq!(found(discs).len(), 2);
}

#[test]
fn a_crossing_through_a_vertex_is_one_crossing() {
    let cross =
        [open(&[(0.0, 0.0), (5.0, 5.0), (10.0, 10.0)]), open(&[(0.0, 10.0), (5.0, 5.0), (10.0, 0.0)])];
    assert_eq!(found(cross), [(FlawKind::Crossing, 1, 2, (5.0, 5.0))]);
    // A figure of eight through one vertex, visited twice.
    let eight = ring(&[(5.0, 5.0), (10.0, 10.0), (10.0, 0.0), (5.0, 5.0), (0.0, 10.0), (0.0, 0.0)]);
    assert_eq!(found([eight]).len(), 1);
}

#[test]
fn contours_that_only_touch_do_not_cross() {
    let corner_to_corner = [square(0.0, 0.0, 5.0), square(5.0, 5.0, 5.0)];
    assert_eq!(found(corner_to_corner), []);
    let tee = [open(&[(0.0, 0.0), (10.0, 0.0)]), open(&[(5.0, 0.0), (5.0, 5.0)])];
    assert_eq!(found(tee), []);
    let corner_on_edge = [square(0.0, 0.0, 10.0), ring(&[(10.0, 5.0), (15.0, 2.0), (15.0, 8.0)])];
    assert_eq!(found(corner_on_edge), []);
    let tangent = [circle(0.0, 0.0, 5.0), circle(10.0, 0.0, 5.0)];
    assert_eq!(found(tangent), []);
}

#[test]
fn parts_that_share_an_edge_are_named_with_its_length() {
    let flaws = crossings(&contours([square(0.0, 0.0, 10.0), square(10.0, 2.0, 5.0)]));
    assert_eq!(flaws.len(), 1, "{flaws:?}");
    assert_eq!((flaws[0].kind, flaws[0].size), (FlawKind::Overlap, 5.0));
}

/// How many pairs of straight spans cross in their inner parts, but for pairs that share an end.
fn crossing_pairs(spans: &[Span]) -> usize {
    let apart = |a: &Span, b: &Span| a.end != b.start && a.start != b.end;
    (0..spans.len())
        .map(|i| spans[i + 1..].iter().filter(|b| apart(&spans[i], b) && cross(&spans[i], b)).count())
        .sum()
}

/// True when the inner parts of two straight spans cross, by the four sides of their ends.
fn cross(a: &Span, b: &Span) -> bool {
    let side = |s: &Span, p: Point| s.chord().cross(p - s.start).signum();
    side(a, b.start) * side(a, b.end) < 0.0 && side(b, a.start) * side(b, a.end) < 0.0
}

#[test]
fn crossings_of_outlines_agree_with_every_pair_tried() {
    let plain = outlines().into_iter().filter(|o| o.id.ends_with("-clean") || o.id.starts_with("coast"));
    let mut in_all = 0;
    for outline in plain.filter(|o| o.paths[0].len() < 3200) {
        let spans: Vec<Span> = outline.paths[0].spans().collect();
        let expected = crossing_pairs(&spans);
        let found = crossings(&contours([outline.paths[0].clone()]));
        assert_eq!(found.len(), expected, "{}", outline.id);
        in_all += 1;
    }
    assert!(in_all > 40);
}

#[test]
fn a_coast_that_crosses_itself_is_found_out() {
    // The tip at vertex 4129 pokes through the edge that comes back past it.
    let baffin = outlines().into_iter().find(|o| o.id == "coast/ne10-baffin").unwrap();
    let flaws = crossings(&contours(baffin.paths));
    assert!(flaws.iter().any(|f| f.at.distance(at(521.05, 290.57)) < 0.02), "{flaws:?}");
}

#[test]
fn crossings_of_random_strokes_agree_with_every_pair_tried() {
    let mut dice = Dice(3);
    let strokes: Vec<ArcSpline> = (0..60)
        .map(|_| {
            let mut point = || (dice.unit() * 50.0, dice.unit() * 50.0);
            open(&[point(), point()])
        })
        .collect();
    let spans: Vec<Span> = strokes.iter().map(|s| s.span(0)).collect();
    let expected = crossing_pairs(&spans);
    assert!(expected > 100);
    assert_eq!(crossings(&contours(strokes)).len(), expected);
}

#[test]
fn spikes_are_placed_with_their_length() {
    let spiked =
        ring(&[(0.0, 0.0), (10.0, 0.0), (10.0, 5.0), (14.0, 5.0), (10.0, 5.0), (10.0, 10.0), (0.0, 10.0)]);
    let cleaned = clean(&sketch([spiked]), 0.1);
    let spikes: Vec<_> = cleaned.flaws.iter().map(|f| (f.kind, f.vertex, f.at, f.size)).collect();
    assert_eq!(spikes, [(FlawKind::Spike, 4, at(14.0, 5.0), 4.0)]);
}
