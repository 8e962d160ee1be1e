//! Smooth densities that go along with what is carried, to judge the steps on.
//!
//! Unit columns would tell little: the error of the steps lies in what is rough in x, of which a density has next to
//! nothing.

use super::columns::{Columns, Family};
use crate::grid::Grid;

/// Powers a and b of the quark densities `x^a (1-x)^b`, sea-like and valence-like; the gluon that goes with both is
/// sea-like.
const SHAPES: [(f64, i32); 2] = [(-0.2, 6), (0.6, 3)];

/// Number of probes.
pub const COUNT: usize = SHAPES.len();

/// Writes the probes to the last columns.
pub fn fill(start: &mut Columns, grid: &Grid) {
    let shape = |(power, fall): (f64, i32), u: f64| (-power * u).exp() * (-(-u).exp_m1()).powi(fall);
    let first = start.light_sum().cols() - COUNT;
    for (column, quark) in (first..).zip(SHAPES) {
        for (i, &u) in grid.u().iter().enumerate() {
            start.light_mut().row_mut(i)[column] = shape(quark, u);
            if start.family == Family::Plus {
                start.gluon_mut().row_mut(i)[column] = 2.0 * shape(SHAPES[0], u);
            }
        }
    }
}

/// The nodes on which the probes are judged.
pub fn nodes(grid: &Grid) -> Vec<usize> {
    // Nearer to x = 1 values fall over decades, and no accuracy relative to them is promised.
    const LARGEST_X: f64 = 0.9;
    (0..grid.nodes()).filter(|&i| grid.u()[i] >= -LARGEST_X.ln()).collect()
}
