//! `dE/ds = A(s) E` for a block lower triangular `A`, by collocation at Chebyshev nodes, with dense output.
//!
//! On a step of length h with nodes `s_0 .. s_m` the solution is the polynomial of degree m with
//! `E_j = E_0 + (h/2) sum_k S_jk A(s_k) E_k`, S the integration matrix. This is implicit (stiff parts of A do no harm) and
//! converges geometrically in m. Row panel p depends on the panels before it alone: the system is solved panel by
//! panel, with one LU factorisation of `m n_p` unknowns for each, which serve any number of columns.

use super::blocks::{Factors, Matrix, multiply_add};
use super::chebyshev::{Nodes, coefficients, integration_matrix};

/// One step, factored: independent of what it is applied to.
pub struct Step {
    nodes: Nodes,
    /// `(h/2) S`, rows 1..=m, columns 0..=m.
    integration: Matrix,
    /// `A` at every node.
    generators: Vec<Matrix>,
    /// One for each row panel.
    factors: Vec<Factors>,
    offsets: Vec<usize>,
}

/// What a step makes of its start: the solution at every node.
pub struct Dense {
    pub(super) nodes: Nodes,
    /// `(node, row * column)`.
    pub(super) values: Matrix,
    pub(super) rows: usize,
    pub(super) cols: usize,
}

impl Step {
    /// Prepares the step from `from` to `to` with a polynomial of `degree` in s.
    ///
    /// `generator(s)` is `A(s)`, block lower triangular with panels between `offsets`.
    pub fn new(from: f64, to: f64, degree: usize, offsets: &[usize], generator: impl Fn(f64) -> Matrix) -> Self {
        let nodes = Nodes::new(from, to, degree);
        let half = 0.5 * (to - from);
        let rows = integration_matrix(degree)[1..].iter().flatten().map(|s| half * s).collect();
        let integration = Matrix::from_values(degree, degree + 1, rows);
        let generators = nodes.points().iter().map(|&s| generator(s)).collect();
        let mut step = Self { nodes, integration, generators, factors: vec![], offsets: offsets.to_vec() };
        step.factors = (0..offsets.len() - 1).map(|panel| Factors::of(&step.system(panel))).collect();
        step
    }

    /// `1 - (h/2) S x A` of one panel, nodes 1..=m.
    fn system(&self, panel: usize) -> Matrix {
        let own = self.offsets[panel]..self.offsets[panel + 1];
        let (m, n) = (self.integration.rows(), own.len());
        let mut system = Matrix::identity(m * n);
        for j in 0..m {
            for r in 0..n {
                let row = system.row_mut(j * n + r);
                for (k, block) in row.chunks_exact_mut(n).enumerate() {
                    let s = self.integration.row(j)[k + 1];
                    let generator = &self.generators[k + 1].row(own.start + r)[own.clone()];
                    block.iter_mut().zip(generator).for_each(|(value, a)| *value -= s * a);
                }
            }
        }
        system
    }

    /// Carries `start` over the step. Rows before panel `first` are zero and stay so.
    pub fn solve(&self, start: &Matrix, first: usize) -> Dense {
        let (rows, cols) = (start.rows(), start.cols());
        let m = self.integration.rows();
        let mut solution = vec![Matrix::zeros(rows, cols); m + 1];
        solution[0] = start.clone();
        for panel in first..self.factors.len() {
            let own = self.offsets[panel]..self.offsets[panel + 1];
            let n = own.len();
            let mut right = self.right_hand_side(&solution, panel, first);
            self.factors[panel].solve(right.part_mut(0..m * n, 0..cols));
            for (j, at_node) in solution[1..].iter_mut().enumerate() {
                for r in 0..n {
                    at_node.row_mut(own.start + r).copy_from_slice(right.row(j * n + r));
                }
            }
        }
        let values = solution.iter().flat_map(Matrix::values).copied().collect();
        Dense { nodes: self.nodes.clone(), values: Matrix::from_values(m + 1, rows * cols, values), rows, cols }
    }

    /// `E_0 + (h/2) sum_k S_jk (what A_k E_k has from panels already solved)`, nodes 1..=m stacked.
    fn right_hand_side(&self, solution: &[Matrix], panel: usize, first: usize) -> Matrix {
        let own = self.offsets[panel]..self.offsets[panel + 1];
        let (m, n, cols) = (self.integration.rows(), own.len(), solution[0].cols());
        let mut known = Matrix::zeros((m + 1) * n, cols);
        for (k, (generator, at_node)) in self.generators.iter().zip(solution).enumerate() {
            // At the start of the step the panel's own values are known as well.
            let end = if k == 0 { own.end } else { own.start };
            let solved = self.offsets[first]..end;
            multiply_add(
                known.part_mut(k * n..(k + 1) * n, 0..cols),
                1.0,
                generator.part(own.clone(), solved.clone()),
                at_node.part(solved, 0..cols),
            );
        }
        let known = known.reshaped(m + 1, n * cols);
        let start = &solution[0].values()[own.start * cols..own.end * cols];
        let mut right = Matrix::from_values(m, n * cols, start.repeat(m));
        multiply_add(
            right.part_mut(0..m, 0..n * cols),
            1.0,
            self.integration.part(0..m, 0..m + 1),
            known.part(0..m + 1, 0..n * cols),
        );
        right.reshaped(m * n, cols)
    }
}

impl Dense {
    /// The solution at several `s` inside the step.
    pub fn at_many(&self, s: &[f64]) -> Vec<Matrix> {
        let (count, size) = (self.nodes.points().len(), self.rows * self.cols);
        let mut weights = Matrix::zeros(s.len(), count);
        for (row, &s) in s.iter().enumerate() {
            self.nodes.cardinals(s, weights.row_mut(row));
        }
        let mut values = Matrix::zeros(s.len(), size);
        multiply_add(
            values.part_mut(0..s.len(), 0..size),
            1.0,
            weights.part(0..s.len(), 0..count),
            self.values.part(0..count, 0..size),
        );
        (0..s.len()).map(|row| Matrix::from_values(self.rows, self.cols, values.row(row).to_vec())).collect()
    }

    /// Another function of s, with the value `map(s, solution(s))` at every node.
    #[must_use]
    pub fn mapped(&self, map: impl Fn(f64, &Matrix) -> Matrix) -> Self {
        let at_node = |(row, &s): (usize, &f64)| {
            map(s, &Matrix::from_values(self.rows, self.cols, self.values.row(row).to_vec()))
        };
        let nodes = self.nodes.clone();
        let values: Vec<f64> =
            nodes.points().iter().enumerate().map(at_node).flat_map(|made| made.values().to_vec()).collect();
        let values = Matrix::from_values(nodes.points().len(), self.rows * self.cols, values);
        Self { nodes, values, rows: self.rows, cols: self.cols }
    }

    /// Adds a function of the same step.
    pub fn add(&mut self, other: &Self) {
        self.values.add_scaled(1.0, &other.values);
    }

    /// The solution at the end of the step.
    pub fn end(&self) -> Matrix {
        let last = self.values.rows() - 1;
        Matrix::from_values(self.rows, self.cols, self.values.row(last).to_vec())
    }

    /// Estimated error of each entry of some rows relative to its largest value over the step, the largest of all.
    ///
    /// The first Chebyshev coefficient in s that is left out, from the last two kept, which fall geometrically;
    /// infinite where the solution or its coefficients are not finite.
    pub fn error(&self, rows: &[usize]) -> f64 {
        let degree = self.nodes.points().len() - 1;
        let mut series = vec![0.0; degree + 1];
        let mut worst = 0.0_f64;
        for entry in rows.iter().flat_map(|row| row * self.cols..(row + 1) * self.cols) {
            series.iter_mut().enumerate().for_each(|(node, value)| *value = self.values.row(node)[entry]);
            let largest = series.iter().fold(0.0_f64, |most, value| most.max(value.abs()));
            let falling = coefficients(&series);
            let (before, last) = (falling[degree - 1].abs(), falling[degree].abs());
            // The largest of some values would pass over what is not a number.
            if !falling.iter().all(|coefficient| coefficient.is_finite()) {
                return f64::INFINITY;
            }
            if largest > 0.0 {
                worst = worst.max(last * if last < before { last / before } else { 1.0 } / largest);
            }
        }
        worst
    }
}
