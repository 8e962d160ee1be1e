//! Rows of the matrix from input densities to data points.
//!
//! Points are sorted by where they lie on the route and shared out in pieces; each piece is carried back to the input by
//! what the evolution holds, so that operators of single scales are never made and memory stays that of the rows.

use crate::error::{Error, Result};
use crate::evolution::GLUON;
use crate::numerics::left_product::{Way, runs};
use crate::thresholds::{Evolution, InputRows, Place, QUARKS, RowAt};
use crate::watch::Watch;
use rayon::prelude::*;

/// Channels of a row: gluon, sums and differences.
pub const CHANNELS: usize = 1 + 2 * QUARKS;
/// From so many points a scale on it is cheaper to evaluate the solution at each scale than to multiply by all nodes.
/// Measured with 3,000 points at NNLO on both presets: at one point a scale the nodes take about nine tenths of the time
/// of evaluation, at two a scale evaluation takes six to eight tenths of that of the nodes.
const POINTS_A_SCALE: usize = 2;
/// Points of a piece: enough for products of matrices, few enough to share out.
const PIECE: usize = 96;

/// Rows at the scales of points.
pub struct Batch<'a> {
    /// `(point, channel, node)`.
    pub rows: &'a [f64],
    /// `(q2, nf)` of every scale.
    pub scales: &'a [(f64, usize)],
    /// The scale of each point.
    pub scale_of: &'a [usize],
    /// Fraction of protons in each target; in a neutron u and d change places.
    pub protons: &'a [f64],
    /// PDG numbers of the input.
    pub flavours: &'a [i64],
    /// The row of `out` of each point, no two alike.
    pub places: &'a [usize],
}

/// Writes rows on the input to `out`, `(row, flavour, node)`, at the places of the points.
///
/// # Errors
/// [`Error::OutOfRange`] for a scale that is not on the route; [`Error::Argument`] for a flavour that is no input, a
/// place or scale that is not there; [`Error::Interrupted`].
pub fn pull_back(evolution: &Evolution, batch: &Batch, out: &mut [f64], watch: &dyn Watch) -> Result<()> {
    let offsets = evolution.offsets();
    let nodes = offsets[offsets.len() - 1];
    let input = Input { flavours: batch.flavours, light: evolution.light(), heavy: evolution.heavy_inputs(), nodes };
    input.check()?;
    let places = batch.scales.par_iter().map(|&(q2, nf)| evolution.place(q2, nf)).collect::<Result<Vec<_>>>()?;
    let mut points: Vec<Point> = Vec::with_capacity(batch.scale_of.len());
    for (index, &scale) in batch.scale_of.iter().enumerate() {
        let at = *places.get(scale).ok_or_else(|| absent("scale_of", scale, places.len()))?;
        let values = &batch.rows[index * CHANNELS * nodes..(index + 1) * CHANNELS * nodes];
        let ends = values.chunks_exact(nodes).map(|row| row.iter().rposition(|v| *v != 0.0).map_or(0, |last| last + 1));
        let end = ends.max().unwrap_or(0);
        points.push(Point { index, at, panels: offsets.partition_point(|&offset| offset < end), values });
    }
    let pieces = pieces(points);
    let count = out.len() / (batch.flavours.len() * nodes);
    let mut slots: Vec<Option<&mut [f64]>> = out.chunks_mut(batch.flavours.len() * nodes).map(Some).collect();
    let mut shared = Vec::with_capacity(pieces.len());
    for (way, piece) in pieces {
        let slots = piece.iter().map(|point| {
            let place = batch.places[point.index];
            slots.get_mut(place).and_then(Option::take).ok_or_else(|| absent("places", place, count))
        });
        let slots = slots.collect::<Result<Vec<_>>>()?;
        shared.push((way, piece, slots));
    }
    shared.into_par_iter().try_for_each(|(way, piece, slots)| {
        watch.check()?;
        let rows: Vec<RowAt> = piece.iter().map(Point::row).collect();
        let made = evolution.pull_back(piece[0].at.leg, piece[0].at.step, &rows, way);
        let mut scratch = vec![0.0; batch.flavours.len() * nodes];
        for (i, (point, slot)) in piece.iter().zip(slots).enumerate() {
            input.write(&made, i, batch.protons[point.index], &mut scratch, slot);
        }
        Ok(())
    })
}

fn absent(name: &'static str, value: usize, count: usize) -> Error {
    Error::Argument { name, value: value.to_string(), allowed: format!("each must be below {count} and there once") }
}

/// A point with its row.
#[derive(Clone, Copy)]
struct Point<'a> {
    index: usize,
    at: Place,
    panels: usize,
    values: &'a [f64],
}

impl Point<'_> {
    fn row(&self) -> RowAt<'_> {
        RowAt { s: self.at.s, panels: self.panels, values: self.values }
    }
}

/// Points within one step of one leg, few enough to share out, in the order that the way wants.
fn pieces(mut points: Vec<Point>) -> Vec<(Way, Vec<Point>)> {
    let step = |point: &Point<'_>| (point.at.leg, point.at.step);
    let by_scale = |one: &Point<'_>, two: &Point<'_>| {
        step(one).cmp(&step(two)).then(one.at.s.total_cmp(&two.at.s)).then(one.panels.cmp(&two.panels))
    };
    points.sort_by(by_scale);
    let mut pieces = Vec::new();
    for group in points.chunk_by(|one, two| step(one) == step(two)) {
        let s: Vec<f64> = group.iter().map(|point| point.at.s).collect();
        if group.len() >= POINTS_A_SCALE * runs(&s).count() {
            let mut piece: Vec<Point> = Vec::new();
            for run in runs(&s) {
                piece.extend_from_slice(&group[run]);
                if piece.len() >= PIECE {
                    pieces.push((Way::Evaluated, std::mem::take(&mut piece)));
                }
            }
            if !piece.is_empty() {
                pieces.push((Way::Evaluated, piece));
            }
        } else {
            let mut group = group.to_vec();
            group.sort_by_key(|point| point.panels);
            pieces.extend(group.chunks(PIECE).map(|piece| (Way::AtNodes, piece.to_vec())));
        }
    }
    pieces
}

/// How channels of the input become its flavours.
struct Input<'a> {
    flavours: &'a [i64],
    light: usize,
    heavy: &'a [usize],
    nodes: usize,
}

impl Input<'_> {
    fn check(&self) -> Result<()> {
        let known = |flavour: i64| {
            let quark = flavour.unsigned_abs() as usize;
            flavour == GLUON || (1..=self.light).contains(&quark) || self.heavy.contains(&quark)
        };
        match self.flavours.iter().find(|&&flavour| !known(flavour)) {
            None => Ok(()),
            Some(flavour) => Err(Error::Argument {
                name: "flavours",
                value: flavour.to_string(),
                allowed: "these operators have no such input".into(),
            }),
        }
    }

    /// Writes one point's row, `(flavour, node)`.
    fn write(&self, rows: &InputRows, point: usize, protons: f64, scratch: &mut [f64], out: &mut [f64]) {
        let n = self.nodes;
        for (target, &flavour) in out.chunks_mut(n).zip(self.flavours) {
            self.flavour(rows, point, flavour, target);
        }
        if protons >= 1.0 {
            return;
        }
        for (target, &flavour) in scratch.chunks_mut(n).zip(self.flavours) {
            self.flavour(rows, point, exchanged(flavour), target);
        }
        for (value, of_neutron) in out.iter_mut().zip(scratch) {
            *value = protons * *value + (1.0 - protons) * *of_neutron;
        }
    }

    fn flavour(&self, rows: &InputRows, point: usize, flavour: i64, out: &mut [f64]) {
        if flavour == GLUON {
            out.copy_from_slice(rows.plus[0].row(point));
            return;
        }
        let (quark, sign) = (flavour.unsigned_abs() as usize, flavour.signum() as f64);
        if let Some(heavy) = self.heavy.iter().position(|&own| own == quark) {
            combine(out, rows.plus[2 + heavy].row(point), sign, rows.minus[1 + heavy].row(point));
            return;
        }
        combine(out, rows.plus[1].row(point), sign, rows.minus[0].row(point));
        let each = self.light - 1;
        // Differences add up to zero: the row on the last is minus the sum of the others.
        let (own, factor) = if quark < self.light { (quark - 1..quark, 1.0) } else { (0..each, -1.0) };
        for difference in own {
            let (plus, minus) = (&rows.plus_differences, &rows.minus_differences);
            let (plus, minus) = (plus.row(point * each + difference), minus.row(point * each + difference));
            for ((value, plus), minus) in out.iter_mut().zip(plus).zip(minus) {
                *value += factor * (plus + sign * minus);
            }
        }
    }
}

fn combine(out: &mut [f64], plus: &[f64], sign: f64, minus: &[f64]) {
    for ((value, plus), minus) in out.iter_mut().zip(plus).zip(minus) {
        *value = plus + sign * minus;
    }
}

/// The flavour that takes the place of one where protons and neutrons change theirs.
fn exchanged(flavour: i64) -> i64 {
    match flavour.abs() {
        1 => 2 * flavour,
        2 => flavour / 2,
        _ => flavour,
    }
}
