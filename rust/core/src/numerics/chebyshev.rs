//! Chebyshev (Lobatto) nodes on an interval: cardinal functions, coefficients, integration.
//!
//! Which one when: [`Nodes::cardinals`] to evaluate anywhere, [`coefficients`] to judge how well a function
//! is resolved, [`integration_matrix`] to solve an integral equation by collocation.

use super::blocks::{Matrix, multiply, view_mut};
use std::f64::consts::PI;

/// Chebyshev points of the second kind on `[from, to]`, in growing order, with barycentric weights.
#[derive(Debug, Clone, PartialEq)]
pub struct Nodes {
    points: Vec<f64>,
    weights: Vec<f64>,
}

impl Nodes {
    /// The `degree + 1` points `from + (to - from) (1 - cos(pi j/degree))/2`; `degree >= 1`.
    pub fn new(from: f64, to: f64, degree: usize) -> Self {
        let points = (0..=degree)
            .map(|j| match j {
                0 => from,
                j if j == degree => to,
                j => from + (to - from) * (0.5 * PI * j as f64 / degree as f64).sin().powi(2),
            })
            .collect();
        let weights = (0..=degree)
            .map(|j| {
                let sign = if j % 2 == 0 { 1.0 } else { -1.0 };
                if j == 0 || j == degree { 0.5 * sign } else { sign }
            })
            .collect();
        Self { points, weights }
    }

    /// The points in growing order.
    pub fn points(&self) -> &[f64] {
        &self.points
    }

    /// Values of all cardinal functions at `at`, written to `out` (one entry a node).
    ///
    /// The second barycentric form (J.-P. Berrut, L. N. Trefethen, SIAM Review 46 (2004) 501, eq. 4.2): stable for
    /// every argument inside the interval.
    pub fn cardinals(&self, at: f64, out: &mut [f64]) {
        self.barycentric(|point| at - point, out);
    }

    /// What polynomials with the values `(node, quantity)` are at several places, to `out`: `(place, quantity)`.
    pub fn interpolate(&self, places: &[f64], values: &Matrix, out: &mut [f64]) {
        let (count, size) = (self.points.len(), values.cols());
        let mut weights = Matrix::zeros(places.len(), count);
        for (row, &place) in places.iter().enumerate() {
            self.cardinals(place, weights.row_mut(row));
        }
        let weights = weights.part(0..places.len(), 0..count);
        multiply(view_mut(out, places.len(), size), 1.0, weights, values.part(0..count, 0..size));
    }

    /// The same as [`Self::cardinals`] a distance `t` to the left of node `j`, without the rounding of a subtraction near that node.
    pub fn cardinals_left_of(&self, j: usize, t: f64, out: &mut [f64]) {
        let node = self.points[j];
        self.barycentric(|point| (node - point) - t, out);
    }

    fn barycentric(&self, distance: impl Fn(f64) -> f64, out: &mut [f64]) {
        let mut sum = 0.0;
        for ((value, &point), &weight) in out.iter_mut().zip(&self.points).zip(&self.weights) {
            *value = weight / distance(point);
            sum += *value;
        }
        if sum.is_finite() {
            let scale = 1.0 / sum;
            for value in out.iter_mut() {
                *value *= scale;
            }
        } else {
            for (value, &point) in out.iter_mut().zip(&self.points) {
                *value = f64::from(distance(point) == 0.0);
            }
        }
    }
}

/// Coefficients of `T_0 .. T_degree` of the polynomial with these values at the nodes (growing order).
pub fn coefficients(values: &[f64]) -> Vec<f64> {
    let degree = values.len() - 1;
    let n = degree as f64;
    (0..=degree)
        .map(|k| {
            let sum: f64 = values
                .iter()
                .enumerate()
                .map(|(j, value)| {
                    // The node j of a growing order is cos(pi (1 - j/degree)).
                    let end = if j == 0 || j == degree { 0.5 } else { 1.0 };
                    end * value * (PI * k as f64 * (degree - j) as f64 / n).cos()
                })
                .sum();
            let end = if k == 0 || k == degree { 0.5 } else { 1.0 };
            2.0 / n * end * sum
        })
        .collect()
}

/// `S[j][k]`: integral of cardinal function `k` from the first node to node `j`, on an interval of length 2.
///
/// Integrates each `T_n` exactly by `int T_n = T_(n+1)/(2(n+1)) - T_(n-1)/(2(n-1))`.
pub fn integration_matrix(degree: usize) -> Vec<Vec<f64>> {
    let m = degree + 1;
    let mut matrix = vec![vec![0.0; m]; m];
    let nodes: Vec<f64> = (0..m).map(|j| -(PI * j as f64 / degree as f64).cos()).collect();
    let chebyshev = |n: usize, x: f64| (n as f64 * x.clamp(-1.0, 1.0).acos()).cos();
    let primitive = |n: usize, x: f64| match n {
        0 => x,
        1 => 0.5 * x * x,
        n => {
            let k = n as f64;
            0.5 * (chebyshev(n + 1, x) / (k + 1.0) - chebyshev(n - 1, x) / (k - 1.0))
        }
    };
    for k in 0..m {
        let mut unit = vec![0.0; m];
        unit[k] = 1.0;
        let series = coefficients(&unit);
        for (row, &x) in matrix.iter_mut().zip(&nodes) {
            row[k] = series.iter().enumerate().map(|(n, c)| c * (primitive(n, x) - primitive(n, -1.0))).sum();
        }
    }
    matrix
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn integration_is_exact_for_polynomials_of_the_degree() {
        let matrix = integration_matrix(7);
        let nodes = Nodes::new(-1.0, 1.0, 7);
        for (row, &x) in matrix.iter().zip(nodes.points()) {
            let integral: f64 = row.iter().zip(nodes.points()).map(|(s, p)| s * p.powi(6)).sum();
            // Eight products of numbers of order one: a few roundings.
            assert!((integral - (x.powi(7) + 1.0) / 7.0).abs() < 2e-15);
        }
    }

    #[test]
    fn cardinals_reproduce_a_polynomial_and_the_nodes() {
        let nodes = Nodes::new(0.3, 2.0, 9);
        let mut row = vec![0.0; 10];
        for at in [0.3, 0.31, 1.234_567, 2.0, nodes.points()[4]] {
            nodes.cardinals(at, &mut row);
            let value: f64 = row.iter().zip(nodes.points()).map(|(l, p)| l * p.powi(9)).sum();
            assert!((value - at.powi(9)).abs() < 1e-12, "{at}"); // values to 512, rounding 1e-16 each
        }
    }
}
