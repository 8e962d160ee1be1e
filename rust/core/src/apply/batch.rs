//! Many replicas through one set of operators, in pieces small enough for the cache.

use super::recombine::{Blocks, Channel, Recombination};
use crate::coupling::MOST;
use crate::error::{Error, Result};
use crate::evolution::check_flavour;
use crate::numerics::blocks::{Matrix, View, multiply, multiply_add};
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
        let padded = (densities.len() / row_in).next_multiple_of(PADDED);
        let mut carried = vec![Matrix::zeros(padded, n); combined.len()];
        for (place, set) in places.into_iter().zip(&sets) {
            watch.check()?;
            let acted = carry(&ways, set, &combined, &mut carried);
            let held: Vec<Option<&Matrix>> = carried.iter().zip(acted).map(|(to, acted)| acted.then_some(to)).collect();
            write(&ways, &held, place, n);
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

    /// `target = source * block^T`, or adds it where something `acted` before: each row of `source` is a density.
    fn act(&self, target: &mut Matrix, source: &Matrix, acted: bool) {
        let (replicas, n) = (source.rows(), source.cols());
        for (strip, &reach) in self.reach.iter().enumerate() {
            let rows = strip * STRIP..((strip + 1) * STRIP).min(n);
            let multiply = if acted { multiply_add } else { multiply };
            multiply(
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
    let mut combined = vec![Matrix::zeros(replicas.next_multiple_of(PADDED), n); ways.channels.len()];
    let mut quarks = Quarks { even: vec![vec![0.0; n]; 1 + MOST], odd: vec![vec![0.0; n]; 1 + MOST] };
    for (replica, density) in densities.chunks(row_in).enumerate() {
        quarks.read(ways, density, n);
        for (channel, combination) in ways.channels.iter().zip(&mut combined) {
            let target = combination.row_mut(replica);
            match *channel {
                Channel::Gluon => {
                    if let Some(place) = ways.gluon {
                        target.copy_from_slice(&density[place * n..(place + 1) * n]);
                    }
                }
                Channel::LightPlus => target.copy_from_slice(&quarks.even[0]),
                Channel::LightMinus => target.copy_from_slice(&quarks.odd[0]),
                Channel::HeavyPlus(quark) => target.copy_from_slice(&quarks.even[quark]),
                Channel::HeavyMinus(quark) => target.copy_from_slice(&quarks.odd[quark]),
                Channel::DifferencePlus(quark) => off_mean(target, &quarks.even, quark, ways.light),
                Channel::DifferenceMinus(quark) => off_mean(target, &quarks.odd, quark, ways.light),
            }
        }
    }
    // What vanishes throughout, such as s - sbar, need not be carried.
    let held = |combination: &Matrix| combination.values().iter().any(|value| *value != 0.0);
    combined.into_iter().map(|combination| held(&combination).then_some(combination)).collect()
}

/// `q + qbar` and `q - qbar` of one replica by quark; in place 0 their sums over the light ones.
struct Quarks {
    even: Vec<Vec<f64>>,
    odd: Vec<Vec<f64>>,
}

impl Quarks {
    fn read(&mut self, ways: &Recombination, density: &[f64], n: usize) {
        let at = |place: usize| &density[place * n..(place + 1) * n];
        self.even[0].fill(0.0);
        self.odd[0].fill(0.0);
        for (quark, places) in (1..).zip(&ways.quarks) {
            let (even, odd) = (&mut self.even[quark], &mut self.odd[quark]);
            match *places {
                [Some(quark), Some(antiquark)] => {
                    let both = at(quark).iter().zip(at(antiquark));
                    for ((even, odd), (q, other)) in even.iter_mut().zip(odd.iter_mut()).zip(both) {
                        *even = q + other;
                        *odd = q - other;
                    }
                }
                [Some(quark), None] => {
                    even.copy_from_slice(at(quark));
                    odd.copy_from_slice(at(quark));
                }
                [None, Some(antiquark)] => {
                    even.copy_from_slice(at(antiquark));
                    odd.iter_mut().zip(at(antiquark)).for_each(|(odd, other)| *odd = -other);
                }
                // Zero from the beginning.
                [None, None] => continue,
            }
            if quark <= ways.light {
                for values in [&mut self.even, &mut self.odd] {
                    let (sum, quarks) = values.split_at_mut(1);
                    sum[0].iter_mut().zip(&quarks[quark - 1]).for_each(|(sum, own)| *sum += own);
                }
            }
        }
    }
}

/// What a light quark differs from the mean of them.
fn off_mean(target: &mut [f64], quarks: &[Vec<f64>], quark: usize, light: usize) {
    let share = 1.0 / light as f64;
    let both = quarks[quark].iter().zip(&quarks[0]);
    target.iter_mut().zip(both).for_each(|(value, (own, sum))| *value = own - share * sum);
}

/// Every channel after evolution, in `carried`; returns which of them hold something.
fn carry(ways: &Recombination, set: &[Block], combined: &[Option<Matrix>], carried: &mut [Matrix]) -> Vec<bool> {
    let mut acted = vec![false; carried.len()];
    for &(output, input, block) in &ways.actions {
        if let Some(source) = &combined[input] {
            set[block].act(&mut carried[output], source, acted[output]);
            acted[output] = true;
        }
    }
    acted
}

/// Flavours from channels: `q` and `qbar` are sum and difference of what both have of `q + qbar` and of `q - qbar`.
fn write(ways: &Recombination, carried: &[Option<&Matrix>], out: &mut [f64], n: usize) {
    let row_out = ways.out_flavours * n;
    let (mut even, mut odd) = (vec![0.0; n], vec![0.0; n]);
    for (replica, row) in out.chunks_mut(row_out).enumerate() {
        for parts in &ways.from_channels {
            sum(&mut even, &parts.even, carried, replica);
            sum(&mut odd, &parts.odd, carried, replica);
            for &(place, sign) in &parts.places {
                let both = even.iter().zip(&odd);
                for (value, (even, odd)) in row[place * n..(place + 1) * n].iter_mut().zip(both) {
                    *value = even + sign * odd;
                }
            }
        }
    }
}

/// `target` becomes a sum of channels of one replica.
fn sum(target: &mut [f64], terms: &[(usize, f64)], carried: &[Option<&Matrix>], replica: usize) {
    let mut held = terms.iter().filter_map(|&(channel, weight)| Some((carried[channel]?.row(replica), weight)));
    match (held.next(), held.next()) {
        (Some((one, weight)), Some((other, second))) => {
            let both = one.iter().zip(other);
            target.iter_mut().zip(both).for_each(|(sum, (a, b))| *sum = weight * a + second * b);
        }
        (Some((one, weight)), None) => target.iter_mut().zip(one).for_each(|(sum, a)| *sum = weight * a),
        _ => target.fill(0.0),
    }
    held.for_each(|(more, weight)| add(target, weight, more));
}

fn add(target: &mut [f64], weight: f64, source: &[f64]) {
    for (sum, value) in target.iter_mut().zip(source) {
        *sum += weight * value;
    }
}
