//! Interpolating splines against published tables, closed forms and independent small systems.

use std::f64::consts::{E, TAU};

use approx::assert_relative_eq;
use kurbo::{Point, Vec2};
use nalgebra::{Matrix1x2, Matrix2, Matrix2x1, Matrix4, Vector4};
use proptest::prelude::*;
use ribband::fair::{CubicSpline, Ends, chord_lengths};
use ribband::num::BlockTridiagonal;

/// The graph of a function as a parametric curve: x is the parameter.
fn graph(knots: &[f64], values: &[f64], ends: Ends) -> CubicSpline {
    let points: Vec<Point> = knots.iter().zip(values).map(|(&x, &y)| Point::new(x, y)).collect();
    CubicSpline::through(knots.to_vec(), &points, ends).expect("a valid graph")
}

fn value(spline: &CubicSpline, x: f64) -> f64 {
    spline.local(x).at.y
}

/// a + b s + c s^2 + d s^3 of the piece that starts at the whole number `from`.
fn coefficients(spline: &CubicSpline, from: f64) -> [f64; 4] {
    let start = spline.local(from);
    let third = spline.local(from + 0.5).second.y - start.second.y;
    [start.at.y, start.first.y, start.second.y / 2.0, third / 3.0]
}

/// Exact for a cubic: the integral of y over each unit piece.
fn integral(spline: &CubicSpline) -> f64 {
    let piece = |x: f64| (value(spline, x) + 4.0 * value(spline, x + 0.5) + value(spline, x + 1.0)) / 6.0;
    (0..3).map(|x| piece(f64::from(x))).sum()
}

fn assert_table(spline: &CubicSpline, table: [[f64; 4]; 3]) {
    for (from, row) in table.into_iter().enumerate() {
        for (got, want) in coefficients(spline, from as f64).into_iter().zip(row) {
            assert_relative_eq!(got, want, epsilon = 1e-10);
        }
    }
}

/// Burden and Faires, Numerical Analysis, section 3.5, the example of e^x at 0, 1, 2, 3 (from memory, the digits
/// recomputed).
#[test]
fn natural_table_of_the_exponential() {
    let knots = [0.0, 1.0, 2.0, 3.0];
    let spline = graph(&knots, &knots.map(f64::exp), Ends::Natural);
    let table = [
        [1.0, 1.4659976142, 0.0, 0.2522842143],
        [E, 2.2228502570, 0.7568526429, 1.6910713706],
        [7.3890560989, 8.8097696545, 5.8300667546, -1.9433555849],
    ];
    assert_table(&spline, table);
    let c1 = (-E.powi(3) + 6.0 * E.powi(2) - 9.0 * E + 4.0) / 5.0;
    let c2 = (4.0 * E.powi(3) - 9.0 * E.powi(2) + 6.0 * E - 1.0) / 5.0;
    assert_relative_eq!(coefficients(&spline, 1.0)[2], c1, epsilon = 1e-13);
    assert_relative_eq!(coefficients(&spline, 2.0)[2], c2, epsilon = 1e-13);
    assert_relative_eq!(integral(&spline), 19.5522864894, epsilon = 1e-10);
    for (x, want) in [(0.5, 1.7645343339), (1.5, 4.2303040390), (2.5, 13.0085381667)] {
        assert_relative_eq!(value(&spline, x), want, epsilon = 1e-10);
    }
}

/// The same source's clamped example.
#[test]
fn clamped_table_of_the_exponential() {
    let knots = [0.0, 1.0, 2.0, 3.0];
    let ends = Ends::Clamped(Vec2::new(1.0, 1.0), Vec2::new(1.0, E.powi(3)));
    let spline = graph(&knots, &knots.map(f64::exp), ends);
    let table = [
        [1.0, 1.0, 0.4446824970, 0.2735993315],
        [E, 2.7101629884, 1.2654804914, 0.6951307906],
        [7.3890560989, 7.3265163431, 3.3508728633, 2.0190916178],
    ];
    assert_table(&spline, table);
    assert_relative_eq!(integral(&spline), 19.0596449787, epsilon = 1e-10);
}

/// A natural spline whose coefficients are whole numbers; solved by hand.
#[test]
fn natural_spline_of_whole_numbers() {
    let spline = graph(&[0.0, 1.0, 2.0, 3.0], &[1.0, 1.0, 0.0, 10.0], Ends::Natural);
    assert_table(&spline, [[1.0, 1.0, 0.0, -1.0], [1.0, -2.0, -3.0, 4.0], [0.0, 4.0, 9.0, -3.0]]);
    for (x, want) in [(0.5, 1.375), (1.5, -0.25), (2.5, 3.875)] {
        assert_relative_eq!(value(&spline, x), want, epsilon = 1e-14);
    }
    assert_relative_eq!(integral(&spline), 5.5, epsilon = 1e-13);
    // Second derivatives 0, -6, 18, 0, linear between: (36 + 36 - 108 + 324 + 324) / 3.
    assert_relative_eq!(spline.energy(), 204.0, epsilon = 1e-12);
}

fn circle(n: usize) -> CubicSpline {
    let angle = |i: usize| TAU * i as f64 / n as f64;
    let points: Vec<Point> = (0..n).map(|i| Vec2::from_angle(angle(i)).to_point()).collect();
    CubicSpline::through((0..=n).map(angle).collect(), &points, Ends::Periodic).expect("a circle")
}

/// Largest | |r| - 1 | of the periodic spline through n equal points of the unit circle (computed with an independent
/// library): fourth order.
#[test]
fn periodic_spline_nears_the_circle_at_fourth_order() {
    let table = [(4, 2.772818e-2), (8, 1.151671e-3), (16, 6.434937e-5), (32, 3.908116e-6)];
    let deviation = |n: usize| {
        let spline = circle(n);
        let off = |i: usize| (spline.local(TAU * i as f64 / 64000.0).at.to_vec2().hypot() - 1.0).abs();
        (0..64000).map(off).fold(0.0, f64::max)
    };
    for (n, want) in table {
        assert_relative_eq!(deviation(n), want, max_relative = 1e-6);
    }
    let order = (deviation(64) / deviation(128)).log2();
    assert!((3.95..4.05).contains(&order), "order {order}");
}

#[test]
fn periodic_spline_is_smooth_where_it_closes() {
    let spline = circle(7);
    let (start, end) = (spline.local(0.0), spline.local(TAU));
    assert_relative_eq!((start.at - end.at).hypot(), 0.0, epsilon = 1e-15);
    assert_relative_eq!((start.first - end.first).hypot(), 0.0, epsilon = 1e-14);
    assert_relative_eq!((start.second - end.second).hypot(), 0.0, epsilon = 1e-13);
    assert!(spline.is_closed());
    assert_relative_eq!(circle(256).local(1.0).curvature(), 1.0, max_relative = 1e-4);
}

/// Runge's function at 11 knots, natural (computed with an independent library).
#[test]
fn natural_spline_of_runge() {
    let runge = |x: f64| 1.0 / (1.0 + 25.0 * x * x);
    let knots: Vec<f64> = (0..11).map(|i| f64::from(i) / 5.0 - 1.0).collect();
    let values: Vec<f64> = knots.iter().map(|&x| runge(x)).collect();
    let spline = graph(&knots, &values, Ends::Natural);
    let error = |i: u32| {
        let x = f64::from(i) / 10000.0 - 1.0;
        (value(&spline, x) - runge(x)).abs()
    };
    assert_relative_eq!((0..=20000).map(error).fold(0.0, f64::max), 0.0219739, epsilon = 1e-7);
}

/// The values of the Hermite basis h00, h10, h01, h11 (closed form).
#[test]
fn two_clamped_points_give_the_hermite_basis() {
    let rows = [
        (0.25, [0.84375, 0.140625, 0.15625, -0.046875]),
        (0.5, [0.5, 0.125, 0.5, -0.125]),
        (0.75, [0.15625, 0.046875, 0.84375, -0.140625]),
    ];
    for (x, row) in rows {
        for (i, want) in row.into_iter().enumerate() {
            let unit = |j: usize| f64::from(u8::from(i == j));
            let ends = Ends::Clamped(Vec2::new(1.0, unit(1)), Vec2::new(1.0, unit(3)));
            let spline = graph(&[0.0, 1.0], &[unit(0), unit(2)], ends);
            assert_relative_eq!(value(&spline, x), want, epsilon = 1e-15);
        }
    }
}

/// The cubic through four points, from the 4 by 4 system of its powers.
fn cubic_through(xs: [f64; 4], ys: [f64; 4]) -> Vector4<f64> {
    let powers = Matrix4::from_fn(|row, power| xs[row].powi(power as i32));
    powers.lu().solve(&Vector4::from(ys)).expect("four different places")
}

fn lagrange(xs: [f64; 4], ys: [f64; 4], x: f64) -> f64 {
    let basis = |i: usize| (0..4).filter(|&j| j != i).map(|j| (x - xs[j]) / (xs[i] - xs[j])).product::<f64>();
    (0..4).map(|i| ys[i] * basis(i)).sum()
}

/// The small linear system for a cubic from four points, Lagrange's form of it, and the clamped spline with that
/// cubic's end slopes are one and the same.
#[test]
fn four_points_make_one_cubic() {
    let (xs, ys) = ([0.0, 0.7, 1.9, 3.0], [2.0, -1.0, 0.5, 4.0]);
    let c = cubic_through(xs, ys);
    let slope = |x: f64| Vec2::new(1.0, c[1] + x * (2.0 * c[2] + x * 3.0 * c[3]));
    let spline = graph(&xs, &ys, Ends::Clamped(slope(xs[0]), slope(xs[3])));
    for i in 0..=60 {
        let x = f64::from(i) / 20.0;
        let powers = c[0] + x * (c[1] + x * (c[2] + x * c[3]));
        assert_relative_eq!(powers, lagrange(xs, ys, x), epsilon = 1e-12);
        assert_relative_eq!(value(&spline, x), powers, epsilon = 1e-12);
    }
}

/// The small linear system for a cubic from two points with slopes, against the Hermite form that the spline holds.
#[test]
fn two_points_with_slopes_make_one_cubic() {
    let (x0, x1, y0, y1, m0, m1): (f64, f64, f64, f64, f64, f64) = (0.5, 2.0, 1.0, -2.0, 3.0, 0.25);
    let place = |x: f64| [1.0, x, x * x, x * x * x];
    let slope = |x: f64| [0.0, 1.0, 2.0 * x, 3.0 * x * x];
    let rows = [place(x0), place(x1), slope(x0), slope(x1)];
    let matrix = Matrix4::from_fn(|row, power| rows[row][power]);
    let c = matrix.lu().solve(&Vector4::new(y0, y1, m0, m1)).expect("two different places");
    let spline = graph(&[x0, x1], &[y0, y1], Ends::Clamped(Vec2::new(1.0, m0), Vec2::new(1.0, m1)));
    for i in 0..=30 {
        let x = x0 + (x1 - x0) * f64::from(i) / 30.0;
        let powers: f64 = place(x).iter().zip(c.iter()).map(|(p, c)| p * c).sum();
        assert_relative_eq!(value(&spline, x), powers, epsilon = 1e-12);
    }
}

/// A chain of `per_gap` points to each gap of the four fixed values that minimises the sum of squared second
/// differences: the normal equations are pentadiagonal.
fn least_bending_chain(fixed: [f64; 4], per_gap: usize) -> Vec<f64> {
    let free = 3 * per_gap + 1;
    let blocks = free.div_ceil(2);
    let held = |i: usize| (i.is_multiple_of(per_gap) && i < free).then(|| fixed[i / per_gap]);
    let mut normal = nalgebra::DMatrix::<f64>::identity(2 * blocks, 2 * blocks);
    normal.view_mut((0, 0), (free, free)).fill(0.0);
    for i in 1..free - 1 {
        for (a, wa) in [(i - 1, 1.0), (i, -2.0), (i + 1, 1.0)] {
            for (b, wb) in [(i - 1, 1.0), (i, -2.0), (i + 1, 1.0)] {
                normal[(a, b)] += wa * wb;
            }
        }
    }
    let mut rhs = vec![Matrix2x1::zeros(); blocks];
    for i in 0..free {
        let Some(y) = held(i) else { continue };
        for j in 0..free {
            rhs[j / 2][j % 2] -= normal[(j, i)] * y;
            normal[(i, j)] = 0.0;
            normal[(j, i)] = 0.0;
        }
        normal[(i, i)] = 1.0;
    }
    (0..free).for_each(|i| rhs[i / 2][i % 2] = held(i).unwrap_or(rhs[i / 2][i % 2]));
    let mut matrix = BlockTridiagonal::<2>::zeros(blocks, false);
    for k in 0..blocks {
        matrix.diagonal[k] = normal.fixed_view::<2, 2>(2 * k, 2 * k).into();
        if k + 1 < blocks {
            matrix.coupling[k] = normal.fixed_view::<2, 2>(2 * k + 2, 2 * k).into();
        }
    }
    matrix.factor().expect("positive definite").solve(&mut rhs);
    (0..free).map(|i| rhs[i / 2][i % 2]).collect()
}

/// The discrete least-bending chain through fixed points tends to the natural cubic spline as its points double, at
/// second order.
#[test]
fn discrete_chain_tends_to_the_natural_spline() {
    let fixed = [1.0, 1.0, 0.0, 10.0];
    let spline = graph(&[0.0, 1.0, 2.0, 3.0], &fixed, Ends::Natural);
    let error = |per_gap: usize| {
        let chain = least_bending_chain(fixed, per_gap);
        let off = |(i, y): (usize, &f64)| (y - value(&spline, i as f64 / per_gap as f64)).abs();
        chain.iter().enumerate().map(off).fold(0.0, f64::max)
    };
    let errors = [8, 16, 32, 64].map(error);
    for pair in errors.windows(2) {
        let order = (pair[0] / pair[1]).log2();
        assert!((1.9..2.1).contains(&order), "order {order}, errors {errors:?}");
    }
}

/// Among curves through the same points the natural spline bends least: adding any bump costs exactly its own energy.
#[test]
fn natural_spline_bends_least() {
    let knots = [0.0, 1.0, 2.5, 3.0, 5.0];
    let values = [0.0, 2.0, -1.0, 0.5, 1.0];
    let natural = graph(&knots, &values, Ends::Natural);
    let clamped = graph(&knots, &values, Ends::Clamped(Vec2::new(1.0, 0.7), Vec2::new(1.0, -2.0)));
    let difference = graph(&knots, &[0.0; 5], {
        let lean = |t: f64| Vec2::new(0.0, clamped.local(t).first.y - natural.local(t).first.y);
        Ends::Clamped(lean(0.0) + Vec2::new(1.0, 0.0), lean(5.0) + Vec2::new(1.0, 0.0))
    });
    assert_relative_eq!(clamped.energy(), natural.energy() + difference.energy(), max_relative = 1e-12);
}

#[test]
fn wrong_input_makes_no_spline() {
    let p = [Point::ZERO, Point::new(1.0, 2.0), Point::new(3.0, 1.0)];
    let rows: [(&[f64], &[Point], Ends); 8] = [
        (&[], &[], Ends::Natural),
        (&[0.0], &p[..1], Ends::Natural),
        (&[0.0, 1.0], &p, Ends::Natural),
        (&[0.0, 1.0, 1.0], &p, Ends::Natural),
        (&[0.0, 2.0, 1.0], &p, Ends::Natural),
        (&[0.0, f64::NAN, 1.0], &p, Ends::Natural),
        (&[0.0, 1.0, 2.0], &p, Ends::Periodic),
        (&[0.0, 1.0], &[Point::ZERO, Point::new(f64::INFINITY, 0.0)], Ends::Natural),
    ];
    for (knots, points, ends) in rows {
        assert_eq!(CubicSpline::through(knots.to_vec(), points, ends), None, "{knots:?} {points:?}");
    }
    assert!(CubicSpline::through(vec![0.0, 1.0, 2.0, 3.0], &p, Ends::Periodic).is_some());
}

#[test]
fn chord_lengths_run_along_the_points() {
    let square = [(0.0, 0.0), (3.0, 0.0), (3.0, 4.0)].map(Point::from);
    assert_eq!(chord_lengths(&square, false), [0.0, 3.0, 7.0]);
    assert_eq!(chord_lengths(&square, true), [0.0, 3.0, 7.0, 12.0]);
    assert_eq!(chord_lengths(&[], true), [0.0; 0]);
}

/// A random positive definite matrix, block tridiagonal or with its ring closed, as blocks and as a dense matrix.
fn systems(seed: &[f64], blocks: usize, ring: bool) -> (BlockTridiagonal<2>, nalgebra::DMatrix<f64>) {
    let mut matrix = BlockTridiagonal::<2>::zeros(blocks, ring);
    let mut dense = nalgebra::DMatrix::zeros(2 * blocks, 2 * blocks);
    for i in 0..blocks {
        matrix.diagonal[i] = Matrix2::identity() * 5.0;
        let block = Matrix2::from_column_slice(&seed[4 * i..4 * i + 4]);
        let next = (i + 1) % blocks;
        dense[(2 * i, 2 * i)] = 5.0;
        dense[(2 * i + 1, 2 * i + 1)] = 5.0;
        if ring || i + 1 < blocks {
            matrix.coupling[i] = block;
            let mut view = dense.fixed_view_mut::<2, 2>(2 * next, 2 * i);
            view += block;
            let mut view = dense.fixed_view_mut::<2, 2>(2 * i, 2 * next);
            view += block.transpose();
        }
    }
    (matrix, dense)
}

proptest! {
    /// The banded solver agrees with a dense one, open and around a ring, from the smallest size on.
    #[test]
    fn banded_agrees_with_dense(blocks in 2_usize..9, ring: bool, seed in prop::collection::vec(-1.0..1.0, 36)) {
        let (matrix, dense) = systems(&seed, blocks, ring);
        let rhs = nalgebra::DVector::from_fn(2 * blocks, |i, _| (i as f64).sin());
        let want = dense.lu().solve(&rhs).expect("positive definite");
        let mut got: Vec<Matrix2x1<f64>> = (0..blocks).map(|i| rhs.fixed_rows::<2>(2 * i).into()).collect();
        matrix.factor().expect("positive definite").solve(&mut got);
        for i in 0..2 * blocks {
            prop_assert!((got[i / 2][i % 2] - want[i]).abs() < 1e-12);
        }
    }
}

#[test]
fn an_indefinite_matrix_is_refused() {
    let mut matrix = BlockTridiagonal::<1>::zeros(3, false);
    matrix.diagonal.iter_mut().for_each(|d| d[0] = 1.0);
    matrix.coupling[0][0] = 2.0;
    assert!(matrix.factor().is_none());
    assert!(BlockTridiagonal::<1>::zeros(1, true).factor().is_none());
    let mut nothing: [Matrix1x2<f64>; 0] = [];
    BlockTridiagonal::<1>::zeros(0, false).factor().expect("nothing to do").solve(&mut nothing);
}
