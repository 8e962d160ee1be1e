//! Rows at the scales of points carried back to the input: operators applied from the left, and never made.
//!
//! A row acts on the gluon, on `q + qbar` and on `q - qbar` of six quarks. On a leg the columns of operators are held as
//! the gluon, the sum L of the light flavours and each heavy one, and as what each light flavour differs from its share
//! of L; so is a row: what acts on L is the mean over light flavours, and on a difference what the row differs from it.

use super::columns::Family;
use super::inputs::Output;
use super::operators::{Chunk, Evolution};
use super::prepared::scale;
use crate::error::Result;
use crate::numerics::blocks::Matrix;
use crate::numerics::left_product::{Rows, Way};
use std::ops::Range;

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
        let step = self.chunks.first().map_or(0, |chunk| chunk.legs[leg].step_of(s));
        Ok(Place { leg, step, s })
    }

    /// Heavy flavours of the input, in the order of their rows.
    pub fn heavy_inputs(&self) -> &[usize] {
        &self.heavy
    }

    /// Where the nodes of each panel begin, and their number.
    pub fn offsets(&self) -> &[usize] {
        self.grid.offsets()
    }

    /// Rows on the input from rows at scales within one step.
    pub fn pull_back(&self, leg: usize, step: usize, points: &[RowAt], way: Way) -> InputRows {
        let (light, offsets) = (self.light(), self.offsets());
        let has = |family| self.chunks.iter().any(|chunk| chunk.family == family);
        let (plus, minus) = (Side::new(points, true, light, offsets), Side::new(points, false, light, offsets));
        let (count, nodes) = (points.len(), offsets[offsets.len() - 1]);
        let empty = |rows| Matrix::zeros(rows, nodes);
        let mut made = InputRows {
            plus: vec![empty(count); 2 + self.heavy.len()],
            minus: vec![empty(count); 1 + self.heavy.len()],
            plus_differences: empty(count * (light - 1)),
            minus_differences: empty(count * (light - 1)),
        };
        for chunk in &self.chunks {
            let carry = Carry { chunk, leg, owned: self.grid.owned(chunk.panel), step, way };
            match chunk.family {
                Family::Plus => carry.densities(&plus, &mut made.plus),
                Family::Minus => carry.densities(&minus, &mut made.minus),
                Family::NsPlus => carry.differences(&plus, &mut made.plus_differences),
                Family::NsMinus => {}
            }
            // Families that evolve like another are not held apart.
            if chunk.family == Family::NsMinus || chunk.family == Family::NsPlus && !has(Family::NsMinus) {
                carry.differences(&minus, &mut made.minus_differences);
                if !has(Family::Minus) {
                    carry.densities(&minus, &mut made.minus);
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
    /// On densities, as far as they do not vanish.
    densities: Vec<(Output, Stacked)>,
    /// On what each light flavour but the last differs from the mean; none where all vanish.
    differences: Option<Stacked>,
}

impl Side {
    fn new(points: &[RowAt], plus: bool, light: usize, offsets: &[usize]) -> Self {
        let n = offsets[offsets.len() - 1];
        let quark = |i: usize, q: usize| {
            let channel = if plus { q } else { QUARKS + q };
            &points[i].values[channel * n..][..offsets[points[i].panels]]
        };
        let sums =
            |row: &mut [f64], i: usize| (1..=light).for_each(|q| add_scaled(row, 1.0 / light as f64, quark(i, q)));
        let mean = Stacked::new(points, 1, offsets, |row, i, _| sums(row, i));
        let mut densities = vec![(Output::Light, mean)];
        if plus {
            densities
                .push((Output::Gluon, Stacked::new(points, 1, offsets, |row, i, _| add_scaled(row, 1.0, quark(i, 0)))));
        }
        for flavour in light + 1..=QUARKS {
            let rows = Stacked::new(points, 1, offsets, |row, i, _| add_scaled(row, 1.0, quark(i, flavour)));
            densities.push((Output::Heavy(flavour), rows));
        }
        let mut means = Matrix::zeros(points.len(), n);
        (0..points.len()).for_each(|i| sums(means.row_mut(i), i));
        let differences = Stacked::new(points, light - 1, offsets, |row, i, q| {
            add_scaled(row, 1.0, quark(i, q + 1));
            add_scaled(row, -1.0, means.row(i));
        });
        let held = |(output, rows): (Output, Stacked)| (!rows.vanish()).then_some((output, rows));
        Self {
            densities: densities.into_iter().filter_map(held).collect(),
            differences: (!differences.vanish()).then_some(differences),
        }
    }
}

impl Stacked {
    /// So many rows for each point; `fill(row, point, index)` writes one.
    fn new(points: &[RowAt], each: usize, offsets: &[usize], fill: impl Fn(&mut [f64], usize, usize)) -> Self {
        let repeated = |i: usize| std::iter::repeat_n(i, each);
        let of: Vec<usize> = (0..points.len()).flat_map(repeated).collect();
        let mut values = Matrix::zeros(of.len(), offsets[offsets.len() - 1]);
        for (row, &i) in of.iter().enumerate() {
            fill(values.row_mut(row), i, row % each);
        }
        let s = of.iter().map(|&i| points[i].s).collect();
        let ends = of.iter().map(|&i| offsets[points[i].panels]).collect();
        Self { s, ends, values }
    }

    fn vanish(&self) -> bool {
        self.values.values().iter().all(|value| *value == 0.0)
    }
}

/// The columns of one input panel on one leg, ready to be multiplied from the left.
struct Carry<'a> {
    chunk: &'a Chunk,
    leg: usize,
    /// Nodes of the panel.
    owned: Range<usize>,
    step: usize,
    way: Way,
}

impl Carry<'_> {
    /// Adds what rows on densities give.
    fn densities(&self, side: &Side, made: &mut [Matrix]) {
        for (output, rows) in &side.densities {
            self.add(*output, rows, made);
        }
    }

    /// Adds what rows on differences give.
    fn differences(&self, side: &Side, made: &mut Matrix) {
        if let Some(rows) = &side.differences {
            self.add(Output::Light, rows, std::slice::from_mut(made));
        }
    }

    /// Adds to every input channel what rows on one density give.
    fn add(&self, output: Output, rows: &Stacked, made: &mut [Matrix]) {
        let count = self.owned.len();
        let mut target = Matrix::zeros(rows.s.len(), made.len() * count);
        let acting = Rows { s: &rows.s, ends: &rows.ends, values: &rows.values, way: self.way };
        self.chunk.legs[self.leg].multiply_left(output, self.step, &acting, &mut target);
        for (channel, made) in made.iter_mut().enumerate() {
            for row in 0..target.rows() {
                let own = &target.row(row)[channel * count..(channel + 1) * count];
                add_scaled(&mut made.row_mut(row)[self.owned.clone()], 1.0, own);
            }
        }
    }
}

/// `target += factor * source`, as far as the source goes.
fn add_scaled(target: &mut [f64], factor: f64, source: &[f64]) {
    for (sum, value) in target.iter_mut().zip(source) {
        *sum += factor * value;
    }
}
