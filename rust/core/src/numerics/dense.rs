//! The solution of a step: a polynomial in s, given by its values at the nodes, and how well it is known.

use super::blocks::{Matrix, multiply};
use super::chebyshev::Nodes;
use super::collocation::Collocation;
use std::sync::Arc;

/// What a step makes of its start: the solution at every node.
pub struct Dense {
    pub(super) nodes: Nodes,
    pub(super) rule: Arc<Collocation>,
    /// `(node, row * column)`.
    pub(super) values: Matrix,
    pub(super) rows: usize,
    pub(super) cols: usize,
    /// `(row, judged column)`: what further sweeps would have changed; the judged columns are the last ones.
    pub(super) left: Matrix,
}

impl Dense {
    /// The nodes.
    pub fn nodes(&self) -> &Nodes {
        &self.nodes
    }

    /// The solution at a node, in row-major order.
    pub fn values_at(&self, node: usize) -> &[f64] {
        self.values.row(node)
    }

    /// The solution at several `s` inside the step.
    pub fn at_many(&self, s: &[f64]) -> Vec<Matrix> {
        let size = self.rows * self.cols;
        let mut values = Matrix::zeros(s.len(), size);
        self.nodes.interpolate(s, &self.values, values.values_mut());
        (0..s.len()).map(|row| Matrix::from_values(self.rows, self.cols, values.row(row).to_vec())).collect()
    }

    /// The solution at the end of the step.
    pub fn end(&self) -> Matrix {
        Matrix::from_values(self.rows, self.cols, self.values_at(self.values.rows() - 1).to_vec())
    }

    /// Estimated error of the judged columns in some rows, relative to the largest value of each entry over the step,
    /// the largest of all.
    ///
    /// The first Chebyshev coefficient in s that is left out, from the last two kept, which fall geometrically, and
    /// what further sweeps would have changed; infinite where the solution or its coefficients are not finite.
    pub fn error(&self, rows: &[usize]) -> f64 {
        let (count, judged) = (self.values.rows(), self.left.cols());
        let mut worst = 0.0_f64;
        let mut last = Matrix::zeros(2, self.cols);
        for &row in rows {
            let values = self.values.part(0..count, row * self.cols..(row + 1) * self.cols);
            multiply(last.part_mut(0..2, 0..self.cols), 1.0, self.rule.last.part(0..2, 0..count), values);
            for (column, left) in (self.cols - judged..self.cols).zip(self.left.row(row)) {
                let largest = (0..count).map(|node| values[(node, column)].abs()).fold(0.0_f64, f64::max);
                let (before, last) = (last.row(0)[column].abs(), last.row(1)[column].abs());
                // The largest of some values would pass over what is not a number.
                if !(before + last + left).is_finite() {
                    return f64::INFINITY;
                }
                if largest > 0.0 {
                    let cut = last * if last < before { last / before } else { 1.0 };
                    worst = worst.max((cut + left) / largest);
                }
            }
        }
        worst
    }
}
