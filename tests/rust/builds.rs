//! Builds and densities shared by the tests of operators.

use scalewright_core::error::Result;
use scalewright_core::grid::Grid;
use scalewright_core::theory::{Assumptions, Theory};
use scalewright_core::thresholds::{BuildOptions, Evolution, build};
use scalewright_core::watch::Unwatched;

/// A grid of few nodes, for identities that hold whatever the resolution.
pub fn coarse() -> Grid {
    Grid::new(&[0.0, 0.3, 1.5, 5.0], &[5, 6, 6]).unwrap()
}

pub fn theory(given: Assumptions) -> Theory {
    Theory::new(given).unwrap()
}

/// A build without intrinsic flavours and kernels of the user.
pub fn options(start: (f64, usize), asked: &[(f64, usize)]) -> BuildOptions {
    let (start_q2, start_nf) = start;
    BuildOptions { start_q2, start_nf, asked: asked.to_vec(), intrinsic: vec![], tolerance: 1e-8, further: vec![] }
}

pub fn built(theory: &Theory, grid: &Grid, options: &BuildOptions) -> Result<Evolution> {
    build(theory, grid, options, &Unwatched)
}

/// One block at one scale, row-major.
pub fn block(set: &Evolution, grid: &Grid, name: &str, scale: (f64, usize)) -> Vec<f64> {
    let (blocks, _) = set.values(&[scale], &Unwatched).unwrap();
    let size = grid.nodes() * grid.nodes();
    let index = set.names().iter().position(|known| known == name).unwrap_or_else(|| panic!("{name}"));
    blocks[index * size..(index + 1) * size].to_vec()
}

/// What a block makes of a density.
pub fn acting(block: &[f64], density: &[f64]) -> Vec<f64> {
    block.chunks(density.len()).map(|row| dot(row, density)).collect()
}

pub fn dot(a: &[f64], b: &[f64]) -> f64 {
    a.iter().zip(b).map(|(a, b)| a * b).sum()
}

/// `x^a (1-x)^b` at the nodes.
pub fn density(grid: &Grid, a: f64, b: i32) -> Vec<f64> {
    grid.u().iter().map(|u| (-a * u).exp() * (-(-u).exp_m1()).powi(b)).collect()
}

/// Largest difference of two lists.
pub fn difference(one: &[f64], other: &[f64]) -> f64 {
    assert_eq!(one.len(), other.len());
    one.iter().zip(other).map(|(a, b)| (a - b).abs()).fold(0.0, |most, d| if d > most || d.is_nan() { d } else { most })
}
