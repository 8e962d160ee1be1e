//! A route made ready: equations prepared along every leg, matching at every crossing.

use super::columns::Columns;
use super::crossing::Crossing;
use super::inputs::Inputs;
use super::leg_columns::LegColumns;
use super::options::BuildOptions;
use super::route::{Entry, Route};
use crate::convolution::{KernelSet, kernels_on};
use crate::error::{Error, Result};
use crate::evolution::{FixedFlavour, Plan, Sector, Stretch};
use crate::grid::Grid;
use crate::theory::Theory;
use crate::watch::Watch;
use rayon::prelude::*;
use std::collections::BTreeMap;

/// How many times the degree of the steps is raised before a build gives up.
const MOST_REFINEMENTS: u32 = 3;

/// Everything that serves all columns of a route.
pub struct Prepared {
    /// The route.
    pub route: Route,
    /// One a leg.
    pub(super) stretches: Vec<Stretch>,
    /// One a leg; none for those that leave the start.
    pub(super) crossings: Vec<Option<Crossing>>,
    offsets: Vec<usize>,
}

impl Prepared {
    /// Prepares every leg and makes every crossing.
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
            .collect::<Vec<_>>()
            .into_par_iter()
            .with_max_len(1)
            .map(|nf| (nf, FixedFlavour::new(theory, kernels, &options.further, nf, &offsets)))
            .collect();
        let stretches = route
            .legs
            .par_iter()
            .with_max_len(1)
            .map(|leg| {
                let (from, to) = (scale(theory, leg.from_q2, leg.nf)?, scale(theory, leg.to_q2, leg.nf)?);
                Stretch::new(&equations[&leg.nf], from, to, plan, watch)
            })
            .collect::<Result<_>>()?;
        let crossings = route
            .legs
            .par_iter()
            .with_max_len(1)
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

    /// Carries columns along every leg. Rows of panels before `first` are zero. The last `judged` columns are probes.
    pub fn carry(&self, theory: &Theory, start: &Columns, first: usize, judged: usize) -> Result<Vec<LegColumns>> {
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
            legs.push(LegColumns::new(entry, &self.stretches[index], leg.nf, &self.offsets, first, judged));
        }
        Ok(legs)
    }

    /// Whether two sectors evolve alike on every leg.
    pub fn same(&self, one: Sector, other: Sector) -> bool {
        self.stretches.iter().all(|stretch| stretch.same(one, other))
    }

    /// Number of steps over all legs.
    pub fn steps(&self) -> usize {
        self.stretches.iter().map(|stretch| stretch.division().count).sum()
    }
}

/// `s = ln a` at a factorisation scale.
pub fn scale(theory: &Theory, q2: f64, nf: usize) -> Result<f64> {
    theory.a_at_factorisation(q2, nf).map(f64::ln)
}

/// A route, what was carried along it, and how well.
pub struct Carried<T> {
    /// How accurate the steps were made in the end.
    pub plan: Plan,
    /// The route made ready.
    pub prepared: Prepared,
    /// What the input consists of.
    pub inputs: Inputs,
    /// What was carried.
    pub columns: T,
    /// The error estimated.
    pub error: f64,
}

/// Prepares a route and carries columns along it, finely enough for the tolerance.
///
/// `carry` returns what it carried and, for some or all of it, the error of each leg.
///
/// # Errors
/// [`Error::Argument`] and [`Error::Shape`] for options that are not allowed; [`Error::Tolerance`] where the steps do
/// not reach the tolerance; those of the running coupling; [`Error::Interrupted`].
pub fn carried<T>(
    theory: &Theory,
    grid: &Grid,
    options: &BuildOptions,
    watch: &dyn Watch,
    carry: impl Fn(&Prepared, &Inputs) -> Result<(T, Vec<Vec<f64>>)>,
) -> Result<Carried<T>> {
    options.check(grid)?;
    let kernels = kernels_on(grid, watch)?;
    let mut refinement = 0;
    loop {
        let plan = Plan { tolerance: options.tolerance, refinement };
        let prepared = Prepared::new(theory, grid, &kernels, options, &plan, watch)?;
        let inputs = Inputs::of(&prepared.route, options.start_nf, &options.intrinsic);
        let (columns, errors) = carry(&prepared, &inputs)?;
        let legs = prepared.route.legs.iter().enumerate();
        let of_legs = legs.map(|(index, leg)| (errors.iter().map(|each| each[index]).fold(0.0, f64::max), leg.nf));
        let (error, nf) = of_legs.fold((0.0, 0), |worst, leg| if leg.0 > worst.0 { leg } else { worst });
        if error <= options.tolerance {
            return Ok(Carried { plan, prepared, inputs, columns, error });
        }
        if refinement == MOST_REFINEMENTS {
            let (tolerance, steps) = (options.tolerance, prepared.steps());
            return Err(Error::Tolerance { nf, reached: error, tolerance, steps });
        }
        refinement += 1;
    }
}
