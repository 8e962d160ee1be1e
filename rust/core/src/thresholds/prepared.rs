//! A route made ready: equations factored along every leg, matching at every crossing.

use super::columns::{Columns, Family, LegColumns};
use super::crossing::Crossing;
use super::inputs::Inputs;
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
/// Powers a and b of the quark densities `x^a (1-x)^b` on which steps are judged, sea-like and valence-like; the gluon
/// that goes with both is sea-like.
const PROBES: [(f64, i32); 2] = [(-0.2, 6), (0.6, 3)];

/// Everything that serves all columns of a route.
pub struct Prepared {
    /// The route.
    pub route: Route,
    /// One a leg.
    pub(super) stretches: Vec<Stretch>,
    /// One a leg; none for those that leave the start.
    pub(super) crossings: Vec<Option<Crossing>>,
    pub(super) offsets: Vec<usize>,
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

    /// Error estimate of the steps and the nf where it is largest: smooth densities of every family are carried along
    /// the route.
    ///
    /// Unit columns would tell little: the error of the steps lies in what is rough in x, of which a density has next
    /// to nothing.
    fn probe(&self, theory: &Theory, grid: &Grid, inputs: &Inputs) -> Result<(f64, usize)> {
        // Nearer to x = 1 values fall over decades, and no accuracy relative to them is promised.
        const LARGEST_X: f64 = 0.9;
        let judged: Vec<usize> = (0..grid.nodes()).filter(|&i| grid.u()[i] >= -LARGEST_X.ln()).collect();
        let errors = inputs
            .families(|one, other| self.same(one, other))
            .par_iter()
            .map(|&family| {
                let mut start = Columns::new(family, inputs.light, grid.nodes() + 1, PROBES.len());
                let shape = |(power, fall): (f64, i32), u: f64| (-power * u).exp() * (-(-u).exp_m1()).powi(fall);
                for (column, quark) in PROBES.into_iter().enumerate() {
                    for (i, &u) in grid.u().iter().enumerate() {
                        start.light_mut().row_mut(i)[column] = shape(quark, u);
                        if family == Family::Plus {
                            start.gluon_mut().row_mut(i)[column] = 2.0 * shape(PROBES[0], u);
                        }
                    }
                }
                for flavour in &inputs.heavy {
                    start.set_heavy(*flavour, start.empty());
                }
                let legs = self.carry(theory, &start, 0)?;
                Ok(legs.iter().map(|leg| leg.error(&judged)).collect())
            })
            .collect::<Result<Vec<Vec<f64>>>>()?;
        let legs = self.route.legs.iter().enumerate();
        let of_legs = legs.map(|(index, leg)| (errors.iter().map(|family| family[index]).fold(0.0, f64::max), leg.nf));
        Ok(of_legs.fold((0.0, 0), |worst, leg| if leg.0 > worst.0 { leg } else { worst }))
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
///
/// # Errors
/// [`Error::Argument`] and [`Error::Shape`] for options that are not allowed; [`Error::Tolerance`] where the steps do
/// not reach the tolerance; those of the running coupling; [`Error::Interrupted`].
pub fn prepare(
    theory: &Theory,
    grid: &Grid,
    options: &BuildOptions,
    watch: &dyn Watch,
) -> Result<(Prepared, Inputs, f64)> {
    options.check(grid)?;
    let kernels = kernels_on(grid, watch)?;
    let mut refinement = 0;
    loop {
        let plan = Plan { tolerance: options.tolerance, refinement };
        let prepared = Prepared::new(theory, grid, &kernels, options, &plan, watch)?;
        let inputs = Inputs::of(&prepared.route, options.start_nf, &options.intrinsic);
        let (error, nf) = prepared.probe(theory, grid, &inputs)?;
        if error <= options.tolerance {
            return Ok((prepared, inputs, error));
        }
        if refinement == MOST_REFINEMENTS {
            let (tolerance, steps) = (options.tolerance, prepared.steps());
            return Err(Error::Tolerance { nf, reached: error, tolerance, steps });
        }
        refinement += 1;
    }
}
