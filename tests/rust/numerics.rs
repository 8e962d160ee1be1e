//! Matrix equations, block products and Chebyshev nodes, against closed forms.

use scalewright_core::numerics::blocks::{Factors, Matrix, multiply_add};
use scalewright_core::numerics::chebyshev::{Nodes, coefficients};
use scalewright_core::numerics::left_product::{Rows, Sampled, Way, multiply_left, runs};
use scalewright_core::numerics::matrix_ode::{Dense, Span, Step};

/// Asserts that every entry differs by at most `tolerance`.
#[track_caller]
fn assert_near(given: &[f64], expected: &[f64], tolerance: f64) {
    assert_eq!(given.len(), expected.len());
    for (g, e) in given.iter().zip(expected) {
        assert!((g - e).abs() <= tolerance, "{given:?} instead of {expected:?}");
    }
}

fn matrix<const N: usize>(rows: [[f64; N]; N]) -> Matrix {
    Matrix::from_values(N, N, rows.concat())
}

/// `exp(s [[p, 0], [c, q]])` with `p != q`.
fn exponential(s: f64, p: f64, q: f64, c: f64) -> Vec<f64> {
    let (first, second) = ((p * s).exp(), (q * s).exp());
    vec![first, 0.0, c * (first - second) / (p - q), second]
}

/// Enough sweeps to leave nothing.
fn span(from: f64, to: f64, degree: usize) -> Span {
    Span { from, to, degree, sweeps: 20 }
}

/// Constant coefficients, the two rows in panels of their own or in one; the second pair is stiff. Degree 24 resolves
/// `e^(-2s)` to rounding; of `e^(-70s)` on a step of one half, Chebyshev coefficients fall like `I_k(17.5) e^(-17.5)`,
/// 2e-7 at k = 24.
#[test]
fn triangular_matrices_have_their_exponential() {
    for (q, length, tolerance) in [(1.0, 1.0, 1e-13), (-70.0, 0.5, 1e-6)] {
        for offsets in [&[0, 1, 2][..], &[0, 2]] {
            let step = Step::new(&span(0.0, length, 24), offsets, |_| matrix([[-2.0, 0.0], [3.0, q]]));
            let solution = step.solve(&Matrix::identity(2), 0, 0);
            assert_near(solution.end().values(), &exponential(length, -2.0, q, 3.0), tolerance);
            let inside = [0.1 * length, 0.5 * length, 0.93 * length];
            for (at, s) in solution.at_many(&inside).iter().zip(inside) {
                assert_near(at.values(), &exponential(s, -2.0, q, 3.0), tolerance);
            }
        }
    }
}

/// `exp(s (p + lower shift)) = e^(ps) [1; s, 1; s^2/2, s, 1]`, backwards in s too. Rounding of numbers up to 3.
#[test]
fn a_jordan_block_has_its_exponential() {
    let jordan = || matrix([[-1.0, 0.0, 0.0], [1.0, -1.0, 0.0], [0.0, 1.0, -1.0]]);
    for s in [0.8_f64, -0.8] {
        let step = Step::new(&span(0.0, s, 20), &[0, 1, 3], |_| jordan());
        let expected = [1.0, 0.0, 0.0, s, 1.0, 0.0, 0.5 * s * s, s, 1.0].map(|value| value * (-s).exp());
        assert_near(step.solve(&Matrix::identity(3), 0, 0).end().values(), &expected, 1e-13);
    }
}

/// `dE/ds = cos(s) E` gives `e^(sin s - sin s0)`; several columns at once. Rounding.
#[test]
fn a_scalar_equation_with_moving_coefficient_has_its_closed_solution() {
    let (from, to) = (0.3_f64, 1.7_f64);
    let step = Step::new(&span(from, to, 22), &[0, 1], |s| Matrix::from_values(1, 1, vec![s.cos()]));
    let solution = step.solve(&Matrix::from_values(1, 2, vec![1.0, -4.0]), 0, 0);
    for (at, s) in solution.at_many(&[from, 1.0, to]).iter().zip([from, 1.0, to]) {
        let growth = (s.sin() - from.sin()).exp();
        assert_near(at.values(), &[growth, -4.0 * growth], 1e-13);
    }
    assert_near(solution.end().values(), &[(to.sin() - from.sin()).exp(), -4.0 * (to.sin() - from.sin()).exp()], 1e-13);
}

/// `1/(1 + s)` from `dE/ds = - E/(1 + s)`: the estimate follows the true error down, degree by degree. The factor 10
/// is what [`scalewright_core::numerics::matrix_ode::Dense::error`] leaves open: one coefficient speaks for all.
#[test]
fn the_error_estimate_is_of_the_size_of_the_error() {
    let mut before = f64::INFINITY;
    for degree in [4, 6, 8, 10] {
        let step = Step::new(&span(0.0, 1.0, degree), &[0, 1], |s| Matrix::from_values(1, 1, vec![-1.0 / (1.0 + s)]));
        let solution = step.solve(&Matrix::identity(1), 0, 1);
        let at: Vec<f64> = (0..=50).map(|i| f64::from(i) / 50.0).collect();
        let values = solution.at_many(&at);
        let errors = values.iter().zip(&at).map(|(value, s)| (value.values()[0] - 1.0 / (1.0 + s)).abs());
        let (error, estimate) = (errors.fold(0.0, f64::max), solution.error(&[0]));
        println!("degree {degree}: error {error:.1e}, estimate {estimate:.1e}");
        assert!(estimate < 10.0 * error && error < 10.0 * estimate, "{degree}: {estimate} for {error}");
        assert!(estimate < 0.1 * before, "{degree}: {estimate} after {before}");
        before = estimate;
    }
}

/// `e^(-s - s^2/2)` from `dE/ds = - (1 + s) E`, degree 16, which leaves 1e-13: each sweep gains, and the estimate is not
/// far below the error (a factor 10, as it speaks of what the next sweep would change).
#[test]
fn each_sweep_gains_and_the_estimate_tells() {
    let mut before = f64::INFINITY;
    for sweeps in 1..=6 {
        let span = Span { from: 0.0, to: 1.0, degree: 16, sweeps };
        let step = Step::new(&span, &[0, 1], |s| Matrix::from_values(1, 1, vec![-1.0 - s]));
        let solution = step.solve(&Matrix::identity(1), 0, 1);
        let (error, estimate) = ((solution.end().values()[0] - (-1.5_f64).exp()).abs(), solution.error(&[0]));
        println!("{sweeps} sweeps: error {error:.1e}, estimate {estimate:.1e}");
        assert!(error < 10.0 * estimate, "{sweeps}: {estimate} for {error}");
        assert!(estimate < 0.5 * before, "{sweeps}: {estimate} after {before}");
        before = estimate;
    }
    assert!(before < 1e-6, "{before}");
}

/// Values at the nodes of rows from `first` on.
fn rows_from(solution: &Dense, first: usize, cols: usize) -> Matrix {
    let count = solution.nodes().points().len();
    let values: Vec<f64> = (0..count).flat_map(|node| solution.values_at(node)[first * cols..].to_vec()).collect();
    let size = values.len() / count;
    Matrix::from_values(count, size, values)
}

/// Rows at their own `s` times `exp(s [[-2, 0], [3, 1]])`, whichever way; a row that ends after the first entry, and the
/// columns of the second panel, whose first row is zero. Rounding of numbers up to 10.
#[test]
fn rows_from_the_left_find_the_exponential_at_their_own_place() {
    let step = Step::new(&span(0.0, 1.0, 24), &[0, 1, 2], |_| matrix([[-2.0, 0.0], [3.0, 1.0]]));
    let s = [0.2, 0.2, 0.7, 0.9];
    let values = Matrix::from_values(4, 2, vec![1.0, 0.0, 2.0, -1.0, 0.5, 3.0, -1.0, 1.0]);
    let product = |row: usize, column: usize| {
        let solution = exponential(s[row], -2.0, 1.0, 3.0);
        values.row(row)[0] * solution[column] + values.row(row)[1] * solution[2 + column]
    };
    let (whole, second) =
        (step.solve(&Matrix::identity(2), 0, 0), step.solve(&Matrix::from_values(2, 1, vec![0.0, 1.0]), 1, 0));
    let (whole_rows, second_rows) = (rows_from(&whole, 0, 2), rows_from(&second, 1, 1));
    for way in [Way::Evaluated, Way::AtNodes] {
        let rows = Rows { s: &s, ends: &[1, 2, 2, 2], values: &values, way };
        let mut target = Matrix::zeros(4, 2);
        Sampled { nodes: whole.nodes(), values: &whole_rows, first: 0, cols: 2 }.multiply_left(&rows, &mut target);
        let expected: Vec<f64> = (0..4).flat_map(|row| [product(row, 0), product(row, 1)]).collect();
        assert_near(target.values(), &expected, 1e-12);
        let mut target = Matrix::zeros(4, 1);
        Sampled { nodes: second.nodes(), values: &second_rows, first: 1, cols: 1 }.multiply_left(&rows, &mut target);
        let expected: Vec<f64> = (0..4).map(|row| product(row, 1)).collect();
        assert_near(target.values(), &expected, 1e-12);
    }
    let rows = Rows { s: &s, ends: &[1, 2, 2, 2], values: &values, way: Way::AtNodes };
    let constant = matrix([[1.0, 0.0], [4.0, 2.0]]);
    let mut target = Matrix::zeros(4, 2);
    multiply_left(constant.part(0..2, 0..2), 0, &rows, &mut target);
    assert_near(target.values(), &[1.0, 0.0, -2.0, -2.0, 12.5, 6.0, 3.0, 2.0], 1e-14);
    // Its first column alone, from the second row on.
    let mut target = Matrix::zeros(4, 1);
    multiply_left(constant.part(1..2, 0..2), 1, &rows, &mut target);
    assert_near(target.values(), &[0.0, -4.0, 12.0, 4.0], 1e-14);
}

#[test]
fn runs_are_neighbours_that_are_equal() {
    assert_eq!(runs(&[3, 3, 1, 3]).collect::<Vec<_>>(), [0..2, 2..3, 3..4]);
    assert_eq!(runs::<usize>(&[]).count(), 0);
}

/// An overflowing solution is no accurate one.
#[test]
fn the_error_of_what_is_not_finite_is_infinite() {
    let step = Step::new(&span(0.0, 1.0, 6), &[0, 1], |_| Matrix::from_values(1, 1, vec![1.0]));
    for start in [f64::MAX, f64::NAN] {
        let error = step.solve(&Matrix::from_values(1, 1, vec![start]), 0, 1).error(&[0]);
        assert!(error.is_infinite(), "{start}: {error}");
    }
}

/// What starts in a later panel needs nothing of the panels before: same bits.
#[test]
fn panels_before_the_first_stay_zero() {
    let generator = |s: f64| matrix([[-1.0, 0.0, 0.0], [s, -2.0, 0.0], [0.5, 1.0 - s, -3.0]]);
    let step = Step::new(&span(0.0, 0.7, 9), &[0, 1, 2, 3], generator);
    let start = Matrix::from_values(3, 1, vec![0.0, 1.0, 2.0]);
    let (all, later) = (step.solve(&start, 0, 0).end(), step.solve(&start, 1, 0).end());
    assert_eq!(all, later);
    assert_eq!(later.row(0), &[0.0]);
}

/// Products of small integers are exact.
#[test]
fn products_of_parts_are_sums_of_products() {
    let entry = |k: usize| (k * 7919 % 23) as f64 - 11.0;
    let left = Matrix::from_values(5, 7, (0..35).map(entry).collect());
    let right = Matrix::from_values(7, 6, (35..77).map(entry).collect());
    let mut target = Matrix::from_values(4, 6, (77..101).map(entry).collect());
    let mut expected = target.clone();
    multiply_add(target.part_mut(1..4, 2..5), -2.0, left.part(2..5, 1..6), right.part(1..6, 0..3));
    for (i, j) in (0..3).flat_map(|i| (0..3).map(move |j| (i, j))) {
        let sum: f64 = (1..6).map(|k| left.row(i + 2)[k] * right.row(k)[j]).sum();
        expected.row_mut(i + 1)[j + 2] -= 2.0 * sum;
    }
    assert_eq!(target, expected);
    let before = target.clone();
    multiply_add(target.part_mut(0..4, 0..2), 1.0, left.part(0..4, 3..3), right.part(3..3, 0..2));
    assert_eq!(target, before, "a product over nothing adds nothing");
}

/// The matrix `min(i, j)` (from 1) has the second differences as its inverse; pivoting is needed once rows are swapped.
#[test]
fn factors_solve_what_has_a_known_inverse() {
    let n = 6;
    let entry = |i: usize, j: usize| (i.min(j) + 1) as f64;
    let rows: Vec<usize> = (0..n).rev().collect();
    let swapped = rows.iter().flat_map(|&i| (0..n).map(move |j| entry(i, j))).collect();
    let solution: Vec<f64> = (0..n).map(|j| j as f64 - 2.5).collect();
    let right: Vec<f64> = rows.iter().map(|&i| (0..n).map(|j| entry(i, j) * solution[j]).sum()).collect();
    let mut right = Matrix::from_values(n, 1, right);
    Factors::of(&Matrix::from_values(n, n, swapped)).solve(right.part_mut(0..n, 0..1));
    // Condition below 100.
    assert_near(right.values(), &solution, 1e-13);
}

/// Coefficients of `T_k` are a unit vector; `T_k(cos t) = cos(k t)`. Rounding of eight terms.
#[test]
fn chebyshev_polynomials_have_unit_coefficients() {
    let nodes = Nodes::new(-1.0, 1.0, 7);
    for k in 0..=7 {
        let values: Vec<f64> = nodes.points().iter().map(|x| (f64::from(k) * x.acos()).cos()).collect();
        let unit: Vec<f64> = (0..=7).map(|other| f64::from(other == k)).collect();
        assert_near(&coefficients(&values), &unit, 1e-14);
    }
}

/// A distance far below the rounding of the node itself still counts: Lagrange polynomials of 0, 1, 2 at `1 - t`.
#[test]
fn cardinals_keep_small_distances_from_a_node() {
    let nodes = Nodes::new(0.0, 2.0, 2);
    for t in [1e-20, 1e-9, 0.4] {
        let mut row = [0.0; 3];
        nodes.cardinals_left_of(1, t, &mut row);
        let expected = [0.5 * t * (1.0 + t), 1.0 - t * t, -0.5 * t * (1.0 - t)];
        for (value, expected) in row.iter().zip(expected) {
            assert!((value - expected).abs() <= 1e-15 * expected.abs(), "{row:?} at {t}");
        }
    }
}
