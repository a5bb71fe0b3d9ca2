//! Loose pieces become contours, whatever their order and direction.

use ribband::clean::{FlawKind, clean};
use ribband::geom::ArcSpline;

use super::common::{Dice, at, open, ring, sketch};

const JOIN: f64 = 0.1;

/// The sides of a ring as loose lines, in another order, each turned round or not by chance.
fn loosened(dice: &mut Dice, rings: &[ArcSpline]) -> Vec<ArcSpline> {
    let mut sides: Vec<ArcSpline> = rings
        .iter()
        .flat_map(|r| r.spans().map(|s| ArcSpline::from_spans(&[s], false)).collect::<Vec<_>>())
        .map(|side| if dice.unit() < 0.5 { side.reversed() } else { side })
        .collect();
    dice.shuffle(&mut sides);
    sides
}

#[test]
fn a_square_of_loose_lines_is_one_ring() {
    let square = ring(&[(0.0, 0.0), (10.0, 0.0), (10.0, 10.0), (0.0, 10.0)]);
    for seed in 0..20 {
        let sides = loosened(&mut Dice(seed), std::slice::from_ref(&square));
        let cleaned = clean(&sketch(sides), JOIN);
        assert_eq!(cleaned.contours.len(), 1, "seed {seed}");
        assert_eq!(cleaned.contours[0].path, square, "seed {seed}");
        assert_eq!((cleaned.counts.joints, cleaned.counts.chained), (4, 3));
        assert!(cleaned.flaws.is_empty(), "{:?}", cleaned.flaws);
    }
}

#[test]
fn repeated_points_are_dropped_and_counted() {
    let path = open(&[(0.0, 0.0), (0.0, 0.0), (5.0, 0.0), (5.0, 0.0), (5.0, 0.0), (5.0, 5.0), (0.0, 0.0)]);
    let cleaned = clean(&sketch([path]), JOIN);
    assert_eq!(cleaned.counts.repeated_points, 3);
    assert_eq!(cleaned.contours[0].path, ring(&[(0.0, 0.0), (5.0, 0.0), (5.0, 5.0)]));
}

#[test]
fn gaps_are_closed_nearest_first_and_never_beyond_the_join_length() {
    let parts = [
        open(&[(0.0, 0.0), (10.0, 0.0)]),
        open(&[(10.05, 0.0), (20.0, 0.0)]),
        open(&[(20.2, 0.0), (30.0, 0.0)]),
    ];
    let cleaned = clean(&sketch(parts), JOIN);
    assert_eq!(cleaned.contours.len(), 2);
    assert_eq!(cleaned.contours[0].path, open(&[(0.0, 0.0), (10.0, 0.0), (10.05, 0.0), (20.0, 0.0)]));
    let kinds: Vec<_> = cleaned.flaws.iter().map(|f| f.kind).collect();
    assert_eq!(kinds, [FlawKind::Gap]);
    assert!((cleaned.flaws[0].size - 0.05).abs() < 1e-5);
    assert_eq!(cleaned.flaws[0].at, at(10.0, 0.0));
}

#[test]
fn a_short_line_is_no_ring() {
    let cleaned = clean(&sketch([open(&[(0.0, 0.0), (0.05, 0.0)])]), JOIN);
    assert!(!cleaned.contours[0].path.closed);
}

#[test]
fn an_open_chain_and_its_neighbours_keep_to_their_layers() {
    let mut drawing = sketch([open(&[(0.0, 0.0), (5.0, 0.0)]), open(&[(5.0, 0.0), (9.0, 1.0)])]);
    drawing.contours[1].layer = "holes".into();
    assert_eq!(clean(&drawing, JOIN).contours.len(), 2);
}

#[test]
fn loops_that_meet_at_a_point_stay_loops() {
    // Two squares corner to corner, drawn in two strokes each.
    let strokes = [
        open(&[(0.0, 0.0), (5.0, 0.0), (5.0, 5.0)]),
        open(&[(0.0, 0.0), (0.0, 5.0), (5.0, 5.0)]),
        open(&[(5.0, 5.0), (9.0, 5.0), (9.0, 9.0)]),
        open(&[(5.0, 5.0), (5.0, 9.0), (9.0, 9.0)]),
    ];
    let cleaned = clean(&sketch(strokes), JOIN);
    assert_eq!(cleaned.contours.len(), 2);
    assert!(cleaned.contours.iter().all(|c| c.path.closed && c.path.len() == 4));
    assert_eq!(
        cleaned.flaws.iter().map(|f| (f.kind, f.size)).collect::<Vec<_>>(),
        [(FlawKind::Junction, 4.0)]
    );
}

#[test]
fn at_a_branch_the_straightest_pair_is_joined() {
    let strokes =
        [open(&[(0.0, 0.0), (5.0, 0.0)]), open(&[(5.0, 0.0), (10.0, 1.0)]), open(&[(5.0, 0.0), (6.0, 6.0)])];
    let cleaned = clean(&sketch(strokes), JOIN);
    let paths: Vec<_> = cleaned.contours.iter().map(|c| c.path.clone()).collect();
    assert_eq!(paths, [open(&[(0.0, 0.0), (5.0, 0.0), (10.0, 1.0)]), open(&[(5.0, 0.0), (6.0, 6.0)])]);
}

#[test]
fn a_small_gap_in_a_large_ring_is_named() {
    let c = open(&[(0.3, 0.0), (50.0, 0.0), (50.0, 50.0), (0.0, 50.0), (0.0, 0.0)]);
    let cleaned = clean(&sketch([c.clone()]), JOIN);
    assert_eq!(cleaned.flaws.len(), 1);
    assert_eq!((cleaned.flaws[0].kind, cleaned.flaws[0].vertex), (FlawKind::NearlyClosed, 5));
    assert!((cleaned.flaws[0].size - 0.3).abs() < 1e-5);
    // With the join length that the message names it closes.
    assert!(cleaned.flaws[0].remedy().contains("--join 0.301mm"), "{}", cleaned.flaws[0]);
    let closed = clean(&sketch([c]), 0.301);
    assert!(closed.contours[0].path.closed);
}

/// Rings of jagged outline on a lattice: `count` of them with `sides` sides each.
fn lattice(count: usize, sides: usize) -> Vec<ArcSpline> {
    let mut dice = Dice(11);
    let ring_at = |k: usize, dice: &mut Dice| {
        let (x, y) = (40.0 * (k % 32) as f64, 40.0 * (k / 32) as f64);
        let corner = |i: usize, r: f64| {
            let angle = std::f64::consts::TAU * i as f64 / sides as f64;
            (x + r * angle.cos(), y + r * angle.sin())
        };
        let points: Vec<_> = (0..sides).map(|i| corner(i, 14.0 + 2.0 * dice.unit())).collect();
        ring(&points)
    };
    (0..count).map(|k| ring_at(k, &mut dice)).collect()
}

/// The rings' own outlines, however they are started and directed.
fn outlines(rings: &[ArcSpline]) -> Vec<Vec<(u64, u64)>> {
    let places = |ring: &ArcSpline| {
        let mut places: Vec<_> = ring.vertices.iter().map(|v| (v.at.x.to_bits(), v.at.y.to_bits())).collect();
        places.sort_unstable();
        places
    };
    let mut all: Vec<_> = rings.iter().map(places).collect();
    all.sort();
    all
}

#[test]
fn two_hundred_thousand_loose_lines_are_chained_in_near_linear_time() {
    let time = |count: usize| {
        let rings = lattice(count, 250);
        let drawing = sketch(loosened(&mut Dice(5), &rings));
        assert_eq!(drawing.contours.len(), 250 * count);
        let start = std::time::Instant::now();
        let cleaned = clean(&drawing, JOIN);
        let taken = start.elapsed();
        let paths: Vec<_> = cleaned.contours.iter().map(|c| c.path.clone()).collect();
        assert!(paths.iter().all(|p| p.closed && p.area() > 0.0));
        assert_eq!(outlines(&paths), outlines(&rings));
        assert!(cleaned.flaws.is_empty());
        taken.as_secs_f64()
    };
    let (few, many) = (time(100), time(800));
    // Eight times the lines: n log n takes 10 times as long, quadratic time 64 times.
    assert!(many < 25.0 * few, "25,000 lines in {few} s, 200,000 in {many} s");
}

#[test]
fn a_dense_hatch_of_slanting_lines_is_cleaned_in_reasonable_time() {
    // Each line lies in the upright box of thousands of others: 64 million pairs, if all were tried.
    let hatch = (0..8000).map(|k| {
        let x = 300.0 * f64::from(k) / 8000.0;
        open(&[(x, 0.0), (x + 500.0, 500.0)])
    });
    let drawing = sketch(hatch);
    let start = std::time::Instant::now();
    assert_eq!(clean(&drawing, JOIN / 100.0).contours.len(), 8000);
    assert!(start.elapsed().as_secs_f64() < 5.0, "{:?}", start.elapsed());
}

proptest::proptest! {
    /// Order and direction of loose lines are never seen in what they are chained to.
    #[test]
    fn order_and_direction_of_loose_lines_do_not_matter(
        places in proptest::collection::vec((0_i32..6, 0_i32..6, 0_i32..6, 0_i32..6), 1..24),
        seed in 0_u64..1000,
    ) {
        let lines: Vec<ArcSpline> = places
            .iter()
            .map(|&(a, b, c, d)| open(&[(f64::from(a), f64::from(b)), (f64::from(c), f64::from(d))]))
            .collect();
        let mut dice = Dice(seed);
        let mut other: Vec<ArcSpline> =
            lines.iter().map(|l| if dice.unit() < 0.5 { l.reversed() } else { l.clone() }).collect();
        dice.shuffle(&mut other);
        let paths = |lines: Vec<ArcSpline>| {
            let cleaned = clean(&sketch(lines), JOIN);
            let mut paths: Vec<String> = cleaned.contours.iter().map(|c| format!("{:?}", undirected(&c.path))).collect();
            paths.sort();
            paths
        };
        proptest::prop_assert_eq!(paths(lines), paths(other));
    }
}

/// A lone line keeps its direction, so that it must be looked at either way.
fn undirected(path: &ArcSpline) -> ArcSpline {
    let (first, last) = (path.vertices[0].at, path.vertices[path.vertices.len() - 1].at);
    let mut path =
        if path.closed || (first.x, first.y) <= (last.x, last.y) { path.clone() } else { path.reversed() };
    // The two zeros are one number, but are not written alike.
    path.vertices.iter_mut().for_each(|v| v.bulge += 0.0);
    path
}
