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
