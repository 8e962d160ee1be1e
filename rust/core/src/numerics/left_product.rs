//! Rows times a solution that is dense in s: what acts on it from the left, each row at an `s` of its own.
//!
//! Which way when: many rows at few `s` want the solution evaluated there; rows that all have an `s` of their own are
//! cheaper multiplied by the solution at every node, since that is one product of matrices for all of them.

use super::blocks::{Matrix, View, multiply_add, view};
use super::chebyshev::Nodes;
use std::ops::Range;

/// Values of `s` at which the solution is evaluated together: each pass over its nodes serves as many.
const TOGETHER: usize = 8;

/// Fewer rows than this are multiplied together with the next, zeros included: a product has a cost of its own.
const FEW: usize = 32;

/// How the solution at the `s` of a row is had.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Way {
    /// It is evaluated once for neighbouring rows with the same `s`.
    Evaluated,
    /// Rows are multiplied by the solution at every node, and the products added with the weights of interpolation.
    AtNodes,
}

/// Rows that act on a solution from the left.
pub struct Rows<'a> {
    /// Where each acts.
    pub s: &'a [f64],
    /// Number of leading entries of each that may differ from zero.
    pub ends: &'a [usize],
    /// `(row, entry)`.
    pub values: &'a Matrix,
    /// How the solution is had.
    pub way: Way,
}

/// A solution by its values at nodes in s.
pub struct Sampled<'a> {
    /// The nodes.
    pub nodes: &'a Nodes,
    /// `(node, (row - first) * column)`.
    pub values: &'a Matrix,
    /// Its first row that is not zero.
    pub first: usize,
    /// Number of columns.
    pub cols: usize,
}

impl Sampled<'_> {
    /// `target += row * solution(s)`, one row of `target` for each; it may hold fewer columns than the solution.
    pub fn multiply_left(&self, rows: &Rows, target: &mut Matrix) {
        let mut weights = Matrix::zeros(rows.s.len(), self.nodes.points().len());
        for (row, &s) in rows.s.iter().enumerate() {
            self.nodes.cardinals(s, weights.row_mut(row));
        }
        match rows.way {
            Way::Evaluated => self.evaluated(rows, &weights, target),
            Way::AtNodes => self.at_nodes(rows, &weights, target),
        }
    }

    fn evaluated(&self, rows: &Rows, weights: &Matrix, target: &mut Matrix) {
        let places: Vec<Range<usize>> = runs(rows.s).collect();
        for together in places.chunks(TOGETHER) {
            let some = together[0].start..together[together.len() - 1].end;
            let end = rows.ends[some].iter().copied().max().unwrap_or(0);
            if end <= self.first {
                continue;
            }
            let (count, nodes, size) = (together.len(), weights.cols(), (end - self.first) * self.cols);
            let of_places = together.iter().flat_map(|run| weights.row(run.start)).copied().collect();
            let of_places = Matrix::from_values(count, nodes, of_places);
            let mut solutions = Matrix::zeros(count, size);
            multiply_add(
                solutions.part_mut(0..count, 0..size),
                1.0,
                of_places.part(0..count, 0..nodes),
                self.values.part(0..nodes, 0..size),
            );
            for (run, solution) in together.iter().zip(0..) {
                let solution = view(solutions.row(solution), end - self.first, self.cols);
                multiply(solution, self.first, rows, run.clone(), target);
            }
        }
    }

    fn at_nodes(&self, rows: &Rows, weights: &Matrix, target: &mut Matrix) {
        let (held, cols) = (self.values.cols() / self.cols, target.cols());
        for (group, end) in groups(rows.ends) {
            if end <= self.first {
                continue;
            }
            let (count, width) = (group.len(), end - self.first);
            let mut product = Matrix::zeros(count, cols);
            for node in 0..weights.cols() {
                product.values_mut().fill(0.0);
                let at_node = view(self.values.row(node), held, self.cols);
                multiply_add(
                    product.part_mut(0..count, 0..cols),
                    1.0,
                    rows.values.part(group.clone(), self.first..end),
                    at_node.submatrix(0, 0, width, cols),
                );
                for (i, row) in group.clone().enumerate() {
                    let weight = weights.row(row)[node];
                    let sums = target.row_mut(row).iter_mut().zip(product.row(i));
                    sums.for_each(|(sum, value)| *sum += weight * value);
                }
            }
        }
    }
}

/// `target += row * solution` for a solution that does not change, from its first row on that is not zero.
pub fn multiply_left(solution: View, first: usize, rows: &Rows, target: &mut Matrix) {
    multiply(solution, first, rows, 0..rows.s.len(), target);
}

/// Multiplies some rows by a solution of which row `first` is the first that is held.
fn multiply(solution: View, first: usize, rows: &Rows, some: Range<usize>, target: &mut Matrix) {
    let cols = target.cols();
    for (group, end) in groups(&rows.ends[some.clone()]) {
        let group = some.start + group.start..some.start + group.end;
        if end > first {
            multiply_add(
                target.part_mut(group.clone(), 0..cols),
                1.0,
                rows.values.part(group, first..end),
                solution.submatrix(0, 0, end - first, cols),
            );
        }
    }
}

/// Neighbouring rows to multiply in one go, with the largest of their ends: those with equal ends, and more where they
/// are few.
fn groups(ends: &[usize]) -> Vec<(Range<usize>, usize)> {
    let mut groups: Vec<(Range<usize>, usize)> = Vec::new();
    for run in runs(ends) {
        let end = ends[run.start];
        match groups.last_mut() {
            Some((group, largest)) if group.len() < FEW => (group.end, *largest) = (run.end, end.max(*largest)),
            _ => groups.push((run, end)),
        }
    }
    groups
}

/// Ranges of neighbours that are equal.
pub fn runs<T: PartialEq>(values: &[T]) -> impl Iterator<Item = Range<usize>> + '_ {
    let mut start = 0;
    values.chunk_by(|one, next| one == next).map(move |run| {
        start += run.len();
        start - run.len()..start
    })
}
