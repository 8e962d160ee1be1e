//! The quadrature points of a grid: `z`, its logarithms and the cardinal values, computed once for all kernels.

use crate::grid::Grid;
use crate::numerics::blocks::Matrix;
use crate::numerics::endpoint::Point;
use crate::numerics::gauss_legendre::{Rule, gauss_legendre};
use std::ops::Range;
use std::sync::OnceLock;

/// Ratio of neighbouring sub-intervals of `t = ln(1/z)` towards `t = 0`.
const RATIO: f64 = 0.25;
/// Sub-intervals end below this value of t: what is left out is of the order of `t ln^4 t`.
const DEPTH: f64 = 1e-15;
/// Longest sub-interval in t: kernels hold powers of `z = e^-t`.
const LONGEST: f64 = 2.5;
/// Points of a sub-interval beyond those which the degree of the panel asks for. With the ratio 1/4 a logarithm
/// converges like `3^(-2n)`. Found by doubling all numbers of points: see `tests/rust/convolution.rs`.
const MARGIN: usize = 16;
/// The same in the square root of t.
const THRESHOLD_MARGIN: usize = 10;

/// One stretch of quadrature points, all of whose `x/z` lie in one panel.
pub(super) struct Stretch {
    /// The panel.
    pub panel: usize,
    /// Which points.
    pub points: Range<usize>,
    /// `(points, nodes of the panel)`: values of the cardinal functions at `x/z`.
    pub cardinals: Matrix,
}

/// The quadrature of one output node.
pub(super) struct NodePoints {
    /// `z` and its logarithms.
    pub points: Vec<Point>,
    /// `t = ln(1/z)`.
    pub t: Vec<f64>,
    /// Weights for an integral over dz.
    pub weights: Vec<f64>,
    /// By panel, the node's own first; points after them lie below every panel.
    pub stretches: Vec<Stretch>,
}

impl NodePoints {
    /// The quadrature of node `i`.
    pub fn of(grid: &Grid, i: usize) -> Self {
        let (u, own) = (grid.u()[i], grid.panel_of(i));
        let mut quadrature = Self { points: vec![], t: vec![], weights: vec![], stretches: vec![] };
        for panel in (0..=own).rev() {
            let (from, to) = ((u - grid.edges()[panel + 1]).max(0.0), u - grid.edges()[panel]);
            let from = if panel == own { 0.0 } else { from };
            let first = quadrature.t.len();
            for (t, weight) in stretch_points(from, to, grid.degrees()[panel]) {
                let point = Point::at(t);
                quadrature.t.push(t);
                quadrature.weights.push(weight * point.z);
                quadrature.points.push(point);
            }
            let points = first..quadrature.t.len();
            let cardinals = cardinal_values(grid, i, panel, &quadrature.t[points.clone()]);
            quadrature.stretches.push(Stretch { panel, points, cardinals });
        }
        for (t, weight) in points_beyond(grid, i) {
            let point = Point::at(t);
            quadrature.t.push(t);
            quadrature.weights.push(weight * point.z);
            quadrature.points.push(point);
        }
        quadrature
    }
}

/// `z` at every quadrature point of a grid, node after node: where a user's own kernel is to be given.
pub fn quadrature_z(grid: &Grid) -> Vec<f64> {
    (0..grid.nodes()).flat_map(|i| NodePoints::of(grid, i).points).map(|point| point.z).collect()
}

/// Number of quadrature points of node `i`.
pub(super) fn count(grid: &Grid, i: usize) -> usize {
    NodePoints::of(grid, i).points.len()
}

/// Points of `t > u_max`, for the last node alone: they matter only to what flows below `x_min`.
fn points_beyond(grid: &Grid, i: usize) -> Vec<(f64, f64)> {
    const PIECES: usize = 8;
    const LENGTH: f64 = 5.0; // e^-40 = 4e-18 of the momentum is left out
    if i + 1 < grid.nodes() {
        return vec![];
    }
    (0..PIECES)
        .flat_map(|piece| {
            let from = grid.u_max() + LENGTH * piece as f64;
            let rule = rule(20);
            rule.nodes.iter().zip(&rule.weights).map(move |(x, w)| (from + 0.5 * LENGTH * (1.0 + x), 0.5 * LENGTH * w))
        })
        .collect()
}

/// Points and weights in t, graded towards zero, for functions with logarithms at t = 0 times a polynomial.
pub(super) fn stretch_points(from: f64, to: f64, degree: usize) -> Vec<(f64, f64)> {
    graded_points(from, to, degree, to.max(LONGEST))
}

/// The same for functions that go on growing like 1/t down to t = `scale`.
pub(super) fn graded_points(from: f64, to: f64, degree: usize, scale: f64) -> Vec<(f64, f64)> {
    let mut points = Vec::new();
    let mut upper = to;
    while upper > from {
        let floor = if from > 0.0 { from } else { DEPTH };
        // A last piece little longer than the grading would make it is taken whole.
        let lower = if upper * RATIO <= 1.5 * floor { from } else { upper * RATIO };
        let lower = lower.max(upper - LONGEST);
        let lower = if lower - from < 0.1 * (upper - lower) { from } else { lower };
        let rule = rule(points_needed(lower, upper, to, degree, scale));
        let (middle, half) = (0.5 * (lower + upper), 0.5 * (upper - lower));
        points.extend(rule.nodes.iter().zip(&rule.weights).map(|(x, w)| (middle + half * x, half * w)));
        upper = lower;
    }
    points
}

/// Points and weights in t for functions of `tau = t^(1/2)` that are analytic but for `tau = +-i distance`: graded in tau
/// towards that distance. The panel is given by its length and degree.
pub(super) fn threshold_points(from: f64, to: f64, panel: (f64, usize), distance: f64) -> Vec<(f64, f64)> {
    let (from, (length, degree)) = (from.sqrt(), panel);
    let mut points = Vec::new();
    let mut upper = to.sqrt();
    while upper > from {
        let lower = if upper <= 1.5 * distance { from } else { upper * RATIO };
        let lower = lower.max((upper * upper - LONGEST).max(0.0).sqrt());
        let lower = if lower - from < 0.1 * (upper - lower) { from } else { lower };
        let share = (upper * upper - lower * lower) / length;
        // Twice the degree of the panel, in tau.
        let needed = THRESHOLD_MARGIN as f64 + degree as f64 * share.sqrt();
        let rule = rule(needed.round() as usize);
        let (middle, half) = (0.5 * (lower + upper), 0.5 * (upper - lower));
        points.extend(rule.nodes.iter().zip(&rule.weights).map(|(x, w)| {
            let tau = middle + half * x;
            (tau * tau, 2.0 * tau * half * w)
        }));
        upper = lower;
    }
    points
}

/// Fewer points where the sub-interval, and with it its share of the integral and of the polynomial, is small.
fn points_needed(lower: f64, upper: f64, whole: f64, degree: usize, scale: f64) -> usize {
    let length = upper - lower;
    let logarithm = MARGIN as f64 + 0.5 * (length / scale).min(1.0).ln();
    let polynomial = 0.5 * degree as f64 * (length / whole.max(LONGEST)).sqrt();
    (logarithm + polynomial).round().max(4.0) as usize
}

fn rule(n: usize) -> &'static Rule {
    static RULES: OnceLock<Vec<Rule>> = OnceLock::new();
    const MOST: usize = 64;
    &RULES.get_or_init(|| (0..=MOST).map(|n| gauss_legendre(n.max(1))).collect())[n.min(MOST)]
}

fn cardinal_values(grid: &Grid, i: usize, panel: usize, t: &[f64]) -> Matrix {
    let nodes = grid.panel(panel);
    let mut cardinals = Matrix::zeros(t.len(), nodes.points().len());
    let own = (grid.panel_of(i) == panel).then(|| i + 1 - grid.owned(panel).start);
    for (row, &t) in t.iter().enumerate() {
        match own {
            // The difference to the node itself is -t exactly: near t = 0 no digit is lost.
            Some(local) => nodes.cardinals_left_of(local, t, cardinals.row_mut(row)),
            None => nodes.cardinals(grid.u()[i] - t, cardinals.row_mut(row)),
        }
    }
    cardinals
}
