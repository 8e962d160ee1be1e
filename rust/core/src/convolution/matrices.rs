//! Kernel functions times quadrature points times cardinal values: rows of convolution matrices.
//!
//! A kernel's matrix is put together from those of ordinary functions, the few universal matrices of
//! `[ln^k(1-z)/(1-z)]_+` and the unit matrix, so each function is integrated once whatever it serves.

use super::below::BelowRule;
use super::points::NodePoints;
use crate::error::Result;
use crate::grid::Grid;
use crate::numerics::blocks::{Matrix, multiply_add};
use crate::numerics::endpoint::Point;
use crate::watch::Watch;
use rayon::prelude::*;
use std::sync::atomic::{AtomicUsize, Ordering};

/// What one kernel does on a grid.
#[derive(Debug, Clone, PartialEq)]
pub struct Convolved {
    /// `(node, node)`, block lower triangular: values of `x (P * f)(x)` from those of `x f(x)`.
    pub matrix: Matrix,
    /// Momentum `int_0^(x_min) dx x (P * f)(x)` that `f` above `x_min` gives to what lies below: one weight a node.
    pub momentum_below: Vec<f64>,
    /// Number `int_0^(x_min) dx (P * f)(x)`, as above. Finite for kernels without 1/z; used for those alone.
    pub number_below: Vec<f64>,
}

impl Convolved {
    /// Nothing at all.
    pub fn zeros(nodes: usize) -> Self {
        Self { matrix: Matrix::zeros(nodes, nodes), momentum_below: vec![0.0; nodes], number_below: vec![0.0; nodes] }
    }

    /// `delta(1-z)`.
    pub fn identity(nodes: usize) -> Self {
        Self { matrix: Matrix::identity(nodes), ..Self::zeros(nodes) }
    }

    /// Adds `factor` times another kernel.
    pub fn add_scaled(&mut self, factor: f64, other: &Self) {
        self.matrix.add_scaled(factor, &other.matrix);
        for (to, from) in
            [(&mut self.momentum_below, &other.momentum_below), (&mut self.number_below, &other.number_below)]
        {
            to.iter_mut().zip(from).for_each(|(value, add)| *value += factor * add);
        }
    }
}

/// The functions to integrate.
pub(super) enum Functions<'a> {
    /// Evaluated at each point.
    Formulas(&'a [fn(&Point) -> f64]),
    /// Values given at [`super::quadrature_z`], one slice a function.
    Values(&'a [&'a [f64]]),
}

impl Functions<'_> {
    fn len(&self) -> usize {
        match self {
            Self::Formulas(formulas) => formulas.len(),
            Self::Values(values) => values.len(),
        }
    }
}

/// The matrices of all functions, then of `[ln^k(1-z)/(1-z)]_+` for `k < plus`, rows in parallel.
pub(super) fn integrate(grid: &Grid, functions: &Functions, plus: usize, watch: &dyn Watch) -> Result<Vec<Convolved>> {
    let nodes = grid.nodes();
    let starts = first_points(grid, functions);
    let below = BelowRule::of(grid);
    let done = AtomicUsize::new(0);
    let rows: Vec<Row> = (0..nodes)
        .into_par_iter()
        .map(|i| {
            watch.check()?;
            let row = Row::of(grid, functions, plus, i, starts[i], &below);
            watch.progress(done.fetch_add(1, Ordering::Relaxed) + 1, nodes);
            Ok(row)
        })
        .collect::<Result<_>>()?;
    let mut all = vec![Convolved::zeros(nodes); functions.len() + plus];
    for (i, row) in rows.iter().enumerate() {
        for (k, convolved) in all.iter_mut().enumerate() {
            convolved.matrix.row_mut(i).copy_from_slice(row.values.row(k));
            if let Some((momentum, number)) = &row.below {
                convolved.momentum_below.copy_from_slice(momentum.row(k));
                convolved.number_below.copy_from_slice(number.row(k));
            }
        }
    }
    Ok(all)
}

/// Where the points of each node begin in lists of values over all points.
fn first_points(grid: &Grid, functions: &Functions) -> Vec<usize> {
    let mut next = 0;
    (0..grid.nodes())
        .map(|i| {
            let first = next;
            if matches!(functions, Functions::Values(_)) {
                next += super::points::count(grid, i);
            }
            first
        })
        .collect()
}

/// One row of every matrix.
struct Row {
    /// `(function, node)`.
    values: Matrix,
    /// `(function, node)` of momentum and number; from the last node, whose points reach furthest.
    below: Option<(Matrix, Matrix)>,
}

impl Row {
    fn of(grid: &Grid, functions: &Functions, plus: usize, i: usize, start: usize, below: &BelowRule) -> Self {
        let quadrature = NodePoints::of(grid, i);
        let weighted = weighted_values(functions, plus, &quadrature, start);
        let count = functions.len();
        let mut values = Matrix::zeros(count + plus, grid.nodes());
        for stretch in &quadrature.stretches {
            let cardinals = &stretch.cardinals;
            let mut local = Matrix::zeros(count + plus, cardinals.cols());
            multiply_add(
                local.part_mut(0..count, 0..cardinals.cols()),
                1.0,
                weighted.part(0..count, stretch.points.clone()),
                cardinals.part(0..cardinals.rows(), 0..cardinals.cols()),
            );
            add_plus_rows(&mut local, count, &weighted, stretch, grid, i);
            for k in 0..count + plus {
                let row = values.row_mut(k);
                grid.scatter(stretch.panel, local.row(k), |j, value| row[j] += value);
            }
        }
        let extent = grid.u()[i] - grid.edges()[grid.panel_of(i)];
        for k in 0..plus {
            values.row_mut(count + k)[i] += left_to_subtract(extent, k);
        }
        let below = (i + 1 == grid.nodes()).then(|| below.rows(grid, &quadrature, &weighted));
        Self { values, below }
    }
}

/// `(function, point)`: values times weights; the plus distributions as `ln^k(1-z)/(1-z)`.
fn weighted_values(functions: &Functions, plus: usize, quadrature: &NodePoints, start: usize) -> Matrix {
    let count = functions.len();
    let mut weighted = Matrix::zeros(count + plus, quadrature.points.len());
    for k in 0..count {
        let row = weighted.row_mut(k);
        match functions {
            Functions::Formulas(formulas) => {
                for ((value, point), weight) in row.iter_mut().zip(&quadrature.points).zip(&quadrature.weights) {
                    *value = weight * formulas[k](point);
                }
            }
            Functions::Values(values) => {
                for ((value, given), weight) in row.iter_mut().zip(&values[k][start..]).zip(&quadrature.weights) {
                    *value = weight * given;
                }
            }
        }
    }
    for k in 0..plus {
        let row = weighted.row_mut(count + k);
        for ((value, point), weight) in row.iter_mut().zip(&quadrature.points).zip(&quadrature.weights) {
            *value = weight * plus_density(point, k);
        }
    }
    weighted
}

/// `ln^k(1-z)/(1-z)`.
fn plus_density(point: &Point, k: usize) -> f64 {
    point.ln_1mz.powi(i32::try_from(k).unwrap_or(i32::MAX)) / point.one_minus_z
}

/// The plus distributions: in the node's own panel the value at z = 1 is subtracted from the cardinal functions
/// before the sum, so that small differences keep their digits.
fn add_plus_rows(
    local: &mut Matrix,
    count: usize,
    weighted: &Matrix,
    stretch: &super::points::Stretch,
    grid: &Grid,
    i: usize,
) {
    let owned = grid.owned(grid.panel_of(i));
    let own = (stretch.panel == grid.panel_of(i)).then(|| i + 1 - owned.start);
    for k in count..local.rows() {
        let weights = &weighted.row(k)[stretch.points.clone()];
        for (point, &weight) in weights.iter().enumerate() {
            let cardinals = stretch.cardinals.row(point);
            let row = local.row_mut(k);
            for (j, (value, cardinal)) in row.iter_mut().zip(cardinals).enumerate() {
                *value += weight * (cardinal - f64::from(own == Some(j)));
            }
        }
    }
}

/// What [`add_plus_rows`] leaves to subtract for t beyond the node's own panel, which reaches to `extent`:
/// `- int_0^z dz' ln^k(1-z')/(1-z')` with `z = e^-extent`, a multiple of F at the node.
pub(super) fn left_to_subtract(extent: f64, k: usize) -> f64 {
    let power = i32::try_from(k + 1).unwrap_or(i32::MAX);
    (-(-extent).exp_m1()).ln().powi(power) / f64::from(power)
}
