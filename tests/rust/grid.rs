//! Panels, interpolation, moments and error estimates of a grid, against closed forms.

use scalewright_core::error::Error;
use scalewright_core::grid::{Grid, Resolution};

const RESOLUTIONS: [Resolution; 2] = [Resolution::Standard, Resolution::Fine];

fn free() -> Grid {
    Grid::new(&[0.0, 0.4, 2.0, 7.0], &[8, 10, 12]).unwrap()
}

fn value(grid: &Grid, x: f64, nodal: &[f64]) -> f64 {
    let mut row = vec![f64::NAN; grid.nodes()];
    grid.cardinals(x, &mut row).unwrap();
    row.iter().zip(nodal).map(|(l, f)| l * f).sum()
}

#[test]
fn cardinals_are_one_at_their_node_and_zero_at_others() {
    let grid = free();
    let mut row = vec![f64::NAN; grid.nodes()];
    for (i, x) in grid.x().into_iter().enumerate() {
        grid.cardinals(x, &mut row).unwrap();
        for (j, l) in row.iter().enumerate() {
            // exp and ln round: 1e-16 of u = 7, times slopes of up to 1e3 near the ends of a panel.
            assert!((l - f64::from(i == j)).abs() < 1e-12, "node {i}, cardinal {j}: {l}");
        }
    }
    grid.cardinals(1.0, &mut row).unwrap();
    assert!(row.iter().all(|l| *l == 0.0), "densities vanish at x = 1: {row:?}");
}

/// Powers of u up to the lowest degree are reproduced in every panel; rounding of the largest value in it.
#[test]
fn polynomials_in_u_are_interpolated_exactly() {
    let grid = free();
    for power in 1..=8 {
        let nodal: Vec<f64> = grid.u().iter().map(|u| u.powi(power)).collect();
        for x in [0.999, 0.7, 0.3, 0.135, 0.01, 1e-3] {
            let u = -f64::ln(x);
            let largest = grid.edges().iter().find(|edge| **edge >= u).unwrap().powi(power);
            let given = value(&grid, x, &nodal);
            assert!((given - u.powi(power)).abs() < 1e-14 * largest, "{given} at {x}, power {power}");
        }
    }
}

#[test]
fn x_outside_of_the_grid_is_out_of_range() {
    let grid = Grid::preset(1e-5, Resolution::Standard).unwrap();
    let mut row = vec![0.0; grid.nodes()];
    assert!(grid.cardinals(1e-5 * (1.0 - 1e-14), &mut row).is_ok(), "x_min up to rounding");
    for x in [9.999e-6, 1.0 + 1e-15, 0.0, -0.1, f64::NAN, f64::INFINITY] {
        match grid.cardinals(x, &mut row) {
            Err(Error::OutOfRange { name: "x", allowed, .. }) => assert!(allowed.contains("[1e-5, 1]"), "{allowed}"),
            other => panic!("{x}: {other:?}"),
        }
    }
}

/// `int_0^U du u^k e^(-pu)`, by a series without cancellation.
fn incomplete_gamma(k: i32, p: f64, end: f64) -> f64 {
    // e^(-pU) U^(k+1) sum_j (pU)^j / ((k+1) ... (k+1+j)).
    let mut term = end.powi(k + 1) / f64::from(k + 1);
    let mut sum = term;
    for j in 1..200 {
        term *= p * end / f64::from(k + 1 + j);
        sum += term;
    }
    (-p * end).exp() * sum
}

/// `F = u^k` is held exactly, so its moments are those of the incomplete gamma function (M. Abramowitz, I. Stegun,
/// 6.5.29). Rounding of 31 terms.
#[test]
fn moment_weights_give_incomplete_gamma_functions() {
    let grid = free();
    for (k, power) in [(1, 0.0), (4, 0.0), (1, 1.0), (3, 1.0), (2, 0.5), (5, 3.0), (1, 9.0)] {
        let weights = grid.moment_weights(power);
        let moment: f64 = weights.iter().zip(grid.u()).map(|(w, u)| w * u.powi(k)).sum();
        let expected = incomplete_gamma(k, power, 7.0);
        assert!((moment / expected - 1.0).abs() < 1e-12, "k {k}, power {power}: {moment} not {expected}");
    }
}

/// `int_0^1 dx x^(p-1) x^a (1-x)^3` is the beta function `Gamma(p+a) 3!/Gamma(p+a+4)`; what lies below `x_min` is
/// `x_min^(p+a)/(p+a)` to `x_min`. The presets promise 1e-6 and 1e-9 or better of such densities.
#[test]
fn moments_of_densities_are_beta_functions() {
    for (resolution, tolerance) in RESOLUTIONS.into_iter().zip([1e-6, 1e-9]) {
        let grid = Grid::preset(1e-7, resolution).unwrap();
        for (a, power) in [(-0.2, 1.0), (0.6, 1.0), (0.6, 2.0), (0.5, 4.0)] {
            let nodal: Vec<f64> = grid.u().iter().map(|u| (-a * u).exp() * (-(-u).exp_m1()).powi(3)).collect();
            let moment: f64 = grid.moment_weights(power).iter().zip(&nodal).map(|(w, f)| w * f).sum();
            let n = power + a;
            let expected = 6.0 / (n * (n + 1.0) * (n + 2.0) * (n + 3.0)) - 1e-7_f64.powf(n) / n;
            assert!((moment / expected - 1.0).abs() < tolerance, "{resolution:?}, a {a}, power {power}: {moment}");
        }
    }
}

/// On `[0, 1]` the coefficient of `T_8` of `u^8` is `2^(1-16)`, that of `T_7` eight times two as large: `2^-15`
/// times `C(16, 0)` and `C(16, 1)`, from `u = cos^2(t/2)`.
#[test]
fn tails_are_the_last_coefficients() {
    let grid = Grid::new(&[0.0, 1.0], &[8]).unwrap();
    let nodal: Vec<f64> = grid.u().iter().map(|u| u.powi(8)).collect();
    let tails = grid.tails(&nodal);
    assert_eq!(tails.len(), 1);
    // Rounding of values of one.
    assert!((tails[0] - 16.0 * 0.5_f64.powi(15)).abs() < 1e-15, "{tails:?}");
    let line: Vec<f64> = free().u().to_vec();
    assert!(free().tails(&line).iter().all(|tail| *tail < 1e-14), "a straight line is resolved");
}

#[test]
fn every_node_is_owned_once() {
    for grid in [free(), Grid::preset(1e-9, Resolution::Fine).unwrap()] {
        let owned: Vec<usize> = (0..grid.panels()).flat_map(|panel| grid.owned(panel)).collect();
        assert_eq!(owned, (0..grid.nodes()).collect::<Vec<_>>());
        for i in owned {
            assert!(grid.owned(grid.panel_of(i)).contains(&i));
            let panel = grid.panel_of(i);
            assert!(grid.edges()[panel] < grid.u()[i] && grid.u()[i] <= grid.edges()[panel + 1]);
        }
        assert_eq!(grid.offsets().last(), Some(&grid.nodes()));
    }
}

#[test]
fn presets_hold_their_number_of_nodes_and_say_their_x_min() {
    for x_min in [1e-9, 1e-7, 3.3e-6, 1e-4, 1e-3, 1e-2] {
        for (resolution, most) in RESOLUTIONS.into_iter().zip([72, 110]) {
            let grid = Grid::preset(x_min, resolution).unwrap();
            assert!(x_min < 1e-7 || grid.nodes() <= most, "{x_min}: {}", grid.nodes());
            // Printed without the rounding of exp and ln.
            assert_eq!(grid.x_min().to_bits(), x_min.to_bits());
            assert_eq!(grid.x().last(), Some(&x_min));
            assert!(grid.x().windows(2).all(|pair| pair[0] > pair[1]));
        }
    }
}

#[test]
fn bad_panels_are_refused_by_name() {
    let nan = f64::NAN;
    let cases: [(&[f64], &[usize], &str); 12] = [
        (&[], &[], "edges"),
        (&[0.0], &[], "edges"),
        (&[0.0, 1.0], &[4, 4], "edges"),
        (&[0.0, 1.0, 2.0], &[4], "edges"),
        (&[0.1, 1.0], &[4], "edges"),
        (&[0.0, 2.0, 1.0], &[4, 4], "edges"),
        (&[0.0, 1.0, 1.0], &[4, 4], "edges"),
        (&[0.0, nan], &[4], "edges"),
        (&[0.0, f64::INFINITY], &[4], "edges"),
        (&[0.0, 1.0], &[1], "degrees"),
        (&[0.0, 1.0], &[65], "degrees"),
        (&[0.0, 1.0, 2.0, 3.0, 4.0, 5.0, 6.0, 7.0], &[60; 7], "degrees"),
    ];
    for (edges, degrees, expected) in cases {
        match Grid::new(edges, degrees) {
            Err(Error::Argument { name, .. }) => assert_eq!(name, expected, "{edges:?} {degrees:?}"),
            other => panic!("{edges:?} {degrees:?}: {other:?}"),
        }
    }
    for x_min in [0.0, 9e-10, 0.011, 1.0, -1.0, nan, f64::INFINITY] {
        let refused = Grid::preset(x_min, Resolution::Standard);
        assert!(matches!(refused, Err(Error::Argument { name: "x_min", .. })), "{x_min}: {refused:?}");
    }
}
