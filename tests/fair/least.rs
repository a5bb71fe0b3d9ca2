//! The least-bending spline inside a tolerance: against a general solver on the same problem, by its own certificate,
//! on real outlines and on hostile traces.

use approx::assert_relative_eq;
use clarabel::algebra::CscMatrix;
use clarabel::solver::SupportedConeT::{SecondOrderConeT, ZeroConeT};
use clarabel::solver::{DefaultSettingsBuilder, DefaultSolver, IPSolver, SolverStatus};
use kurbo::{Point, Vec2};
use proptest::prelude::*;
use ribband::fair::{Effort, Ends, Fair, chord_lengths, fair};
use ribband::num::Tolerance;

fn mm(tolerance: f64) -> Tolerance {
    Tolerance::new(tolerance).expect("above zero")
}

/// Uniform in -1 to 1, the same on every run (a linear congruential generator's high bits).
fn jitter() -> impl FnMut() -> f64 {
    let mut state = 1_u64;
    move || {
        state = state.wrapping_mul(6364136223846793005).wrapping_add(1442695040888963407);
        (state >> 33) as f64 / f64::from(1_u32 << 30) - 1.0
    }
}

/// A paddle-like outline of `n` vertices with noise.
fn blade(n: usize, noise: f64) -> Vec<Point> {
    let mut jitter = jitter();
    (0..n)
        .map(|i| {
            let a = std::f64::consts::TAU * i as f64 / n as f64;
            let r = 12.0 + 2.0 * (3.0 * a).sin();
            Point::new(r * a.cos() * 1.5 + noise * jitter(), r * a.sin() + noise * jitter())
        })
        .collect()
}

/// The distances at like parameters, at every vertex.
fn at_vertices<'a>(points: &'a [Point], fair: &'a Fair) -> impl Iterator<Item = f64> + 'a {
    let along = chord_lengths(points, false);
    points.iter().zip(along).map(|(p, t)| fair.spline.local(t).at.distance(*p))
}

/// The least energy by a general solver: unknown are the places and second derivatives at all vertices, tied by
/// the continuity of the first derivative (Reinsch 1967), each place in its disc.
fn general_solver(points: &[Point], ends: Ends, radius: f64) -> f64 {
    let n = points.len();
    let ring = ends == Ends::Periodic;
    let along = chord_lengths(points, ring);
    let widths: Vec<f64> = along.windows(2).map(|t| t[1] - t[0]).collect();
    let (place, bend) =
        (|i: usize, axis: usize| 2 * (i % n) + axis, |i: usize, axis: usize| 2 * (n + i % n) + axis);
    let mut energy = Entries::default();
    let mut rows = Entries::default();
    let mut b = Vec::new();
    for axis in 0..2 {
        for (i, h) in widths.iter().enumerate() {
            energy.add(bend(i, axis), bend(i, axis), 2.0 * h / 3.0);
            energy.add(bend(i + 1, axis), bend(i + 1, axis), 2.0 * h / 3.0);
            let (row, column) = (bend(i, axis).min(bend(i + 1, axis)), bend(i, axis).max(bend(i + 1, axis)));
            energy.add(row, column, h / 3.0);
        }
        for i in 0..n {
            let row = b.len();
            let after = (ring || i + 1 < n).then(|| widths[i]);
            let before = if i > 0 { Some(widths[i - 1]) } else { ring.then(|| widths[n - 1]) };
            let free_end = before.is_none() || after.is_none();
            let mut right = 0.0;
            match ends {
                Ends::Natural | Ends::Pinned if free_end => {
                    rows.add(row, bend(i, axis), 1.0);
                    b.push(0.0);
                    continue;
                }
                Ends::Clamped(start, end) if free_end => {
                    let slope = if i == 0 { start } else { -end };
                    right = if axis == 0 { slope.x } else { slope.y };
                }
                _ => {}
            }
            for (h, j) in [(before, i + n - 1), (after, i + 1)] {
                let Some(h) = h else { continue };
                rows.add(row, place(j, axis), 1.0 / h);
                rows.add(row, place(i, axis), -1.0 / h);
                rows.add(row, bend(i, axis), -h / 3.0);
                rows.add(row, bend(j, axis), -h / 6.0);
            }
            b.push(right);
        }
    }
    let mut cones = vec![ZeroConeT(b.len())];
    for (i, p) in points.iter().enumerate() {
        rows.add(b.len() + 1, place(i, 0), -1.0);
        rows.add(b.len() + 2, place(i, 1), -1.0);
        let held = ends == Ends::Pinned && (i == 0 || i + 1 == n);
        b.extend([if held { 1e-6 * radius } else { radius }, -p.x, -p.y]);
        cones.push(SecondOrderConeT(3));
    }
    let settings = DefaultSettingsBuilder::default().verbose(false).build().expect("settings");
    let q = vec![0.0; 4 * n];
    let (p, a) = (energy.matrix(4 * n, 4 * n), rows.matrix(b.len(), 4 * n));
    let mut solver = DefaultSolver::new(&p, &q, &a, &b, &cones, settings).expect("a valid problem");
    solver.solve();
    assert_eq!(solver.solution.status, SolverStatus::Solved);
    solver.solution.obj_val
}

#[derive(Default)]
struct Entries {
    rows: Vec<usize>,
    columns: Vec<usize>,
    values: Vec<f64>,
}

impl Entries {
    fn add(&mut self, row: usize, column: usize, value: f64) {
        self.rows.push(row);
        self.columns.push(column);
        self.values.push(value);
    }

    fn matrix(self, rows: usize, columns: usize) -> CscMatrix<f64> {
        CscMatrix::new_from_triplets(rows, columns, self.rows, self.columns, self.values)
    }
}

/// Three more points on every chord: our curve keeps the tolerance between the vertices too.
fn with_quarters(points: &[Point], ends: Ends) -> Vec<Point> {
    let ring = ends == Ends::Periodic;
    let next = |i: usize| points[(i + 1) % points.len()];
    let chord = |i: usize| (0..4).map(move |k| points[i].lerp(next(i), f64::from(k) / 4.0));
    let mut all: Vec<Point> = (0..points.len()).flat_map(chord).collect();
    all.truncate(all.len() - if ring { 0 } else { 3 });
    all
}

/// The same discs for both solvers, at the vertices and three times between them; ours keeps the tolerance everywhere,
/// which costs it a little more.
#[test]
fn as_fair_as_a_general_solver_finds() {
    let closed = blade(160, 0.03);
    let open = &closed[..60];
    let leaving = Ends::Clamped(Vec2::new(0.2, 0.9), Vec2::new(-1.0, 0.0));
    let rows = [
        (&closed[..], Ends::Periodic, 0.1),
        (&closed[..], Ends::Periodic, 0.02),
        (open, Ends::Natural, 0.1),
        (open, Ends::Natural, 0.3),
        (open, leaving, 0.1),
        (open, Ends::Pinned, 0.1),
        (open, Ends::Pinned, 0.3),
    ];
    for (points, ends, tolerance) in rows {
        let ours = fair(points, ends, mm(tolerance), Effort::Full).expect("a fair curve");
        let least = general_solver(&with_quarters(points, ends), ends, tolerance);
        println!("{ends:?} {tolerance}: ours {} least {least} excess {}", ours.energy, ours.excess);
        assert!(ours.energy <= 1.01 * least, "{ends:?} {tolerance}: {} for {least}", ours.energy);
        assert!(ours.energy - ours.excess <= least * (1.0 + 1e-3), "the certificate promises too much");
        assert!(ours.excess <= 0.01 * ours.energy);
        assert!(!ours.capped && ours.deviation.mm <= tolerance * 1.005);
        assert!(at_vertices(points, &ours).all(|distance| distance <= tolerance));
    }
}

/// The conditions of an optimum, from the curve alone: a knot pulls only where it touches the tolerance, and straight
/// inwards from the rim.
#[test]
fn the_curve_is_held_only_at_its_contacts() {
    let points = blade(400, 0.02);
    let tolerance = 0.1;
    let ours = fair(&points, Ends::Periodic, mm(tolerance), Effort::Full).expect("a fair curve");
    let along = chord_lengths(&points, true);
    let knots = ours.spline.knots();
    let seconds: Vec<Vec2> = ours.spline.locals(knots).map(|local| local.second).collect();
    let third = |i: usize| (seconds[i + 1] - seconds[i]) / (knots[i + 1] - knots[i]);
    let last = knots.len() - 2;
    let (mut slack, mut total) = (0.0, 0.0);
    for (i, &knot) in knots[..=last].iter().enumerate() {
        let pull = third(i) - third(if i == 0 { last } else { i - 1 });
        let j = along.partition_point(|&t| t <= knot) - 1;
        let next = points[(j + 1) % points.len()];
        let centre = points[j].lerp(next, (knot - along[j]) / (along[j + 1] - along[j]));
        let offset = ours.spline.places()[i] - centre;
        slack += pull.hypot() * tolerance + pull.dot(offset);
        total += pull.hypot() * tolerance;
    }
    assert!(slack >= 0.0 && slack <= 2e-3 * total, "slack {slack} of {total}");
    assert_relative_eq!(2.0 * slack, ours.excess, max_relative = 1e-6);
}

/// A larger tolerance never bends more, and a straight trace does not bend at all.
#[test]
fn more_room_bends_less() {
    let points = blade(300, 0.03);
    let energies = [0.01, 0.03, 0.1, 0.3, 1.0, 3.0]
        .map(|tolerance| fair(&points, Ends::Periodic, mm(tolerance), Effort::Full).expect("fair").energy);
    assert!(energies.is_sorted_by(|a, b| a > b), "{energies:?}");
    let mut jitter = jitter();
    let line: Vec<Point> = (0..200).map(|i| Point::new(f64::from(i) * 0.1, 0.04 * jitter())).collect();
    let straight = fair(&line, Ends::Natural, mm(0.1), Effort::Full).expect("fair");
    assert!(straight.energy < 1e-6, "{}", straight.energy);
}

/// Long chords are held between their ends too: a rectangle's sides stay straight within the tolerance.
#[test]
fn long_sides_stay_within_the_tolerance() {
    let corners = [(0.0, 0.0), (80.0, 0.0), (80.0, 50.0), (0.0, 50.0)].map(Point::from);
    let ours = fair(&corners, Ends::Periodic, mm(0.1), Effort::Full).expect("fair");
    assert!(!ours.capped && ours.deviation.mm < 0.1005, "{:?}", ours.deviation);
    let off = |i: u32| ours.spline.local(80.0 * f64::from(i) / 10000.0).at.y.abs();
    assert!((0..=10000).all(|i| off(i) <= 0.1 * (1.0 + 1e-9)));
}

/// The same curve from any start and in either direction.
#[test]
fn the_start_of_a_ring_does_not_matter() {
    let points = blade(300, 0.03);
    let energy = |points: &[Point]| fair(points, Ends::Periodic, mm(0.1), Effort::Full).expect("fair").energy;
    let mut turned = points.clone();
    turned.rotate_left(117);
    assert_relative_eq!(energy(&turned), energy(&points), max_relative = 2e-3);
    turned.reverse();
    assert_relative_eq!(energy(&turned), energy(&points), max_relative = 2e-3);
}

/// Outlines with the tolerances that the manifest names for them.
const OUTLINES: [(&str, f64); 11] = [
    ("analytic/arcchain-a-rand-clean", 0.05),
    ("analytic/ellipse-a-s05-n02", 0.1),
    ("analytic/gear-a-s05-n05", 0.2),
    ("analytic/keyhole-a-s20-clean", 0.05),
    ("coast/ne10-iceland", 0.25),
    ("glyph/dejavu-sans-u0038", 0.05),
    ("traced/cell354", 0.268),
    ("traced/dolphin-stair", 0.41),
    ("traced/dolphin-subpx", 0.205),
    ("traced/eagle-stair", 0.8),
    ("traced/coin1-stair", 1.231),
];

/// The first contour of an outline that the tests cut.
fn outline(name: &str) -> Vec<Point> {
    let path = format!("{}/fixtures/outlines/{name}.csv", env!("CARGO_MANIFEST_DIR"));
    let text = std::fs::read_to_string(path).expect("a fixture");
    let rows = text.lines().skip(1).take_while(|line| !line.is_empty()).map(|line| {
        let (x, y) = line.split_once(',').expect("x,y");
        Point::new(x.parse().expect("x"), y.parse().expect("y"))
    });
    rows.collect()
}

#[test]
fn real_outlines_come_out_fair() {
    for (name, tolerance) in OUTLINES {
        let mut points = outline(name);
        assert!(points.len() > 50, "{name} holds {} points", points.len());
        let ring = points.first() == points.last();
        points.truncate(points.len() - usize::from(ring));
        let ends = if ring { Ends::Periodic } else { Ends::Natural };
        let ours = fair(&points, ends, mm(tolerance), Effort::Full).expect("fair");
        assert!(!ours.capped && ours.deviation.mm <= tolerance * 1.005, "{name}: {:?}", ours.deviation);
        assert!(ours.excess <= 0.01 * ours.energy, "{name}: {} of {}", ours.excess, ours.energy);
        assert!(at_vertices(&points, &ours).all(|distance| distance <= tolerance), "{name}");
    }
}

#[test]
fn too_little_to_fair() {
    let p = Point::new(1.0, 2.0);
    for points in
        [&[][..], &[p], &[p, p, p], &[p, Point::new(f64::NAN, 0.0)], &[p, Point::new(f64::INFINITY, 0.0)]]
    {
        for ends in [Ends::Natural, Ends::Periodic, Ends::Clamped(Vec2::ZERO, Vec2::ZERO)] {
            assert!(fair(points, ends, mm(0.1), Effort::Full).is_none(), "{points:?} {ends:?}");
        }
    }
    let two = [p, p, Point::new(4.0, 6.0), Point::new(4.0, 6.0)];
    let straight = fair(&two, Ends::Natural, mm(0.1), Effort::Full).expect("a line");
    assert!(straight.deviation.mm <= 0.1 && straight.energy < 1e-9);
    assert!(
        fair(&two, Ends::Periodic, mm(0.1), Effort::Full)
            .is_some_and(|there_and_back| !there_and_back.capped)
    );
}

/// The start for other methods: near the least energy in a few steps.
#[test]
fn a_quick_start_is_near_the_answer() {
    let points = blade(2000, 0.02);
    let full = fair(&points, Ends::Periodic, mm(0.1), Effort::Full).expect("fair");
    let start = fair(&points, Ends::Periodic, mm(0.1), Effort::Start).expect("fair");
    assert!(start.steps * 2 < full.steps);
    assert_relative_eq!(start.energy, full.energy, max_relative = 0.3);
    assert!(start.deviation.mm < 0.2, "{:?}", start.deviation);
}

/// Traces built for trouble: repeated points, points an ulp apart, spikes, any scale.
fn hostile() -> impl Strategy<Value = Vec<Point>> {
    let step = prop_oneof![
        4 => (-1.0..1.0, -1.0..1.0).prop_map(Vec2::from),
        1 => Just(Vec2::ZERO),
        1 => (-1e-15..1e-15, -1e-15..1e-15).prop_map(Vec2::from),
        1 => (-50.0..50.0, -50.0..50.0).prop_map(Vec2::from),
    ];
    let scale = prop_oneof![Just(1e-3), Just(1.0), Just(300.0)];
    (prop::collection::vec(step, 2..40), scale).prop_map(|(steps, scale)| {
        let mut at = Point::new(100.0, -20.0);
        let walk = steps.into_iter().map(|step| {
            at += step * scale;
            at
        });
        walk.collect()
    })
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(100))]
    /// No panic, no endless loop; the tolerance holds or the result says that it does not.
    #[test]
    fn hostile_traces_are_held_or_told(points in hostile(), ring: bool, tolerance in 0.001..10.0) {
        let ends = if ring { Ends::Periodic } else { Ends::Natural };
        let different = points.iter().any(|p| p.distance(points[0]) > 1e-9);
        let ours = fair(&points, ends, mm(tolerance), Effort::Full);
        prop_assert!(ours.is_some() || !different);
        if let Some(ours) = ours {
            let worst = at_vertices(&points, &ours).fold(0.0, f64::max);
            prop_assert!(worst <= ours.deviation.mm * (1.0 + 1e-9) + 1e-9, "{} of {:?}", worst, ours.deviation);
            prop_assert!(ours.capped || worst <= tolerance * (1.0 + 1e-9), "{} of {}", worst, tolerance);
            prop_assert!(!ours.capped, "gave up");
        }
    }
}
