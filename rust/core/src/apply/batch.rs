//! Many replicas through one set of operators, in pieces small enough for the cache.

use super::recombine::{Blocks, Recombination, check_flavour};
use crate::error::{Error, Result};
use crate::numerics::blocks::{Matrix, View, multiply_add};
use crate::watch::Watch;
use rayon::prelude::*;

/// Replicas of one piece. Found by trial: blocks of 72 nodes and the combinations of a piece fit the second-level cache.
const PIECE: usize = 192;
/// Replicas are padded with zeros to a multiple of this, so that the matrix library takes the same path for one
/// replica as for many, and each comes out with the same bits alone and in company.
const PADDED: usize = 32;
/// Rows of a block taken together when its zeros are skipped. Found by trial among 18, 24, 36 and 72.
const STRIP: usize = 24;

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
    let (row_in, row_out) = (batch.in_flavours.len() * n, batch.out_flavours.len() * n);
    let replicas = batch.densities.len() / row_in.max(1);
    if replicas == 0 || row_out == 0 {
        return Ok(());
    }
    let ways = Recombination::new(batch.blocks, batch.in_flavours, batch.out_flavours);
    let sets: Vec<Vec<Block>> = batch
        .values
        .par_chunks(batch.block_count * n * n)
        .map(|values| values.chunks(n * n).map(|values| Block::new(values, n)).collect())
        .collect();
    // For each piece of replicas the places it fills, one a scale.
    let mut places: Vec<Vec<&mut [f64]>> = Vec::new();
    places.resize_with(replicas.div_ceil(PIECE), Vec::new);
    for scale in out.chunks_mut(replicas * row_out) {
        for (piece, place) in places.iter_mut().zip(scale.chunks_mut(PIECE * row_out)) {
            piece.push(place);
        }
    }
    places.into_par_iter().zip(batch.densities.par_chunks(PIECE * row_in)).try_for_each(|(places, densities)| {
        let combined = combine(&ways, densities, n);
        for (place, set) in places.into_iter().zip(&sets) {
            watch.check()?;
            let carried = carry(&ways, set, &combined, n);
            write(&ways, &carried, place, n);
        }
        Ok(())
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

/// A few replicas as combinations `(padded replica, node)`, one a channel; `None` where one vanishes.
fn combine(ways: &Recombination, densities: &[f64], n: usize) -> Vec<Option<Matrix>> {
    let row_in = ways.in_flavours * n;
    let replicas = densities.len() / row_in;
    ways.into_channels
        .iter()
        .map(|weights| {
            let mut combination = Matrix::zeros(replicas.next_multiple_of(PADDED), n);
            for (replica, density) in densities.chunks(row_in).enumerate() {
                let target = combination.row_mut(replica);
                for &(flavour, weight) in weights {
                    add(target, weight, &density[flavour * n..(flavour + 1) * n]);
                }
            }
            // What vanishes throughout, such as s - sbar, need not be carried.
            combination.values().iter().any(|value| *value != 0.0).then_some(combination)
        })
        .collect()
}

/// Every channel after evolution; `None` where nothing acts on it.
fn carry(ways: &Recombination, set: &[Block], combined: &[Option<Matrix>], n: usize) -> Vec<Option<Matrix>> {
    let mut carried: Vec<Option<Matrix>> = vec![None; combined.len()];
    for &(output, input, block) in &ways.actions {
        if let Some(source) = &combined[input] {
            let target = carried[output].get_or_insert_with(|| Matrix::zeros(source.rows(), n));
            set[block].act(target, source);
        }
    }
    carried
}

fn write(ways: &Recombination, carried: &[Option<Matrix>], out: &mut [f64], n: usize) {
    let row_out = ways.from_channels.len() * n;
    for (replica, row) in out.chunks_mut(row_out).enumerate() {
        for (target, weights) in row.chunks_mut(n).zip(&ways.from_channels) {
            target.fill(0.0);
            for &(channel, weight) in weights {
                if let Some(matrix) = &carried[channel] {
                    add(target, weight, matrix.row(replica));
                }
            }
        }
    }
}

fn add(target: &mut [f64], weight: f64, source: &[f64]) {
    for (sum, value) in target.iter_mut().zip(source) {
        *sum += weight * value;
    }
}
