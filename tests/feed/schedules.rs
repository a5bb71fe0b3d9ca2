//! Feeds that suit the machine: limits, the queue recomputed apart from the planner, chips.

use approx::assert_relative_eq;
use kurbo::Point;
use proptest::prelude::*;
use ribband::feed::{Limits, MOST_OVERRIDE, hold_chip_load, schedule, time};
use ribband::geom::{ArcSpline, Span};
use ribband::machine::Machine;
use ribband::toolpath::Toolpath;

use super::{cut, polyline, wavy};

fn old_controller() -> Limits {
    Limits::of(&Machine::named("old-controller").expect("a built-in profile"))
}

/// Starved blocks by a clock of fixed ticks, apart from the planner: blocks run at their feed from end to end; the queue
/// holds `places`, the one that runs included, and a block is read every `interval` while it has room.
fn starved_by_ticks(toolpath: &Toolpath, places: usize, interval: f64) -> usize {
    let tick = interval / 2000.0;
    let times: Vec<f64> =
        toolpath.moves.iter().map(|m| m.length() * 60.0 / m.feed.expect("a feed")).collect();
    let (mut read, mut running, mut left) = (places.min(times.len()), 0, times[0]);
    let (mut reading, mut starved, mut waiting) = (0.0, 0, false);
    while running < times.len() {
        if read < times.len() && read - running < places {
            reading += tick;
            // Two ticks are given away to their coarseness.
            if reading >= interval - 2.0 * tick {
                (read, reading) = (read + 1, 0.0);
            }
        } else {
            reading = 0.0;
        }
        left -= tick;
        while left <= 0.0 && running < times.len() {
            if running + 1 < read || running + 1 == times.len() {
                running += 1;
                left += times.get(running).copied().unwrap_or(0.0);
                waiting = false;
            } else {
                starved += usize::from(!waiting);
                (waiting, left) = (true, 0.0);
                break;
            }
        }
    }
    starved
}

#[test]
fn the_old_controllers_numbers() {
    let limits = old_controller();
    for axis in 0..3 {
        assert_relative_eq!(limits.feed[axis], 50.0);
        assert_relative_eq!(limits.acceleration[axis], 200.0);
    }
    assert_eq!(limits.queue, 8);
    assert_relative_eq!(limits.junction, 0.02);
    assert_relative_eq!(limits.blocks_per_second, 50.0);
}

/// The shortest block sustained at b blocks a second is F / (60 b): at 3000 mm/min and 50 a second 1 mm.
#[test]
fn blocks_as_long_as_the_reading_allows_keep_their_feed() {
    for (rate, shortest) in [(50.0, 1.0), (100.0, 0.5), (250.0, 0.2), (1000.0, 0.05)] {
        let limits = Limits { blocks_per_second: rate, ..old_controller() };
        let line = |side: f64| -> Vec<(f64, f64)> { (0..200).map(|i| (f64::from(i) * side, 0.0)).collect() };
        let mut enough = cut(&polyline(&line(shortest * (1.0 + 1e-9))), 3000.0);
        assert_eq!(schedule(&mut enough, &limits).lowered, 0, "at {rate}");
        let mut half = cut(&polyline(&line(shortest / 2.0)), 3000.0);
        assert!(schedule(&mut half, &limits).lowered > 150);
        let feeds: Vec<f64> = half.moves.iter().skip(20).take(160).filter_map(|m| m.feed).collect();
        assert!(feeds.iter().all(|&feed| feed > 1300.0 && feed <= 1700.0), "{feeds:?}");
    }
}

/// A burst of short blocks that the queue absorbs is left alone.
#[test]
fn bursts_within_the_queue_keep_their_feed() {
    let mut x = 0.0;
    let points: Vec<(f64, f64)> = (0..200)
        .map(|i| {
            x += if i % 20 < 5 { 0.2 } else { 3.0 };
            (x, 0.0)
        })
        .collect();
    let mut toolpath = cut(&polyline(&points), 3000.0);
    assert_eq!(schedule(&mut toolpath, &old_controller()).lowered, 0);
    assert_eq!(starved_by_ticks(&toolpath, 8, 0.02), 0);
}

/// v = sqrt(a r) on arcs, within the step of 2 %; never above it.
#[test]
fn arcs_take_their_centripetal_feed() {
    for (radius, want) in [(0.5_f64, 600.0), (1.0, 849.0), (2.5, 1342.0), (5.0, 1897.0), (10.0, 2683.0)] {
        let circle = ArcSpline::from_spans(
            &[
                Span::arc(Point::ZERO, Point::new(2.0 * radius, 0.0), 1.0),
                Span::arc(Point::new(2.0 * radius, 0.0), Point::ZERO, 1.0),
            ],
            true,
        );
        let mut toolpath = cut(&circle, 3000.0);
        schedule(&mut toolpath, &old_controller());
        for m in &toolpath.moves {
            let feed = m.feed.expect("a feed");
            assert!(feed <= 60.0 * (200.0 * radius).sqrt() && feed >= 0.98 * want - 1.0, "{radius}: {feed}");
        }
    }
}

#[test]
fn no_feed_is_above_the_profile() {
    let mut toolpath = cut(&wavy(100, 50.0), 20000.0);
    toolpath.moves[7].to.z -= 2.0;
    toolpath.moves[8].from.z -= 2.0;
    let limits = Limits { feed: [50.0, 40.0, 10.0], ..old_controller() };
    schedule(&mut toolpath, &limits);
    assert!(toolpath.moves.iter().all(|m| m.feed <= Some(2400.0)));
    assert!(toolpath.moves[7].feed <= Some(600.0));
}

/// As drawn the machine waits for most blocks; scheduled, for none, at no more time.
#[test]
fn scheduled_blocks_never_starve() {
    let limits = old_controller();
    let drawn = cut(&wavy(2000, 40.0), 3000.0);
    let mut suited = drawn.clone();
    let result = schedule(&mut suited, &limits);
    let (before, after) = (time(&drawn, &limits), time(&suited, &limits));
    assert!(before.starved_blocks > 1900 && starved_by_ticks(&drawn, 8, 0.02) > 1900);
    assert_eq!((after.starved_blocks, starved_by_ticks(&suited, 8, 0.02)), (0, 0));
    assert!(after.time_s <= before.time_s * 1.05, "{} {}", before.time_s, after.time_s);
    assert!(result.highest_override >= 100);
}

/// The override named holds, and the next does not.
#[test]
fn the_highest_override_is_the_highest() {
    let limits = old_controller();
    let points: Vec<(f64, f64)> = (0..300).map(|i| (f64::from(i) * 0.7, 0.0)).collect();
    let mut toolpath = cut(&polyline(&points), 1500.0);
    let highest = schedule(&mut toolpath, &limits).highest_override;
    let starved = |percent: u32| {
        let mut faster = toolpath.clone();
        faster.moves.iter_mut().for_each(|m| m.feed = m.feed.map(|feed| feed * f64::from(percent) / 100.0));
        assert!(starved_by_ticks(&faster, 8, 0.02) >= time(&faster, &limits).starved_blocks);
        starved_by_ticks(&faster, 8, 0.02)
    };
    assert!((100..MOST_OVERRIDE).contains(&highest), "{highest}");
    assert_eq!(starved(highest), 0);
    assert!(starved(highest + 1) > 0);
    let mut easy = cut(&polyline(&[(0.0, 0.0), (100.0, 0.0), (200.0, 0.0)]), 600.0);
    assert_eq!(schedule(&mut easy, &limits).highest_override, MOST_OVERRIDE);
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(24))]
    /// Whatever the blocks: nothing starves by the clock, no feed is raised, a second schedule lowers nothing.
    #[test]
    fn any_chain_is_sustained(
        sides in prop::collection::vec(prop_oneof![3 => 0.02..0.8, 1 => 2.0..20.0], 20..80),
        feed in 300.0..4000.0,
        queue in 2_usize..12,
    ) {
        let mut at = (0.0, 0.0);
        let mut points = vec![at];
        points.extend(sides.iter().enumerate().map(|(i, side)| {
            at = if i % 2 == 0 { (at.0 + side, at.1) } else { (at.0, at.1 + side) };
            at
        }));
        let limits = Limits { queue, ..old_controller() };
        let mut toolpath = cut(&polyline(&points), feed);
        schedule(&mut toolpath, &limits);
        prop_assert!(toolpath.moves.iter().all(|m| m.feed.is_some_and(|held| held > 0.0 && held <= feed)));
        prop_assert_eq!(starved_by_ticks(&toolpath, queue, 0.02), 0);
        prop_assert_eq!(time(&toolpath, &limits).starved_blocks, 0);
        let once = toolpath.clone();
        prop_assert_eq!(schedule(&mut toolpath, &limits).lowered, 0);
        prop_assert_eq!(toolpath, once);
    }
}

/// f = n z fz: 18000 rev/min, 2 edges, 0.1 mm make 3600 mm/min; a third of the feed wants a third of the speed.
#[test]
fn the_spindle_slows_with_the_feed() {
    let machine = Machine::named("old-controller").expect("a built-in profile");
    let cutter = machine.cutter("6mm").expect("a cutter");
    let line = polyline(&[(0.0, 0.0), (100.0, 0.0)]);
    let rows = [
        (3600.0, 18000.0, 0.1, 0),
        (720.0, 12000.0, 0.03, 0),
        (300.0, 6000.0, 0.025, 1),
        (9000.0, 18000.0, 0.25, 1),
    ];
    for (feed, rpm, chip, told) in rows {
        let mut toolpath = cut(&line, feed);
        let load = hold_chip_load(&mut toolpath, cutter, &machine.spindle).expect("a cut");
        assert_relative_eq!(load.rpm, rpm, max_relative = 1e-12);
        assert_relative_eq!(load.thinnest_mm, chip, max_relative = 1e-12);
        assert_relative_eq!(load.thickest_mm, chip, max_relative = 1e-12);
        assert_eq!(load.told.len(), told, "{:?}", load.told);
        assert_relative_eq!(toolpath.moves[0].spindle_rpm, rpm, max_relative = 1e-12);
    }
}

#[test]
fn slow_parts_of_the_cut_are_told() {
    let machine = Machine::named("old-controller").expect("a built-in profile");
    let cutter = machine.cutter("6mm").expect("a cutter");
    let mut toolpath = cut(&polyline(&[(0.0, 0.0), (95.0, 0.0), (100.0, 0.0)]), 3000.0);
    toolpath.moves[1].feed = Some(200.0);
    let load = hold_chip_load(&mut toolpath, cutter, &machine.spindle).expect("a cut");
    assert_relative_eq!(load.rpm, 18000.0);
    assert_eq!(load.told, ["on 5 % of the cut the chip is thinner than 0.03 mm: the cutter rubs there"]);
    let mut by_hand = machine.spindle.clone();
    by_hand.hand_switched = true;
    let mut slow = cut(&polyline(&[(0.0, 0.0), (95.0, 0.0)]), 300.0);
    assert_relative_eq!(hold_chip_load(&mut slow, cutter, &by_hand).expect("a cut").rpm, 18000.0);
    assert_eq!(hold_chip_load(&mut Toolpath::default(), cutter, &machine.spindle), None);
}
