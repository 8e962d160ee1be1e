//! Some densities to a few scales without building operators.

use super::columns::{Columns, Family, LegColumns};
use super::inputs::Inputs;
use super::options::BuildOptions;
use super::prepared::{prepare, scale};
use crate::error::Result;
use crate::evolution::GLUON;
use crate::grid::Grid;
use crate::numerics::blocks::Matrix;
use crate::theory::Theory;
use crate::watch::Watch;
use rayon::prelude::*;

/// Replicas carried together.
const PIECE: usize = 32;
/// Every family.
const FAMILIES: [Family; 4] = [Family::Plus, Family::Minus, Family::NsPlus, Family::NsMinus];

/// Densities by flavour (PDG numbers).
pub struct Vectors<'a> {
    /// Flavours of the input; heavy ones above `start_nf` that [`BuildOptions::intrinsic`] does not name are left out.
    pub in_flavours: &'a [i64],
    /// `(replica, flavour, node)`.
    pub values: &'a [f64],
    /// Flavours of the output.
    pub out_flavours: &'a [i64],
}

/// Carries densities to every asked scale: `(scale, replica, flavour, node)`.
///
/// # Errors
/// As [`super::build`].
pub fn evolve(
    theory: &Theory,
    grid: &Grid,
    options: &BuildOptions,
    vectors: &Vectors,
    watch: &dyn Watch,
) -> Result<Vec<f64>> {
    let (prepared, inputs, _) = prepare(theory, grid, options, watch)?;
    let nodes = grid.nodes();
    let (row_in, row_out) = (vectors.in_flavours.len() * nodes, vectors.out_flavours.len() * nodes);
    let replicas = vectors.values.len() / row_in.max(1);
    let pieces: Vec<Vec<f64>> = vectors
        .values
        .par_chunks((PIECE * row_in).max(1))
        .map(|values| {
            watch.check()?;
            let piece = Piece { inputs: &inputs, vectors, values, nodes };
            let families = FAMILIES
                .par_iter()
                .map(|&family| prepared.carry(theory, &piece.start(family), 0))
                .collect::<Result<Vec<_>>>()?;
            let mut out = Vec::new();
            for &(q2, nf) in &options.asked {
                let (leg, s) = (prepared.route.leg_of(q2, nf)?, scale(theory, q2, nf)?);
                out.extend(piece.finish(&families, leg, s));
            }
            Ok(out)
        })
        .collect::<Result<_>>()?;
    Ok(in_order_of_scales(&pieces, options.asked.len(), replicas * row_out))
}

/// `(piece, scale, ...)` as `(scale, piece, ...)`.
fn in_order_of_scales(pieces: &[Vec<f64>], scales: usize, per_scale: usize) -> Vec<f64> {
    let mut all = Vec::with_capacity(scales * per_scale);
    for index in 0..scales {
        for piece in pieces {
            let length = piece.len() / scales;
            all.extend_from_slice(&piece[index * length..(index + 1) * length]);
        }
    }
    all
}

/// A few replicas.
struct Piece<'a> {
    inputs: &'a Inputs,
    vectors: &'a Vectors<'a>,
    values: &'a [f64],
    nodes: usize,
}

impl Piece<'_> {
    fn replicas(&self) -> usize {
        self.values.len() / (self.vectors.in_flavours.len() * self.nodes)
    }

    /// The combinations of a family: one column a replica, for differences one for each light flavour and replica.
    fn start(&self, family: Family) -> Columns {
        let (light, replicas) = (self.inputs.light, self.replicas());
        let plus = matches!(family, Family::Plus | Family::NsPlus);
        if matches!(family, Family::NsPlus | Family::NsMinus) {
            let mut start = Columns::new(family, light, self.nodes + 1, replicas * light);
            for flavour in 1..=light {
                for other in 1..=light {
                    let weight = f64::from(flavour == other) - 1.0 / light as f64;
                    self.add(start.light_mut(), other, plus, weight, (flavour - 1) * replicas);
                }
            }
            return start;
        }
        let mut start = Columns::new(family, light, self.nodes + 1, replicas);
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
        let row_in = self.vectors.in_flavours.len() * self.nodes;
        for (index, &flavour) in self.vectors.in_flavours.iter().enumerate() {
            let held = if flavour == GLUON { 0 } else { flavour.unsigned_abs() as usize };
            if held != quark {
                continue;
            }
            let weight = if flavour < 0 && !plus { -weight } else { weight };
            for (replica, values) in self.values.chunks_exact(row_in).enumerate() {
                for (i, value) in values[index * self.nodes..(index + 1) * self.nodes].iter().enumerate() {
                    target.row_mut(i)[first + replica] += weight * value;
                }
            }
        }
    }

    /// `(replica, flavour, node)` at one scale.
    fn finish(&self, families: &[Vec<LegColumns>], leg: usize, s: f64) -> Vec<f64> {
        let [plus, minus, ns_plus, ns_minus] = [0, 1, 2, 3].map(|family: usize| families[family][leg].at(s));
        let (light, replicas) = (self.inputs.light, self.replicas());
        let quark = |sum: &Columns, difference: &Columns, flavour: usize, replica: usize, i: usize| -> f64 {
            if flavour > light {
                return sum.heavy(flavour).map_or(0.0, |heavy| heavy.row(i)[replica]);
            }
            let own = difference.light_sum().row(i)[(flavour - 1) * replicas + replica];
            own + sum.light_sum().row(i)[replica] / light as f64
        };
        let mut out = Vec::with_capacity(replicas * self.vectors.out_flavours.len() * self.nodes);
        for replica in 0..replicas {
            for &flavour in self.vectors.out_flavours {
                let number = flavour.unsigned_abs() as usize;
                out.extend((0..self.nodes).map(|i| {
                    if flavour == GLUON {
                        return plus.gluon().row(i)[replica];
                    }
                    let both = quark(&plus, &ns_plus, number, replica, i);
                    let difference = quark(&minus, &ns_minus, number, replica, i);
                    0.5 * (both + flavour.signum() as f64 * difference)
                }));
            }
        }
        out
    }
}
