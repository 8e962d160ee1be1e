//! Columns along one leg of a route, flavour by flavour, at any scale of it.

use super::columns::{CHANNELS, CHARM_PLACE, Columns, Family, GLUON_PLACE, LIGHT_PLACE};
use super::inputs::Output;
use crate::evolution::{CHARM, Division, Stretch, StretchSolution, place};
use crate::numerics::blocks::Matrix;
use crate::numerics::chebyshev::Nodes;

/// Columns along one leg.
pub struct LegColumns {
    division: Division,
    /// What does not evolve on this leg: heavy flavours that are not active.
    inactive: Columns,
    /// One a step; one in all where the leg has no length.
    pieces: Vec<Piece>,
    /// Rows and columns.
    shape: (usize, usize),
    /// Number of leading rows that are zero.
    first_row: usize,
    /// Estimated error of the judged columns, relative to each value: one a node.
    errors: Vec<f64>,
}

/// Columns along one step.
struct Piece {
    /// None where the leg has no length.
    nodes: Option<Nodes>,
    /// `(node in s, (row - first row) * column)` of every channel that evolves.
    channels: [Option<Matrix>; CHANNELS],
}

impl LegColumns {
    /// Carries columns along a stretch of nf flavours. Rows of panels before `first` are zero. The error is estimated on
    /// the last `judged` columns.
    pub fn new(start: Columns, stretch: &Stretch, nf: usize, offsets: &[usize], first: usize, judged: usize) -> Self {
        let ((sector, whole), differences) = start.combinations(nf, offsets);
        // Differences obey the same equations: they are carried side by side.
        let carry_differences = || {
            let parts: Vec<&Matrix> = differences.iter().map(|(_, _, deviation)| deviation).collect();
            let first_one = differences.first();
            first_one.map(|(_, sector, _)| stretch.solve_judged(*sector, side_by_side(&parts), first, judged))
        };
        let (sum, difference) = rayon::join(|| stretch.solve_judged(sector, whole, first, judged), carry_differences);
        let heavy: Vec<usize> = differences.iter().map(|(flavour, _, _)| *flavour).collect();
        let split = Split::new(&start, &heavy, nf, offsets, offsets[first]);
        let errors = if judged > 0 { errors(&start, &sum, difference.as_ref(), offsets) } else { vec![] };
        Self {
            division: stretch.division(),
            pieces: split.pieces(&sum, difference.as_ref()),
            inactive: start.inactive(nf),
            shape: (start.light_sum().rows(), start.light_sum().cols()),
            first_row: offsets[first],
            errors,
        }
    }

    /// The columns at `s = ln a`.
    pub fn at(&self, s: f64) -> Columns {
        // One scale gives one set of columns.
        self.at_many(&[s]).swap_remove(0)
    }

    /// The columns at several scales.
    pub fn at_many(&self, s: &[f64]) -> Vec<Columns> {
        let mut all = vec![self.inactive.clone(); s.len()];
        let (rows, cols) = self.shape;
        let mut room = Vec::new();
        for channel in 0..CHANNELS {
            self.each(channel, s, &mut room, |index, values| {
                let mut matrix = Matrix::zeros(rows, cols);
                matrix.values_mut()[self.first_row * cols..].copy_from_slice(values);
                all[index].channels[channel] = Some(matrix);
            });
        }
        all
    }

    /// Hands over one density at several scales: index of the scale, and the rows from `first` on; `room` is room to
    /// work in.
    pub fn output(&self, output: Output, s: &[f64], room: &mut Vec<f64>, mut put: impl FnMut(usize, &[f64])) {
        let channel = match output {
            Output::Gluon => GLUON_PLACE,
            Output::Light => LIGHT_PLACE,
            Output::Heavy(flavour) => flavour - CHARM + CHARM_PLACE,
        };
        if let Some(constant) = &self.inactive.channels[channel] {
            let values = &constant.values()[self.first_row * constant.cols()..];
            (0..s.len()).for_each(|index| put(index, values));
        }
        self.each(channel, s, room, put);
    }

    /// The same for a channel that evolves.
    fn each(&self, channel: usize, s: &[f64], room: &mut Vec<f64>, mut put: impl FnMut(usize, &[f64])) {
        for (index, piece) in self.pieces.iter().enumerate() {
            let Some(values) = &piece.channels[channel] else { continue };
            let here: Vec<usize> = (0..s.len()).filter(|&i| self.division.step_of(s[i]) == index).collect();
            let Some(nodes) = &piece.nodes else {
                for &index in &here {
                    put(index, values.row(0));
                }
                continue;
            };
            let places: Vec<f64> = here.iter().map(|&i| s[i]).collect();
            let size = values.cols();
            room.resize(room.len().max(places.len() * size), 0.0);
            nodes.interpolate(&places, values, &mut room[..places.len() * size]);
            for (&index, found) in here.iter().zip(room.chunks_exact(size.max(1))) {
                put(index, found);
            }
        }
    }

    /// Estimated error of the judged columns relative to each value at the nodes named, over the whole leg.
    pub fn error(&self, nodes: &[usize]) -> f64 {
        nodes.iter().filter_map(|&node| self.errors.get(node)).copied().fold(0.0, f64::max)
    }
}

/// Estimated errors at each node.
fn errors(start: &Columns, sum: &StretchSolution, difference: Option<&StretchSolution>, offsets: &[usize]) -> Vec<f64> {
    let error = |node: usize| {
        let of_sum = if start.family == Family::Plus {
            sum.error(&[place(offsets, 0, node), place(offsets, 1, node)])
        } else {
            sum.error(&[node])
        };
        difference.map_or(of_sum, |solution| of_sum.max(solution.error(&[node])))
    };
    (0..offsets[offsets.len() - 1]).map(error).collect()
}

/// How flavours follow from their sum and what each heavy one differs from its share of the light sum.
///
/// With `d_h = h - L/light` and `Sigma = L + sum_h h`: `L = (light/nf) (Sigma - sum_h d_h)`.
struct Split<'a> {
    family: Family,
    light: usize,
    heavy: &'a [usize],
    nf: usize,
    /// Number of columns.
    cols: usize,
    /// Where the rows from the first that is not zero stand in the sum, gluon and sum of quarks; the gluon only of the
    /// plus family.
    rows: Vec<(Option<usize>, Option<usize>)>,
    first_row: usize,
}

impl<'a> Split<'a> {
    fn new(start: &Columns, heavy: &'a [usize], nf: usize, offsets: &[usize], first_row: usize) -> Self {
        let nodes = offsets[offsets.len() - 1];
        let rows = (first_row..=nodes).map(|row| match start.family {
            // All momentum below `x_min` is held with the gluon.
            Family::Plus if row == nodes => (Some(2 * nodes), None),
            Family::Plus => (Some(place(offsets, 0, row)), Some(place(offsets, 1, row))),
            _ => (None, Some(row)),
        });
        let rows = rows.collect();
        Self { family: start.family, light: start.light, heavy, nf, cols: start.light_sum().cols(), rows, first_row }
    }

    fn pieces(&self, sum: &StretchSolution, difference: Option<&StretchSolution>) -> Vec<Piece> {
        if sum.steps().is_empty() {
            let mut channels = [const { vec![] }; CHANNELS];
            self.add(sum.start().values(), difference.map(|solution| solution.start().values()), &mut channels);
            return vec![self.piece(None, 1, channels)];
        }
        (0..sum.steps().len())
            .map(|index| {
                let step = &sum.steps()[index];
                let count = step.nodes().points().len();
                let mut channels = self.room(count);
                for node in 0..count {
                    let differences = difference.map(|solution| solution.steps()[index].values_at(node));
                    self.add(step.values_at(node), differences, &mut channels);
                }
                self.piece(Some(step.nodes().clone()), count, channels)
            })
            .collect()
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

    fn piece(&self, nodes: Option<Nodes>, count: usize, channels: [Vec<f64>; CHANNELS]) -> Piece {
        let size = self.rows.len() * self.cols;
        let stacked = |values: Vec<f64>| (!values.is_empty()).then(|| Matrix::from_values(count, size, values));
        Piece { nodes, channels: channels.map(stacked) }
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
            for (own, flavour) in own.chunks_exact(cols).zip(self.heavy) {
                channels[flavour - CHARM + CHARM_PLACE].extend(own.iter().zip(&mean).map(|(own, mean)| own + mean));
            }
        }
    }
}

/// Matrices of equal height beside each other.
fn side_by_side(parts: &[&Matrix]) -> Matrix {
    let rows = parts.first().map_or(0, |part| part.rows());
    let values = (0..rows).flat_map(|i| parts.iter().flat_map(move |part| part.row(i))).copied().collect();
    Matrix::from_values(rows, parts.iter().map(|part| part.cols()).sum(), values)
}
