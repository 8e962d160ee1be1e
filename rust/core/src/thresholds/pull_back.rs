//! Rows at the scales of points carried back to the input: operators applied from the left, and never made.
//!
//! A row acts on the gluon, on `q + qbar` and on `q - qbar` of six quarks. On a leg the columns of operators are held as
//! the sum of all active flavours and what the heavy ones differ from their share of it; so is a row: with
//! `L = (light/nf) (Sigma - sum_h d_h)` and `h = d_h + L/light`, what acts on Sigma is the mean over active flavours,
//! and on `d_h` what the row on h differs from that mean.

use super::columns::{Family, LegColumns};
use super::operators::{Chunk, Evolution};
use super::prepared::scale;
use crate::error::Result;
use crate::numerics::blocks::Matrix;
use crate::numerics::left_product::{Rows, Way, multiply_left};

/// Quarks in a row: first the gluon, then so many sums, then so many differences.
pub const QUARKS: usize = 6;

/// Where a scale lies on a route.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Place {
    /// Index of the leg.
    pub leg: usize,
    /// Step of the leg.
    pub step: usize,
    /// `ln a` at `mu_f`.
    pub s: f64,
}

/// One row at its scale.
#[derive(Debug, Clone, Copy)]
pub struct RowAt<'a> {
    /// `ln a` at `mu_f`.
    pub s: f64,
    /// Number of panels, from x = 1 on, beyond which it is zero.
    pub panels: usize,
    /// `(gluon, q + qbar of six quarks, q - qbar of six quarks; node)`.
    pub values: &'a [f64],
}

/// Rows on the channels of the input, each matrix `(row, node)`.
pub struct InputRows {
    /// On gluon, sum of the light `q + qbar`, heavy `q + qbar`.
    pub plus: Vec<Matrix>,
    /// On the sum of the light `q - qbar`, heavy `q - qbar`.
    pub minus: Vec<Matrix>,
    /// On what each light `q + qbar` but the last differs from the mean: all differences of a row one after the other.
    pub plus_differences: Matrix,
    /// The same for `q - qbar`.
    pub minus_differences: Matrix,
}

impl Evolution {
    /// Where a scale lies.
    ///
    /// # Errors
    /// [`crate::error::Error::OutOfRange`] for a scale that is not on the route.
    pub fn place(&self, q2: f64, nf: usize) -> Result<Place> {
        let leg = self.route.leg_of(q2, nf)?;
        let s = scale(&self.theory, q2, nf)?;
        let step = self.chunks.first().map_or(0, |chunk| chunk.legs[leg].sum.step_of(s));
        Ok(Place { leg, step, s })
    }

    /// Heavy flavours of the input, in the order of their rows.
    pub fn heavy_inputs(&self) -> &[usize] {
        &self.heavy
    }

    /// Where the nodes of each panel begin, and their number.
    pub fn offsets(&self) -> &[usize] {
        self.chunks.first().map_or(&[], |chunk| &chunk.legs[0].offsets)
    }

    /// Rows on the input from rows at scales within one step.
    pub fn pull_back(&self, leg: usize, step: usize, points: &[RowAt], way: Way) -> InputRows {
        let (light, nf, offsets) = (self.light(), self.route.legs[leg].nf, self.offsets());
        let has = |family| self.chunks.iter().any(|chunk| chunk.family == family);
        let plus = Side::new(points, Some(offsets), light, nf, offsets);
        let minus = Side::new(points, None, light, if has(Family::Minus) { nf } else { light }, offsets);
        let (count, nodes) = (points.len(), offsets[offsets.len() - 1]);
        let empty = |rows| Matrix::zeros(rows, nodes);
        let mut made = InputRows {
            plus: vec![empty(count); 2 + self.heavy.len()],
            minus: vec![empty(count); 1 + self.heavy.len()],
            plus_differences: empty(count * (light - 1)),
            minus_differences: empty(count * (light - 1)),
        };
        for chunk in &self.chunks {
            let carry = Carry { chunk, columns: &chunk.legs[leg], step, way };
            match chunk.family {
                Family::Plus => {
                    carry.sum(plus.sum.as_ref(), &mut made.plus);
                    carry.heavy(&plus.heavy, &mut made.plus);
                }
                Family::Minus => {
                    carry.sum(minus.sum.as_ref(), &mut made.minus);
                    carry.heavy(&minus.heavy, &mut made.minus);
                }
                Family::NsPlus => {
                    carry.sum(plus.differences.as_ref(), std::slice::from_mut(&mut made.plus_differences));
                }
                Family::NsMinus => {}
            }
            // Families that evolve like another are not held apart.
            if chunk.family == Family::NsMinus || chunk.family == Family::NsPlus && !has(Family::NsMinus) {
                carry.sum(minus.differences.as_ref(), std::slice::from_mut(&mut made.minus_differences));
                if !has(Family::Minus) {
                    carry.sum(minus.sum.as_ref(), &mut made.minus);
                }
            }
        }
        made
    }
}

/// Rows with their places.
struct Stacked {
    s: Vec<f64>,
    ends: Vec<usize>,
    values: Matrix,
}

/// The rows on sums `q + qbar` (with the gluon) or on differences `q - qbar`, as a leg holds what they act on.
struct Side {
    /// On the sum of the active flavours, or on the pair of it and the gluon; none where all vanish.
    sum: Option<Stacked>,
    /// On what an active heavy flavour differs, or on a heavy flavour that does not evolve.
    heavy: Vec<(usize, Stacked)>,
    /// On what each light flavour but the last differs from the mean.
    differences: Option<Stacked>,
}

impl Side {
    /// `pair`: the panels where gluon and sum are interleaved, for sums `q + qbar`.
    fn new(points: &[RowAt], pair: Option<&[usize]>, light: usize, nf: usize, offsets: &[usize]) -> Self {
        let n = offsets[offsets.len() - 1];
        let base = if pair.is_some() { 1 } else { 1 + QUARKS };
        let ends: Vec<usize> = points.iter().map(|point| offsets[point.panels]).collect();
        let quark = |i: usize, q: usize| &points[i].values[(base + q) * n..][..ends[i]];
        let mean = |count: usize| {
            let mut values = Matrix::zeros(points.len(), n);
            for i in 0..points.len() {
                for q in 0..count {
                    add_scaled(values.row_mut(i), 1.0 / count as f64, quark(i, q));
                }
            }
            values
        };
        let s: Vec<f64> = points.iter().map(|point| point.s).collect();
        let (all, lightest) = (mean(nf), mean(light));
        let mut heavy = Vec::new();
        for flavour in light + 1..=QUARKS {
            let mut values = Matrix::zeros(points.len(), n);
            for i in 0..points.len() {
                add_scaled(values.row_mut(i), 1.0, quark(i, flavour - 1));
                if flavour <= nf {
                    add_scaled(values.row_mut(i), -1.0, all.row(i));
                }
            }
            heavy.extend(Stacked::new(s.clone(), ends.clone(), values).map(|rows| (flavour, rows)));
        }
        let each = light - 1;
        let mut differences = Matrix::zeros(points.len() * each, n);
        for i in 0..points.len() {
            for q in 0..each {
                add_scaled(differences.row_mut(i * each + q), 1.0, quark(i, q));
                add_scaled(differences.row_mut(i * each + q), -1.0, lightest.row(i));
            }
        }
        let repeated = |i: usize| std::iter::repeat_n(i, each);
        let (more_s, more_ends) =
            (0..points.len()).flat_map(repeated).map(|i| (s[i], ends[i])).unzip::<f64, usize, Vec<_>, Vec<_>>();
        let sum = match pair {
            None => Stacked::new(s, ends, all),
            Some(offsets) => {
                Stacked::new(s, ends.iter().map(|end| 2 * end).collect(), with_gluon(points, &all, offsets))
            }
        };
        Self { sum, heavy, differences: Stacked::new(more_s, more_ends, differences) }
    }
}

impl Stacked {
    fn new(s: Vec<f64>, ends: Vec<usize>, values: Matrix) -> Option<Self> {
        values.values().iter().any(|value| *value != 0.0).then_some(Self { s, ends, values })
    }
}

/// Rows on gluon and sum, panel by panel as the singlet pair is ordered.
fn with_gluon(points: &[RowAt], sum: &Matrix, offsets: &[usize]) -> Matrix {
    let n = sum.cols();
    let mut pair = Matrix::zeros(points.len(), 2 * n);
    for (i, point) in points.iter().enumerate() {
        let row = pair.row_mut(i);
        for panel in offsets[..=point.panels].windows(2) {
            let (start, end) = (panel[0], panel[1]);
            row[2 * start..start + end].copy_from_slice(&point.values[start..end]);
            row[start + end..2 * end].copy_from_slice(&sum.row(i)[start..end]);
        }
    }
    pair
}

/// The columns of one input panel on one leg, ready to be multiplied from the left.
struct Carry<'a> {
    chunk: &'a Chunk,
    columns: &'a LegColumns,
    step: usize,
    way: Way,
}

impl Carry<'_> {
    /// Adds what rows on the sum (or on the only content) give.
    fn sum(&self, rows: Option<&Stacked>, made: &mut [Matrix]) {
        let Some(rows) = rows else { return };
        let pairs = if self.chunk.family == Family::Plus { 2 } else { 1 };
        let mut target = self.target(rows);
        self.columns.sum.multiply_left(self.step, &self.rows(rows), pairs * self.first(), &mut target);
        self.add(&target, made);
    }

    /// Adds what rows on heavy flavours give.
    fn heavy(&self, rows: &[(usize, Stacked)], made: &mut [Matrix]) {
        for (flavour, rows) in rows {
            let mut target = self.target(rows);
            let difference = self.columns.differences.iter().find(|(own, _)| own == flavour);
            if let Some((_, solution)) = difference {
                solution.multiply_left(self.step, &self.rows(rows), self.first(), &mut target);
            } else if let Some(constant) = self.columns.start.heavy(*flavour) {
                multiply_left(constant, &self.rows(rows), self.first(), &mut target);
            }
            self.add(&target, made);
        }
    }

    /// The first node of the panel to which the columns belong.
    fn first(&self) -> usize {
        self.chunk.columns.first().map_or(0, |&(_, node)| node)
    }

    fn rows<'r>(&self, rows: &'r Stacked) -> Rows<'r> {
        Rows { s: &rows.s, ends: &rows.ends, values: &rows.values, way: self.way }
    }

    fn target(&self, rows: &Stacked) -> Matrix {
        Matrix::zeros(rows.s.len(), self.chunk.columns.len())
    }

    /// Adds columns to their channels; those of a channel are neighbours, as their nodes are.
    fn add(&self, target: &Matrix, made: &mut [Matrix]) {
        let channels = self.chunk.columns.chunk_by(|one, next| one.0 == next.0);
        let mut start = 0;
        for columns in channels {
            let (channel, node) = columns[0];
            for row in 0..target.rows() {
                let values = &target.row(row)[start..start + columns.len()];
                add_scaled(&mut made[channel].row_mut(row)[node..], 1.0, values);
            }
            start += columns.len();
        }
    }
}

/// `target += factor * source`, as far as the source goes.
fn add_scaled(target: &mut [f64], factor: f64, source: &[f64]) {
    for (sum, value) in target.iter_mut().zip(source) {
        *sum += factor * value;
    }
}
