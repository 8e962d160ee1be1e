//! Matrices kept for the life of the process, one set for each grid.

use super::matrices::{Convolved, Functions, integrate};
use crate::error::Result;
use crate::grid::Grid;
use crate::kernels::kernel::Kernel;
use crate::kernels::matching::{self, Element, HeavyGluonForm, MassKind};
use crate::kernels::splitting::{self, Channel};
use crate::numerics::endpoint::Point;
use crate::watch::Watch;
use std::collections::HashMap;
use std::sync::{Arc, Mutex, OnceLock, PoisonError};

/// Orders of matching: a^1 and a^2.
const MATCHING_ORDERS: [usize; 2] = [1, 2];
/// Powers of `ln(mu^2/m^2)` in the matching: 0, 1, 2.
const LOGARITHMS: usize = 3;

type MatchingKey = (usize, Element, MassKind, HeavyGluonForm);

/// All kernels on one grid; each is a polynomial in nf, one entry a power.
pub struct KernelSet {
    splitting: HashMap<(usize, Channel), Vec<Convolved>>,
    matching: HashMap<MatchingKey, [Vec<Convolved>; LOGARITHMS]>,
    nodes: usize,
}

impl KernelSet {
    /// The splitting function of `a^(order+1)` for nf flavours; zero for an order that is not known.
    pub fn splitting(&self, order: usize, channel: Channel, nf: f64) -> Convolved {
        self.at_nf(self.splitting.get(&(order, channel)).map_or(&[], Vec::as_slice), nf)
    }

    /// Whether that splitting function vanishes for every nf.
    pub fn splitting_is_zero(&self, order: usize, channel: Channel) -> bool {
        self.splitting.get(&(order, channel)).is_none_or(Vec::is_empty)
    }

    /// The `a^order` part of a matching element at `log = ln(mu^2/m^2)`, nl light flavours.
    pub fn matching(
        &self,
        order: usize,
        element: Element,
        kind: MassKind,
        form: HeavyGluonForm,
        log: f64,
        nl: f64,
    ) -> Convolved {
        let mut sum = Convolved::zeros(self.nodes);
        if let Some(powers) = self.matching.get(&(order, element, kind, form)) {
            for (power, terms) in powers.iter().enumerate() {
                sum.add_scaled(log.powi(power as i32), &self.at_nf(terms, nl));
            }
        }
        sum
    }

    fn at_nf(&self, terms: &[Convolved], nf: f64) -> Convolved {
        let mut sum = Convolved::zeros(self.nodes);
        for (power, term) in terms.iter().enumerate() {
            sum.add_scaled(nf.powi(power as i32), term);
        }
        sum
    }
}

/// The set of a grid, computed the first time an equal grid asks.
///
/// # Errors
/// [`crate::error::Error::Interrupted`] where the watch says stop.
pub fn kernels_on(grid: &Grid, watch: &dyn Watch) -> Result<Arc<KernelSet>> {
    type Key = (Vec<u64>, Vec<usize>);
    static SETS: OnceLock<Mutex<HashMap<Key, Arc<KernelSet>>>> = OnceLock::new();
    let key = (grid.edges().iter().map(|edge| edge.to_bits()).collect(), grid.degrees().to_vec());
    let sets = SETS.get_or_init(Mutex::default);
    if let Some(set) = sets.lock().unwrap_or_else(PoisonError::into_inner).get(&key) {
        return Ok(Arc::clone(set));
    }
    // Computed outside the lock: two threads that ask at once may both compute, and get the same bits.
    let set = Arc::new(compute(grid, watch)?);
    sets.lock().unwrap_or_else(PoisonError::into_inner).insert(key, Arc::clone(&set));
    Ok(set)
}

/// A user's own kernel, its regular part given at [`super::quadrature_z`].
///
/// # Errors
/// [`crate::error::Error::Interrupted`] where the watch says stop.
pub fn convolve_values(grid: &Grid, regular: &[f64], plus: &[f64], local: f64, watch: &dyn Watch) -> Result<Convolved> {
    let mut parts = integrate(grid, &Functions::Values(&[regular]), plus.len(), watch)?;
    let mut kernel = parts.remove(0);
    for (coefficient, part) in plus.iter().zip(&parts) {
        kernel.add_scaled(*coefficient, part);
    }
    kernel.add_scaled(local, &Convolved::identity(grid.nodes()));
    Ok(kernel)
}

fn compute(grid: &Grid, watch: &dyn Watch) -> Result<KernelSet> {
    let splitting: Vec<_> = (0..splitting::ORDERS)
        .flat_map(|order| Channel::ALL.map(|channel| ((order, channel), splitting::kernel(order, channel))))
        .filter(|(_, kernel)| !kernel.is_zero())
        .collect();
    let matching: Vec<(MatchingKey, [Kernel; LOGARITHMS])> = matching_keys()
        .map(|key| (key, matching::kernel(key.0, key.1, key.2, key.3)))
        .filter(|(_, powers)| !powers.iter().all(Kernel::is_zero))
        .collect();

    let mut formulas = Formulas::default();
    let of_matching = matching.iter().flat_map(|(_, powers)| powers);
    for kernel in splitting.iter().map(|(_, kernel)| kernel).chain(of_matching) {
        formulas.collect(kernel);
    }
    let parts = integrate(grid, &Functions::Formulas(&formulas.regular), formulas.plus, watch)?;

    let assemble = |kernel: &Kernel| formulas.assemble(kernel, &parts, grid.nodes());
    Ok(KernelSet {
        splitting: splitting.iter().map(|(key, kernel)| (*key, assemble(kernel))).collect(),
        matching: matching.iter().map(|(key, powers)| (*key, powers.each_ref().map(assemble))).collect(),
        nodes: grid.nodes(),
    })
}

fn matching_keys() -> impl Iterator<Item = MatchingKey> {
    MATCHING_ORDERS.into_iter().flat_map(|order| {
        Element::ALL.into_iter().flat_map(move |element| {
            [MassKind::Pole, MassKind::Msbar].into_iter().flat_map(move |kind| {
                [HeavyGluonForm::Exact, HeavyGluonForm::Compact].map(move |form| (order, element, kind, form))
            })
        })
    })
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
