//! How flavours follow from what evolves alone.
//!
//! With `d_h = h - L/light` and `Sigma = L + sum_h h`: `L = (light/nf) (Sigma - sum_h d_h)`.

use super::columns::{CHANNELS, CHARM_PLACE, Columns, Family, GLUON_PLACE, LIGHT_PLACE};
use crate::evolution::{CHARM, place};
use crate::numerics::blocks::Matrix;

/// Flavours of some columns, at nf, from the sum of all and what each heavy one differs from its share of the light sum.
pub struct Split {
    family: Family,
    light: usize,
    heavy: Vec<usize>,
    nf: usize,
    /// Number of columns.
    cols: usize,
    /// Where the rows from the first that is not zero stand in the sum, gluon and sum of quarks; the gluon only of the
    /// plus family.
    rows: Vec<(Option<usize>, Option<usize>)>,
    first_row: usize,
}

impl Split {
    /// For columns like `start`; their rows before `first_row` are zero.
    pub fn new(start: &Columns, nf: usize, offsets: &[usize], first_row: usize) -> Self {
        let nodes = offsets[offsets.len() - 1];
        let rows = (first_row..=nodes).map(|row| match start.family {
            // All momentum below `x_min` is held with the gluon.
            Family::Plus if row == nodes => (Some(2 * nodes), None),
            Family::Plus => (Some(place(offsets, 0, row)), Some(place(offsets, 1, row))),
            _ => (None, Some(row)),
        });
        let (rows, cols) = (rows.collect(), start.light_sum().cols());
        Self { family: start.family, light: start.light, heavy: start.active(nf), nf, cols, rows, first_row }
    }

    /// Every channel that evolves, `(scale, (row - first row) * column)`: `at` hands over the sum at a scale, and
    /// differences side by side.
    pub fn channels<T: AsRef<[f64]>>(
        &self,
        count: usize,
        at: impl Fn(usize) -> (T, Option<T>),
    ) -> [Option<Matrix>; CHANNELS] {
        let mut channels = self.room(count);
        for index in 0..count {
            let (sum, differences) = at(index);
            self.add(sum.as_ref(), differences.as_ref().map(AsRef::as_ref), &mut channels);
        }
        let size = self.rows.len() * self.cols;
        channels.map(|values| (!values.is_empty()).then(|| Matrix::from_values(count, size, values)))
    }

    /// Room for the values of every channel that evolves.
    fn room(&self, count: usize) -> [Vec<f64>; CHANNELS] {
        std::array::from_fn(|channel| {
            let held = match channel {
                GLUON_PLACE => self.family == Family::Plus,
                LIGHT_PLACE => true,
                heavy => self.heavy.contains(&(heavy - CHARM_PLACE + CHARM)),
            };
            Vec::with_capacity(if held { count * self.rows.len() * self.cols } else { 0 })
        })
    }

    /// Appends the channels at one scale; differences stand side by side.
    fn add(&self, sum: &[f64], differences: Option<&[f64]>, channels: &mut [Vec<f64>; CHANNELS]) {
        let cols = self.cols;
        let wide = self.heavy.len() * cols;
        let mut mean = vec![0.0; cols];
        for (index, &(gluon, quarks)) in self.rows.iter().enumerate() {
            if let Some(row) = gluon {
                channels[GLUON_PLACE].extend_from_slice(&sum[row * cols..(row + 1) * cols]);
            }
            let Some(quarks) = quarks.map(|row| &sum[row * cols..(row + 1) * cols]) else {
                channels[LIGHT_PLACE].extend(std::iter::repeat_n(0.0, cols));
                let heavy = self.heavy.iter().map(|flavour| flavour - CHARM + CHARM_PLACE);
                heavy.for_each(|channel| channels[channel].extend(std::iter::repeat_n(0.0, cols)));
                continue;
            };
            if matches!(self.family, Family::NsPlus | Family::NsMinus) {
                channels[LIGHT_PLACE].extend_from_slice(quarks);
                continue;
            }
            let row = self.first_row + index;
            let own = differences.map_or(&[][..], |differences| &differences[row * wide..(row + 1) * wide]);
            mean.copy_from_slice(quarks);
            for own in own.chunks_exact(cols) {
                mean.iter_mut().zip(own).for_each(|(mean, own)| *mean -= own);
            }
            for mean in &mut mean {
                *mean /= self.nf as f64;
            }
            channels[LIGHT_PLACE].extend(mean.iter().map(|mean| self.light as f64 * mean));
            for (own, flavour) in own.chunks_exact(cols).zip(&self.heavy) {
                channels[flavour - CHARM + CHARM_PLACE].extend(own.iter().zip(&mean).map(|(own, mean)| own + mean));
            }
        }
    }
}
