//! The cutter on its side: nesting, order, leads, allowance, finishing, relief, drilled holes.

use insta::assert_snapshot;
use kurbo::Point;
use ribband::geom::{ArcSpline, SpanIndex, Vertex};
use ribband::offset::Corners;
use ribband::route::{
    Cut, Direction, Entry, Outline, Routed, Setup, Side, Sided, Work, beside, by_cutter, route,
};
use ribband::toolpath::Toolpath;

use crate::{assert_safe, cut, rectangle};

pub(crate) fn circle(x: f64, y: f64, radius: f64) -> ArcSpline {
    let vertex = |x| Vertex { at: Point::new(x, y), bulge: 1.0 };
    ArcSpline { vertices: vec![vertex(x - radius), vertex(x + radius)], closed: true }
}

pub(crate) fn outline(id: usize, path: ArcSpline, side: Side) -> Outline {
    Outline { id, path, cut: Cut { side, ..cut() } }
}

fn square(id: usize, (x, y): (f64, f64), size: f64, side: Side) -> Outline {
    outline(id, rectangle(id, (x, y), (size, size)).path, side)
}

/// A plate with a round hole, an island in the hole, and a second plate beside it.
fn nested() -> Vec<Outline> {
    vec![
        square(1, (10.0, 10.0), 100.0, Side::Outside),
        outline(2, circle(60.0, 60.0, 30.0), Side::Outside),
        square(3, (50.0, 50.0), 20.0, Side::Outside),
        square(4, (130.0, 10.0), 40.0, Side::Outside),
    ]
}

fn sided(outlines: &[Outline]) -> Sided {
    beside(outlines, 0.01).expect("there are lines beside")
}

/// No cut below the stock's top comes closer to any outline than `distance`: leads, ramps and helices included.
pub(crate) fn assert_clear(toolpath: &Toolpath, outlines: &[Outline], distance: f64) {
    let index = SpanIndex::new(outlines.iter().flat_map(|o| o.path.spans()));
    for m in toolpath.moves.iter().filter(|m| m.to.z < 0.0 && !m.is_rapid()) {
        for k in 0..=20 {
            let at = m.span().at(f64::from(k) / 20.0);
            let (_, near) = index.nearest(at).expect("there are outlines");
            let found = near.nearest(at).distance;
            assert!(found >= distance - 1e-6, "{at} is {found} from an outline");
        }
    }
}

#[test]
fn nested_contours_are_cut_on_the_waste_side_inner_ones_first() {
    for entry in [Entry::Ramp, Entry::Plunge, Entry::Helix] {
        let outlines: Vec<Outline> =
            nested().into_iter().map(|o| Outline { cut: Cut { entry, ..o.cut.clone() }, ..o }).collect();
        let lines = sided(&outlines);
        assert_eq!(lines.notes, Vec::<String>::new());
        let setup = Setup::default();
        let routing = route(&lines.routed, &setup).expect("a nested part routes");
        assert_safe(&routing.toolpath, &setup);
        assert_clear(&routing.toolpath, &outlines, 3.0);
        let inner_first: Vec<usize> = routing.order.iter().copied().filter(|&id| id != 4).collect();
        assert_eq!(inner_first, [3, 2, 1], "the island, its hole, the plate");
        let apart = routing.order[0] == 4 || routing.order[3] == 4;
        assert!(apart, "the other plate before or after: {:?}", routing.order);
    }
}

#[test]
fn a_pocket_keeps_clear_of_its_island() {
    let outlines = [square(1, (0.0, 0.0), 60.0, Side::Inside), square(2, (12.0, 12.0), 36.0, Side::Inside)];
    let lines = sided(&outlines);
    let areas: Vec<f64> = lines.routed.iter().map(|line| line.path.area().abs()).collect();
    let rounded = 36.0 * 36.0 + 4.0 * 36.0 * 3.0 + std::f64::consts::PI * 9.0;
    assert!(areas.len() == 2 && (areas[0] - 54.0 * 54.0).abs() < 1e-9, "{areas:?}");
    assert!((areas[1] - rounded).abs() < 1e-9, "{areas:?} for {rounded}");
    let routing = route(&lines.routed, &Setup::default()).expect("a pocket routes");
    assert_clear(&routing.toolpath, &outlines, 3.0);
}

#[test]
fn conventional_runs_counter_clockwise_about_a_part_and_clockwise_in_a_hole() {
    // NISTIR 6556, B.2.1: left of the contour about an outside shape is clockwise; a cutter that turns clockwise climbs
    // there.
    let turns = |direction| {
        let outlines = nested().into_iter().map(|o| Outline { cut: Cut { direction, ..o.cut.clone() }, ..o });
        let mut lines = sided(&outlines.collect::<Vec<_>>()).routed;
        lines.sort_by_key(|line| line.id);
        lines.iter().map(|line| line.path.area() > 0.0).collect::<Vec<_>>()
    };
    assert_eq!(turns(Direction::Conventional), [true, false, true, true]);
    assert_eq!(turns(Direction::Climb), [false, true, false, false]);
}

#[test]
fn a_line_is_begun_on_its_longest_calm_span_with_a_lead() {
    let lines = sided(&[square(1, (0.0, 0.0), 50.0, Side::Inside)]);
    let [line] = &lines.routed[..] else { panic!("one line: {lines:?}") };
    let start = line.path.vertices[0].at;
    assert!([start.x, start.y].iter().any(|&v| (v - 25.0).abs() < 1e-9), "{start} is the middle of a side");
    assert!(matches!(line.work, Work::Beside { lead: Some(_), .. }));
    // In a slot little wider than the cutter a smaller lead, and in one as wide as can be, none.
    let slot = |width| outline(1, rectangle(1, (0.0, 0.0), (50.0, width)).path, Side::Inside);
    let lead = |width| match sided(&[slot(width)]).routed[0].work {
        Work::Beside { lead, .. } => lead.map(|lead| (lead.radius_mm, lead.whole)),
        _ => None,
    };
    assert_eq!(
        [lead(20.0), lead(12.0), lead(10.0), lead(6.1)],
        [Some((3.0, true)), Some((3.0, true)), Some((3.0, false)), None]
    );
}

#[test]
fn neighbours_closer_than_the_cutter_are_not_cut_into() {
    let pair = [square(1, (0.0, 0.0), 50.0, Side::Outside), square(2, (55.0, 0.0), 50.0, Side::Outside)];
    let lines = sided(&pair);
    assert_eq!(lines.notes, ["contours 1 and 2 share one cut: the cutter does not fit between them"]);
    let routing = route(&lines.routed, &Setup::default()).expect("it routes");
    assert_clear(&routing.toolpath, &pair, 3.0);
    let uncut: Vec<usize> = lines.uncut.iter().map(|(id, _)| *id).collect();
    assert_eq!(uncut, [1, 2], "the sides that face each other stay uncut");
}

#[test]
fn allowance_moves_the_edge_and_leave_adds_a_finishing_pass() {
    let area = |allowance_mm, leave_mm| {
        let o = square(1, (0.0, 0.0), 50.0, Side::Outside);
        let corners = Corners::Sharp;
        let lines = sided(&[Outline { cut: Cut { allowance_mm, leave_mm, corners, ..o.cut.clone() }, ..o }]);
        let line = lines.routed[0].clone();
        let rough = match line.work {
            Work::Beside { rough, .. } => rough.map(|rough| rough.area().abs().sqrt()),
            _ => None,
        };
        (line.path.area().abs().sqrt(), rough)
    };
    let near = |(side, rough): (f64, Option<f64>), expected: f64, expected_rough: Option<f64>| {
        assert!((side - expected).abs() < 1e-9, "{side} for {expected}");
        assert!(rough.is_some() == expected_rough.is_some());
        rough.zip(expected_rough).into_iter().for_each(|(a, b)| assert!((a - b).abs() < 1e-9, "{a} for {b}"));
    };
    near(area(0.0, 0.0), 56.0, None);
    near(area(0.2, 0.0), 56.4, None);
    near(area(-0.1, 0.0), 55.8, None);
    near(area(0.0, 0.5), 56.0, Some(57.0));
}

#[test]
fn a_relieved_corner_seats_a_sharp_one() {
    for relief in [false, true] {
        let o = square(1, (0.0, 0.0), 50.0, Side::Inside);
        let lines = sided(&[Outline { cut: Cut { relief, ..o.cut.clone() }, ..o }]);
        let index = SpanIndex::new(lines.routed[0].path.spans());
        for corner in [(0.0, 0.0), (50.0, 0.0), (50.0, 50.0), (0.0, 50.0)].map(Point::from) {
            let (_, near) = index.nearest(corner).expect("there is a line");
            let reached = near.nearest(corner).distance;
            let expected = if relief { 3.0 } else { 3.0 * 2.0_f64.sqrt() };
            assert!((reached - expected).abs() < 1e-9, "{reached} for {expected}");
        }
        assert_eq!(lines.uncut.len(), 4, "the corners are listed");
    }
}

#[test]
fn holes_of_the_cutters_size_are_drilled() {
    let plate = [
        square(1, (0.0, 0.0), 60.0, Side::Outside),
        outline(2, circle(15.0, 15.0, 3.0), Side::Outside),
        outline(3, circle(45.0, 45.0, 3.4), Side::Outside),
        outline(4, circle(15.0, 45.0, 2.5), Side::Outside),
    ];
    let lines = sided(&plate);
    let drilled: Vec<usize> = lines.routed.iter().filter(|r| r.work == Work::Drill).map(|r| r.id).collect();
    assert_eq!(drilled, [2]);
    assert_eq!(lines.notes, ["contour 4 is not cut: the cutter of 6 mm is too large for it"]);
    let routing = route(&lines.routed, &Setup::default()).expect("a plate routes");
    assert_safe(&routing.toolpath, &Setup::default());
    assert_eq!(routing.order.last(), Some(&1), "the plate last");
}

#[test]
fn what_has_no_side_or_no_room_is_refused() {
    let refusal = |outlines: &[Outline]| beside(outlines, 0.01).expect_err("refused").to_string();
    let open = [(0.0, 0.0), (50.0, 0.0), (50.0, 50.0), (0.2, 0.3)].map(Point::from);
    assert_snapshot!(
        "open-with-a-side",
        refusal(&[outline(7, ArcSpline::polyline(open, false), Side::Inside)])
    );
    assert_snapshot!("cutter-too-large", refusal(&[square(1, (0.0, 0.0), 5.0, Side::Inside)]));
    let o = square(1, (0.0, 0.0), 50.0, Side::Inside);
    let loose = Outline { cut: Cut { allowance_mm: -3.0, ..o.cut.clone() }, ..o };
    assert_snapshot!("allowance-beyond-the-cutter", refusal(&[loose]));
}

#[test]
fn each_cutter_gets_a_program_and_the_freeing_cut_is_in_the_last() {
    let with = |id, (x, y), size, cutter| {
        let r = rectangle(id, (x, y), (size, size));
        Routed { cut: Cut { cutter, ..cut() }, ..r }
    };
    let ids = |contours: &[Routed]| {
        let programs = by_cutter(contours);
        programs.iter().map(|p| p.iter().map(|c| c.id).collect::<Vec<_>>()).collect::<Vec<_>>()
    };
    let outer = with(1, (0.0, 0.0), 100.0, 0);
    let hole = with(2, (10.0, 10.0), 20.0, 1);
    let pocket = with(3, (50.0, 10.0), 20.0, 0);
    assert_eq!(ids(&[outer.clone(), hole, pocket]), vec![vec![2], vec![1, 3]]);
    // An island by the large cutter in a hole by the small one, in a plate by the large one: three programs.
    let hole = with(2, (10.0, 10.0), 60.0, 1);
    let island = with(3, (20.0, 20.0), 30.0, 0);
    assert_eq!(ids(&[outer, hole, island]), vec![vec![3], vec![2], vec![1]]);
}
