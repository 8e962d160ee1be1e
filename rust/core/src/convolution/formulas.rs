//! Many kernels at once: each distinct function is integrated once, then every kernel is put together.

use super::matrices::{Convolved, Functions, integrate};
use crate::error::Result;
use crate::grid::Grid;
use crate::kernels::kernel::Kernel;
use crate::numerics::endpoint::Point;
use crate::watch::Watch;
use std::collections::HashMap;

/// The matrices of all kernels: one list for each, one entry a power of nf.
pub(super) fn convolve<'a>(
    grid: &Grid,
    kernels: impl Iterator<Item = &'a Kernel> + Clone,
    watch: &dyn Watch,
) -> Result<Vec<Vec<Convolved>>> {
    let mut formulas = Formulas::default();
    kernels.clone().for_each(|kernel| formulas.collect(kernel));
    let parts = integrate(grid, &Functions::Formulas(&formulas.regular), formulas.plus, watch)?;
    Ok(kernels.map(|kernel| formulas.assemble(kernel, &parts, grid.nodes())).collect())
}

/// A polynomial in nf at one nf.
pub(super) fn at_nf(terms: &[Convolved], nf: f64, nodes: usize) -> Convolved {
    let mut sum = Convolved::zeros(nodes);
    add_at_nf(&mut sum, 1.0, terms, nf);
    sum
}

/// Adds `factor` times a polynomial in nf at one nf.
pub(super) fn add_at_nf(sum: &mut Convolved, factor: f64, terms: &[Convolved], nf: f64) {
    for (power, term) in terms.iter().enumerate() {
        sum.add_scaled(factor * nf.powi(power as i32), term);
    }
}

/// The distinct regular functions of many kernels, and how many plus distributions they need.
#[derive(Default)]
struct Formulas {
    regular: Vec<fn(&Point) -> f64>,
    index: HashMap<usize, usize>,
    plus: usize,
}

impl Formulas {
    fn collect(&mut self, kernel: &Kernel) {
        for term in &kernel.terms {
            self.plus = self.plus.max(term.plus.len());
            if let Some(formula) = term.regular {
                // Two kernels that name the same function share its integrals; were two functions merged by the
                // compiler they would have the same values.
                self.index.entry(formula as usize).or_insert_with(|| {
                    self.regular.push(formula);
                    self.regular.len() - 1
                });
            }
        }
    }

    fn assemble(&self, kernel: &Kernel, parts: &[Convolved], nodes: usize) -> Vec<Convolved> {
        kernel
            .terms
            .iter()
            .map(|term| {
                let mut sum = term
                    .regular
                    .map_or_else(|| Convolved::zeros(nodes), |formula| parts[self.index[&(formula as usize)]].clone());
                for (k, &coefficient) in term.plus.iter().enumerate() {
                    sum.add_scaled(coefficient, &parts[self.regular.len() + k]);
                }
                sum.add_scaled(term.local, &Convolved::identity(nodes));
                sum
            })
            .collect()
    }
}
