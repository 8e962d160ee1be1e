//! Many replicas through one set of operators, in pieces small enough for the cache.

use super::recombine::{Blocks, Channel, GLUON, check_flavour};
use crate::error::{Error, Result};
use crate::numerics::blocks::{Matrix, View, multiply_add};
use crate::watch::Watch;
use rayon::prelude::*;

/// Replicas of one piece. Found by trial: blocks of 72 nodes and the combinations of a piece fit the second-level cache.
const PIECE: usize = 192;
/// Replicas are padded with zeros to a multiple of this, so that the matrix library takes the same path for one
/// replica as for many, and each comes out with the same bits alone and in company.
const PADDED: usize = 32;
/// Rows of a block taken together when its zeros are skipped.
const STRIP: usize = 18;

/// What is applied to what.
pub struct Batch<'a> {
    /// Names and light flavours of the set.
    pub blocks: &'a Blocks,
    /// Number of blocks of the set.
    pub block_count: usize,
    /// `(scale, block, node, node)`.
    pub values: &'a [f64],
    /// Number of nodes.
    pub nodes: usize,
    /// `(replica, flavour, node)`.
    pub densities: &'a [f64],
    /// PDG numbers of the input.
    pub in_flavours: &'a [i64],
    /// PDG numbers of the output.
    pub out_flavours: &'a [i64],
}

/// Writes `(scale, replica, flavour, node)` to `out`.
///
/// # Errors
/// [`Error::Argument`] for a flavour that the set cannot carry; [`Error::Interrupted`].
pub fn apply(batch: &Batch, out: &mut [f64], watch: &dyn Watch) -> Result<()> {
    batch.in_flavours.iter().chain(batch.out_flavours).try_for_each(|&flavour| check_flavour(flavour))?;
    if let Some(&flavour) = batch.in_flavours.iter().find(|&&flavour| !batch.blocks.accepts(flavour)) {
        return Err(Error::Argument {
            name: "flavour",
            value: flavour.to_string(),
            allowed: "these operators were built without this input: name it in intrinsic".into(),
        });
    }
    let n = batch.nodes;
    let per_scale = batch.block_count * n * n;
    let (row_in, row_out) = (batch.in_flavours.len() * n, batch.out_flavours.len() * n);
    let replicas = batch.densities.len() / row_in.max(1);
    if replicas == 0 || row_out == 0 {
        return Ok(());
    }
    out.par_chunks_mut(replicas * row_out).zip(batch.values.par_chunks(per_scale)).try_for_each(|(out, values)| {
        let set: Vec<Block> = values.chunks(n * n).map(|values| Block::new(values, n)).collect();
        out.par_chunks_mut(PIECE * row_out).zip(batch.densities.par_chunks(PIECE * row_in)).try_for_each(
            |(out, densities)| {
                watch.check()?;
                Piece::new(batch, densities).carry(batch, &set, out);
                Ok(())
            },
        )
    })
}

/// A block and where its rows end.
struct Block<'a> {
    values: View<'a>,
    /// Number of leading columns that are not all zero, by strip of rows.
    reach: Vec<usize>,
}

impl<'a> Block<'a> {
    fn new(values: &'a [f64], n: usize) -> Self {
        let reach = values
            .chunks(STRIP * n)
            .map(|strip| {
                let ends = strip.chunks(n).map(|row| row.iter().rposition(|v| *v != 0.0).map_or(0, |last| last + 1));
                ends.max().unwrap_or(0)
            })
            .collect();
        Self { values: View::from_row_major_slice(values, n, n), reach }
    }

    /// `target += source * block^T`: each row of `source` is a density.
    fn act(&self, target: &mut Matrix, source: &Matrix) {
        let (replicas, n) = (source.rows(), source.cols());
        for (strip, &reach) in self.reach.iter().enumerate() {
            let rows = strip * STRIP..((strip + 1) * STRIP).min(n);
            multiply_add(
                target.part_mut(0..replicas, rows.clone()),
                1.0,
                source.part(0..replicas, 0..reach),
                self.values.submatrix(rows.start, 0, rows.len(), reach).transpose(),
            );
        }
    }
}

/// A few replicas as combinations.
struct Piece {
    replicas: usize,
    /// Rows of every matrix: the replicas, padded.
    rows: usize,
    nodes: usize,
    light: usize,
    gluon: Matrix,
    /// `q + qbar` and `q - qbar` by flavour; `None` where the input has none.
    plus: [Option<Matrix>; 6],
    minus: [Option<Matrix>; 6],
}

impl Piece {
    fn new(batch: &Batch, densities: &[f64]) -> Self {
        let n = batch.nodes;
        let row_in = batch.in_flavours.len() * n;
        let replicas = densities.len() / row_in;
        let padded = replicas.next_multiple_of(PADDED);
        let mut piece = Self {
            replicas,
            rows: padded,
            nodes: n,
            light: batch.blocks.light,
            gluon: Matrix::zeros(padded, n),
            plus: [const { None }; 6],
            minus: [const { None }; 6],
        };
        for (index, &flavour) in batch.in_flavours.iter().enumerate() {
            let rows = (0..replicas).map(|r| &densities[r * row_in + index * n..r * row_in + (index + 1) * n]);
            if flavour == GLUON {
                add_rows(&mut piece.gluon, rows, 1.0);
                continue;
            }
            let quark = flavour.unsigned_abs() as usize - 1;
            let sign = if flavour > 0 { 1.0 } else { -1.0 };
            add_rows(piece.plus[quark].get_or_insert_with(|| Matrix::zeros(padded, n)), rows.clone(), 1.0);
            add_rows(piece.minus[quark].get_or_insert_with(|| Matrix::zeros(padded, n)), rows, sign);
        }
        // What vanishes throughout need not be carried.
        for matrix in &mut piece.minus {
            if matrix.as_ref().is_some_and(|matrix| matrix.values().iter().all(|value| *value == 0.0)) {
                *matrix = None;
            }
        }
        piece
    }

    fn carry(&self, batch: &Batch, set: &[Block], out: &mut [f64]) {
        let mut carried: Vec<(Channel, Matrix)> = Vec::new();
        for output in batch.blocks.outputs() {
            let mut sum = Matrix::zeros(self.rows, self.nodes);
            for (input, block) in batch.blocks.inputs(output) {
                if let Some(source) = self.channel(input) {
                    set[block].act(&mut sum, &source);
                }
            }
            carried.push((output, sum));
        }
        let plus = self.quarks(batch, set, &carried, true);
        let minus = self.quarks(batch, set, &carried, false);
        self.write(batch, &carried, &plus, &minus, out);
    }

    /// The combination that a block acts on; `None` where it vanishes.
    fn channel(&self, channel: Channel) -> Option<std::borrow::Cow<'_, Matrix>> {
        use std::borrow::Cow::{Borrowed, Owned};
        match channel {
            Channel::Gluon => Some(Borrowed(&self.gluon)),
            Channel::HeavyPlus(flavour) => self.plus[flavour - 1].as_ref().map(Borrowed),
            Channel::HeavyMinus(flavour) => self.minus[flavour - 1].as_ref().map(Borrowed),
            Channel::LightPlus => self.light_sum(&self.plus).map(Owned),
            Channel::LightMinus => self.light_sum(&self.minus).map(Owned),
        }
    }

    fn light_sum(&self, quarks: &[Option<Matrix>; 6]) -> Option<Matrix> {
        let mut held = quarks[..self.light].iter().flatten();
        let mut sum = held.next()?.clone();
        held.for_each(|quark| sum.add_scaled(1.0, quark));
        Some(sum)
    }

    /// Each flavour's `q + qbar` or `q - qbar` after evolution.
    fn quarks(&self, batch: &Batch, set: &[Block], carried: &[(Channel, Matrix)], plus: bool) -> Vec<Option<Matrix>> {
        let find = |channel: Channel| carried.iter().find(|(found, _)| *found == channel).map(|(_, values)| values);
        let quarks = if plus { &self.plus } else { &self.minus };
        let light = self.light as f64;
        let average_in = self.light_sum(quarks);
        let sum = find(if plus { Channel::LightPlus } else { Channel::LightMinus });
        let mut result: Vec<Option<Matrix>> = Vec::new();
        let mut others: Option<Matrix> = None;
        for flavour in 1..=self.light {
            // Differences add up to zero: the last is minus the sum of the others.
            let difference = if flavour == self.light && flavour > 1 {
                others.take().map(|mut all| {
                    all.values_mut().iter_mut().for_each(|value| *value = -*value);
                    all
                })
            } else {
                self.difference(quarks[flavour - 1].as_ref(), average_in.as_ref()).map(|source| {
                    let mut target = Matrix::zeros(self.rows, self.nodes);
                    if let Some(block) = batch.blocks.difference(plus) {
                        set[block].act(&mut target, &source);
                    }
                    others.get_or_insert_with(|| Matrix::zeros(self.rows, self.nodes)).add_scaled(1.0, &target);
                    target
                })
            };
            let mut quark = difference.unwrap_or_else(|| Matrix::zeros(self.rows, self.nodes));
            if let Some(sum) = sum {
                quark.add_scaled(1.0 / light, sum);
            }
            result.push(Some(quark));
        }
        for flavour in self.light + 1..=6 {
            let channel = if plus { Channel::HeavyPlus(flavour) } else { Channel::HeavyMinus(flavour) };
            result.push(find(channel).cloned());
        }
        result
    }

    /// `q - average`; `None` where both vanish.
    fn difference(&self, quark: Option<&Matrix>, sum: Option<&Matrix>) -> Option<Matrix> {
        let mut difference = match (quark, sum) {
            (None, None) => return None,
            (Some(quark), _) => quark.clone(),
            (None, Some(_)) => Matrix::zeros(self.rows, self.nodes),
        };
        if let Some(sum) = sum {
            difference.add_scaled(-1.0 / self.light as f64, sum);
        }
        Some(difference)
    }

    fn write(
        &self,
        batch: &Batch,
        carried: &[(Channel, Matrix)],
        plus: &[Option<Matrix>],
        minus: &[Option<Matrix>],
        out: &mut [f64],
    ) {
        let n = self.nodes;
        let row_out = batch.out_flavours.len() * n;
        let gluon = carried.iter().find(|(channel, _)| *channel == Channel::Gluon).map(|(_, values)| values);
        for (index, &flavour) in batch.out_flavours.iter().enumerate() {
            for replica in 0..self.replicas {
                let start = replica * row_out + index * n;
                let target = &mut out[start..start + n];
                target.fill(0.0);
                let mut add = |matrix: Option<&Matrix>, factor: f64| {
                    if let Some(matrix) = matrix {
                        target.iter_mut().zip(matrix.row(replica)).for_each(|(sum, value)| *sum += factor * value);
                    }
                };
                if flavour == GLUON {
                    add(gluon, 1.0);
                } else {
                    let quark = flavour.unsigned_abs() as usize - 1;
                    add(plus[quark].as_ref(), 0.5);
                    add(minus[quark].as_ref(), 0.5 * flavour.signum() as f64);
                }
            }
        }
    }
}

fn add_rows<'a>(target: &mut Matrix, rows: impl Iterator<Item = &'a [f64]>, factor: f64) {
    for (replica, row) in rows.enumerate() {
        target.row_mut(replica).iter_mut().zip(row).for_each(|(sum, value)| *sum += factor * value);
    }
}
