//! A route made ready: equations factored along every leg, matching at every crossing.

use super::columns::{Columns, LegColumns};
use super::crossing::Crossing;
use super::inputs::Inputs;
use super::route::{Entry, Route};
use crate::convolution::{KernelSet, kernels_on};
use crate::error::{Error, Result};
use crate::evolution::{FixedFlavour, FurtherKernel, Plan, Sector, Stretch};
use crate::grid::Grid;
use crate::theory::Theory;
use crate::watch::Watch;
use rayon::prelude::*;
use std::collections::BTreeMap;

/// How many times the degree of the steps is raised before a build gives up.
const MOST_REFINEMENTS: u32 = 3;

/// What is to be built.
pub struct BuildOptions {
    /// Scale of the input, GeV^2.
    pub start_q2: f64,
    /// Number of flavours of the input.
    pub start_nf: usize,
    /// Scales in GeV^2, with the number of flavours at each.
    pub asked: Vec<(f64, usize)>,
    /// Heavy flavours above `start_nf` that the input may hold.
    pub intrinsic: Vec<usize>,
    /// Relative accuracy of the steps.
    pub tolerance: f64,
    /// Kernels of the user.
    pub further: Vec<FurtherKernel>,
}

/// Everything that serves all columns of a route.
pub struct Prepared {
    /// The route.
    pub route: Route,
    /// One a leg.
    stretches: Vec<Stretch>,
    /// One a leg; none for those that leave the start.
    crossings: Vec<Option<Crossing>>,
    offsets: Vec<usize>,
}

impl Prepared {
    /// Factors every leg and makes every crossing.
    pub fn new(
        theory: &Theory,
        grid: &Grid,
        kernels: &KernelSet,
        options: &BuildOptions,
        plan: &Plan,
        watch: &dyn Watch,
    ) -> Result<Self> {
        let route = Route::plan(theory, options.start_q2, options.start_nf, &options.asked);
        let offsets = grid.offsets().to_vec();
        let equations: BTreeMap<usize, FixedFlavour> = (route.light..=route.most)
            .map(|nf| (nf, FixedFlavour::new(theory, kernels, &options.further, nf, &offsets)))
            .collect();
        let stretches = route
            .legs
            .par_iter()
            .map(|leg| {
                let (from, to) = (scale(theory, leg.from_q2, leg.nf)?, scale(theory, leg.to_q2, leg.nf)?);
                Stretch::new(&equations[&leg.nf], from, to, plan, watch)
            })
            .collect::<Result<_>>()?;
        let crossings = route
            .legs
            .iter()
            .map(|leg| match leg.entry {
                Entry::Start => Ok(None),
                Entry::Crossing { from_leg } => {
                    let below = leg.nf.min(route.legs[from_leg].nf);
                    Crossing::new(theory, kernels, below, grid.nodes()).map(Some)
                }
            })
            .collect::<Result<_>>()?;
        Ok(Self { route, stretches, crossings, offsets })
    }

    /// Carries columns along every leg. Rows of panels before `first` are zero.
    pub fn carry(&self, theory: &Theory, start: &Columns, first: usize) -> Result<Vec<LegColumns>> {
        let mut legs: Vec<LegColumns> = Vec::new();
        for (index, leg) in self.route.legs.iter().enumerate() {
            let entry = match (leg.entry, &self.crossings[index]) {
                (Entry::Crossing { from_leg }, Some(crossing)) => {
                    let from_nf = self.route.legs[from_leg].nf;
                    let mut columns = legs[from_leg].at(scale(theory, leg.from_q2, from_nf)?);
                    if leg.nf > from_nf {
                        crossing.up(&mut columns);
                    } else {
                        crossing.down(&mut columns);
                    }
                    columns
                }
                _ => start.clone(),
            };
            legs.push(LegColumns::new(entry, &self.stretches[index], leg.nf, &self.offsets, first));
        }
        Ok(legs)
    }

    /// Whether two sectors evolve alike on every leg.
    pub fn same(&self, one: Sector, other: Sector) -> bool {
        self.stretches.iter().all(|stretch| stretch.same(one, other))
    }

    /// Number of steps over all legs.
    pub fn steps(&self) -> usize {
        self.stretches.iter().map(Stretch::steps).sum()
    }
}

/// `s = ln a` at a factorisation scale.
pub fn scale(theory: &Theory, q2: f64, nf: usize) -> Result<f64> {
    theory.a_at_factorisation(q2, nf).map(f64::ln)
}

/// Factors the equations of a route finely enough for the tolerance; also returns the error reached.
pub fn prepare(
    theory: &Theory,
    grid: &Grid,
    options: &BuildOptions,
    watch: &dyn Watch,
) -> Result<(Prepared, Inputs, f64)> {
    let kernels = kernels_on(grid, watch)?;
    let mut refinement = 0;
    loop {
        let plan = Plan { tolerance: options.tolerance, refinement };
        let prepared = Prepared::new(theory, grid, &kernels, options, &plan, watch)?;
        let inputs = Inputs::of(&prepared, options);
        let error = inputs.probe(theory, grid, &prepared)?;
        if error <= options.tolerance {
            return Ok((prepared, inputs, error));
        }
        if refinement == MOST_REFINEMENTS {
            let (nf, tolerance, steps) = (options.start_nf, options.tolerance, prepared.steps());
            return Err(Error::Tolerance { nf, reached: error, tolerance, steps });
        }
        refinement += 1;
    }
}
