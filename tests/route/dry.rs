//! Dry runs and starting again.

use kurbo::Rect;
use ribband::geom::{ArcSpline, SpanIndex};
use ribband::route::{Cut, Entry, KeepOut, Routed, Routing, Setup, air_cut, frame, resume, route};
use ribband::toolpath::Toolpath;

use crate::{assert_safe, contour, cut, lowest_at, rectangle};

fn job(entry: Entry) -> (Vec<Routed>, Routing) {
    let cut = Cut { entry, ..cut() };
    let contours = vec![
        Routed { cut: cut.clone(), ..rectangle(1, (10.0, 10.0), (80.0, 60.0)) },
        Routed { cut, ..contour(2, &[(120.0, 10.0), (120.0, 80.0), (160.0, 80.0)], false) },
    ];
    let routing = route(&contours, &Setup::default()).expect("it routes");
    (contours, routing)
}

#[test]
fn an_air_cut_is_the_same_moves_above_the_stock_with_the_spindle_stopped() {
    let (_, routing) = job(Entry::Ramp);
    let air = air_cut(&routing.toolpath, &Setup::default());
    assert_eq!(air.lift_mm, 11.0);
    assert_eq!(air.toolpath.moves.len(), routing.toolpath.moves.len());
    for (high, low) in air.toolpath.moves.iter().zip(&routing.toolpath.moves) {
        assert_eq!(
            (high.from.xy, high.to.xy, high.bulge, high.feed),
            (low.from.xy, low.to.xy, low.bulge, low.feed)
        );
        assert!(high.to.z >= 5.0 && high.spindle_rpm == 0.0);
        assert!((high.to.z - low.to.z - 11.0).abs() < 1e-12);
    }
}

#[test]
fn a_frame_goes_about_the_cuts_and_every_clamp_above_them() {
    let clamp = KeepOut { place: Rect::new(100.0, 30.0, 110.0, 40.0), height_mm: 25.0 };
    let setup = Setup { keep_outs: vec![clamp], ..Setup::default() };
    let (_, routing) = job(Entry::Plunge);
    let framed = frame(&routing.toolpath, &cut(), &setup).expect("a frame is traced");
    assert!(framed.moves.iter().all(|m| m.to.z == 30.0 && m.spindle_rpm == 0.0));
    let traced = framed.moves.iter().filter(|m| !m.is_rapid()).map(|m| m.span().bbox());
    assert_eq!(traced.reduce(|a, b| a.union(b)), Some(Rect::new(7.0, 7.0, 163.0, 83.0)));
    assert_eq!(framed.moves.iter().filter(|m| !m.is_rapid()).count(), 8, "two boxes");
}

#[test]
fn a_program_taken_up_at_any_move_cuts_the_rest_and_nothing_new() {
    for entry in [Entry::Ramp, Entry::Plunge] {
        let (contours, routing) = job(entry);
        let drawn = SpanIndex::new(contours.iter().flat_map(|c| c.path.spans()));
        let deepest: Vec<f64> = places(&contours).map(|at| lowest_at(&routing.toolpath, at)).collect();
        for number in 0..routing.toolpath.moves.len() {
            let again = resume(&routing, number, &contours[0].cut, &Setup::default()).expect("it resumes");
            if again.moves.is_empty() {
                continue;
            }
            assert_safe(&again, &Setup::default());
            let rest = &routing.toolpath.moves[number + 1..];
            assert!(again.moves.ends_with(rest), "all moves from {number} on are there");
            for m in again.moves.iter().filter(|m| m.to.z < 0.0) {
                let at = m.span().at(0.5);
                let (_, near) = drawn.nearest(at).expect("there are contours");
                assert!(near.nearest(at).distance < 1e-9, "a cut beside the contours at {at}");
            }
            for (at, deepest) in places(&contours).zip(&deepest) {
                assert!(lowest_at(&again, at) >= *deepest, "cut deeper at {at}");
            }
            assert!(entry == Entry::Plunge || never_straight_down(&again), "taken up at {number}");
        }
    }
    let (contours, routing) = job(Entry::Ramp);
    assert!(resume(&routing, 10_000, &contours[0].cut, &Setup::default()).is_err());
}

/// Places along all contours.
fn places(contours: &[Routed]) -> impl Iterator<Item = kurbo::Point> + '_ {
    let along =
        |path: &ArcSpline| path.spans().flat_map(|s| (0..5).map(move |k| s.at(f64::from(k) / 5.0))).collect();
    contours.iter().flat_map(move |c| -> Vec<_> { along(&c.path) })
}

fn never_straight_down(toolpath: &Toolpath) -> bool {
    toolpath.moves.iter().all(|m| m.from.xy != m.to.xy || m.to.z >= m.from.z.min(0.0))
}
