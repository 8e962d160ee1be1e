//! Splitting functions and matching on a grid, one set for each grid.

use super::formulas::{add_at_nf, at_nf, convolve};
use super::kept::Kept;
use super::matrices::{Convolved, Functions, integrate};
use crate::error::Result;
use crate::grid::Grid;
use crate::kernels::kernel::Kernel;
use crate::kernels::matching::{self, Element, HeavyGluonForm, MassKind};
use crate::kernels::splitting::{self, Channel};
use crate::numerics::blocks::Matrix;
use crate::watch::Watch;
use std::collections::HashMap;
use std::sync::{Arc, Mutex, PoisonError};

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
    derived: Mutex<HashMap<(usize, usize), Arc<Derived>>>,
}

/// Matrices that somebody makes of a set, by what they are for.
pub type Derived = Vec<Vec<Matrix>>;

impl KernelSet {
    /// The splitting function of `a^(order+1)` for nf flavours; zero for an order that is not known.
    pub fn splitting(&self, order: usize, channel: Channel, nf: f64) -> Convolved {
        at_nf(self.splitting.get(&(order, channel)).map_or(&[], Vec::as_slice), nf, self.nodes)
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
                let factor = log.powi(power as i32);
                if factor != 0.0 {
                    add_at_nf(&mut sum, factor, terms, nl);
                }
            }
        }
        sum
    }

    /// Matrices put together from the splitting functions of the set, computed the first time a label is asked for.
    pub fn derived(&self, label: (usize, usize), compute: impl FnOnce() -> Derived) -> Arc<Derived> {
        if let Some(known) = self.derived.lock().unwrap_or_else(PoisonError::into_inner).get(&label) {
            return Arc::clone(known);
        }
        // Computed outside the lock: two threads that ask at once may both compute, and get the same bits.
        let made = Arc::new(compute());
        self.derived.lock().unwrap_or_else(PoisonError::into_inner).insert(label, Arc::clone(&made));
        made
    }

    /// Derivative of [`KernelSet::matching`] with respect to the logarithm.
    pub fn matching_slope(
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
            for (power, terms) in powers.iter().enumerate().skip(1) {
                let factor = power as f64 * log.powi(power as i32 - 1);
                add_at_nf(&mut sum, factor, terms, nl);
            }
        }
        sum
    }
}

/// The set of a grid, computed the first time an equal grid asks.
///
/// # Errors
/// [`crate::error::Error::Interrupted`] where the watch says stop.
pub fn kernels_on(grid: &Grid, watch: &dyn Watch) -> Result<Arc<KernelSet>> {
    static SETS: Kept<KernelSet> = Kept::new();
    SETS.of(grid, || compute(grid, watch))
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

    let of_matching = matching.iter().flat_map(|(_, powers)| powers);
    let kernels = splitting.iter().map(|(_, kernel)| kernel).chain(of_matching);
    let mut matrices = convolve(grid, kernels, watch)?.into_iter();
    let mut next = || matrices.next().unwrap_or_default();
    Ok(KernelSet {
        splitting: splitting.iter().map(|(key, _)| (*key, next())).collect(),
        matching: matching.iter().map(|(key, _)| (*key, std::array::from_fn(|_| next()))).collect(),
        nodes: grid.nodes(),
        derived: Mutex::default(),
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
