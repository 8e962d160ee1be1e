//! Rows of F2, FL and xF3 at points: coefficient matrices and powers of a, applied to flavour combinations.
//!
//! `rows = sum over terms of factor * nodal @ matrix`, each term being one structure function, one power of a and one of
//! the channels below; then the couplings of quarks spread the channels over flavours. Nodal weights of a point are
//! zero outside few panels, and coefficient matrices are block lower triangular: only what is not zero is multiplied.

use super::forward::CHANNELS;
use crate::error::{Error, Result};
use crate::numerics::blocks::{Matrix, View, multiply_add};
use crate::thresholds::QUARKS;
use crate::watch::Watch;
use rayon::prelude::*;

/// Points that share a product of matrices.
const PIECE: usize = 64;
/// What terms add up to before couplings: `q + qbar` and `q - qbar` of F2 and FL, the same of xF3, pure singlet, gluon.
const SUMS: usize = 6;
/// Structure functions.
const FUNCTIONS: usize = 3;

/// What a coefficient function acts on.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Part {
    /// `q + qbar`.
    Plus,
    /// `q - qbar`.
    Minus,
    /// The sum of all active flavours, with the mean coupling.
    PureSinglet,
    /// The gluon, with the mean coupling.
    Gluon,
}

/// One coefficient matrix and where it belongs.
#[derive(Debug, Clone, Copy)]
pub struct Term<'a> {
    /// 0 to 2: F2, FL, xF3.
    pub function: usize,
    /// What it acts on.
    pub part: Part,
    /// Power of a: the column of `Factors::powers`.
    pub power: usize,
    /// `(node, node)`, block lower triangular.
    pub matrix: &'a [f64],
}

/// What differs from point to point.
pub struct Factors<'a> {
    /// `(point, node)` of F2, FL and xF3: their weights at nodes in what is measured.
    pub nodal: [&'a [f64]; FUNCTIONS],
    /// `(point, power)`.
    pub powers: &'a [f64],
    /// `(point, quark)` of `q + qbar` and `q - qbar` in F2 and FL, then in xF3; zero for what is not active.
    pub couplings: [&'a [f64]; 4],
    /// Number of active flavours.
    pub nf: usize,
}

impl Part {
    /// All of them.
    pub const ALL: [Self; 4] = [Self::Plus, Self::Minus, Self::PureSinglet, Self::Gluon];

    /// The name of the coefficient function.
    pub fn name(self) -> &'static str {
        match self {
            Self::Plus => "ns+",
            Self::Minus => "ns-",
            Self::PureSinglet => "pure singlet",
            Self::Gluon => "gluon",
        }
    }
}

/// Writes rows `(point, channel, node)`; `offsets` are those of the panels.
///
/// # Errors
/// [`Error::Argument`] for a term of no structure function or of a power without factor; [`Error::Interrupted`].
pub fn light_rows(
    offsets: &[usize],
    terms: &[Term],
    factors: &Factors,
    out: &mut [f64],
    watch: &dyn Watch,
) -> Result<()> {
    let nodes = offsets[offsets.len() - 1];
    let count = out.len() / (CHANNELS * nodes);
    let powers = factors.powers.len() / count.max(1);
    if let Some(term) = terms.iter().find(|term| term.function >= FUNCTIONS || term.power >= powers) {
        return Err(Error::Argument {
            name: "terms",
            value: format!("structure function {}, power {}", term.function, term.power),
            allowed: format!("below {FUNCTIONS} and {powers}"),
        });
    }
    let mut points: Vec<Point> = (0..count).map(|index| Point::new(index, factors, offsets)).collect();
    points.sort_by_key(|point| (point.sums, point.panels, point.first, point.index));
    let mut slots: Vec<Option<&mut [f64]>> = out.chunks_mut(CHANNELS * nodes).map(Some).collect();
    let alike = |one: &Point, two: &Point| (one.sums, one.panels) == (two.sums, two.panels);
    let pieces = points.chunk_by(alike).flat_map(|group| group.chunks(PIECE));
    // Every index is there once.
    let shared: Vec<_> = pieces
        .map(|piece| (piece, piece.iter().filter_map(|point| slots[point.index].take()).collect::<Vec<_>>()))
        .collect();
    shared.into_par_iter().try_for_each(|(piece, slots)| {
        watch.check()?;
        let sums = add_up(piece, terms, factors, powers, offsets);
        for (i, (point, slot)) in piece.iter().zip(slots).enumerate() {
            spread(point, factors, &sums, i, slot);
        }
        Ok(())
    })
}

/// What decides how a point is computed.
struct Point {
    index: usize,
    /// Which sums have a coupling, one bit each.
    sums: u32,
    /// First node with a weight, and number of panels with any.
    first: usize,
    panels: usize,
}

impl Point {
    fn new(index: usize, factors: &Factors, offsets: &[usize]) -> Self {
        let nodes = offsets[offsets.len() - 1];
        let (mut first, mut end, mut functions) = (nodes, 0, [false; FUNCTIONS]);
        for (nodal, there) in factors.nodal.iter().zip(&mut functions) {
            let row = &nodal[index * nodes..(index + 1) * nodes];
            if let (Some(low), Some(high)) = (row.iter().position(|v| *v != 0.0), row.iter().rposition(|v| *v != 0.0)) {
                (first, end, *there) = (first.min(low), end.max(high + 1), true);
            }
        }
        let coupled = |kind: usize| factors.of_quarks(kind, index).iter().any(|v| *v != 0.0);
        let (f2, f3) = (functions[0] || functions[1], functions[2]);
        let kinds = [f2 && coupled(0), f2 && coupled(1), f3 && coupled(2), f3 && coupled(3)];
        let mean = f2 && factors.mean(index) != 0.0;
        let bits = kinds.into_iter().chain([mean, mean]).enumerate();
        let sums = bits.map(|(bit, there)| u32::from(there) << bit).sum();
        Self { index, sums, first, panels: offsets.partition_point(|&offset| offset < end) }
    }

    fn has(&self, sum: usize) -> bool {
        self.sums >> sum & 1 == 1
    }
}

impl Factors<'_> {
    fn of_quarks(&self, kind: usize, point: usize) -> &[f64] {
        &self.couplings[kind][point * QUARKS..(point + 1) * QUARKS]
    }

    /// The mean over active flavours of what couples to `q + qbar` in F2 and FL.
    fn mean(&self, point: usize) -> f64 {
        self.of_quarks(0, point)[..self.nf].iter().sum::<f64>() / self.nf as f64
    }
}

/// The sum that a term belongs to.
fn sum_of(term: &Term) -> Option<usize> {
    match (term.part, term.function) {
        (Part::Plus, 2) => Some(2),
        (Part::Minus, 2) => Some(3),
        (Part::Plus, _) => Some(0),
        (Part::Minus, _) => Some(1),
        (_, 2) => None,
        (Part::PureSinglet, _) => Some(4),
        (Part::Gluon, _) => Some(5),
    }
}

/// Adds up the terms of a piece, `(point, node)` for each sum that is needed.
fn add_up(piece: &[Point], terms: &[Term], factors: &Factors, powers: usize, offsets: &[usize]) -> Vec<Matrix> {
    let nodes = offsets[offsets.len() - 1];
    let end = offsets[piece[0].panels];
    let first = piece.iter().map(|point| point.first).min().unwrap_or(0).min(end);
    let mut sums = vec![Matrix::zeros(piece.len(), nodes); SUMS];
    let mut scaled = Matrix::zeros(piece.len(), end - first);
    for term in terms {
        let Some(sum) = sum_of(term).filter(|&sum| piece[0].has(sum)) else { continue };
        for (i, point) in piece.iter().enumerate() {
            let factor = factors.powers[point.index * powers + term.power];
            let weights = &factors.nodal[term.function][point.index * nodes..][first..end];
            scaled.row_mut(i).iter_mut().zip(weights).for_each(|(to, weight)| *to = factor * weight);
        }
        multiply_add(
            sums[sum].part_mut(0..piece.len(), 0..end),
            1.0,
            scaled.part(0..piece.len(), 0..end - first),
            View::from_row_major_slice(term.matrix, nodes, nodes).submatrix(first, 0, end - first, end),
        );
    }
    sums
}

/// Spreads the sums of one point over gluon, `q + qbar` and `q - qbar`.
fn spread(point: &Point, factors: &Factors, sums: &[Matrix], i: usize, out: &mut [f64]) {
    let nodes = out.len() / CHANNELS;
    out.fill(0.0);
    let mut add = |channel: usize, factor: f64, sum: usize| {
        if factor != 0.0 && point.has(sum) {
            let target = &mut out[channel * nodes..(channel + 1) * nodes];
            target.iter_mut().zip(sums[sum].row(i)).for_each(|(value, part)| *value += factor * part);
        }
    };
    let mean = factors.mean(point.index);
    add(0, mean, 5);
    for q in 0..QUARKS {
        add(1 + q, factors.of_quarks(0, point.index)[q], 0);
        add(1 + q, factors.of_quarks(2, point.index)[q], 2);
        add(1 + QUARKS + q, factors.of_quarks(1, point.index)[q], 1);
        add(1 + QUARKS + q, factors.of_quarks(3, point.index)[q], 3);
        if q < factors.nf {
            add(1 + q, mean, 4);
        }
    }
}
