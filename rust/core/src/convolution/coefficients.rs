//! Coefficient functions of light quarks on a grid, one set for each grid.
//!
//! Apart from the splitting functions: who only evolves does not pay for them.

use super::formulas::{at_nf, convolve};
use super::kept::Kept;
use super::matrices::Convolved;
use crate::error::Result;
use crate::grid::Grid;
use crate::kernels::coefficients::{Coefficient, StructureFunction, kernel};
use crate::kernels::kernel::Kernel;
use crate::numerics::blocks::Matrix;
use crate::watch::Watch;
use std::collections::HashMap;
use std::sync::Arc;

type Key = (usize, StructureFunction, Coefficient);

/// All coefficient functions on one grid; each is a polynomial in nf, one entry a power.
pub struct CoefficientSet {
    coefficients: HashMap<Key, Vec<Convolved>>,
    nodes: usize,
}

impl CoefficientSet {
    /// `(node, node)`: the part `a^order` of a structure function at the nodes from the nodal values of a density,
    /// `mu_r = mu_f = Q`; zero for what is not known.
    pub fn matrix(&self, order: usize, function: StructureFunction, coefficient: Coefficient, nf: f64) -> Matrix {
        let terms = self.coefficients.get(&(order, function, coefficient));
        at_nf(terms.map_or(&[], Vec::as_slice), nf, self.nodes).matrix
    }
}

/// The set of a grid, computed the first time an equal grid asks.
///
/// # Errors
/// [`crate::error::Error::Interrupted`] where the watch says stop.
pub fn coefficients_on(grid: &Grid, watch: &dyn Watch) -> Result<Arc<CoefficientSet>> {
    static SETS: Kept<CoefficientSet> = Kept::new();
    SETS.of(grid, || compute(grid, watch))
}

fn compute(grid: &Grid, watch: &dyn Watch) -> Result<CoefficientSet> {
    let kernels: Vec<(Key, Kernel)> = StructureFunction::ALL
        .into_iter()
        .flat_map(|function| (0..=function.highest_order()).map(move |order| (order, function)))
        .flat_map(|(order, function)| Coefficient::ALL.map(|coefficient| (order, function, coefficient)))
        .map(|key| (key, kernel(key.0, key.1, key.2)))
        .filter(|(_, kernel)| !kernel.is_zero())
        .collect();
    let matrices = convolve(grid, kernels.iter().map(|(_, kernel)| kernel), watch)?;
    let coefficients = kernels.iter().map(|(key, _)| *key).zip(matrices).collect();
    Ok(CoefficientSet { coefficients, nodes: grid.nodes() })
}
