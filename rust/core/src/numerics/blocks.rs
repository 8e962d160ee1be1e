//! Dense row-major matrices: products of sub-blocks and solves. The only file that calls a matrix library.
//!
//! Every call runs on the calling thread alone, so that bits do not depend on the number of threads; who has
//! independent pieces of work shares those out.

use faer::linalg::solvers::{PartialPivLu, Solve};
use faer::{Accum, Par};
use std::ops::Range;

/// A matrix, or a part of one, for reading.
pub type View<'a> = faer::MatRef<'a, f64>;
/// A matrix, or a part of one, for writing.
pub type ViewMut<'a> = faer::MatMut<'a, f64>;

/// A row-major matrix.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Matrix {
    rows: usize,
    cols: usize,
    data: Vec<f64>,
}

impl Matrix {
    /// All zeros.
    pub fn zeros(rows: usize, cols: usize) -> Self {
        Self { rows, cols, data: vec![0.0; rows * cols] }
    }

    /// The unit matrix.
    pub fn identity(n: usize) -> Self {
        let mut unit = Self::zeros(n, n);
        unit.data.iter_mut().step_by(n + 1).for_each(|value| *value = 1.0);
        unit
    }

    /// From `rows * cols` values in row-major order.
    pub fn from_values(rows: usize, cols: usize, data: Vec<f64>) -> Self {
        debug_assert_eq!(data.len(), rows * cols);
        Self { rows, cols, data }
    }

    /// Number of rows.
    pub fn rows(&self) -> usize {
        self.rows
    }

    /// Number of columns.
    pub fn cols(&self) -> usize {
        self.cols
    }

    /// All values in row-major order.
    pub fn values(&self) -> &[f64] {
        &self.data
    }

    /// All values in row-major order.
    pub fn values_mut(&mut self) -> &mut [f64] {
        &mut self.data
    }

    /// One row.
    pub fn row(&self, i: usize) -> &[f64] {
        &self.data[i * self.cols..(i + 1) * self.cols]
    }

    /// One row.
    pub fn row_mut(&mut self, i: usize) -> &mut [f64] {
        &mut self.data[i * self.cols..(i + 1) * self.cols]
    }

    /// The same values in another shape.
    #[must_use]
    pub fn reshaped(self, rows: usize, cols: usize) -> Self {
        Self::from_values(rows, cols, self.data)
    }

    /// Rows and columns exchanged.
    #[must_use]
    pub fn transposed(&self) -> Self {
        let mut other = Self::zeros(self.cols, self.rows);
        for i in 0..self.rows {
            for (j, value) in self.row(i).iter().enumerate() {
                other.row_mut(j)[i] = *value;
            }
        }
        other
    }

    /// The same with one more row and column: `last` as the row, zeros as the column.
    #[must_use]
    pub fn with_last_row(&self, last: &[f64]) -> Self {
        debug_assert_eq!(last.len(), self.cols);
        let mut larger = Self::zeros(self.rows + 1, self.cols + 1);
        for i in 0..self.rows {
            larger.row_mut(i)[..self.cols].copy_from_slice(self.row(i));
        }
        larger.row_mut(self.rows)[..self.cols].copy_from_slice(last);
        larger
    }

    /// Adds `factor * other`, of the same shape.
    pub fn add_scaled(&mut self, factor: f64, other: &Self) {
        debug_assert_eq!((self.rows, self.cols), (other.rows, other.cols));
        for (value, add) in self.data.iter_mut().zip(&other.data) {
            *value += factor * add;
        }
    }

    /// Multiplies every entry.
    pub fn scale(&mut self, factor: f64) {
        for value in &mut self.data {
            *value *= factor;
        }
    }

    /// A rectangular part, for reading.
    pub fn part(&self, rows: Range<usize>, cols: Range<usize>) -> View<'_> {
        View::from_row_major_slice(&self.data, self.rows, self.cols).submatrix(
            rows.start,
            cols.start,
            rows.len(),
            cols.len(),
        )
    }

    /// A rectangular part, for writing.
    pub fn part_mut(&mut self, rows: Range<usize>, cols: Range<usize>) -> ViewMut<'_> {
        ViewMut::from_row_major_slice_mut(&mut self.data, self.rows, self.cols).submatrix_mut(
            rows.start,
            cols.start,
            rows.len(),
            cols.len(),
        )
    }
}

/// Values in row-major order as a matrix.
pub fn view(values: &[f64], rows: usize, cols: usize) -> View<'_> {
    View::from_row_major_slice(values, rows, cols)
}

/// Values in row-major order as a matrix to write to.
pub fn view_mut(values: &mut [f64], rows: usize, cols: usize) -> ViewMut<'_> {
    ViewMut::from_row_major_slice_mut(values, rows, cols)
}

/// `target = factor * left * right`, on this thread.
pub fn multiply(mut target: ViewMut<'_>, factor: f64, left: View<'_>, right: View<'_>) {
    if left.ncols() == 0 {
        target.fill(0.0);
    } else if right.ncols() > 0 {
        faer::linalg::matmul::matmul(target, Accum::Replace, left, right, factor, Par::Seq);
    }
}

/// `target += factor * left * right`, on this thread.
pub fn multiply_add(target: ViewMut<'_>, factor: f64, left: View<'_>, right: View<'_>) {
    if left.ncols() > 0 && right.ncols() > 0 {
        faer::linalg::matmul::matmul(target, Accum::Add, left, right, factor, Par::Seq);
    }
}

/// A complex number: real and imaginary part.
pub type Complex = (f64, f64);

/// Eigenvalues of a small matrix and, for each, the real part of its vector.
///
/// # Panics
/// Where the QR iteration gives up, after 30 sweeps an eigenvalue: of small matrices of finite numbers none needs as
/// many.
pub fn eigenvectors(matrix: &Matrix) -> Vec<(Complex, Vec<f64>)> {
    let found = matrix.part(0..matrix.rows, 0..matrix.cols).eigen().expect("a small matrix of finite numbers");
    let (values, vectors) = (found.S(), found.U());
    let vector = |k: usize| (0..matrix.rows).map(|i| vectors[(i, k)].re).collect();
    (0..matrix.rows).map(|k| ((values[k].re, values[k].im), vector(k))).collect()
}

/// The inverse of a square matrix.
pub fn inverse(matrix: &Matrix) -> Matrix {
    let n = matrix.rows;
    let mut inverse = Matrix::identity(n);
    Factors::of(matrix).solve(inverse.part_mut(0..n, 0..n));
    inverse
}

/// A factored square matrix (LU with partial pivoting).
pub struct Factors {
    lu: PartialPivLu<f64>,
}

impl Factors {
    /// Factors a square matrix.
    pub fn of(matrix: &Matrix) -> Self {
        Self { lu: matrix.part(0..matrix.rows, 0..matrix.cols).partial_piv_lu() }
    }

    /// Replaces the right-hand sides by the solutions.
    pub fn solve(&self, right: ViewMut<'_>) {
        self.lu.solve_in_place(right);
    }
}
