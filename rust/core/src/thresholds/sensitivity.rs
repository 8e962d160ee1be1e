//! How a set of operators moves with the coupling, the masses and its own scale: exact derivatives.
//!
//! Operators depend on a parameter p through `s = ln a` at the ends of each leg and through the matching. On a leg the
//! columns are `C(s) = U(s, s_0) C_0`, `dC/ds = A(s) C`, so that at a fixed scale
//!
//! `dC/dp = A(s) C(s) ds/dp + U(s, s_0) [dC_0/dp - A(s_0) C_0 ds_0/dp]`;
//!
//! across a threshold `C' = M C` gives `dC' = dM C + M dC`. The bracket is carried over the same steps as the columns
//! themselves. Since `da/dp = beta(a) shift` with one shift a number of flavours
//! ([`crate::coupling::sensitivity`]), `A ds/dp` is `shift` times the splitting functions `P = A d ln a/d ln mu^2`.

use super::crossing_slope::CrossingSlope;
use super::leg_columns::LegColumns;
use super::operators::{Chunk, Evolution};
use super::prepared::{Prepared, scale};
use super::route::Entry;
use crate::convolution::{KernelSet, kernels_on};
use crate::coupling::sensitivity::Parameter;
use crate::error::{Error, Result};
use crate::evolution::FixedFlavour;
use crate::numerics::blocks::{Matrix, multiply};
use crate::watch::Watch;
use rayon::prelude::*;
use std::collections::BTreeMap;

/// What operators are differentiated with respect to.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Direction {
    /// A parameter of the coupling; threshold scales are held fixed.
    Parameter(Parameter),
    /// `ln mu_f^2` of the output.
    Scale,
}

/// What all columns need to move.
struct Moves<'a> {
    set: &'a Evolution,
    equations: BTreeMap<usize, FixedFlavour>,
    /// One a leg.
    shifts: Vec<f64>,
}

impl Evolution {
    /// The derivative of the set: served as the set itself, at the cost of a build.
    ///
    /// # Errors
    /// [`Error::Argument`] where this is a derivative itself; otherwise as [`super::build`].
    pub fn derivative(&self, direction: Direction, watch: &dyn Watch) -> Result<Self> {
        let (options, plan) = self.made.as_ref().ok_or_else(|| Error::Argument {
            name: "direction",
            value: format!("{direction:?}"),
            allowed: "a derivative has none of its own".into(),
        })?;
        let kernels = kernels_on(&self.grid, watch)?;
        let equations = (self.route.light..=self.route.most)
            .map(|nf| (nf, FixedFlavour::new(&self.theory, &kernels, &options.further, nf, self.grid.offsets())))
            .collect();
        let shift = |nf: usize| match direction {
            Direction::Parameter(parameter) => self.theory.shift(parameter, nf),
            Direction::Scale => Ok(1.0),
        };
        let shifts = self.route.legs.iter().map(|leg| shift(leg.nf)).collect::<Result<_>>()?;
        let moves = Moves { set: self, equations, shifts };
        let Direction::Parameter(parameter) = direction else {
            return Ok(self.with_legs(self.chunks.par_iter().map(|chunk| moves.along(chunk)).collect()));
        };
        let prepared = Prepared::new(&self.theory, &self.grid, &kernels, options, plan, watch)?;
        let crossings = moves.crossings(&prepared, &kernels, parameter)?;
        let legs = self.chunks.par_iter().map(|chunk| {
            watch.check()?;
            moves.carry(chunk, &prepared, &crossings)
        });
        Ok(self.with_legs(legs.collect::<Result<_>>()?))
    }
}

impl Moves<'_> {
    /// The matching at each crossing with its derivative.
    fn crossings<'p>(
        &self,
        prepared: &'p Prepared,
        kernels: &KernelSet,
        parameter: Parameter,
    ) -> Result<Vec<Option<CrossingSlope<'p>>>> {
        let nodes = self.set.grid.nodes();
        let of = |at| CrossingSlope::new(at, &self.set.theory, kernels, parameter, nodes);
        prepared.crossings.iter().map(|crossing| crossing.as_ref().map(of).transpose()).collect()
    }

    /// Derivatives of the columns of a chunk with respect to the scale, on every leg.
    fn along(&self, chunk: &Chunk) -> Vec<LegColumns> {
        (0..chunk.legs.len()).map(|leg| self.moving(chunk, leg)).collect()
    }

    /// Derivatives of the columns of a chunk with respect to a parameter, on every leg.
    fn carry(
        &self,
        chunk: &Chunk,
        prepared: &Prepared,
        crossings: &[Option<CrossingSlope>],
    ) -> Result<Vec<LegColumns>> {
        let mut legs: Vec<LegColumns> = Vec::new();
        for (index, leg) in self.set.route.legs.iter().enumerate() {
            let entered = match (leg.entry, &crossings[index]) {
                (Entry::Crossing { from_leg }, Some(crossing)) => {
                    let from_nf = self.set.route.legs[from_leg].nf;
                    let s = scale(&self.set.theory, leg.from_q2, from_nf)?;
                    let (before, moved) = (chunk.legs[from_leg].at(s), legs[from_leg].at(s));
                    if leg.nf > from_nf { crossing.up(&before, moved) } else { crossing.down(before, moved) }
                }
                _ => chunk.legs[index].at_start().nothing(),
            };
            let (stretch, offsets) = (&prepared.stretches[index], self.set.grid.offsets());
            legs.push(LegColumns::derivative(entered, self.moving(chunk, index), stretch, offsets, chunk.panel));
        }
        Ok(legs)
    }

    /// `A(s) C(s) ds/dp` on a leg.
    fn moving(&self, chunk: &Chunk, leg: usize) -> LegColumns {
        let equations = &self.equations[&self.set.route.legs[leg].nf];
        chunk.legs[leg].mapped(self.set.grid.offsets(), |sector, s, columns| {
            let generator = equations.generator(equations.representative(sector), s);
            let (rows, cols) = (columns.rows(), columns.cols());
            let mut product = Matrix::zeros(rows, cols);
            multiply(
                product.part_mut(0..rows, 0..cols),
                self.shifts[leg] * equations.slope(s),
                generator.part(0..rows, 0..rows),
                columns.part(0..rows, 0..cols),
            );
            product
        })
    }
}
