//! Mellin moments of kernels by quadrature graded towards z = 1.

use scalewright_core::kernels::kernel::Kernel;
use scalewright_core::numerics::endpoint::Point;

/// Absolute, for moments of exact forms, which are of the order of 1 to 1e2: measured below 1e-13; a factor ten is
/// left for other exponentials and logarithms.
pub const ROUNDING: f64 = 1e-12;

/// Nodes and weights of Gauss-Legendre on [0, 1], by Newton's method.
fn gauss_legendre(n: usize) -> Vec<(f64, f64)> {
    let node = |i: usize| {
        let mut x = (std::f64::consts::PI * (i as f64 + 0.75) / (n as f64 + 0.5)).cos();
        let mut slope = 0.0;
        for _ in 0..20 {
            let (mut previous, mut value) = (1.0, x);
            for k in 2..=n {
                let k = k as f64;
                (previous, value) = (value, ((2.0 * k - 1.0) * x * value - (k - 1.0) * previous) / k);
            }
            slope = n as f64 * (x * value - previous) / (x * x - 1.0);
            x -= value / slope;
        }
        (0.5 * (1.0 + x), 1.0 / ((1.0 - x * x) * slope * slope))
    };
    (0..n).map(node).collect()
}

/// Integral over t from 0 to 100, panels shrinking geometrically towards t = 0, where logarithms sit.
pub fn integrate(function: impl Fn(f64) -> f64) -> f64 {
    let rule = gauss_legendre(20);
    let mut edges = vec![0.0];
    edges.extend((-60..=0).map(|k| 2f64.powi(k)));
    edges.extend((2..=100).map(f64::from));
    let panel = |ends: &[f64]| {
        let width = ends[1] - ends[0];
        rule.iter().map(|&(x, weight)| weight * width * function(ends[0] + x * width)).sum::<f64>()
    };
    edges.windows(2).map(panel).sum()
}

/// Mellin moment, the integral of `z^(N-1) P(z)` over [0, 1].
pub fn moment(kernel: &Kernel, n: f64, nf: f64) -> f64 {
    let plus = kernel.plus(nf);
    let integral = integrate(|t| {
        let point = Point::at(t);
        let distributions = plus.iter().rev().fold(0.0, |sum, c| sum * point.ln_1mz + c) / point.one_minus_z;
        let weight = (-(n - 1.0) * t).exp();
        let subtracted = (-(n - 1.0) * t).exp_m1();
        point.z * (weight * kernel.regular(&point, nf) + subtracted * distributions)
    });
    integral + kernel.local(nf)
}

/// The coefficient of one power of nf as a kernel of its own.
pub fn power(kernel: &Kernel, p: usize) -> Kernel {
    kernel.terms.get(p).cloned().map_or_else(Kernel::default, |term| vec![term].into())
}

#[track_caller]
pub fn assert_near(value: f64, expected: f64, tolerance: f64) {
    assert!((value - expected).abs() <= tolerance, "{value:.15e} is not {expected:.15e} within {tolerance:e}");
}
