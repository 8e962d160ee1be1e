//! Gauss-Legendre quadrature: nodes and weights on [-1, 1].
//!
//! An n-point rule integrates polynomials of degree 2n - 1 exactly. The nodes are the zeros of the Legendre
//! polynomial `P_n`, found by Newton's method; accurate to a few units of rounding for n up to some hundreds.

use std::f64::consts::PI;

/// A quadrature rule on [-1, 1].
#[derive(Debug, Clone, PartialEq)]
pub struct Rule {
    /// Nodes, ascending.
    pub nodes: Vec<f64>,
    /// Weights; they add up to 2.
    pub weights: Vec<f64>,
}

impl Rule {
    /// Integral of `f` from `from` to `to`.
    pub fn integrate(&self, from: f64, to: f64, f: impl Fn(f64) -> f64) -> f64 {
        let (middle, half) = (0.5 * (to + from), 0.5 * (to - from));
        let sum: f64 = self.nodes.iter().zip(&self.weights).map(|(x, w)| w * f(middle + half * x)).sum();
        half * sum
    }
}

/// The n-point Gauss-Legendre rule; `n = 0` gives an empty rule.
///
/// Start values `cos(pi (k + 3/4) / (n + 1/2))`, then Newton's method on `P_n`; weights
/// `2 / ((1 - x^2) P_n'(x)^2)` (M. Abramowitz, I. Stegun, Handbook of Mathematical Functions, eq. 25.4.29 and
/// 22.16.6).
pub fn gauss_legendre(n: usize) -> Rule {
    let mut nodes = vec![0.0; n];
    let mut weights = vec![0.0; n];
    for k in 0..n.div_ceil(2) {
        let mut x = (PI * (k as f64 + 0.75) / (n as f64 + 0.5)).cos();
        if 2 * k + 1 == n {
            x = 0.0;
        }
        // Convergence is quadratic from a start good to 1e-2 of the spacing: four steps reach rounding.
        for _ in 0..6 {
            let (value, slope) = legendre(n, x);
            x -= value / slope;
        }
        let (_, slope) = legendre(n, x);
        let weight = 2.0 / ((1.0 - x * x) * slope * slope);
        (nodes[n - 1 - k], nodes[k]) = (x, -x);
        (weights[n - 1 - k], weights[k]) = (weight, weight);
    }
    if n % 2 == 1 {
        nodes[n / 2] = 0.0;
    }
    Rule { nodes, weights }
}

/// `P_n(x)` and its derivative by the three-term recurrence, for |x| < 1.
fn legendre(n: usize, x: f64) -> (f64, f64) {
    let (mut before, mut value) = (0.0, 1.0);
    for j in 0..n {
        let j = j as f64;
        let next = ((2.0 * j + 1.0) * x * value - j * before) / (j + 1.0);
        before = value;
        value = next;
    }
    (value, n as f64 * (before - x * value) / (1.0 - x * x))
}

#[cfg(test)]
mod tests {
    use super::gauss_legendre;

    /// Five-point nodes in closed form (M. Abramowitz, I. Stegun, table 25.4): to a few units of rounding.
    #[test]
    fn five_nodes_are_the_closed_form() {
        let outer = (5.0 + 2.0 * (10.0f64 / 7.0).sqrt()).sqrt() / 3.0;
        let rule = gauss_legendre(5);
        assert!((rule.nodes[4] - outer).abs() < 4e-16 && (rule.nodes[0] + outer).abs() < 4e-16);
        assert!((rule.weights[4] - (322.0 - 13.0 * 70f64.sqrt()) / 900.0).abs() < 1e-15);
    }

    /// Exact for x^k up to k = 2n - 1; rounding grows slowly with n.
    #[test]
    fn powers_are_integrated_exactly() {
        for n in [1, 2, 3, 16, 33, 64, 200] {
            let rule = gauss_legendre(n);
            for k in 0..2 * n {
                let power = i32::try_from(k).unwrap();
                let given = rule.integrate(-1.0, 1.0, |x| x.powi(power));
                let exact = if k % 2 == 0 { 2.0 / (k as f64 + 1.0) } else { 0.0 };
                assert!((given - exact).abs() < 1e-14, "n = {n}, k = {k}: {given}");
            }
        }
    }
}
