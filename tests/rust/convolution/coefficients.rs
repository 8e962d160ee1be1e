//! Coefficient matrices and massive rows against quadrature by another rule (tanh-sinh) of the same formulas.
//!
//! The density is `F(u) = u^3`, `u = ln(1/x)`, which the grid holds exactly, so that only the quadrature is compared.

use crate::{dot, grid};
use scalewright_core::convolution::{coefficients_on, massive_rows};
use scalewright_core::error::Error;
use scalewright_core::grid::{Grid, Resolution};
use scalewright_core::kernels::coefficients::{Coefficient, Massive, StructureFunction, kernel};
use scalewright_core::numerics::endpoint::{Logarithms, Point};
use scalewright_core::watch::Unwatched;
use std::f64::consts::PI;

/// Relative to the integral of the modulus. Measured 5e-11, for `ln^4(1-z)` of `FL` at a^3.
const TOLERANCE: f64 = 2e-10;

fn cubes(grid: &Grid) -> Vec<f64> {
    grid.u().iter().map(|u| u.powi(3)).collect()
}

/// Integral over t in (0, to) by the rule of H. Takahasi and M. Mori (1974), and that of the modulus.
fn tanh_sinh(to: f64, function: impl Fn(f64) -> f64) -> (f64, f64) {
    const STEP: f64 = 1.0 / 128.0;
    let (mut sum, mut modulus) = (0.0, 0.0);
    for k in -560..=560 {
        let s = STEP * f64::from(k);
        let t = to / (1.0 + (-PI * s.sinh()).exp());
        let weight = STEP * t * PI * s.cosh() / (1.0 + (PI * s.sinh()).exp());
        if t > 0.0 && weight > 0.0 {
            let value = weight * function(t);
            sum += value;
            modulus += value.abs();
        }
    }
    (sum, modulus)
}

/// `int dz K(z) F(x/z)` for a regular part, plus distributions and a local part.
fn convolve(u: f64, regular: impl Fn(f64) -> f64, plus: &[f64], local: f64) -> (f64, f64) {
    let (sum, modulus) = tanh_sinh(u, |t| {
        let w = Logarithms::at(t);
        let distributions = plus.iter().rev().fold(0.0, |sum, c| sum * w.ln_1mz() + c) / w.one_minus_z;
        let subtracted = -t * (3.0 * u * (u - t) + t * t);
        w.z * (regular(t) * (u - t).powi(3) + distributions * subtracted)
    });
    let edge = (-(-u).exp_m1()).ln();
    let here = plus.iter().zip(1..).fold(local, |sum, (c, k)| sum + c * edge.powi(k) / f64::from(k));
    (sum + here * u.powi(3), modulus + here.abs() * u.powi(3))
}

#[test]
fn massive_rows_are_the_integrals() {
    let grid = grid(Resolution::Standard);
    let values = cubes(&grid);
    let mut worst = 0.0_f64;
    for what in Massive::ALL {
        for x in [1e-6, 1e-4, 0.0123, 0.1, 0.3, 0.5, 0.74, 0.85] {
            for (q2, mass) in [(2.0, 1.3), (10.0, 1.5), (90.0, 4.8), (4e4, 1.3), (1e12, 1.0)] {
                let row = massive_rows(&grid, what, &[x], &[q2], mass, &Unwatched).unwrap();
                let kernel = what.at(q2, mass);
                let u = -(x * kernel.rescaling).ln();
                if u <= 0.0 {
                    assert!(row.iter().all(|&value| value == 0.0));
                    continue;
                }
                let (expected, scale) = convolve(u, |t| kernel.regular(&Logarithms::at(t)), &kernel.plus, kernel.local);
                let difference = (dot(&row, &values) - expected).abs() / scale;
                if difference > worst {
                    worst = difference;
                    println!("{} x {x} Q2 {q2}: {worst:.1e}", what.name());
                }
                assert!(difference < TOLERANCE, "{} {x} {q2} {mass}: {difference:e}", what.name());
            }
        }
    }
}

#[test]
fn coefficient_matrices_are_the_integrals() {
    let grid = grid(Resolution::Standard);
    let values = cubes(&grid);
    let set = coefficients_on(&grid, &Unwatched).unwrap();
    let mut worst = 0.0_f64;
    for function in StructureFunction::ALL {
        for coefficient in Coefficient::ALL {
            for order in 0..=function.highest_order() {
                let formula = kernel(order, function, coefficient);
                let matrix = set.matrix(order, function, coefficient, 4.0);
                for i in [3, 20, 41, grid.nodes() - 1] {
                    let regular = |t: f64| formula.regular(&Point::at(t), 4.0);
                    let (expected, scale) = convolve(grid.u()[i], regular, &formula.plus(4.0), formula.local(4.0));
                    let difference = (dot(matrix.row(i), &values) - expected).abs();
                    let relative = if scale > 0.0 { difference / scale } else { difference };
                    if relative > worst {
                        worst = relative;
                        println!("{} {} a^{order} node {i}: {worst:.1e}", function.name(), coefficient.name());
                    }
                    let name = (function.name(), coefficient.name());
                    assert!(
                        difference <= TOLERANCE * scale,
                        "{name:?} a^{order} node {i}: {difference:e} of {scale:e}"
                    );
                }
            }
        }
    }
}

#[test]
fn bad_points_are_refused() {
    let grid = Grid::preset(1e-4, Resolution::Standard).unwrap();
    let ask = |x: &[f64], q2: &[f64], mass| massive_rows(&grid, Massive::F2Gluon, x, q2, mass, &Unwatched);
    assert!(matches!(ask(&[5e-5], &[1e4], 1.3), Err(Error::OutOfRange { name: "x", .. })));
    // Below x_min, but the gluon is only needed above it.
    assert!(ask(&[5e-5], &[4.0], 1.3).is_ok());
    assert!(matches!(ask(&[-0.1], &[4.0], 1.3), Err(Error::Argument { name: "x", .. })));
    assert!(matches!(ask(&[0.1], &[0.0], 1.3), Err(Error::Argument { name: "q2", .. })));
    assert!(matches!(ask(&[0.1], &[4.0], f64::NAN), Err(Error::Argument { name: "mass", .. })));
    assert!(matches!(ask(&[0.1], &[4.0, 5.0], 1.3), Err(Error::Shape { name: "q2", .. })));
}
