//! Columns along one leg of a route, flavour by flavour, at any scale of it.

use super::columns::{CHANNELS, CHARM_PLACE, Columns, Family, GLUON_PLACE, LIGHT_PLACE};
use super::inputs::Output;
use super::split::Split;
use crate::evolution::{CHARM, Division, Sector, Stretch, StretchSolution, place};
use crate::numerics::blocks::{Matrix, view};
use crate::numerics::chebyshev::Nodes;
use crate::numerics::left_product::{Rows, Sampled, multiply_left};

/// Columns along one leg.
pub struct LegColumns {
    division: Division,
    /// Number of active flavours.
    nf: usize,
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
        let (sum, difference) = rayon::join(
            || stretch.solve_judged(sector, whole, first, judged),
            || differences.map(|(sector, all)| stretch.solve_judged(sector, all, first, judged)),
        );
        let errors = if judged > 0 { errors(&start, &sum, difference.as_ref(), offsets) } else { vec![] };
        let split = Split::new(&start, nf, offsets, offsets[first]);
        Self {
            division: stretch.division(),
            nf,
            pieces: pieces(&split, &sum, difference.as_ref()),
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
        let channel = channel_of(output);
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

    /// `target += row * density(s)` for rows that all act within one step on one density; `target` may hold fewer
    /// columns than are carried.
    pub fn multiply_left(&self, output: Output, step: usize, rows: &Rows, target: &mut Matrix) {
        let (channel, first, (height, cols)) = (channel_of(output), self.first_row, self.shape);
        if let Some(constant) = &self.inactive.channels[channel] {
            multiply_left(constant.part(first..height, 0..cols), first, rows, target);
        }
        let piece = &self.pieces[step];
        match (&piece.channels[channel], &piece.nodes) {
            (Some(values), Some(nodes)) => Sampled { nodes, values, first, cols }.multiply_left(rows, target),
            (Some(values), None) => multiply_left(view(values.row(0), height - first, cols), first, rows, target),
            (None, _) => {}
        }
    }

    /// The step that holds `s`.
    pub fn step_of(&self, s: f64) -> usize {
        self.division.step_of(s)
    }

    /// The columns where the leg is entered.
    pub fn at_start(&self) -> Columns {
        let mut start = self.inactive.clone();
        start.add_scaled(1.0, &self.at_node(&self.pieces[0], 0));
        start
    }

    /// Another function of s: `map(sector, s, C)` of each combination that evolves alone, nothing of what does not
    /// evolve. As accurate as the map is smooth in s.
    #[must_use]
    pub fn mapped(&self, offsets: &[usize], map: impl Fn(Sector, f64, &Matrix) -> Matrix) -> Self {
        let pieces = self.pieces.iter().map(|piece| self.mapped_piece(piece, offsets, &map)).collect();
        Self { pieces, inactive: self.inactive.nothing(), errors: vec![], ..*self }
    }

    fn mapped_piece(&self, piece: &Piece, offsets: &[usize], map: impl Fn(Sector, f64, &Matrix) -> Matrix) -> Piece {
        let start = [self.division.from];
        let points = piece.nodes.as_ref().map_or(&start[..], Nodes::points);
        let split = Split::new(&self.at_node(piece, 0), self.nf, offsets, self.first_row);
        let channels = split.channels(points.len(), |node| {
            let ((sector, sum), differences) = self.at_node(piece, node).combinations(self.nf, offsets);
            let map = |sector, columns: &Matrix| map(sector, points[node], columns).values().to_vec();
            (map(sector, &sum), differences.map(|(sector, all)| map(sector, &all)))
        });
        Piece { nodes: piece.nodes.clone(), channels }
    }

    /// How these columns move with a parameter.
    ///
    /// `entered` is how those at the start of the leg do there, at a fixed scale; `moving` is `A(s) C ds/dp`, made of
    /// these columns. What the start moves away from under the columns is carried on with what enters; `stretch`,
    /// `offsets` and `first` as for [`LegColumns::new`], with the steps of these columns.
    #[must_use]
    pub fn derivative(entered: Columns, mut moving: Self, stretch: &Stretch, offsets: &[usize], first: usize) -> Self {
        let mut carried = entered;
        carried.add_scaled(-1.0, &moving.at_node(&moving.pieces[0], 0));
        let carried = Self::new(carried, stretch, moving.nf, offsets, first, 0);
        for (piece, own) in moving.pieces.iter_mut().zip(&carried.pieces) {
            for (values, own) in piece.channels.iter_mut().flatten().zip(own.channels.iter().flatten()) {
                values.add_scaled(1.0, own);
            }
        }
        Self { inactive: carried.inactive, ..moving }
    }

    /// What evolves, at a node of a step.
    fn at_node(&self, piece: &Piece, node: usize) -> Columns {
        let (rows, cols) = self.shape;
        let channels = piece.channels.each_ref().map(|channel| {
            channel.as_ref().map(|values| {
                let mut matrix = Matrix::zeros(rows, cols);
                matrix.values_mut()[self.first_row * cols..].copy_from_slice(values.row(node));
                matrix
            })
        });
        Columns { channels, ..self.inactive }
    }

    /// Estimated error of the judged columns relative to each value at the nodes named, over the whole leg.
    pub fn error(&self, nodes: &[usize]) -> f64 {
        nodes.iter().filter_map(|&node| self.errors.get(node)).copied().fold(0.0, f64::max)
    }
}

/// Where a density stands among the channels.
fn channel_of(output: Output) -> usize {
    match output {
        Output::Gluon => GLUON_PLACE,
        Output::Light => LIGHT_PLACE,
        Output::Heavy(flavour) => flavour - CHARM + CHARM_PLACE,
    }
}

/// Flavours at the nodes of every step.
fn pieces(split: &Split, sum: &StretchSolution, difference: Option<&StretchSolution>) -> Vec<Piece> {
    if sum.steps().is_empty() {
        let start = |_| (sum.start().values(), difference.map(|solution| solution.start().values()));
        return vec![Piece { nodes: None, channels: split.channels(1, start) }];
    }
    let piece = |index: usize| {
        let step = &sum.steps()[index];
        let channels = split.channels(step.nodes().points().len(), |node| {
            (step.values_at(node), difference.map(|solution| solution.steps()[index].values_at(node)))
        });
        Piece { nodes: Some(step.nodes().clone()), channels }
    };
    (0..sum.steps().len()).map(piece).collect()
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
