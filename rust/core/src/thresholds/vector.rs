//! Some densities to a few scales without building operators.

use super::columns::{Columns, Family};
use super::inputs::Inputs;
use super::leg_columns::LegColumns;
use super::options::BuildOptions;
use super::prepared::{Prepared, carried, scale};
use super::probes;
use crate::coupling::MOST;
use crate::error::Result;
use crate::evolution::{GLUON, check_flavour};
use crate::grid::Grid;
use crate::numerics::blocks::Matrix;
use crate::theory::Theory;
use crate::threads::costly_first;
use crate::watch::Watch;
use rayon::prelude::*;

/// Replicas carried together.
const PIECE: usize = 32;
/// Every family.
const FAMILIES: [Family; 4] = [Family::Plus, Family::Minus, Family::NsPlus, Family::NsMinus];
/// Scales written by one task.
const TOGETHER: usize = 8;

/// Densities by flavour (PDG numbers).
pub struct Vectors<'a> {
    /// Flavours of the input; heavy ones above `start_nf` that [`BuildOptions::intrinsic`] does not name are left out.
    pub in_flavours: &'a [i64],
    /// `(replica, flavour, node)`.
    pub values: &'a [f64],
    /// Flavours of the output.
    pub out_flavours: &'a [i64],
}

/// Densities at several scales.
#[derive(Debug, Clone, PartialEq)]
pub struct Evolved {
    /// `(scale, replica, flavour, node)`.
    pub values: Vec<f64>,
    /// Momentum that has gone below `x_min`: `(scale, replica)`.
    pub momentum: Vec<f64>,
    /// Number of `q - qbar` that has gone below `x_min`: `(scale, replica, quark)`, quarks 1 to 6.
    pub number: Vec<f64>,
}

/// Carries densities to every asked scale.
///
/// # Errors
/// As [`super::build`], and [`Error::Argument`] for a number that is none of a flavour.
///
/// [`Error::Argument`]: crate::error::Error::Argument
pub fn evolve(
    theory: &Theory,
    grid: &Grid,
    options: &BuildOptions,
    vectors: &Vectors,
    watch: &dyn Watch,
) -> Result<Evolved> {
    vectors.in_flavours.iter().chain(vectors.out_flavours).try_for_each(|&flavour| check_flavour(flavour))?;
    let row_in = vectors.in_flavours.len() * grid.nodes();
    let judged = probes::nodes(grid);
    let made = carried(theory, grid, options, watch, |prepared, inputs| {
        let pieces = vectors.values.chunks((PIECE * row_in).max(1)).enumerate();
        let pieces: Vec<Piece> =
            pieces.map(|(index, values)| Piece { inputs, vectors, values, grid, probed: index == 0 }).collect();
        let tasks: Vec<(&Piece, Family)> =
            pieces.iter().flat_map(|piece| FAMILIES.map(|family| (piece, family))).collect();
        let cost = |task: &(&Piece, Family)| if task.1 == Family::Plus { 6 } else { 1 };
        let legs = costly_first(&tasks, cost, |&(piece, family)| {
            watch.check()?;
            prepared.carry(theory, &piece.start(family), 0, piece.probes())
        })?;
        let errors = |legs: &Vec<LegColumns>| legs.iter().map(|leg| leg.error(&judged)).collect();
        let errors = legs.iter().map(errors).collect();
        Ok((legs, errors))
    })?;
    let replicas = vectors.values.len() / row_in.max(1);
    let output = Output { prepared: &made.prepared, legs: &made.columns, light: made.inputs.light, vectors, replicas };
    output.all(theory, &options.asked, grid.nodes())
}

/// What was carried, to be written flavour by flavour.
struct Output<'a> {
    prepared: &'a Prepared,
    /// For each piece of replicas and each family the legs.
    legs: &'a [Vec<LegColumns>],
    light: usize,
    vectors: &'a Vectors<'a>,
    replicas: usize,
}

impl Output<'_> {
    fn all(&self, theory: &Theory, asked: &[(f64, usize)], nodes: usize) -> Result<Evolved> {
        let row = self.vectors.out_flavours.len() * nodes;
        let mut evolved = Evolved {
            values: vec![0.0; asked.len() * self.replicas * row],
            momentum: vec![0.0; asked.len() * self.replicas],
            number: vec![0.0; asked.len() * self.replicas * MOST],
        };
        let part = |per_replica: usize| (TOGETHER * self.replicas * per_replica).max(1);
        evolved
            .values
            .par_chunks_mut(part(row))
            .zip(evolved.momentum.par_chunks_mut(part(1)))
            .zip(evolved.number.par_chunks_mut(part(MOST)))
            .zip(asked.par_chunks(TOGETHER))
            .with_max_len(1)
            .try_for_each(|(((values, momentum), number), asked)| {
                for leg in 0..self.prepared.route.legs.len() {
                    let mut here = Vec::new();
                    for (index, &(q2, nf)) in asked.iter().enumerate() {
                        if self.prepared.route.leg_of(q2, nf)? == leg {
                            here.push((index, scale(theory, q2, nf)?));
                        }
                    }
                    self.write(leg, &here, nodes, (&mut *values, &mut *momentum, &mut *number));
                }
                Ok(())
            })?;
        Ok(evolved)
    }

    /// Writes some scales of one leg: `(index of the scale, ln a)`.
    fn write(&self, leg: usize, here: &[(usize, f64)], nodes: usize, out: (&mut [f64], &mut [f64], &mut [f64])) {
        let (values, momentum, number) = out;
        let s: Vec<f64> = here.iter().map(|(_, s)| *s).collect();
        let row = self.vectors.out_flavours.len() * nodes;
        for (piece, legs) in self.legs.chunks(FAMILIES.len()).enumerate() {
            let families: Vec<Vec<Columns>> = legs.iter().map(|legs| legs[leg].at_many(&s)).collect();
            let count = PIECE.min(self.replicas - piece * PIECE);
            for (place, &(index, _)) in here.iter().enumerate() {
                let at = AtScale { families: &families, place, light: self.light, replicas: count };
                for replica in 0..count {
                    let own = index * self.replicas + piece * PIECE + replica;
                    momentum[own] = at.gluon(nodes, replica);
                    for quark in 1..=MOST {
                        number[own * MOST + quark - 1] = at.quark(quark, nodes, replica, false);
                    }
                    let flavours = self.vectors.out_flavours.iter();
                    for (target, flavour) in values[own * row..(own + 1) * row].chunks_mut(nodes).zip(flavours) {
                        for (i, value) in target.iter_mut().enumerate() {
                            *value = at.flavour(*flavour, i, replica);
                        }
                    }
                }
            }
        }
    }
}

/// The families at one scale.
struct AtScale<'a> {
    families: &'a [Vec<Columns>],
    /// Place of the scale.
    place: usize,
    light: usize,
    replicas: usize,
}

impl AtScale<'_> {
    fn gluon(&self, i: usize, replica: usize) -> f64 {
        self.families[0][self.place].gluon().row(i)[replica]
    }

    /// `q + qbar` or `q - qbar`.
    fn quark(&self, flavour: usize, i: usize, replica: usize, plus: bool) -> f64 {
        let kind = usize::from(!plus);
        let (sum, difference) = (&self.families[kind][self.place], &self.families[2 + kind][self.place]);
        if flavour > self.light {
            return sum.heavy(flavour).map_or(0.0, |heavy| heavy.row(i)[replica]);
        }
        let own = difference.light_sum().row(i)[(flavour - 1) * self.replicas + replica];
        own + sum.light_sum().row(i)[replica] / self.light as f64
    }

    fn flavour(&self, flavour: i64, i: usize, replica: usize) -> f64 {
        if flavour == GLUON {
            return self.gluon(i, replica);
        }
        let number = flavour.unsigned_abs() as usize;
        let (both, difference) = (self.quark(number, i, replica, true), self.quark(number, i, replica, false));
        0.5 * (both + flavour.signum() as f64 * difference)
    }
}

/// A few replicas.
struct Piece<'a> {
    inputs: &'a Inputs,
    vectors: &'a Vectors<'a>,
    values: &'a [f64],
    grid: &'a Grid,
    /// Whether probes go along.
    probed: bool,
}

impl Piece<'_> {
    fn replicas(&self) -> usize {
        self.values.len() / (self.vectors.in_flavours.len() * self.grid.nodes())
    }

    fn probes(&self) -> usize {
        if self.probed { probes::COUNT } else { 0 }
    }

    /// The combinations of a family, and the probes after them.
    fn start(&self, family: Family) -> Columns {
        let mut start = self.combinations(family);
        if self.probed {
            probes::fill(&mut start, self.grid);
        }
        start
    }

    /// One column a replica, for differences one for each light flavour and replica; then room for the probes.
    fn combinations(&self, family: Family) -> Columns {
        let (light, replicas) = (self.inputs.light, self.replicas());
        let plus = matches!(family, Family::Plus | Family::NsPlus);
        if matches!(family, Family::NsPlus | Family::NsMinus) {
            let mut start = Columns::new(family, light, self.grid.nodes() + 1, replicas * light + self.probes());
            for flavour in 1..=light {
                for other in 1..=light {
                    let weight = f64::from(flavour == other) - 1.0 / light as f64;
                    self.add(start.light_mut(), other, plus, weight, (flavour - 1) * replicas);
                }
            }
            return start;
        }
        let mut start = Columns::new(family, light, self.grid.nodes() + 1, replicas + self.probes());
        for flavour in 1..=light {
            self.add(start.light_mut(), flavour, plus, 1.0, 0);
        }
        for &flavour in &self.inputs.heavy {
            let mut heavy = start.empty();
            self.add(&mut heavy, flavour, plus, 1.0, 0);
            start.set_heavy(flavour, heavy);
        }
        if family == Family::Plus {
            self.add(start.gluon_mut(), 0, plus, 1.0, 0);
        }
        start
    }

    /// Adds `weight` times `q +- qbar` (0: the gluon) to columns from `first` on.
    fn add(&self, target: &mut Matrix, quark: usize, plus: bool, weight: f64, first: usize) {
        let nodes = self.grid.nodes();
        let row_in = self.vectors.in_flavours.len() * nodes;
        for (index, &flavour) in self.vectors.in_flavours.iter().enumerate() {
            let held = if flavour == GLUON { 0 } else { flavour.unsigned_abs() as usize };
            if held != quark {
                continue;
            }
            let weight = if flavour < 0 && !plus { -weight } else { weight };
            for (replica, values) in self.values.chunks_exact(row_in).enumerate() {
                for (i, value) in values[index * nodes..(index + 1) * nodes].iter().enumerate() {
                    target.row_mut(i)[first + replica] += weight * value;
                }
            }
        }
    }
}
