//! The value of a nodal function at any x, and its integrals.

use super::Grid;
use crate::error::{Error, Result};
use crate::numerics::gauss_legendre::gauss_legendre;

/// How far below `x_min` an argument may lie, relatively, and still count as `x_min`: the rounding of `exp` and `ln`.
const ROUNDING: f64 = 1e-13;

impl Grid {
    /// Values of all cardinal functions at `x`, one entry a node: `F(x) = sum_j row_j F_j`.
    ///
    /// # Errors
    /// [`Error::OutOfRange`] where x is not in `[x_min, 1]`.
    pub fn cardinals(&self, x: f64, row: &mut [f64]) -> Result<()> {
        let u = -x.ln();
        if !(x <= 1.0 && x >= self.x_min() * (1.0 - ROUNDING)) {
            return Err(Error::OutOfRange {
                name: "x",
                value: format!("{x:?}"),
                allowed: format!("x must lie in [{:?}, 1]", self.x_min()),
            });
        }
        let u = u.min(self.u_max());
        let panel = self.edges()[1..].partition_point(|&edge| edge < u).min(self.panels() - 1);
        let mut local = vec![0.0; self.degrees()[panel] + 1];
        self.panel(panel).cardinals(u, &mut local);
        row.fill(0.0);
        self.scatter(panel, &local, |j, value| row[j] += value);
        Ok(())
    }

    /// Gives the values of a panel's cardinal functions to `take(node, value)`; the dropped node x = 1 is left out.
    pub fn scatter(&self, panel: usize, local: &[f64], mut take: impl FnMut(usize, f64)) {
        let start = self.owned(panel).start;
        for (j, &value) in local.iter().enumerate() {
            if start + j > 0 {
                take(start + j - 1, value);
            }
        }
    }

    /// Weights with `sum_j w_j F_j = int_(x_min)^1 x^power F(x) dx/x`.
    ///
    /// By Gauss-Legendre quadrature on pieces of each panel short enough for `e^(-power u)`.
    pub fn moment_weights(&self, power: f64) -> Vec<f64> {
        let rule = gauss_legendre(40);
        let mut weights = vec![0.0; self.nodes()];
        for panel in 0..self.panels() {
            let (from, to) = (self.edges()[panel], self.edges()[panel + 1]);
            let pieces = ((to - from) * power.abs() / 8.0).ceil().max(1.0);
            let mut local = vec![0.0; self.degrees()[panel] + 1];
            for piece in 0..pieces as usize {
                let half = 0.5 * (to - from) / pieces;
                let middle = from + half * (2 * piece + 1) as f64;
                for (node, weight) in rule.nodes.iter().zip(&rule.weights) {
                    let u = middle + half * node;
                    self.panel(panel).cardinals(u, &mut local);
                    let factor = half * weight * (-power * u).exp();
                    self.scatter(panel, &local, |j, value| weights[j] += factor * value);
                }
            }
        }
        weights
    }
}
