//! Integration at Chebyshev nodes, and the basis in which it falls apart into pairs of nodes.
//!
//! With `S` the integration matrix without the first node, `x - S x A x = b` couples all nodes of a step. In a basis of
//! invariant planes of S, spanned by `e_1` and `e_2 = S e_1/s`, S acts as `[[0, -s], [s, t]]` with the trace t and the
//! determinant s^2 of the plane, and each plane is solved by itself with matrices of the size of A:
//! `(1 - t A + s^2 A^2) x_2 = b_2 + s A b_1`, `x_1 = b_1 - s A x_2`. This is exact where A does not depend on the node.

use super::blocks::{Factors, Matrix, eigenvectors};
use super::chebyshev::{coefficients, integration_matrix};
use std::collections::HashMap;
use std::sync::{Arc, Mutex, OnceLock, PoisonError};

/// What depends on the degree alone.
pub struct Collocation {
    /// `S`, rows 1..=m, columns 0..=m, on an interval of length 2.
    pub integration: Matrix,
    /// Rows that give the last Chebyshev coefficient but one and the last from values at the nodes.
    pub last: Matrix,
    /// From values at nodes 1..=m to the basis of planes.
    pub to_planes: Matrix,
    /// From the basis of planes to values at nodes.
    pub from_planes: Matrix,
    /// `(t, s)` of each plane, in the order of the basis.
    pub planes: Vec<(f64, f64)>,
    /// The eigenvalue of the one vector left over where m is odd, last in the basis.
    pub single: Option<f64>,
}

impl Collocation {
    /// That of a degree, at least 1, computed once in a process.
    pub fn of(degree: usize) -> Arc<Self> {
        static KNOWN: OnceLock<Mutex<HashMap<usize, Arc<Collocation>>>> = OnceLock::new();
        let mut known = KNOWN.get_or_init(Mutex::default).lock().unwrap_or_else(PoisonError::into_inner);
        Arc::clone(known.entry(degree).or_insert_with(|| Arc::new(Self::new(degree))))
    }

    fn new(degree: usize) -> Self {
        let rows = integration_matrix(degree)[1..].concat();
        let integration = Matrix::from_values(degree, degree + 1, rows);
        let inner = integration.part(0..degree, 1..degree + 1);
        let inner = Matrix::from_values(
            degree,
            degree,
            (0..degree * degree).map(|i| inner[(i / degree, i % degree)]).collect(),
        );
        let basis = Planes::of(&inner);
        let from_planes = Matrix::from_values(degree, degree, basis.vectors.concat()).transposed();
        let mut to_planes = Matrix::identity(degree);
        Factors::of(&from_planes).solve(to_planes.part_mut(0..degree, 0..degree));
        let (planes, single) = (basis.invariants, basis.single);
        Self { integration, last: last_coefficients(degree), to_planes, from_planes, planes, single }
    }

    /// Degree of the polynomials.
    pub fn degree(&self) -> usize {
        self.integration.rows()
    }
}

/// `(2, node)`: how the last two Chebyshev coefficients follow from values.
fn last_coefficients(degree: usize) -> Matrix {
    let mut last = Matrix::zeros(2, degree + 1);
    for node in 0..=degree {
        let mut unit = vec![0.0; degree + 1];
        unit[node] = 1.0;
        let series = coefficients(&unit);
        last.row_mut(0)[node] = series[degree - 1];
        last.row_mut(1)[node] = series[degree];
    }
    last
}

/// A real basis of invariant planes.
#[derive(Default)]
struct Planes {
    vectors: Vec<Vec<f64>>,
    invariants: Vec<(f64, f64)>,
    single: Option<f64>,
}

impl Planes {
    fn of(matrix: &Matrix) -> Self {
        let mut basis = Self::default();
        let mut real: Vec<(f64, Vec<f64>)> = Vec::new();
        for (value, vector) in eigenvectors(matrix) {
            if value.1 > 0.0 {
                basis.add(matrix, vector, 2.0 * value.0, value.0.hypot(value.1));
            } else if value.1 == 0.0 {
                real.push((value.0, vector));
            }
        }
        // All eigenvalues of S have positive real parts: two real ones make a plane like a complex pair.
        for two in real.chunks_exact(2) {
            let sum = two[0].1.iter().zip(&two[1].1).map(|(a, b)| a + b).collect();
            basis.add(matrix, sum, two[0].0 + two[1].0, (two[0].0 * two[1].0).sqrt());
        }
        if let [(value, vector)] = real.chunks_exact(2).remainder() {
            basis.vectors.push(vector.clone());
            basis.single = Some(*value);
        }
        basis
    }

    fn add(&mut self, matrix: &Matrix, first: Vec<f64>, trace: f64, s: f64) {
        let image = (0..matrix.rows()).map(|i| matrix.row(i).iter().zip(&first).map(|(a, b)| a * b).sum::<f64>() / s);
        let second = image.collect();
        self.vectors.push(first);
        self.vectors.push(second);
        self.invariants.push((trace, s));
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::numerics::blocks::multiply;

    fn product(left: &Matrix, right: &Matrix) -> Matrix {
        let (rows, inner, cols) = (left.rows(), left.cols(), right.cols());
        let mut product = Matrix::zeros(rows, cols);
        multiply(product.part_mut(0..rows, 0..cols), 1.0, left.part(0..rows, 0..inner), right.part(0..inner, 0..cols));
        product
    }

    /// `S` acts on each plane as the module says, up to the largest degree in use. S is far from normal: eigenvectors and
    /// the inverse of their basis lose a digit every other degree. Each sweep mends what that leaves, by a factor 100 or
    /// more as long as it is below 1e-2.
    #[test]
    fn planes_are_invariant() {
        for degree in 1..=18 {
            let tolerance = 1e-2;
            let rule = Collocation::new(degree);
            let square = |i: usize| rule.integration.row(i)[1..].to_vec();
            let inner = Matrix::from_values(degree, degree, (0..degree).flat_map(square).collect());
            let mut action = Matrix::zeros(degree, degree);
            for (plane, &(t, s)) in rule.planes.iter().enumerate() {
                let (first, second) = (2 * plane, 2 * plane + 1);
                action.row_mut(first)[second] = -s;
                action.row_mut(second)[first] = s;
                action.row_mut(second)[second] = t;
            }
            if let Some(single) = rule.single {
                action.row_mut(degree - 1)[degree - 1] = single;
            }
            let (image, expected) = (product(&inner, &rule.from_planes), product(&rule.from_planes, &action));
            let mut unit = product(&rule.to_planes, &rule.from_planes);
            unit.add_scaled(-1.0, &Matrix::identity(degree));
            for (a, b) in image.values().iter().zip(expected.values()) {
                assert!((a - b).abs() < tolerance, "degree {degree}: {a} instead of {b}");
            }
            let worst = unit.values().iter().fold(0.0_f64, |most, value| most.max(value.abs()));
            assert!(worst < tolerance, "degree {degree}: the inverse is off by {worst:e}");
        }
    }
}
