//! What flows below `x_min`.
//!
//! A density `f` above `x_min` feeds what lies below: the momentum there grows by
//! `int_0^(x_min) dx x (P * f)(x) = int_0^1 dz z P(z) C(ln 1/z)` with
//! `C(t) = int_(u_max - t)^(u_max) du e^-u F(u)`, `u_max = ln(1/x_min)`; the number by the same without the `z` and
//! the `e^-u`. `C` vanishes at t = 0, so plus distributions need no subtraction and `delta(1-z)` gives nothing.

use super::points::NodePoints;
use crate::grid::Grid;
use crate::numerics::blocks::{Matrix, multiply_add};
use crate::numerics::chebyshev::Nodes;
use crate::numerics::gauss_legendre::gauss_legendre;

/// Degree added to that of a panel, so that integrals of `e^-u L_j(u)` are polynomials to rounding.
const EXTRA_DEGREE: usize = 18;

/// Integrals of cardinal functions up to `u_max`, ready to be taken at any t.
pub(super) struct BelowRule {
    panels: Vec<PanelPrimitive>,
}

struct PanelPrimitive {
    fine: Nodes,
    /// `(fine node, node of the panel)`: integral from the fine node to the right edge, with and without `e^-u`.
    momentum: Matrix,
    number: Matrix,
}

impl BelowRule {
    /// Prepares the integrals of a grid.
    pub fn of(grid: &Grid) -> Self {
        Self { panels: (0..grid.panels()).map(|panel| PanelPrimitive::of(grid, panel)).collect() }
    }

    /// `(function, node)` of momentum and number, from the quadrature of the last node.
    pub fn rows(&self, grid: &Grid, quadrature: &NodePoints, weighted: &Matrix) -> (Matrix, Matrix) {
        let points = quadrature.t.len();
        let mut momentum = Matrix::zeros(points, grid.nodes());
        let mut number = Matrix::zeros(points, grid.nodes());
        for (p, (&t, point)) in quadrature.t.iter().zip(&quadrature.points).enumerate() {
            self.add(grid, t, point.z, momentum.row_mut(p), number.row_mut(p));
        }
        let sum = |integrals: &Matrix| {
            let mut rows = Matrix::zeros(weighted.rows(), grid.nodes());
            multiply_add(
                rows.part_mut(0..weighted.rows(), 0..grid.nodes()),
                1.0,
                weighted.part(0..weighted.rows(), 0..points),
                integrals.part(0..points, 0..grid.nodes()),
            );
            rows
        };
        (sum(&momentum), sum(&number))
    }

    /// `z C(t)` of every cardinal function, and its counterpart for numbers.
    fn add(&self, grid: &Grid, t: f64, z: f64, momentum: &mut [f64], number: &mut [f64]) {
        let from = (grid.u_max() - t).max(0.0);
        for (panel, primitive) in self.panels.iter().enumerate().rev() {
            let (left, right) = (grid.edges()[panel], grid.edges()[panel + 1]);
            if right <= from {
                return;
            }
            let mut fine = vec![0.0; primitive.fine.points().len()];
            primitive.fine.cardinals(from.max(left), &mut fine);
            for (integrals, row, factor) in
                [(&primitive.momentum, &mut *momentum, z), (&primitive.number, &mut *number, 1.0)]
            {
                let mut local = vec![0.0; integrals.cols()];
                for (cardinal, k) in fine.iter().zip(0..) {
                    local.iter_mut().zip(integrals.row(k)).for_each(|(sum, value)| *sum += cardinal * value);
                }
                grid.scatter(panel, &local, |j, value| row[j] += factor * value);
            }
        }
    }
}

impl PanelPrimitive {
    fn of(grid: &Grid, panel: usize) -> Self {
        let (left, right) = (grid.edges()[panel], grid.edges()[panel + 1]);
        let degree = grid.degrees()[panel];
        let fine = Nodes::new(left, right, degree + EXTRA_DEGREE);
        let count = fine.points().len();
        let mut momentum = Matrix::zeros(count, degree + 1);
        let mut number = Matrix::zeros(count, degree + 1);
        let rule = gauss_legendre(degree / 2 + EXTRA_DEGREE);
        let mut cardinals = vec![0.0; degree + 1];
        for (k, &from) in fine.points().iter().enumerate() {
            let (middle, half) = (0.5 * (from + right), 0.5 * (right - from));
            for (node, weight) in rule.nodes.iter().zip(&rule.weights) {
                let u = middle + half * node;
                grid.panel(panel).cardinals(u, &mut cardinals);
                for (integrals, factor) in [(&mut momentum, (-u).exp()), (&mut number, 1.0)] {
                    let scale = half * weight * factor;
                    integrals.row_mut(k).iter_mut().zip(&cardinals).for_each(|(sum, l)| *sum += scale * l);
                }
            }
        }
        Self { fine, momentum, number }
    }
}
