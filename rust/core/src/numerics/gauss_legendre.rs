//! Gauss-Legendre nodes and weights.

use std::f64::consts::PI;

/// Nodes and weights on `[-1, 1]`.
#[derive(Debug, Clone, PartialEq)]
pub struct Rule {
    /// Nodes in growing order.
    pub nodes: Vec<f64>,
    /// Weights, of sum 2.
    pub weights: Vec<f64>,
}

/// The rule of `n` points, exact for polynomials of degree `2n - 1`: Newton's method on `P_n`.
pub fn gauss_legendre(n: usize) -> Rule {
    let mut nodes = vec![0.0; n];
    let mut weights = vec![0.0; n];
    for i in 0..n {
        let mut x = -(PI * (i as f64 + 0.75) / (n as f64 + 0.5)).cos();
        let mut slope = 1.0;
        for _ in 0..6 {
            let (value, derivative) = legendre(n, x);
            x -= value / derivative;
            slope = legendre(n, x).1;
        }
        nodes[i] = x;
        weights[i] = 2.0 / ((1.0 - x * x) * slope * slope);
    }
    Rule { nodes, weights }
}

/// `P_n(x)` and its derivative by the three-term recurrence.
fn legendre(n: usize, x: f64) -> (f64, f64) {
    let (mut before, mut value) = (1.0, x);
    for k in 2..=n {
        let k = k as f64;
        (before, value) = (value, ((2.0 * k - 1.0) * x * value - (k - 1.0) * before) / k);
    }
    (value, n as f64 * (x * value - before) / (x * x - 1.0))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn integrates_polynomials_to_their_degree() {
        for n in [2, 5, 16, 24] {
            let rule = gauss_legendre(n);
            let power = 2 * n - 2;
            let sum: f64 =
                rule.nodes.iter().zip(&rule.weights).map(|(x, w)| w * x.powi(power as i32)).sum();
            assert!((sum - 2.0 / (power as f64 + 1.0)).abs() < 4e-15); // n roundings of order 1e-16
        }
    }
}
